//! The tree of a term: immutable, shared, exact.

use std::cmp::Ordering;
use std::collections::BTreeSet;
use std::hash::{Hash, Hasher};
use std::sync::Arc;

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use crate::enclosure::Function;

/// A name of a variable or a quantity.
pub type Name = Arc<str>;

/// A named real constant.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Constant {
    /// The ratio of a circle's circumference to its diameter.
    Pi,
    /// The base of the natural logarithm.
    E,
    /// Euler's constant, 0.5772...
    Euler,
}

impl Constant {
    /// The name in the language and in the kernel's text.
    #[must_use]
    pub const fn name(self) -> &'static str {
        match self {
            Constant::Pi => "pi",
            Constant::E => "e",
            Constant::Euler => "euler",
        }
    }
}

/// What a series does with its terms.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum SeriesKind {
    /// The sum over the integers of a range; 0 if the range is empty.
    Sum,
    /// The product over the integers of a range; 1 if the range is empty.
    Product,
    /// The integral over an interval of reals.
    Integral,
}

impl SeriesKind {
    /// The word that opens the series in the language and in the kernel's text.
    #[must_use]
    pub const fn name(self) -> &'static str {
        match self {
            SeriesKind::Sum => "sum",
            SeriesKind::Product => "product",
            SeriesKind::Integral => "integral",
        }
    }
}

/// An end of a range or of a domain.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum End {
    /// Unbounded below.
    MinusInfinity,
    /// A real number.
    Finite(Term),
    /// Unbounded above.
    PlusInfinity,
}

impl End {
    /// The term, if the end is finite.
    #[must_use]
    pub fn finite(&self) -> Option<&Term> {
        match self {
            End::Finite(t) => Some(t),
            _ => None,
        }
    }

    /// The end with `f` applied to its term.
    #[must_use]
    pub fn map(&self, f: impl FnOnce(&Term) -> Term) -> End {
        match self {
            End::Finite(t) => End::Finite(f(t)),
            other => other.clone(),
        }
    }
}

/// One level of a term.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Node {
    /// An exact rational number, possibly negative.
    Number(BigRational),
    /// A named constant.
    Constant(Constant),
    /// A parameter, a bound variable or the index of a series.
    Variable(Name),
    /// Minus the operand.
    Negate(Term),
    /// The sum of two terms.
    Add(Term, Term),
    /// The first minus the second.
    Subtract(Term, Term),
    /// The product of two terms.
    Multiply(Term, Term),
    /// The first divided by the second, which must not be zero.
    Divide(Term, Term),
    /// A power, base first: defined for a base > 0, for an integer exponent if
    /// the base is not 0 or the exponent is positive, and for 0 to a positive power.
    Power(Term, Term),
    /// A function of the language at its arguments.
    Apply(Function, Vec<Term>),
    /// A quantity, known only by facts, at its arguments.
    Quantity(Name, Vec<Term>),
    /// A sum, product or integral; the index is bound in the body only.
    Series {
        /// Sum, product or integral.
        kind: SeriesKind,
        /// The bound index.
        index: Name,
        /// The lower end, outside the index's reach.
        lower: End,
        /// The upper end, outside the index's reach.
        upper: End,
        /// What is summed, multiplied or integrated.
        body: Term,
    },
}

/// A term. Only literal signs and literal quotients are folded into one number
/// (`-3`, `1/3`), exactly as the kernel does when it reads the text of the term.
/// Cloning shares; equality, order and hash are structural (the names of
/// series indices count).
#[derive(Clone)]
pub struct Term(Arc<Shared>);

struct Shared {
    node: Node,
    hash: u64,
    size: u32,
    depth: u32,
    nesting: u32,
}

impl Term {
    fn of(node: Node) -> Term {
        let (mut size, mut depth) = (1u32, 0u32);
        node.each_child(&mut |t| {
            size = size.saturating_add(t.size());
            depth = depth.max(t.depth());
        });
        let mut mixer = Mixer(0x51_7c_c1_b7_27_22_0a_95);
        node.hash(&mut mixer);
        let nesting = nesting(&node);
        Term(Arc::new(Shared { hash: mixer.finish(), size, depth: depth.saturating_add(1), nesting, node }))
    }

    /// The term's outermost level.
    #[must_use]
    pub fn node(&self) -> &Node {
        &self.0.node
    }

    /// How many nodes the term has when written out, saturating.
    #[must_use]
    pub fn size(&self) -> u32 {
        self.0.size
    }

    /// The number of levels, saturating. Recursion over a term is this deep;
    /// whoever builds terms from a user's text limits it.
    #[must_use]
    pub fn depth(&self) -> u32 {
        self.0.depth
    }

    /// How deep parentheses, arguments and exponents nest in the term's text, at
    /// most. Unlike the depth, it does not grow with the length of a sum.
    #[must_use]
    pub fn nesting(&self) -> u32 {
        self.0.nesting
    }

    /// A structural digest, the same on every run of one build.
    #[must_use]
    pub fn digest(&self) -> u64 {
        self.0.hash
    }

    /// Whether two handles share one tree (sufficient for equality).
    #[must_use]
    pub fn same_tree(&self, other: &Term) -> bool {
        Arc::ptr_eq(&self.0, &other.0)
    }

    /// An exact number.
    #[must_use]
    pub fn number(value: BigRational) -> Term {
        Term::of(Node::Number(value))
    }

    /// An exact integer.
    #[must_use]
    pub fn integer(value: impl Into<BigInt>) -> Term {
        Term::number(BigRational::from_integer(value.into()))
    }

    /// The fraction of two integers; `denominator` must not be 0.
    #[must_use]
    pub fn ratio(numerator: i64, denominator: i64) -> Term {
        Term::number(BigRational::new(numerator.into(), denominator.into()))
    }

    /// A named constant.
    #[must_use]
    pub fn constant(constant: Constant) -> Term {
        Term::of(Node::Constant(constant))
    }

    /// A variable.
    #[must_use]
    pub fn variable(name: impl Into<Name>) -> Term {
        Term::of(Node::Variable(name.into()))
    }

    /// Minus `self`; a number is negated in place.
    #[must_use]
    pub fn negate(&self) -> Term {
        match self.as_number() {
            Some(a) => Term::number(-a),
            None => Term::of(Node::Negate(self.clone())),
        }
    }

    /// `self + other`, as a node of its own.
    #[must_use]
    pub fn add(&self, other: &Term) -> Term {
        Term::of(Node::Add(self.clone(), other.clone()))
    }

    /// `self - other`, as a node of its own.
    #[must_use]
    pub fn subtract(&self, other: &Term) -> Term {
        Term::of(Node::Subtract(self.clone(), other.clone()))
    }

    /// `self * other`, as a node of its own.
    #[must_use]
    pub fn multiply(&self, other: &Term) -> Term {
        Term::of(Node::Multiply(self.clone(), other.clone()))
    }

    /// `self / other`; two numbers are divided unless the divisor is 0.
    #[must_use]
    pub fn divide(&self, other: &Term) -> Term {
        match (self.as_number(), other.as_number()) {
            (Some(a), Some(b)) if !b.is_zero() => Term::number(a / b),
            _ => Term::of(Node::Divide(self.clone(), other.clone())),
        }
    }

    /// `self ^ exponent`, never evaluated: `10^9` stays short, `0^0` stays undefined.
    #[must_use]
    pub fn power(&self, exponent: &Term) -> Term {
        Term::of(Node::Power(self.clone(), exponent.clone()))
    }

    /// A function at its arguments. The caller has checked the arity.
    #[must_use]
    pub fn apply(function: Function, arguments: Vec<Term>) -> Term {
        Term::of(Node::Apply(function, arguments))
    }

    /// A function of one argument.
    #[must_use]
    pub fn apply1(function: Function, argument: &Term) -> Term {
        Term::apply(function, vec![argument.clone()])
    }

    /// A quantity at its arguments.
    #[must_use]
    pub fn quantity(name: impl Into<Name>, arguments: Vec<Term>) -> Term {
        Term::of(Node::Quantity(name.into(), arguments))
    }

    /// A sum, product or integral.
    #[must_use]
    pub fn series(kind: SeriesKind, index: impl Into<Name>, lower: End, upper: End, body: Term) -> Term {
        Term::of(Node::Series { kind, index: index.into(), lower, upper, body })
    }

    /// The number, if the term is one.
    #[must_use]
    pub fn as_number(&self) -> Option<&BigRational> {
        match self.node() {
            Node::Number(a) => Some(a),
            _ => None,
        }
    }

    /// The integer, if the term is a number without a fractional part.
    #[must_use]
    pub fn as_integer(&self) -> Option<&BigInt> {
        self.as_number().filter(|a| a.is_integer()).map(BigRational::numer)
    }

    /// The name, if the term is a variable.
    #[must_use]
    pub fn as_variable(&self) -> Option<&Name> {
        match self.node() {
            Node::Variable(name) => Some(name),
            _ => None,
        }
    }

    /// Whether the term is the number 0.
    #[must_use]
    pub fn is_zero(&self) -> bool {
        self.as_number().is_some_and(Zero::is_zero)
    }

    /// Whether the term is the number 1.
    #[must_use]
    pub fn is_one(&self) -> bool {
        self.as_number().is_some_and(One::is_one)
    }

    /// The exact value of a term made of numbers, `+ - * /` and powers with
    /// literal integer exponents; none if it is not of that shape, is undefined,
    /// or would need more than `MAX_BITS` bits.
    #[must_use]
    pub fn rational_value(&self) -> Option<BigRational> {
        const MAX_BITS: u64 = 4096;
        let value = match self.node() {
            Node::Number(a) => return Some(a.clone()),
            Node::Negate(a) => -a.rational_value()?,
            Node::Add(a, b) => a.rational_value()? + b.rational_value()?,
            Node::Subtract(a, b) => a.rational_value()? - b.rational_value()?,
            Node::Multiply(a, b) => a.rational_value()? * b.rational_value()?,
            Node::Divide(a, b) => {
                let b = b.rational_value()?;
                if b.is_zero() {
                    return None;
                }
                a.rational_value()? / b
            }
            Node::Power(a, n) => {
                let (a, n) = (a.rational_value()?, n.rational_value()?);
                if !n.is_integer() || (a.is_zero() && !n.is_positive()) {
                    return None;
                }
                let n = i32::try_from(n.numer()).ok()?;
                let bits = a.numer().bits().max(a.denom().bits()).max(1);
                if bits.saturating_mul(u64::from(n.unsigned_abs())) > MAX_BITS {
                    return None;
                }
                a.pow(n)
            }
            _ => return None,
        };
        (value.numer().bits().max(value.denom().bits()) <= MAX_BITS).then_some(value)
    }

    /// Calls `f` with every direct part of the term, left to right.
    pub fn each_child(&self, f: &mut dyn FnMut(&Term)) {
        self.node().each_child(f);
    }

    /// Calls `f` with the term and all its parts, outermost first, left to right.
    /// `f` says whether to go on into the parts of what it was given.
    pub fn walk(&self, f: &mut dyn FnMut(&Term) -> bool) {
        if f(self) {
            self.each_child(&mut |t| t.walk(f));
        }
    }

    /// The variables that occur free.
    #[must_use]
    pub fn free_variables(&self) -> BTreeSet<Name> {
        let mut free = BTreeSet::new();
        self.collect_free(&mut Vec::new(), &mut free);
        free
    }

    fn collect_free(&self, bound: &mut Vec<Name>, free: &mut BTreeSet<Name>) {
        match self.node() {
            Node::Variable(name) => {
                if !bound.contains(name) {
                    free.insert(name.clone());
                }
            }
            Node::Series { index, lower, upper, body, .. } => {
                for end in [lower, upper] {
                    if let End::Finite(t) = end {
                        t.collect_free(bound, free);
                    }
                }
                bound.push(index.clone());
                body.collect_free(bound, free);
                bound.pop();
            }
            node => node.each_child(&mut |t| t.collect_free(bound, free)),
        }
    }

    /// Whether the variable occurs free.
    #[must_use]
    pub fn mentions(&self, name: &str) -> bool {
        match self.node() {
            Node::Variable(v) => &**v == name,
            Node::Series { index, lower, upper, body, .. } => {
                [lower, upper].into_iter().any(|e| e.finite().is_some_and(|t| t.mentions(name)))
                    || (&**index != name && body.mentions(name))
            }
            node => {
                let mut found = false;
                node.each_child(&mut |t| found = found || t.mentions(name));
                found
            }
        }
    }

    /// The names of the quantities that occur.
    #[must_use]
    pub fn quantities(&self) -> BTreeSet<Name> {
        let mut names = BTreeSet::new();
        self.walk(&mut |t| {
            if let Node::Quantity(name, _) = t.node() {
                names.insert(name.clone());
            }
            true
        });
        names
    }

    /// The same outermost level over other parts: `f` is given each direct part.
    /// The tree is shared where nothing changed. Bound indices are the caller's care.
    #[must_use]
    pub fn map_children(&self, f: &mut dyn FnMut(&Term) -> Term) -> Term {
        let mut changed = false;
        let mut go = |t: &Term| {
            let new = f(t);
            changed |= !new.same_tree(t);
            new
        };
        let rebuilt = match self.node() {
            Node::Number(_) | Node::Constant(_) | Node::Variable(_) => return self.clone(),
            Node::Negate(a) => go(a).negate(),
            Node::Add(a, b) => go(a).add(&go(b)),
            Node::Subtract(a, b) => go(a).subtract(&go(b)),
            Node::Multiply(a, b) => go(a).multiply(&go(b)),
            Node::Divide(a, b) => go(a).divide(&go(b)),
            Node::Power(a, b) => go(a).power(&go(b)),
            Node::Apply(function, args) => Term::apply(*function, args.iter().map(go).collect()),
            Node::Quantity(name, args) => Term::quantity(name.clone(), args.iter().map(go).collect()),
            Node::Series { kind, index, lower, upper, body } => {
                let (lower, upper) = (lower.map(&mut go), upper.map(&mut go));
                Term::series(*kind, index.clone(), lower, upper, go(body))
            }
        };
        if changed { rebuilt } else { self.clone() }
    }
}

impl Node {
    /// Calls `f` with every direct part, left to right.
    pub fn each_child(&self, f: &mut dyn FnMut(&Term)) {
        match self {
            Node::Number(_) | Node::Constant(_) | Node::Variable(_) => {}
            Node::Negate(a) => f(a),
            Node::Add(a, b)
            | Node::Subtract(a, b)
            | Node::Multiply(a, b)
            | Node::Divide(a, b)
            | Node::Power(a, b) => {
                f(a);
                f(b);
            }
            Node::Apply(_, args) | Node::Quantity(_, args) => args.iter().for_each(f),
            Node::Series { lower, upper, body, .. } => {
                for end in [lower, upper] {
                    if let End::Finite(t) = end {
                        f(t);
                    }
                }
                f(body);
            }
        }
    }
}

fn nesting(node: &Node) -> u32 {
    let inner = |t: &Term| t.nesting().saturating_add(1);
    match node {
        Node::Add(a, b) | Node::Subtract(a, b) => a.nesting().max(inner(b)),
        Node::Multiply(a, b) | Node::Divide(a, b) => {
            let bare = matches!(a.node(), Node::Multiply(..) | Node::Divide(..));
            let left = if bare { a.nesting() } else { inner(a) };
            left.max(inner(b))
        }
        _ => {
            let mut most = 0;
            node.each_child(&mut |t| most = most.max(inner(t)));
            most
        }
    }
}

impl PartialEq for Term {
    fn eq(&self, other: &Term) -> bool {
        self.same_tree(other) || (self.0.hash == other.0.hash && self.0.node == other.0.node)
    }
}

impl Eq for Term {}

impl PartialOrd for Term {
    fn partial_cmp(&self, other: &Term) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Term {
    fn cmp(&self, other: &Term) -> Ordering {
        if self.same_tree(other) { Ordering::Equal } else { self.0.node.cmp(&other.0.node) }
    }
}

impl Hash for Term {
    fn hash<H: Hasher>(&self, state: &mut H) {
        state.write_u64(self.0.hash);
    }
}

/// A small fixed hasher: the standard one is seeded anew in every process.
struct Mixer(u64);

impl Hasher for Mixer {
    fn finish(&self) -> u64 {
        let h = (self.0 ^ (self.0 >> 32)).wrapping_mul(0x9e37_79b9_7f4a_7c15);
        h ^ (h >> 29)
    }

    fn write(&mut self, bytes: &[u8]) {
        for &b in bytes {
            self.write_u64(u64::from(b));
        }
    }

    fn write_u64(&mut self, word: u64) {
        self.0 = (self.0.rotate_left(5) ^ word).wrapping_mul(0x517c_c1b7_2722_0a95);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::sample::term;

    #[test]
    fn signs_and_quotients_fold_but_definedness_stays() {
        assert_eq!(Term::integer(6).divide(&Term::integer(4)), Term::ratio(3, 2));
        let x = Term::variable("x");
        assert_eq!(x.subtract(&x).to_string(), "x - x");
        assert_eq!(Term::integer(1).divide(&Term::integer(0)).to_string(), "1/0");
        assert_eq!(Term::integer(0).power(&Term::integer(0)).rational_value(), None);
        assert_eq!(
            Term::integer(2).power(&Term::integer(-3)).rational_value(),
            Some(BigRational::new(1.into(), 8.into()))
        );
        assert_eq!(Term::integer(10).power(&Term::integer(1_000_000)).rational_value(), None);
    }

    #[test]
    fn free_variables_skip_the_index_but_not_the_ends() {
        let t = term("sum(k = k .. n, k*x) + k");
        let free: Vec<String> = t.free_variables().iter().map(|n| n.to_string()).collect();
        assert_eq!(free, ["k", "n", "x"]);
        assert!(!term("sum(k = 1 .. n, k*x)").mentions("k"));
        assert!(term("sum(k = k .. n, x)").mentions("k"));
    }

    #[test]
    fn equality_is_structural_and_agrees_with_order_and_digest() {
        let (a, b) = (term("exp(x)*y^2 + q(x)"), term("exp(x)*y^2 + q(x)"));
        assert!(!a.same_tree(&b));
        assert_eq!(a, b);
        assert_eq!(a.digest(), b.digest());
        assert_eq!(a.cmp(&b), Ordering::Equal);
        assert_ne!(a, term("exp(x)*y^3 + q(x)"));
        assert_eq!(a.size(), 9);
        assert_eq!(a.nesting(), 2);
        assert_eq!(term("a + b + c + d*e*f*g").nesting(), 2);
    }
}

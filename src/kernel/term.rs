//! The kernel's terms: immutable trees with exact numbers.
//!
//! Nothing here simplifies, except that literal signs and literal quotients are
//! folded into one number (`-3`, `1/3`), which changes neither value nor
//! definedness. Printing is canonical and reads back to the same term.

use std::collections::BTreeSet;
use std::fmt;
use std::ops::Deref;
use std::sync::Arc;

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use super::number::Function;

/// A variable, quantity, fact or goal by name.
pub type Name = Arc<str>;

/// A term; cloning is cheap.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Term(Arc<Node>);

/// The three named constants.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Constant {
    /// The ratio of a circle's circumference to its diameter.
    Pi,
    /// The base of the natural logarithm.
    E,
    /// Euler's gamma constant, 0.5772...
    Euler,
}

impl Constant {
    /// Its name in texts.
    pub fn name(self) -> &'static str {
        match self {
            Constant::Pi => "pi",
            Constant::E => "e",
            Constant::Euler => "euler",
        }
    }
}

/// What a series does with the values of its body.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum SeriesKind {
    /// The sum over integers.
    Sum,
    /// The product over integers.
    Product,
    /// The integral over a real interval.
    Integral,
}

impl SeriesKind {
    /// Its name in texts.
    pub fn name(self) -> &'static str {
        match self {
            SeriesKind::Sum => "sum",
            SeriesKind::Product => "product",
            SeriesKind::Integral => "integral",
        }
    }
}

/// The upper or lower limit of a series.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Limit {
    /// A finite limit.
    Finite(Term),
    /// Minus infinity.
    Below,
    /// Plus infinity.
    Above,
}

/// One node of a term.
#[derive(Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
#[allow(missing_docs)]
pub enum Node {
    Number(BigRational),
    Constant(Constant),
    Variable(Name),
    Negate(Term),
    Add(Term, Term),
    Subtract(Term, Term),
    Multiply(Term, Term),
    Divide(Term, Term),
    Power(Term, Term),
    Apply(Function, Vec<Term>),
    Quantity(Name, Vec<Term>),
    Series { kind: SeriesKind, index: Name, lower: Limit, upper: Limit, body: Term },
}

impl Deref for Term {
    type Target = Node;
    fn deref(&self) -> &Node {
        &self.0
    }
}

impl From<Node> for Term {
    fn from(node: Node) -> Term {
        Term(Arc::new(node))
    }
}

impl Term {
    /// A number.
    pub fn number(value: BigRational) -> Term {
        Node::Number(value).into()
    }

    /// A small whole number.
    pub fn integer(value: i64) -> Term {
        Term::number(BigRational::from_integer(value.into()))
    }

    /// Zero.
    pub fn zero() -> Term {
        Term::integer(0)
    }

    /// A variable.
    pub fn variable(name: &str) -> Term {
        Node::Variable(name.into()).into()
    }

    /// `-self`; a literal keeps being a literal.
    pub fn negate(&self) -> Term {
        match &**self {
            Node::Number(q) => Term::number(-q),
            _ => Node::Negate(self.clone()).into(),
        }
    }

    /// `self + other`, as a node of its own.
    pub fn add(&self, other: &Term) -> Term {
        Node::Add(self.clone(), other.clone()).into()
    }

    /// `self - other`, as a node of its own.
    pub fn subtract(&self, other: &Term) -> Term {
        Node::Subtract(self.clone(), other.clone()).into()
    }

    /// `self * other`, as a node of its own.
    pub fn multiply(&self, other: &Term) -> Term {
        Node::Multiply(self.clone(), other.clone()).into()
    }

    /// `self / other`; a quotient of literals with a non-zero divisor is a literal.
    pub fn divide(&self, other: &Term) -> Term {
        match (&**self, &**other) {
            (Node::Number(a), Node::Number(b)) if !b.is_zero() => Term::number(a / b),
            _ => Node::Divide(self.clone(), other.clone()).into(),
        }
    }

    /// `self ^ other`, as a node of its own.
    pub fn power(&self, other: &Term) -> Term {
        Node::Power(self.clone(), other.clone()).into()
    }

    /// A function of one argument.
    pub fn apply(function: Function, argument: &Term) -> Term {
        Node::Apply(function, vec![argument.clone()]).into()
    }

    /// Its value if it is a literal.
    pub fn as_number(&self) -> Option<&BigRational> {
        match &**self {
            Node::Number(q) => Some(q),
            _ => None,
        }
    }

    /// The parts of this node, left to right; the limits of a series come before its body.
    pub fn children(&self) -> Vec<&Term> {
        match &**self {
            Node::Number(_) | Node::Constant(_) | Node::Variable(_) => vec![],
            Node::Negate(a) => vec![a],
            Node::Add(a, b)
            | Node::Subtract(a, b)
            | Node::Multiply(a, b)
            | Node::Divide(a, b)
            | Node::Power(a, b) => vec![a, b],
            Node::Apply(_, args) | Node::Quantity(_, args) => args.iter().collect(),
            Node::Series { lower, upper, body, .. } => {
                let mut parts = Vec::with_capacity(3);
                for limit in [lower, upper] {
                    if let Limit::Finite(t) = limit {
                        parts.push(t);
                    }
                }
                parts.push(body);
                parts
            }
        }
    }

    /// Names that occur free.
    pub fn free_variables(&self) -> BTreeSet<Name> {
        let mut found = BTreeSet::new();
        self.collect_free(&mut Vec::new(), &mut found);
        found
    }

    fn collect_free(&self, bound: &mut Vec<Name>, found: &mut BTreeSet<Name>) {
        match &**self {
            Node::Variable(name) => {
                if !bound.contains(name) {
                    found.insert(name.clone());
                }
            }
            Node::Series { index, lower, upper, body, .. } => {
                for limit in [lower, upper] {
                    if let Limit::Finite(t) = limit {
                        t.collect_free(bound, found);
                    }
                }
                bound.push(index.clone());
                body.collect_free(bound, found);
                bound.pop();
            }
            _ => self.children().into_iter().for_each(|c| c.collect_free(bound, found)),
        }
    }

    /// Whether `name` occurs free.
    pub fn mentions(&self, name: &str) -> bool {
        match &**self {
            Node::Variable(n) => &**n == name,
            Node::Series { index, lower, upper, body, .. } => {
                let in_limits =
                    [lower, upper].into_iter().any(|l| matches!(l, Limit::Finite(t) if t.mentions(name)));
                in_limits || (&**index != name && body.mentions(name))
            }
            _ => self.children().into_iter().any(|c| c.mentions(name)),
        }
    }

    /// Number of nodes, counted as a tree (shared parts count each time), up to `limit`.
    pub fn size_up_to(&self, limit: usize) -> usize {
        let mut count = 1;
        for child in self.children() {
            if count >= limit {
                break;
            }
            count += child.size_up_to(limit - count);
        }
        count
    }

    /// Replaces the parts that `replacement` gives a value for, outermost first;
    /// what was put in is not searched again. Parts under a series that mention
    /// its index are offered with the index as an ordinary variable, so
    /// `replacement` must not answer for terms that mention a bound name; use
    /// [`Term::substitute`] for variables.
    pub fn rebuild(&self, replacement: &mut dyn FnMut(&Term) -> Option<Term>) -> Term {
        if let Some(new) = replacement(self) {
            return new;
        }
        match &**self {
            Node::Number(_) | Node::Constant(_) | Node::Variable(_) => self.clone(),
            Node::Negate(a) => a.rebuild(replacement).negate(),
            Node::Add(a, b) => a.rebuild(replacement).add(&b.rebuild(replacement)),
            Node::Subtract(a, b) => a.rebuild(replacement).subtract(&b.rebuild(replacement)),
            Node::Multiply(a, b) => a.rebuild(replacement).multiply(&b.rebuild(replacement)),
            Node::Divide(a, b) => a.rebuild(replacement).divide(&b.rebuild(replacement)),
            Node::Power(a, b) => a.rebuild(replacement).power(&b.rebuild(replacement)),
            Node::Apply(f, args) => {
                Node::Apply(*f, args.iter().map(|a| a.rebuild(replacement)).collect()).into()
            }
            Node::Quantity(n, args) => {
                Node::Quantity(n.clone(), args.iter().map(|a| a.rebuild(replacement)).collect()).into()
            }
            Node::Series { kind, index, lower, upper, body } => {
                let mut limit = |l: &Limit| match l {
                    Limit::Finite(t) => Limit::Finite(t.rebuild(replacement)),
                    other => other.clone(),
                };
                let (lower, upper) = (limit(lower), limit(upper));
                let body = body.rebuild(replacement);
                Node::Series { kind: *kind, index: index.clone(), lower, upper, body }.into()
            }
        }
    }

    /// Puts `value` for every free occurrence of the variable `name`. The index
    /// of a series is renamed where it would capture a name of `value`.
    pub fn substitute(&self, name: &str, value: &Term) -> Term {
        if !self.mentions(name) {
            return self.clone();
        }
        match &**self {
            Node::Variable(_) => value.clone(),
            Node::Series { kind, index, lower, upper, body } => {
                let limit = |l: &Limit| match l {
                    Limit::Finite(t) => Limit::Finite(t.substitute(name, value)),
                    other => other.clone(),
                };
                let (lower, upper) = (limit(lower), limit(upper));
                let (index, body) = if &**index == name {
                    (index.clone(), body.clone())
                } else if value.mentions(index) {
                    let mut fresh = format!("{index}'");
                    while value.mentions(&fresh) || body.mentions(&fresh) || fresh == name {
                        fresh.push('\'');
                    }
                    let renamed = body.substitute(index, &Term::variable(&fresh));
                    (fresh.as_str().into(), renamed.substitute(name, value))
                } else {
                    (index.clone(), body.substitute(name, value))
                };
                Node::Series { kind: *kind, index, lower, upper, body }.into()
            }
            _ => self.rebuild(&mut |part| {
                let own = std::ptr::eq(&*part.0, &*self.0);
                if own { None } else { Some(part.substitute(name, value)) }
            }),
        }
    }

    /// Puts `new` for every occurrence of the term `old` that is not under a
    /// series index it mentions.
    pub fn replace(&self, old: &Term, new: &Term) -> Term {
        if self == old {
            return new.clone();
        }
        if let Node::Series { index, .. } = &**self
            && (old.mentions(index) || new.mentions(index))
        {
            return self.clone();
        }
        self.rebuild(&mut |part| {
            let own = std::ptr::eq(&*part.0, &*self.0);
            if own { None } else { Some(part.replace(old, new)) }
        })
    }

    /// The quantities that occur, applied to whatever arguments.
    pub fn quantities(&self) -> BTreeSet<Name> {
        let mut found: BTreeSet<Name> = self.children().into_iter().flat_map(Term::quantities).collect();
        if let Node::Quantity(name, _) = &**self {
            found.insert(name.clone());
        }
        found
    }

    /// Whether `part` occurs in it.
    pub fn contains(&self, part: &Term) -> bool {
        self == part || self.children().into_iter().any(|c| c.contains(part))
    }
}

/// How tightly a context binds; a term that binds less gets parentheses.
#[derive(Clone, Copy, PartialEq, PartialOrd)]
enum Binding {
    Sum,
    Product,
    Power,
    Atom,
}

fn binding(term: &Term) -> Binding {
    match &**term {
        Node::Number(q) if q.is_negative() => Binding::Sum,
        Node::Number(q) if !q.denom().is_one() => Binding::Product,
        Node::Negate(_) | Node::Add(..) | Node::Subtract(..) => Binding::Sum,
        Node::Multiply(..) | Node::Divide(..) => Binding::Product,
        Node::Power(..) => Binding::Power,
        _ => Binding::Atom,
    }
}

struct At<'a>(&'a Term, Binding);

impl fmt::Display for At<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if binding(self.0) < self.1 { write!(f, "({})", self.0) } else { write!(f, "{}", self.0) }
    }
}

fn list(f: &mut fmt::Formatter<'_>, args: &[Term]) -> fmt::Result {
    for (i, a) in args.iter().enumerate() {
        if i > 0 {
            f.write_str(", ")?;
        }
        write!(f, "{a}")?;
    }
    Ok(())
}

impl fmt::Display for Limit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Limit::Finite(t) => write!(f, "{t}"),
            Limit::Below => f.write_str("-inf"),
            Limit::Above => f.write_str("inf"),
        }
    }
}

impl fmt::Display for Term {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        use Binding::{Atom, Power, Product, Sum};
        match &**self {
            Node::Number(q) if q.denom() == &BigInt::one() => write!(f, "{}", q.numer()),
            Node::Number(q) => write!(f, "{}/{}", q.numer(), q.denom()),
            Node::Constant(c) => f.write_str(c.name()),
            Node::Variable(n) => f.write_str(n),
            Node::Negate(a) => write!(f, "-{}", At(a, Product)),
            Node::Add(a, b) => write!(f, "{} + {}", At(a, Sum), At(b, Product)),
            Node::Subtract(a, b) => write!(f, "{} - {}", At(a, Sum), At(b, Product)),
            Node::Multiply(a, b) => write!(f, "{}*{}", At(a, Product), At(b, Power)),
            Node::Divide(a, b) => write!(f, "{}/{}", At(a, Product), At(b, Power)),
            Node::Power(a, b) => write!(f, "{}^{}", At(a, Atom), At(b, Power)),
            Node::Apply(g, args) => {
                write!(f, "{}(", g.name())?;
                list(f, args)?;
                f.write_str(")")
            }
            Node::Quantity(n, args) => {
                write!(f, "{n}(")?;
                list(f, args)?;
                f.write_str(")")
            }
            Node::Series { kind, index, lower, upper, body } => {
                write!(f, "{}({index} = {lower} .. {upper}, {body})", kind.name())
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::read::term;

    #[test]
    fn printing_reads_back() {
        for text in [
            "x - (y - z)",
            "x - y - z",
            "-x^2",
            "(-x)^2",
            "2^-x",
            "2^3^x",
            "(2^3)^x",
            "x/y/z",
            "x/(y/z)",
            "x/(y*z)",
            "-x*y",
            "(-x)*y",
            "x*(-3)",
            "-3 + x",
            "1/3*x",
            "x^(1/2)",
            "x^(-2)",
            "-(x + y)",
            "sum(k = 1 .. n, k^2)",
            "sum(k = 0 .. inf, x^k)",
            "integral(t = -inf .. 0, exp(t))",
            "min(x, y, 2)",
            "weight(c + 1)",
            "mean()",
            "(1/2)^x",
            "x*y^2/z",
            "pi*e*euler",
            "0.125*x",
        ] {
            let read = term(text).expect(text);
            let printed = read.to_string();
            assert_eq!(term(&printed).expect(&printed), read, "{text} printed as {printed}");
        }
        assert_eq!(term("0.125").unwrap().to_string(), "1/8");
    }

    #[test]
    fn substitution_does_not_capture() {
        let t = term("sum(k = 1 .. n, x*k)").unwrap();
        let put = t.substitute("x", &term("k").unwrap());
        assert_eq!(put.to_string(), "sum(k' = 1 .. n, k*k')");
        assert_eq!(t.substitute("k", &term("5").unwrap()), t, "a bound name is not free");
        assert_eq!(put.free_variables().into_iter().map(|n| n.to_string()).collect::<Vec<_>>(), ["k", "n"]);
    }

    #[test]
    fn replacing_leaves_bound_names_alone() {
        let t = term("sum(k = 1 .. 3, f(k)) + f(k)").unwrap();
        let put = t.replace(&term("f(k)").unwrap(), &term("u").unwrap());
        assert_eq!(put.to_string(), "sum(k = 1 .. 3, f(k)) + u");
    }
}

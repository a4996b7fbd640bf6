//! Signs that are plain from the shape of a term, so that the kernel sees them too:
//! ranges from the parts to the whole, by the order axioms and by the ranges of
//! the functions (the kernel's `sign.rs` does at least as much).

use std::cell::Cell;

use num_rational::BigRational;
use num_traits::{One, Signed, ToPrimitive, Zero};

use crate::enclosure::Function;
use crate::expression::{Constant, End, Node, Term};
use crate::statement::{Rel, Relation, Sequent};

use super::laurent::Algebra;
use super::range::{Bound, Range};

/// Most parts of a term that are looked at.
const MAX_VISITS: u32 = 4000;

/// Whether a term is positive by its shape alone.
#[must_use]
pub fn is_plainly_positive(s: &Sequent, term: &Term) -> bool {
    Shape::new(s).range(term).is_positive()
}

/// Whether a term is not negative by its shape alone.
#[must_use]
pub fn is_plainly_non_negative(s: &Sequent, term: &Term) -> bool {
    Shape::new(s).range(term).is_non_negative()
}

/// Whether a relation is plain: stated as it stands, or by the ranges of its sides.
#[must_use]
pub fn is_plain(s: &Sequent, r: &Relation) -> bool {
    let r = r.turned();
    let shape = Shape::new(s);
    if shape.states(&r) {
        return true;
    }
    let gap = || shape.range(&r.difference());
    match r.rel {
        Rel::LessEqual => gap().is_non_negative(),
        Rel::Less => gap().is_positive(),
        Rel::NotEqual => {
            let gap = gap();
            gap.is_positive() || gap.negated().is_positive()
        }
        _ => false,
    }
}

struct Shape<'a> {
    s: &'a Sequent,
    visits: Cell<u32>,
}

impl Shape<'_> {
    fn new(s: &Sequent) -> Shape<'_> {
        Shape { s, visits: Cell::new(0) }
    }

    /// Whether a hypothesis or a declared end states the relation as it stands.
    fn states(&self, r: &Relation) -> bool {
        let enough = |f: &Relation| {
            let f = f.turned();
            let same = f.left == r.left && f.right == r.right;
            same && (f.rel == r.rel
                || (f.rel == Rel::Less && matches!(r.rel, Rel::LessEqual | Rel::NotEqual)))
        };
        let by_end = |t: &Term| {
            let declared = t.as_variable().and_then(|x| self.s.declaration(x));
            declared.is_some_and(|d| d.ends().iter().any(enough))
        };
        self.s.hypotheses.iter().any(enough) || by_end(&r.left) || by_end(&r.right)
    }

    fn range(&self, term: &Term) -> Range {
        self.visits.set(self.visits.get() + 1);
        if self.visits.get() > MAX_VISITS {
            return Range::default();
        }
        let integer = |n: i64| BigRational::from_integer(n.into());
        match term.node() {
            Node::Number(q) => Range::exactly(q.clone()),
            Node::Constant(c) => {
                let low: i64 = match c {
                    Constant::Pi => 31_415_926,
                    Constant::E => 27_182_818,
                    Constant::Euler => 5_772_156,
                };
                let ratio = |n: i64| BigRational::new(n.into(), 10_000_000.into());
                Range::between(ratio(low), ratio(low + 1))
            }
            Node::Variable(name) => {
                let Some(d) = self.s.declaration(name) else { return Range::default() };
                let end = |e: &End, open: bool, low: bool| {
                    let r = self.range(e.finite()?);
                    let b = if low { r.lower } else { r.upper }?;
                    Some(Bound { open: b.open || open, ..b })
                };
                Range {
                    lower: end(&d.domain.lower, d.domain.lower_open, true),
                    upper: end(&d.domain.upper, d.domain.upper_open, false),
                }
            }
            Node::Negate(a) => self.range(a).negated(),
            Node::Add(a, b) => self.range(a).plus(&self.range(b)),
            Node::Subtract(a, b) => self.difference(a, b),
            Node::Multiply(a, b) if a == b => self.range(a).natural_power(2),
            Node::Multiply(a, b) => self.range(a).times(&self.range(b)),
            Node::Divide(a, b) => self.range(a).times(&self.range(b).reciprocal()),
            Node::Power(b, p) => {
                let base = self.range(b);
                match p.as_number().map(|q| (q.is_integer().then(|| q.numer().to_i64()).flatten(), q)) {
                    Some((Some(n), _)) if n.unsigned_abs() <= 1000 => {
                        let power = base.natural_power(n.unsigned_abs() as u32);
                        if n < 0 { power.reciprocal() } else { power }
                    }
                    // Defined for a base >= 0 only.
                    Some((None, q)) if !q.is_integer() => {
                        self.root(&base, base.is_positive() || q.is_negative(), q.is_positive())
                    }
                    _ if base.is_positive() => Range::above(0, true),
                    _ => Range::default(),
                }
            }
            Node::Apply(f, args) => self.function(*f, args, &integer),
            Node::Quantity(..) | Node::Series { .. } => Range::default(),
        }
    }

    /// A power of something `>= 0` that is no integer; against 1 if it rises.
    fn root(&self, base: &Range, strictly: bool, rising: bool) -> Range {
        let sign = Range::above(0, strictly);
        let one = BigRational::one();
        if rising && base.is_above(&one, false) {
            sign.meet(Range::above(1, base.is_above(&one, true)))
        } else {
            sign
        }
    }

    /// `a - b`, also where a stated order says more than the ranges.
    fn difference(&self, a: &Term, b: &Term) -> Range {
        let by_range = self.range(a).plus(&self.range(b).negated());
        let states = |l: &Term, rel, r: &Term| self.states(&Relation::new(l.clone(), rel, r.clone()));
        for (low, high, up) in [(b, a, true), (a, b, false)] {
            let strictly = states(low, Rel::Less, high);
            if strictly || states(low, Rel::LessEqual, high) {
                let stated = Range::above(0, strictly);
                return by_range.meet(if up { stated } else { stated.negated() });
            }
        }
        by_range
    }

    fn function(&self, f: Function, args: &[Term], integer: &dyn Fn(i64) -> BigRational) -> Range {
        let Some(first) = args.first() else { return Range::default() };
        let a = self.range(first);
        let zero = BigRational::zero();
        let unit = || Range::between(integer(-1), integer(1));
        // A rising function with value `at` at `from`, seen from there only.
        let rising = |from: i64, at: i64| {
            let here = integer(from);
            let mut range = Range::default();
            if a.is_above(&here, false) {
                range = range.meet(Range::above(at, a.is_above(&here, true)));
            }
            if a.negated().is_above(&-&here, false) {
                range = range.meet(Range::below(at, a.negated().is_above(&-&here, true)));
            }
            range
        };
        match f {
            Function::Exp => rising(0, 1).meet(Range::above(0, true)),
            Function::Log | Function::Log2 => rising(1, 0),
            Function::Sqrt => self.root(&a, a.is_positive(), true).meet(rising(1, 1)),
            Function::Abs if a.is_non_negative() => a,
            Function::Abs if a.negated().is_non_negative() => a.negated(),
            Function::Abs => a.negated().hull(a).meet(Range::above(0, false)),
            Function::Min | Function::Max => {
                let up = f == Function::Max;
                let turn = |r: Range| if up { r } else { r.negated() };
                let all = args.iter().map(|t| turn(self.range(t)));
                let largest = all.reduce(|x, y| {
                    let lower = Range { lower: x.lower.clone(), upper: None }
                        .meet(Range { lower: y.lower.clone(), upper: None });
                    x.hull(y).meet(lower)
                });
                turn(largest.unwrap_or_default())
            }
            Function::Sin => unit().meet(within_arch(self.s, first, 0)),
            Function::Cos => unit().meet(within_arch(self.s, first, 1)),
            Function::Tanh | Function::Erf => {
                a.sign_only().meet(Range::above(-1, true)).meet(Range::below(1, true))
            }
            Function::Atan => a.sign_only().meet(Range::between(
                BigRational::new((-8).into(), 5.into()),
                BigRational::new(8.into(), 5.into()),
            )),
            Function::Asin | Function::Sinh | Function::Asinh | Function::Atanh => a.sign_only(),
            Function::Acos | Function::Acosh => Range::above(0, false),
            Function::Erfc => {
                let range = Range::above(0, true).meet(Range::below(2, true));
                if a.is_non_negative() { range.meet(Range::below(1, a.is_above(&zero, true))) } else { range }
            }
            Function::Cosh => Range::above(1, false),
            Function::Gamma | Function::Trigamma if a.is_positive() => Range::above(0, true),
            Function::Factorial => Range::above(1, false),
            Function::Binomial => Range::above(0, false),
            _ => Range::default(),
        }
    }
}

/// The sign of the sine (`shift` 0) or of the cosine (`shift` 1) of `a` where that
/// stays strictly within the first arch, as the kernel sees it for multiples of one
/// variable.
fn within_arch(s: &Sequent, a: &Term, shift: i64) -> Range {
    let pi = Term::constant(Constant::Pi);
    // The variable and its factor in half turns, the factor of pi apart.
    let (x, turns) = match a.node() {
        Node::Variable(x) => (x, false),
        Node::Multiply(p, x) if *p == pi => match x.node() {
            Node::Variable(x) => (x, true),
            _ => return Range::default(),
        },
        _ => return Range::default(),
    };
    let Some(d) = s.declaration(x) else { return Range::default() };
    let algebra = Algebra { positive: &|_| true };
    let end = |e: &End| {
        let e = e.finite()?;
        if e.is_zero() {
            return Some(BigRational::zero());
        }
        let value = if turns { e.clone() } else { e.divide(&pi) };
        algebra.poly(&value)?.as_number()
    };
    let half = BigRational::new(shift.into(), 2.into());
    let (Some(low), Some(high)) = (end(&d.domain.lower), end(&d.domain.upper)) else {
        return Range::default();
    };
    let (low, high) = (low + &half, high + &half);
    let one = BigRational::one();
    let inside = (low.is_positive() || (low.is_zero() && d.domain.lower_open))
        && (high < one || (high == one && d.domain.upper_open));
    if inside { Range::above(0, true) } else { Range::default() }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::Sort;
    use crate::expression::sample::term;
    use crate::statement::{Conclusion, Declaration, Domain};

    /// A real variable `x` or `a` with ends as written: `x in (0, 1]`.
    fn declared(text: &str) -> Declaration {
        let (name, ends) = text.split_once(" in ").unwrap();
        let (low, high) = ends[1..ends.len() - 1].split_once(", ").unwrap();
        let end = |t: &str| match t {
            "inf" => End::PlusInfinity,
            "-inf" => End::MinusInfinity,
            t => End::Finite(term(t)),
        };
        let domain = Domain {
            sort: Sort::Real,
            lower: end(low),
            lower_open: ends.starts_with('('),
            upper: end(high),
            upper_open: ends.ends_with(')'),
        };
        Declaration { name: name.into(), domain }
    }

    fn positive(variables: &str, text: &str) -> bool {
        let variables = variables.split("; ").map(declared).collect();
        let s = Sequent { variables, hypotheses: vec![], goal: Conclusion::Absurd };
        is_plainly_positive(&s, &term(text))
    }

    #[test]
    fn ranges_of_functions_and_stated_orders() {
        let all = "x in (-inf, inf)";
        for (domain, text) in [
            (all, "2 + cos(x)"),
            (all, "1 + exp(x) - sin(x)^3"),
            (all, "1 - tanh(x)"),
            (all, "x^2 + 1"),
            ("x in (1, 2)", "x - 1"),
            ("x in (1, 2)", "log(x)"),
            ("x in (0, 1)", "1 - exp(-x)"),
            ("x in (0, 1)", "1 - x^2"),
            ("a in (0, 1); x in (a, 2)", "x - a"),
        ] {
            assert!(positive(domain, text), "{text} on {domain}");
        }
    }

    #[test]
    fn what_is_not_plain() {
        let all = "x in (-inf, inf)";
        for (domain, text) in [
            (all, "1 + cos(x)"),
            (all, "x^2"),
            (all, "x"),
            ("x in [1, 2]", "x - 1"),
            ("x in [1, 2]", "log(x)"),
            ("x in [0, 1]", "1/x - 1"),
            ("a in (0, 1); x in [a, 2]", "x - a"),
            ("x in (0, 7)", "sin(x)"),
        ] {
            assert!(!positive(domain, text), "{text} on {domain}");
        }
    }
}

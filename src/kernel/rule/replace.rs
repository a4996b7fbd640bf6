//! `{replace (s) (s2) up {s2 <= s} {mono} {rest} {defined}?}`, `{replace (s) (s2) down {s <= s2} {mono} {rest} {defined}?}`
//!
//! Goal `l <= r` or `l < r`; write F(u) for `r - l` with u for every occurrence
//! of the term s. `up`: F does not decrease between s2 and s, so F(s2) decides;
//! `down`: F does not increase between s and s2. `rest` proves the goal with s2.
//! Both sides must be defined for every u between, in Gamma with the real
//! variable `hole` in `[s2, s]` (`[s, s2]`) declared last. `mono` proves there
//! `D_hole F >= 0` (`<= 0`), or is `{structure}`: F moves one way by its shape,
//! co-factors having signs that are plain (`sign.rs`).
//! Sound: one-variable monotonicity at fixed values of the others (R14).
//! Forgotten: a range between that leaves the monotone or the defined part; a
//! power as increasing in its exponent for a base below 1.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_defined;
use crate::kernel::differentiate::differentiate;
use crate::kernel::number::Function;
use crate::kernel::section::require;
use crate::kernel::sequent::{Declaration, Domain, End, Rel, Relation, Sequent, Sort};
use crate::kernel::sign::{Sign, range_of, sign_of};
use crate::kernel::step::Fields;
use crate::kernel::term::{Node, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

const HOLE: &str = "hole";

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let goal = s.relation()?;
    let (old, new) = (fields.term()?, fields.term()?);
    let up = match &**fields.word()? {
        "up" => true,
        "down" => false,
        other => return refuse(Reason::Fields, format!("`{other}` is neither up nor down")),
    };
    let (order, mono, rest) = (fields.step()?, fields.step()?, fields.step()?);
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    if !matches!(goal.rel, Rel::Le | Rel::Lt) {
        return refuse(Reason::Condition, "the goal is no inequality");
    }
    require_defined(s, &[old, new], defined, k)?;
    let (low, high) = if up { (new, old) } else { (old, new) };
    prove(&s.with_goal(Relation::new(low.clone(), Rel::Le, high.clone())), order, k)?;

    let end = |t: &Term| Some(End { term: t.clone(), open: false });
    let domain = Domain { sort: Sort::Real, lower: end(low), upper: end(high) };
    k.require_fresh(s, HOLE)?;
    let inside = s.with_variable(Declaration { name: HOLE.into(), domain })?;
    let hole = Term::variable(HOLE);
    let between = goal.map(|t| t.replace(old, &hole));
    require_defined(&inside, &[&between.left, &between.right], defined, k)?;
    if &*mono.rule == "structure" && mono.fields.is_empty() {
        let moves =
            Moves::of(&inside, &between.left, 0).reversed().and(Moves::of(&inside, &between.right, 0));
        if moves != Moves::Not && moves != (if up { Moves::Up } else { Moves::Down }) {
            return refuse(Reason::Condition, format!("the shape of {between} does not say how it moves"));
        }
    } else {
        let slope = differentiate(&between.difference(), HOLE)?;
        require(&inside, &slope.conditions, defined, k)?;
        require_defined(&inside, &[&slope.term], defined, k)?;
        let rel = if up { Rel::Ge } else { Rel::Le };
        prove(&inside.with_goal(Relation::new(slope.term, rel, Term::zero())), mono, k)?;
    }
    // From the same F: where an index of a series hides a name of `new`, putting it in
    // for `old` directly would leave occurrences behind.
    prove(&s.with_goal(between.map(|t| t.substitute(HOLE, new))), rest, k)
}

/// How a term moves when the hole increases.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Moves {
    Not,
    Up,
    Down,
    Unknown,
}

impl Moves {
    fn reversed(self) -> Moves {
        match self {
            Moves::Up => Moves::Down,
            Moves::Down => Moves::Up,
            other => other,
        }
    }

    /// Both at once.
    fn and(self, other: Moves) -> Moves {
        match (self, other) {
            (Moves::Not, m) | (m, Moves::Not) => m,
            (a, b) if a == b => a,
            _ => Moves::Unknown,
        }
    }

    /// Under a factor of that sign.
    fn times(self, sign: Sign) -> Moves {
        match self {
            Moves::Not => Moves::Not,
            m if sign.is_non_negative() => m,
            m if sign.is_non_positive() => m.reversed(),
            _ => Moves::Unknown,
        }
    }

    fn of(s: &Sequent, t: &Term, depth: usize) -> Moves {
        if !t.mentions(HOLE) {
            return Moves::Not;
        }
        if depth > 200 {
            return Moves::Unknown;
        }
        let part = |t: &Term| Moves::of(s, t, depth + 1);
        let sign = |t: &Term| sign_of(s, t);
        match &**t {
            Node::Variable(_) => Moves::Up,
            Node::Negate(a) => part(a).reversed(),
            Node::Add(a, b) => part(a).and(part(b)),
            Node::Subtract(a, b) => part(a).and(part(b).reversed()),
            // a b moves with a if b has a sign, and with b if a has one.
            Node::Multiply(a, b) => part(a).times(sign(b)).and(part(b).times(sign(a))),
            // 1/b falls as b rises, wherever b keeps its sign.
            Node::Divide(a, b) => {
                let divisor = sign(b);
                if !divisor.is_non_negative() && !divisor.is_non_positive() && part(b) != Moves::Not {
                    return Moves::Unknown;
                }
                part(a).times(divisor).and(part(b).reversed().times(sign(a)))
            }
            Node::Power(b, p) => Moves::of_power(s, b, p, depth),
            Node::Apply(f, args) => match f {
                Function::Exp
                | Function::Log
                | Function::Log2
                | Function::Sqrt
                | Function::Floor
                | Function::Ceil
                | Function::Asin
                | Function::Atan
                | Function::Sinh
                | Function::Tanh
                | Function::Asinh
                | Function::Acosh
                | Function::Atanh
                | Function::Erf => part(&args[0]),
                Function::Acos | Function::Erfc => part(&args[0]).reversed(),
                Function::Abs | Function::Cosh => part(&args[0]).times(sign(&args[0])),
                Function::Min | Function::Max => args.iter().map(part).fold(Moves::Not, Moves::and),
                _ => Moves::Unknown,
            },
            _ => Moves::Unknown,
        }
    }

    /// `b^p`: odd powers rise with b; for b >= 0 it rises with b if p >= 0 and falls
    /// if p <= 0; it rises with p if b >= 1 and falls if 0 < b <= 1. Negative
    /// integer powers of a base of one sign go by `1/b`.
    fn of_power(s: &Sequent, b: &Term, p: &Term, depth: usize) -> Moves {
        let base = sign_of(s, b);
        let moves = Moves::of(s, b, depth + 1);
        let literal = p.as_number();
        let odd = |q: &num_rational::BigRational| q.is_integer() && !num_integer::Integer::is_even(q.numer());
        let positive = literal.is_some_and(num_traits::Signed::is_positive);
        let by_base = if moves == Moves::Not || (literal.is_some_and(odd) && positive) {
            moves
        } else if base.is_non_negative() {
            moves.times(sign_of(s, p))
        } else if base.is_non_positive() && literal.is_some_and(num_rational::BigRational::is_integer) {
            // b^n = (-1)^n (-b)^n.
            let even = literal.is_some_and(|q| !odd(q));
            let size = moves.reversed().times(sign_of(s, p));
            if even { size } else { size.reversed() }
        } else {
            Moves::Unknown
        };
        let one = num_traits::One::one();
        let range = range_of(s, b);
        let by_exponent = match Moves::of(s, p, depth + 1) {
            Moves::Not => Moves::Not,
            m if range.is_at_least(&one, false) => m,
            m if base.is_non_negative() && range.is_at_most(&one, false) => m.reversed(),
            _ => Moves::Unknown,
        };
        by_base.and(by_exponent)
    }
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn replacements() {
        accepted(
            "for all m : real in [0, inf), mu : real in [0, inf), c : real in (0, inf) with m <= mu: m/c <= mu/c",
            "{replace (m) (mu) down {linear (1) h1} {structure} {identity}}",
        );
        accepted(
            "for all n : real in [0, 10], x : real in [0, 1], r : real in [1, inf) with n <= x: n^r*exp(n) <= x^r*exp(x)",
            "{replace (n) (x) down {linear (1) h1} {structure} {identity}}",
        );
        accepted(
            "for all a : real in [1, inf), p : real in [0, 2]: a^p <= a^2",
            "{replace (p) (2) down {sign} {structure} {identity}}",
        );
        accepted(
            "for all x : real in [0, 1], y : real in [x, 1]: x*exp(-x) <= y*exp(-y)",
            "{replace (x) (y) down {sign} {scale [(hole - 1)*exp(-hole) <= 0] (1) {sign} {sign}} {identity}}",
        );
    }

    #[test]
    fn refused() {
        // The base may be below 1.
        rejected(
            "for all x : real in (0, 2], a : real in [0, 1], b : real in [0, 1] with a <= b: x^a <= x^b",
            "{replace (a) (b) down {linear (1) h1} {structure} {identity}}",
        );
        // Past the monotone range: t exp(-t) falls beyond 1.
        rejected(
            "for all t : real in [0, 3], u : real in [0, 3] with t <= u: t*exp(-t) <= u*exp(-u)",
            "{replace (t) (u) down {linear (1) h1} {scale [(hole - 1)*exp(-hole) <= 0] (1) {sign} {sign}} {identity}}",
        );
        // The range between contains the pole.
        rejected(
            "for all x : real in [-2, -1], y : real in [1, 2]: 1/y <= 1/x",
            "{replace (x) (y) up {sign} {structure} {identity}}",
        );
        rejected(
            "for all x : real in [-2, -1], y : real in [1, 2]: 1/x >= 1/y",
            "{replace (x) (y) down {sign} {structure} {identity}}",
        );
        // Wrong direction, no order, even power over both signs.
        rejected(
            "for all m : real in [0, 1], c : real in [0, 1] with m <= c: c <= m",
            "{replace (m) (c) up {linear (1) h1} {structure} {identity}}",
        );
        rejected(
            "for all x : real in [0, 1]: x <= 1/2",
            "{replace (x) (1/2) down {sign} {structure} {identity}}",
        );
        rejected(
            "for all x : real in [-2, 1], y : real in [x, 1]: x^2 <= y^2",
            "{replace (x) (y) down {sign} {structure} {identity}}",
        );
    }
}

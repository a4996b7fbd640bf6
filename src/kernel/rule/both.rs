//! `{both log {0 < l} {0 < r} {rest}}`, `{both exp {rest}}`,
//! `{both square {0 <= r} {rest}}`, `{both odd (n) {rest}}`,
//! `{both power (p) {0 < p} {0 <= l} {0 <= r} {rest} {defined}?}`,
//! `{both reciprocal {0 < l} {0 < r} {rest}}`
//!
//! Goal `l rho r` from `phi(l) rho phi(r)`, phi strictly increasing where both
//! values lie; from `1/r rho 1/l` for the reciprocal; from `l^2 rho r^2` if the
//! LARGER side is `>= 0` (not for `=`).
//! Sound: if `l > r`, then `phi(l) > phi(r)`; for squares `abs(l) <= r` gives
//! `l <= r` (R12). The new sides are defined under the conditions shown.
//! Forgotten: squaring when the larger side may be negative proves `2 <= -3`.

use num_integer::Integer;
use num_traits::Signed;

use super::{Kernel, check as prove};
use crate::kernel::defined::require_defined;
use crate::kernel::number::Function;
use crate::kernel::sequent::{Rel, Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let goal = s.relation()?;
    if goal.rel == Rel::Ne {
        return refuse(Reason::Condition, "not for `!=`");
    }
    let way = fields.word()?;
    let shows = |fields: &mut Fields, rel, t: &Term| {
        prove(&s.with_goal(Relation::new(Term::zero(), rel, t.clone())), fields.step()?, k)
    };
    let (l, r) = (&goal.left, &goal.right);
    let (left, right) = match &**way {
        "log" => {
            shows(&mut fields, Rel::Lt, l)?;
            shows(&mut fields, Rel::Lt, r)?;
            (Term::apply(Function::Log, l), Term::apply(Function::Log, r))
        }
        "exp" => (Term::apply(Function::Exp, l), Term::apply(Function::Exp, r)),
        "square" => {
            if goal.rel == Rel::Eq {
                return refuse(Reason::Condition, "equal squares do not make equal sides");
            }
            shows(&mut fields, Rel::Le, r)?;
            (l.power(&Term::integer(2)), r.power(&Term::integer(2)))
        }
        "odd" => {
            let n = fields.term()?;
            if !n.as_number().is_some_and(|q| q.is_integer() && q.is_positive() && q.numer().is_odd()) {
                return refuse(Reason::Condition, format!("{n} is not an odd natural number"));
            }
            (l.power(n), r.power(n))
        }
        "power" => {
            let p = fields.term()?;
            shows(&mut fields, Rel::Lt, p)?;
            shows(&mut fields, Rel::Le, l)?;
            shows(&mut fields, Rel::Le, r)?;
            (l.power(p), r.power(p))
        }
        "reciprocal" => {
            shows(&mut fields, Rel::Lt, l)?;
            shows(&mut fields, Rel::Lt, r)?;
            (Term::integer(1).divide(r), Term::integer(1).divide(l))
        }
        _ => return refuse(Reason::Fields, format!("`{way}` is no way to change both sides")),
    };
    let rest = fields.step()?;
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    if let ("power", crate::kernel::term::Node::Power(_, p)) = (&**way, &*left) {
        require_defined(s, &[p], defined, k)?;
    }
    prove(&s.with_goal(Relation::new(left, goal.rel, right)), rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn both_sides() {
        accepted(
            "for all x : real in [1, inf), p : real in [0, inf): x^p*exp(p) <= exp(p*x)*x^p*exp(p)",
            "{both log {sign} {sign} {linear [0 <= p*x] {sign}}}",
        );
        accepted(
            "for all x : real in [0, inf): sqrt(x) <= 1 + x",
            "{both square {sign} {linear [0 <= 1 + x + x^2] {sign}}}",
        );
        accepted(
            "for all x : real in (0, inf), p : real in (0, inf): x <= x + 1",
            "{both power (1/p) {sign} {sign} {sign} {both power (p) {sign} {sign} {sign} {sign}}}",
        );
        accepted("for all x : real in [2, inf): 1/x <= 1/2", "{both reciprocal {sign} {sign} {sign}}");
        accepted("for all x : real in (-inf, 0]: x <= 1", "{both odd (3) {sign}}");
    }

    #[test]
    fn refused() {
        // 4 <= 9 does not prove 2 <= -3.
        rejected("for all x : real in [0, 1]: 2 <= -3", "{both square {sign} {sign}}");
        rejected(
            "for all x : real in [-1, 1] with x^2 >= 1/4: 1/2 <= x",
            "{both square {sign} {linear (1) h1}}",
        );
        rejected("for all x : real in (-inf, inf): x <= x^2", "{both log {sign} {sign} {sign}}");
        rejected("for all x : real in [-2, 1]: x = 1", "{both square {sign} {sign}}");
        rejected("for all x : real in [-3, -2]: x <= -3", "{both odd (2) {sign}}");
        rejected("for all x : real in [1, 2]: 2 <= x", "{both power (-1) {sign} {sign} {sign} {sign}}");
        rejected(
            "for all x : real in [-1, 1], y : real in [1, 2] with 1/y <= 1/x: x <= y",
            "{both reciprocal {sign} {sign} {linear (1) h1}}",
        );
    }
}

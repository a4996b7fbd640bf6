//! `{face x lo|hi {monotone} {rest}? {defined}?}`                          (R20)
//!
//! Goal `l <= r` or `l < r`, F = r - l, in a section of the real variable `x`
//! (`section.rs`). `monotone` proves `D_x F >= 0` (lo) or `<= 0` (hi) inside the
//! section. `lo` takes the goal to the lower end, `hi` to the upper end:
//! - a closed end a: F must be continuous by its shape, and `rest` proves the goal
//!   at x = a, in Gamma without x (with the order of the ends as last hypothesis
//!   if they are not both literals);
//! - an open or infinite end: the limit of F there (`end.rs`) must be infinite
//!   upwards, or `rest` proves that it is `>= 0` (may be left out if that is
//!   settled quickly); a strict goal then needs `monotone` strict.
//!
//! `{defined [c] {p} ..}` proves conditions of differentiability or definedness
//! inside the section.
//! Sound: the mean value theorem on each section. Source: any text on analysis.
//! Forgotten: a hypothesis in which x moves; a closed end where F jumps;
//! strictness across an open end (the limit of positive values may be 0).

use super::{Kernel, check as prove};
use crate::kernel::defined::{require_defined, settled};
use crate::kernel::differentiate::{continuous, differentiate};
use crate::kernel::end::Tends;
use crate::kernel::section::{Section, require};
use crate::kernel::sequent::{Rel, Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let x = fields.word()?;
    let low = match &**fields.word()? {
        "lo" => true,
        "hi" => false,
        other => return refuse(Reason::Fields, format!("`{other}` is neither lo nor hi")),
    };
    let monotone = fields.step()?;
    let defined = fields.optional_step_named("defined");
    let rest = if defined.is_some() { None } else { fields.optional_step() };
    let defined = defined.or_else(|| fields.optional_step_named("defined"));
    fields.end()?;
    let goal = s.relation()?;
    let strict = match goal.rel {
        Rel::Le => false,
        Rel::Lt => true,
        _ => return refuse(Reason::Condition, "the goal is not an inequality"),
    };
    let section = Section::of(s, x, k)?;
    let f = goal.difference();
    let slope = differentiate(&f, x)?;
    require(&section.inside, &slope.conditions, defined, k)?;
    require_defined(&section.inside, &[&slope.term], defined, k)?;
    let end = if low { &section.lower } else { &section.upper };
    let closed = end.as_ref().is_some_and(|e| !e.open);
    let rel = match (low, strict && !closed) {
        (true, false) => Rel::Ge,
        (true, true) => Rel::Gt,
        (false, false) => Rel::Le,
        (false, true) => Rel::Lt,
    };
    prove(&section.inside.with_goal(Relation::new(slope.term, rel, Term::zero())), monotone, k)?;

    if let Some(a) = end.as_ref().filter(|e| !e.open) {
        continuous(&f, x)?;
        let at = goal.map(|t| t.substitute(x, &a.term));
        let Some(rest) = rest else { return refuse(Reason::Fields, "expected a step for the end") };
        return prove(&section.base(false).with_goal(at), rest, k);
    }
    let base = section.base(true);
    match section.towards(&base, low, k).limit(&f)? {
        Tends::Up => Ok(()),
        Tends::Down => refuse(Reason::NotProved, "the difference tends to minus infinity"),
        Tends::To(c) => {
            let goal = Relation::new(c, Rel::Ge, Term::zero());
            match rest {
                Some(rest) => prove(&base.with_goal(goal), rest, k),
                None if settled(&base, &goal) => Ok(()),
                None => refuse(Reason::NotProved, format!("{goal} is not settled")),
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use crate::kernel::sample::{accepts, rejects};

    #[test]
    fn closed_and_open_ends() {
        accepts("x : real in [0, inf) | | exp(-x) <= 1 + x", "{face x lo {sign} {sign}}");
        accepts(
            "x : real in [0, inf); y : real in [0, 1] | | y*exp(-x) <= 1 + x",
            "{face x lo {sign} {sign}}",
        );
        accepts("x : real in (0, inf) | | x/(1 + x) < 1", "{face x hi {sign} {sign}}");
        accepts("x : real in (0, inf) | | x/(1 + x) <= 1", "{face x hi {sign}}");
        accepts("a : real in [0, 1]; x : real in [a, inf) | | a^3 <= x^3", "{face x lo {sign} {sign}}");
    }

    #[test]
    fn forgotten_conditions() {
        // Strict at a limit: the limit is what counts, and it is below.
        rejects(
            "x : real in [0, inf) | | x/(1 + x) <= 1 - 1/1000000000",
            "{face x hi {sign}}",
            "not settled",
        );
        // A hypothesis in which x moves.
        rejects(
            "x : real in [0, 1]; y : real in [0, 1] | x + y >= 1 | 2 <= x + 2*y",
            "{face x lo {sign} {sign}}",
            "moves with",
        );
        // An end that moves with x.
        rejects(
            "x : real in [0, 1]; y : real in [0, x] | | 0 <= x - y",
            "{face x lo {sign} {sign}}",
            "moves with",
        );
        // The open end of a decreasing term is its limit, not a value.
        rejects(
            "x : real in (0, 1] | | 1/x - 1/(2*x) <= 10^9",
            "{face x lo {sign} {sign}}",
            "minus infinity",
        );
        // A closed end where the difference jumps.
        rejects("x : real in [0, 1] | | 0 <= x - floor(x)", "{face x lo {sign} {sign}}", "floor");
        // No derivative at the kink.
        rejects("x : real in [-1, 1] | | x + 1/2 <= abs(x)", "{face x hi {sign} {sign}}", "x != 0");
        // Strictness across an open end needs a strict slope.
        rejects("x : real in (0, inf) | | 0 < x^2*0", "{face x lo {sign} {sign}}", "sign");
        rejects("x : integer in [0, 5] | | 0 <= x", "{face x lo {sign} {sign}}", "not a real variable");
    }
}

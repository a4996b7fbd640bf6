//! Short forms for the tests of rules.

use std::collections::BTreeMap;

use super::read;
use super::rule::{Kernel, check};
use super::sequent::{Goal, Sequent};
use super::verdict::{Checked, Reason};

/// A sequent from texts; the goal may be `absurd`.
pub fn sequent(declarations: &[&str], hypotheses: &[&str], goal: &str) -> Sequent {
    Sequent {
        variables: declarations.iter().map(|d| read::declaration(d).expect("a declaration")).collect(),
        hypotheses: hypotheses.iter().map(|h| read::relation(h).expect("a relation")).collect(),
        goal: if goal == "absurd" {
            Goal::Absurd
        } else {
            Goal::Relation(read::relation(goal).expect("a goal"))
        },
    }
}

/// A kernel that knows quantities `q(real in (0, inf)) : real in [0, 1]` and `m() : real in [0, inf)`.
pub fn kernel() -> Kernel {
    let domain = |text: &str| read::declaration(&format!("x : {text}")).expect("a domain").domain;
    let mut known = BTreeMap::new();
    known.insert("q".into(), (vec![domain("real in (0, inf)")], domain("real in [0, 1]")));
    known.insert("m".into(), (vec![], domain("real in [0, inf)")));
    Kernel::new(known)
}

/// What the kernel says of a step.
pub fn verdict(s: &Sequent, step: &str) -> Checked {
    check(s, &read::step(step).expect("a step"), &kernel())
}

/// Demands that the step is accepted.
pub fn accepted(s: &Sequent, step: &str) {
    if let Err(reject) = verdict(s, step) {
        panic!("{s}\n  refused: {reject}");
    }
}

/// Demands that the step is refused for that reason.
pub fn refused(s: &Sequent, step: &str, reason: Reason) {
    match verdict(s, step) {
        Ok(()) => panic!("{s}\n  accepted: {step}"),
        Err(reject) => assert_eq!(reject.reason, reason, "{reject}"),
    }
}

//! Tests of rules in one line: a sequent as the kernel prints it, and a step.

use std::collections::BTreeMap;

use super::{Kernel, check};
use crate::kernel::read::{self, Reader};
use crate::kernel::sequent::{Goal, Sequent};
use crate::kernel::verdict::Checked;

fn sequent(text: &str) -> Sequent {
    let mut r = Reader::new(text).unwrap();
    r.word("for").unwrap();
    r.word("all").unwrap();
    let variables = r.list(Reader::declaration).unwrap();
    let hypotheses = if r.takes_word("with") { r.list(Reader::relation).unwrap() } else { vec![] };
    r.sign(":").unwrap();
    let goal = if r.takes_word("absurd") { Goal::Absurd } else { Goal::Relation(r.relation().unwrap()) };
    assert!(r.at_end(), "{text}");
    Sequent { variables, hypotheses, goal }
}

fn run(text: &str, step: &str) -> Checked {
    check(&sequent(text), &read::step(step).unwrap(), &Kernel::new(BTreeMap::new()))
}

/// Asserts that the step proves the sequent.
pub(super) fn accepted(text: &str, step: &str) {
    if let Err(r) = run(text, step) {
        panic!("{text}\n  by {step}\n  {r}");
    }
}

/// Asserts that the step is refused.
pub(super) fn rejected(text: &str, step: &str) {
    assert!(run(text, step).is_err(), "{text}\n  by {step}\n  was accepted");
}

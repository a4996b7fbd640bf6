//! Tests of rules in one line: a sequent as the kernel prints it, and a step.

use std::collections::BTreeMap;

use super::{Kernel, check};
use crate::kernel::read;
use crate::kernel::verdict::Checked;

fn run(text: &str, step: &str) -> Checked {
    check(&read::sequent(text).unwrap(), &read::step(step).unwrap(), &Kernel::new(BTreeMap::new()))
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

//! For the tests of the rules: sequents and steps from short texts.

use std::collections::BTreeMap;

use super::read;
use super::rule::{Kernel, check};
use super::sequent::{Goal, Sequent};
use super::verdict::Checked;

/// `"x : real in [0, 1]; y : real in (0, inf) | x <= y | x <= y + 1"`: declarations,
/// hypotheses, goal.
pub fn sequent(text: &str) -> Sequent {
    let parts: Vec<&str> = text.split('|').collect();
    let list = |part: &str| -> Vec<String> {
        part.split(';').map(str::trim).filter(|p| !p.is_empty()).map(str::to_string).collect()
    };
    let variables = list(parts[0]).iter().map(|d| read::declaration(d).expect(d)).collect();
    let hypotheses = list(parts[1]).iter().map(|h| read::relation(h).expect(h)).collect();
    let goal = match parts[2].trim() {
        "absurd" => Goal::Absurd,
        relation => Goal::Relation(read::relation(relation).expect(relation)),
    };
    Sequent { variables, hypotheses, goal }
}

/// Checks a step against a sequent without quantities.
pub fn proves(sequent_text: &str, step: &str) -> Checked {
    let step = read::step(step).unwrap_or_else(|e| panic!("{step}: {e}"));
    check(&sequent(sequent_text), &step, &Kernel::new(BTreeMap::new()))
}

/// The step must be accepted.
pub fn accepts(sequent_text: &str, step: &str) {
    if let Err(e) = proves(sequent_text, step) {
        panic!("{sequent_text}\n{step}\n{e}");
    }
}

/// The step must be refused with a message that contains `why`.
pub fn rejects(sequent_text: &str, step: &str, why: &str) {
    match proves(sequent_text, step) {
        Ok(()) => panic!("accepted: {sequent_text}\n{step}"),
        Err(e) => assert!(e.to_string().contains(why), "{sequent_text}\n{step}\n{e}\nexpected: {why}"),
    }
}

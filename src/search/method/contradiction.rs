//! Suppositions that exclude each other: one hypothesis is refuted by the domains,
//! or by the domains and the other hypotheses.
//!
//! The negation of a hypothesis is a goal like any other, so every method serves;
//! without the hypotheses and variables it does not need, the goal is one that
//! they know. An equation is refuted from either side.

use std::collections::BTreeSet;

use crate::expression::{Name, Term};
use crate::statement::{Condition, Rel, Relation, Sequent, conditions, has_at_hand};

use super::super::engine::{Method, Search, Stuck};
use super::super::proof::Proof;

/// The method.
pub struct Contradiction;

impl Method for Contradiction {
    fn name(&self) -> &'static str {
        "contradiction"
    }

    fn share(&self) -> u64 {
        50
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        if s.relation().is_some() {
            return Err(Stuck::NotApplicable("the goal is a relation"));
        }
        let mut ways: Vec<(usize, Relation)> = Vec::new();
        for (i, h) in s.hypotheses.iter().enumerate() {
            match h.rel {
                Rel::NotEqual => {}
                Rel::Equal => {
                    ways.extend([Rel::Less, Rel::Greater].map(|rel| (i, Relation { rel, ..h.clone() })))
                }
                _ => ways.push((i, h.negation())),
            }
        }
        if ways.is_empty() {
            return Err(Stuck::NotApplicable("there is no hypothesis to refute"));
        }
        // First each by itself, then with the others.
        let tries: Vec<(&(usize, Relation), bool)> =
            [true, false].iter().flat_map(|alone| ways.iter().map(move |way| (way, *alone))).collect();
        let many = tries.len() as u64;
        for (((i, goal), alone), done) in tries.into_iter().zip(0..) {
            let dropped: BTreeSet<usize> =
                (0..s.hypotheses.len()).filter(|j| if alone { true } else { j == i }).collect();
            let Some((rest, words)) = without(s, &dropped, goal) else { continue };
            let share = search.left() / (many - done);
            let Ok(proof) = search.within(share, |search| search.prove(&rest)) else { continue };
            let words = words.iter().fold(Proof::new("forget"), |step, word| step.word(word));
            let refuted = words.with(proof);
            let supposed = Proof::new("linear").with(Term::integer(1)).word(&format!("h{}", i + 1));
            let h = &s.hypotheses[*i];
            let step = Proof::new("absurd");
            return Ok(match h.rel {
                Rel::Equal => step.with(goal.clone()).with(refuted).with(supposed),
                _ => step.with(h.clone()).with(supposed).with(refuted),
            });
        }
        Err(Stuck::because("no hypothesis is refuted by the rest"))
    }
}

/// The context without these hypotheses and without variables that nothing then
/// mentions, and what was dropped; nothing if a dropped hypothesis may be needed for
/// what is left to be defined.
fn without(s: &Sequent, dropped: &BTreeSet<usize>, goal: &Relation) -> Option<(Sequent, Vec<String>)> {
    let mut rest = s.with_goal(goal.clone());
    rest.hypotheses.clear();
    for (_, h) in s.hypotheses.iter().enumerate().filter(|(i, _)| !dropped.contains(i)) {
        if !stays_defined(&rest, h) {
            return None;
        }
        rest.hypotheses.push(h.clone());
    }
    if !stays_defined(&rest, goal) {
        return None;
    }
    let mut words: Vec<String> = dropped.iter().map(|i| format!("h{}", i + 1)).collect();
    while let Some(at) = rest.variables.iter().rposition(|d| !is_mentioned(&rest, &d.name)) {
        words.push(rest.variables.remove(at).name.to_string());
    }
    Some((rest, words))
}

fn stays_defined(s: &Sequent, r: &Relation) -> bool {
    let none = Vec::new();
    let found = [&r.left, &r.right].into_iter().flat_map(|t| conditions(s, &none, t));
    found.into_iter().all(|c| match c {
        Condition::OneOf { indices, alternatives, .. } => {
            indices.is_empty() && alternatives.iter().any(|all| all.iter().all(|r| has_at_hand(s, r)))
        }
        _ => false,
    })
}

fn is_mentioned(s: &Sequent, x: &Name) -> bool {
    let in_relation = |r: &Relation| r.left.mentions(x) || r.right.mentions(x);
    s.hypotheses.iter().chain(s.relation()).any(in_relation)
        || s.variables.iter().any(|d| d.domain.ends().any(|t| t.mentions(x)))
}

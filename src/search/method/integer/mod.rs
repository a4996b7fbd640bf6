//! Integer variables: treat them as real, or go from one value to the next.

mod recurrence;
mod relax;
mod steps;

pub use relax::Relax;
pub use steps::Steps;

use crate::expression::Term;
use crate::statement::{Condition, Rel, Relation, Sequent, Signature, conditions, has_at_hand};

use super::super::engine::{Search, Stuck};
use super::super::plain::{is_plainly_non_negative, is_plainly_positive};
use super::super::proof::Proof;
use super::super::sample::{approximate, quick};
use super::ladder::Ladder;

/// Proves a premise. That it is false says nothing about the goal.
fn premise(search: &mut Search, s: &Sequent) -> Result<Proof, Stuck> {
    if s.relation().is_some_and(|r| is_plain(s, r)) {
        return Ok(Proof::new("sign"));
    }
    search.prove(s).map_err(|stuck| match stuck {
        Stuck::Counterexample(at) => Stuck::because(format!("{s} is false at {at:?}")),
        other => other,
    })
}

/// The same for terms that are smooth in their real variables: derivatives first.
fn smooth_premise(search: &mut Search, s: &Sequent) -> Result<Proof, Stuck> {
    if s.relation().is_some_and(|r| is_plain(s, r)) {
        return Ok(Proof::new("sign"));
    }
    if let Some(point) = quick(s, 120, search) {
        return Err(Stuck::because(format!("{s} is {}", approximate(&point).remark())));
    }
    match search.attempt(&Ladder, s) {
        Err(Stuck::Exhausted) if search.left() == 0 => Err(Stuck::Exhausted),
        Err(_) => premise(search, s),
        proved => proved,
    }
}

/// Whether the kernel's quick signs settle the relation.
fn is_plain(s: &Sequent, r: &Relation) -> bool {
    match r.turned().rel {
        Rel::Less => is_plainly_positive(s, &r.difference()),
        Rel::LessEqual => is_plainly_non_negative(s, &r.difference()),
        _ => false,
    }
}

/// `{defined [c] {p} ..}` for what is not plain of terms that a step brings in;
/// nothing if all is.
fn defined(s: &Sequent, terms: &[&Term], search: &mut Search) -> Result<Option<Proof>, Stuck> {
    let nothing: Vec<Signature> = Vec::new();
    let mut proof = Proof::new("defined");
    let mut seen: Vec<Relation> = Vec::new();
    for term in terms {
        for condition in conditions(s, &nothing, term) {
            let Condition::OneOf { indices, alternatives, .. } = condition else {
                return Err(Stuck::because("a term whose definedness cannot be shown"));
            };
            let mut inner = s.clone();
            inner.variables.extend(indices);
            let at_hand = |r: &Relation| has_at_hand(&inner, r) || is_plain(&inner, r);
            if alternatives.iter().any(|all| all.iter().all(at_hand)) {
                continue;
            }
            let ordered = |all: &&Vec<Relation>| all.iter().all(|r| r.rel != Rel::NotEqual);
            let Some(way) = alternatives.iter().find(ordered) else {
                return Err(Stuck::because("a term whose definedness cannot be shown"));
            };
            for r in way {
                if !at_hand(r) && !seen.contains(r) {
                    let share = search.left() / 8;
                    let step = search.within(share, |search| premise(search, &inner.with_goal(r.clone())))?;
                    proof = proof.with(r.clone()).with(step);
                    seen.push(r.clone());
                }
            }
        }
    }
    Ok(if proof.fields.is_empty() { None } else { Some(proof) })
}

/// With the step `{defined ..}` that its new terms need.
fn with_defined(proof: Proof, s: &Sequent, terms: &[&Term], search: &mut Search) -> Result<Proof, Stuck> {
    Ok(match defined(s, terms, search)? {
        Some(step) => proof.with(step),
        None => proof,
    })
}

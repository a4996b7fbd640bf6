//! Reasons that a step turned out not to need.
//!
//! A reason is needless if the kernel accepts the very certificates that establish
//! the step when `a + b = a + b` stands in place of everything the reason says of `a`
//! and `b`. So nothing is searched for again, what the kernel used without being told
//! counts as used, and the answer depends on the certificates alone. Reasons are tried
//! from the last to the first, each without those found needless before: what is left
//! suffices.

use std::collections::{BTreeMap, BTreeSet};

use rayon::prelude::*;

use crate::diagnostic::{Code, Diagnostic};
use crate::expression::Name;
use crate::kernel::audit::{Docket, Verdict};
use crate::source::Place;
use crate::statement::{Domain, Fact, Goal, Rel, Relation, Says, Standing, Theory, plain};

use super::case::{Case, Found, belongs};

/// Longest certificates of a step that are checked again, in bytes.
const LONGEST: usize = 50_000;

/// A warning for each needless reason of the steps written in the dossier itself.
pub fn warnings(case: &Case, found: &BTreeMap<usize, Found>) -> Vec<Diagnostic> {
    let theory = &case.loaded.theory;
    let imported: BTreeSet<&Name> =
        theory.items.iter().filter(|item| item.imported).map(|item| &item.name).collect();
    let goals: Vec<&Goal> = theory.goals.iter().filter(|goal| !imported.contains(&goal.item)).collect();
    let needless = goals.into_par_iter().flat_map_iter(|goal| {
        let places =
            established(case, found, goal).map_or(Vec::new(), |proofs| needless(theory, goal, &proofs));
        places.into_iter().map(|place| {
            let step = format!("{}.{}", theory.stem, goal.name);
            Diagnostic::warning(Code::UnusedReason, place, format!("{step} holds without this reason"))
                .caption("not needed")
                .hint("drop it, unless the reader is to see it")
        })
    });
    needless.collect()
}

/// The certificates of a step of which every part holds, by their obligations.
fn established(case: &Case, found: &BTreeMap<usize, Found>, goal: &Goal) -> Option<Vec<(String, String)>> {
    if case.docket.refused().contains_key(&*goal.name) || goal.uses.iter().all(|one| one.place.is_none()) {
        return None;
    }
    let mut proofs = Vec::new();
    for (position, one) in case.docket.obligations().iter().enumerate() {
        if belongs(&one.id, &goal.name) {
            let found = found.get(&position).filter(|found| found.decision.verdict == Verdict::Holds)?;
            proofs.push((one.id.clone(), found.certificate.clone()?));
        }
    }
    let short = proofs.iter().map(|(_, text)| text.len()).sum::<usize>() <= LONGEST;
    (short && !proofs.is_empty()).then_some(proofs)
}

/// The places of the reasons that are not needed, in the order of the text.
fn needless(theory: &Theory, goal: &Goal, proofs: &[(String, String)]) -> Vec<Place> {
    let mut reasons: Vec<Place> = Vec::new();
    for place in goal.uses.iter().filter_map(|one| one.place) {
        if !reasons.contains(&place) {
            reasons.push(place);
        }
    }
    let mut dropped: Vec<Place> = Vec::new();
    loop {
        let before = dropped.len();
        for place in reasons.iter().rev() {
            if !dropped.contains(place) {
                dropped.push(*place);
                if !stands(&without(theory, goal, &dropped), goal, proofs) {
                    dropped.pop();
                }
            }
        }
        // What supplies a property may be dropped once the lemma that requires it is.
        if dropped.len() == before {
            return reasons.into_iter().filter(|place| dropped.contains(place)).collect();
        }
    }
}

/// The goal alone, with the facts it uses; those at the places dropped say nothing.
fn without(theory: &Theory, goal: &Goal, dropped: &[Place]) -> Theory {
    let mut facts: Vec<Fact> = Vec::new();
    let mut uses = Vec::new();
    for one in &goal.uses {
        let Some(fact) = theory.fact(&one.fact) else { continue };
        let mut fact = Fact { standing: Standing::Assumption, ..fact.clone() };
        let mut one = one.clone();
        if one.place.is_some_and(|place| dropped.contains(&place)) {
            let Says::Relations(relations) = &fact.says else { continue };
            // The terms stay, and the number of the hypotheses: certificates name both.
            fact.says = Says::Relations(relations.iter().map(nothing).collect());
            fact.context.given.clear();
            fact.context.requires.clear();
            for variable in &mut fact.context.variables {
                variable.domain = Domain::all(variable.domain.sort);
            }
            let mut name = format!("{}'", fact.name);
            while theory.fact(&name).is_some() || theory.goal(&name).is_some() {
                name.push('\'');
            }
            fact.name = name.as_str().into();
            one.fact = fact.name.clone();
        }
        if facts.iter().all(|known| known.name != fact.name) {
            facts.push(fact);
        }
        uses.push(one);
    }
    Theory {
        stem: theory.stem.clone(),
        parameters: theory.parameters.clone(),
        wheres: theory.wheres.clone(),
        quantities: theory.quantities.clone(),
        facts,
        goals: vec![Goal { uses, ..goal.clone() }],
        ..Theory::default()
    }
}

/// What is true of the two sides of a relation whatever they are.
fn nothing(relation: &Relation) -> Relation {
    let sum = relation.left.add(&relation.right);
    Relation::new(sum.clone(), Rel::Equal, sum)
}

/// Whether the certificates establish all that the goal of `theory` obliges to show.
fn stands(theory: &Theory, goal: &Goal, proofs: &[(String, String)]) -> bool {
    let Ok(docket) = Docket::open(&plain(theory)) else { return false };
    let mut own = docket.obligations().iter().enumerate().filter(|(_, one)| belongs(&one.id, &goal.name));
    docket.refused().is_empty()
        && own.all(|(position, one)| {
            // Side conditions are numbered through, so one may have another number now.
            proofs.iter().any(|(id, text)| {
                let head = format!("certificate 1 for {id} ");
                let Some(rest) = text.strip_prefix(&head) else { return false };
                let text = format!("certificate 1 for {} {rest}", one.id);
                docket.decide(position, &[&text]).verdict == Verdict::Holds
            })
        })
}

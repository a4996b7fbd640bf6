//! From one obligation to one decision.

use crate::expression::{Node, Term};
use crate::statement::{
    Case, Conclusion, Condition, Declaration, Fact, Needed, Obligation, ObligationKind, Relation, Sequent,
    Signature, Use,
};

use super::budget::Effort;
use super::engine::{Search, Stuck};
use super::outcome::{Decision, Outcome, Undecided};
use super::proof::Proof;

/// One obligation with what the search may want to know about it.
#[derive(Clone, Debug)]
pub struct Task<'a> {
    /// What is to be shown.
    pub obligation: &'a Obligation,
    /// The quantities that may occur: of the dossier, and those the statement is a schema for.
    pub signatures: &'a [Signature],
    /// The facts of the dossier.
    pub facts: &'a [Fact],
    /// The instances the obligation may use, in order.
    pub uses: &'a [Use],
    /// The user's case distinction, if any.
    pub cases: &'a [Case],
    /// How many certificates for it the kernel has rejected so far: the search
    /// keeps more distance from the roundings with each.
    pub caution: u32,
}

/// Searches for a certificate.
#[must_use]
pub fn decide(task: &Task, effort: Effort) -> Decision {
    let mut search = Search::new(effort, task.caution);
    let found = match task.obligation.kind {
        ObligationKind::Definedness => prove_defined(task, &mut search),
        _ => prove_abstracted(&task.obligation.sequent, task.signatures, &mut search),
    };
    let outcome = match found {
        Ok(proof) => Outcome::Holds {
            certificate: format!("certificate 1 for {} holds {proof};", task.obligation.id),
            method: proof.rule,
            margin: None,
        },
        Err(stuck) => Outcome::Undecided(undecided(&task.obligation.sequent, stuck)),
    };
    Decision { outcome, inhabitant: None, effort: search.spent(), diary: search.diary }
}

fn undecided(sequent: &Sequent, stuck: Stuck) -> Undecided {
    let region = match &stuck {
        Stuck::Failed { region, .. } => sequent
            .variables
            .iter()
            .zip(region)
            .map(|(d, (lo, hi))| (d.name.clone(), lo.to_string(), hi.to_string()))
            .collect(),
        _ => Vec::new(),
    };
    let hint = matches!(stuck, Stuck::Exhausted).then(|| "more effort, or a case distinction".to_string());
    Undecided { reason: stuck.remark(), region, hint }
}

/// Proves a sequent after replacing every application of a quantity by a variable.
fn prove_abstracted(
    sequent: &Sequent,
    signatures: &[Signature],
    search: &mut Search,
) -> Result<Proof, Stuck> {
    let Some(application) = innermost_application(sequent) else { return search.prove(sequent) };
    let Node::Quantity(name, _) = application.node() else { return search.prove(sequent) };
    let Some(signature) = signatures.iter().find(|s| s.name == *name) else {
        return Err(Stuck::because(format!("the quantity {name} is not declared")));
    };
    let used = |n: &str| {
        let in_relation = |r: &Relation| r.left.mentions(n) || r.right.mentions(n);
        sequent.declaration(n).is_some()
            || sequent.hypotheses.iter().any(in_relation)
            || sequent.relation().is_some_and(in_relation)
    };
    let mut fresh = name.to_string();
    while used(&fresh) {
        fresh.push('\'');
    }
    let new = abstracted(
        sequent,
        &application,
        &Declaration { name: fresh.as_str().into(), domain: signature.range.clone() },
    );
    let rest = prove_abstracted(&new, signatures, search)?;
    Ok(Proof::new("abstract").word(&fresh).with(application).with(rest))
}

/// An application of a quantity without applications in its arguments, the first in
/// the order of the sequent. Applications under the index of a series stay.
fn innermost_application(sequent: &Sequent) -> Option<Term> {
    let mut found = None;
    let mut look = |term: &Term| {
        term.walk(&mut |t| {
            if found.is_some() {
                return false;
            }
            if let Node::Quantity(_, args) = t.node()
                && args.iter().all(|a| a.quantities().is_empty())
                && t.free_variables().iter().all(|v| sequent.declaration(v).is_some())
            {
                found = Some(t.clone());
            }
            true
        });
    };
    sequent.variables.iter().flat_map(|d| d.domain.ends()).for_each(&mut look);
    for r in sequent.hypotheses.iter().chain(sequent.relation()) {
        look(&r.left);
        look(&r.right);
    }
    found
}

/// The sequent with a variable for an application: declared last, or just before
/// the first domain that mentions the application.
fn abstracted(sequent: &Sequent, application: &Term, declaration: &Declaration) -> Sequent {
    let variable = Term::variable(declaration.name.clone());
    let put = |t: &Term| t.replace(application, &variable);
    let mentions = |d: &Declaration| d.domain.ends().any(|t| put(t) != *t);
    let place = sequent.variables.iter().position(mentions).unwrap_or(sequent.variables.len());
    let mut variables: Vec<Declaration> = sequent
        .variables
        .iter()
        .map(|d| Declaration { name: d.name.clone(), domain: d.domain.map(put) })
        .collect();
    variables.insert(place, declaration.clone());
    let goal = match &sequent.goal {
        Conclusion::Relation(r) => Conclusion::Relation(r.map(put)),
        Conclusion::Absurd => Conclusion::Absurd,
    };
    Sequent { variables, hypotheses: sequent.hypotheses.iter().map(|h| h.map(put)).collect(), goal }
}

/// Proves each condition of a definedness obligation: `{defined [c1] {p1} ..}`.
fn prove_defined(task: &Task, search: &mut Search) -> Result<Proof, Stuck> {
    let mut proof = Proof::new("defined");
    for needed in &task.obligation.needed {
        for (relation, step) in prove_needed(task, needed, search)? {
            proof = proof.with(relation).with(step);
        }
    }
    Ok(proof)
}

fn prove_needed(task: &Task, needed: &Needed, search: &mut Search) -> Result<Vec<(Relation, Proof)>, Stuck> {
    let (indices, alternatives) = match &needed.condition {
        Condition::OneOf { indices, alternatives } => (indices, alternatives),
        Condition::NotOfSort { term, sort } => {
            return Err(Stuck::because(format!("{term} is not {} by its shape", sort.name())));
        }
        Condition::Unshowable(what) => {
            return Err(Stuck::because(format!("cannot show definedness: {what}")));
        }
    };
    let whole = &task.obligation.sequent;
    let mut variables = whole.variables[..needed.variables.min(whole.variables.len())].to_vec();
    variables.extend(indices.iter().cloned());
    let hypotheses = whole.hypotheses[..needed.hypotheses.min(whole.hypotheses.len())].to_vec();
    let context = Sequent { variables, hypotheses, goal: Conclusion::Absurd };
    let mut told = None;
    // The strict forms of `!= 0` are the ones that methods can prove.
    for all in alternatives.iter().filter(|a| a.iter().all(is_ordered)).chain(alternatives) {
        let share = search.left() / 2;
        let proved: Result<Vec<_>, Stuck> = search.within(share, |search| {
            all.iter()
                .map(|r| {
                    Ok((r.clone(), prove_abstracted(&context.with_goal(r.clone()), task.signatures, search)?))
                })
                .collect()
        });
        match proved {
            Ok(pairs) => return Ok(pairs),
            Err(stuck) => told = told.or(Some(stuck)),
        }
    }
    Err(told.unwrap_or_else(|| Stuck::because("a condition without alternatives")))
}

fn is_ordered(r: &Relation) -> bool {
    r.rel != crate::statement::Rel::NotEqual
}

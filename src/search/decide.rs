//! From one obligation to one decision.

use num_rational::BigRational;

use crate::expression::{Name, Node, Term, for_people};
use crate::statement::{
    Case, Conclusion, Condition, Declaration, Fact, Needed, Obligation, ObligationKind, Rel, Relation,
    Sequent, Signature, Use,
};

use super::budget::Effort;
use super::engine::{Referee, Search, Stuck};
use super::exact::{is_inside, placed, truth};
use super::interpret::{Reading, Theory, interpret};
use super::method::{WITNESS_BITS, Zeal, inhabit, refute, refute_by};
use super::outcome::{Decision, Outcome, Undecided, Witness};
use super::proof::{Field, Proof};
use super::sample::simplest;

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
    /// Whom to ask about single steps.
    pub referee: Referee<'a>,
}

/// Searches for a certificate.
#[must_use]
pub fn decide(task: &Task, effort: Effort) -> Decision {
    let mut search = Search::new(effort, task.caution).asking(task.referee);
    let mut inhabitant = None;
    let outcome = match task.obligation.kind {
        ObligationKind::Definedness => decide_defined(task, &mut search),
        _ => decide_relation(task, &mut inhabitant, &mut search),
    };
    Decision { outcome, inhabitant, effort: search.spent(), diary: search.diary }
}

fn holds(task: &Task, proof: &Proof) -> Outcome {
    let certificate = format!("certificate 1 for {} holds {proof};", task.obligation.id);
    // The step that says most is below the bookkeeping of abstraction.
    let mut main = proof;
    while let ("abstract" | "substitute", Some(Field::Proof(rest))) = (main.rule, main.fields.last()) {
        main = rest;
    }
    Outcome::Holds { certificate, method: main.rule, margin: None }
}

/// The share of a budget, in percent of what is left.
fn part(search: &Search, percent: u64) -> u64 {
    (search.left() / 100).saturating_mul(percent).max(1)
}

fn decide_relation(task: &Task, inhabitant: &mut Option<Witness>, search: &mut Search) -> Outcome {
    let s = &task.obligation.sequent;
    let (plain, applications) = everything_abstracted(s, task.signatures);
    let bare = applications.is_empty();
    let share = part(search, 3);
    let inside = search.within(share, |search| inhabit(&plain, search));
    let vacuous = |percent, search: &mut Search| {
        let share = part(search, percent);
        let absurd = s.with_absurd();
        let proof = search.within(share, |search| prove_abstracted(&absurd, task.signatures, search)).ok()?;
        let certificate = format!("certificate 1 for {} vacuous {proof};", task.obligation.id);
        Some(Outcome::Vacuous { certificate })
    };
    if inside.is_none() {
        if let Some(vacuous) = vacuous(20, search) {
            return vacuous;
        }
    } else if !bare {
        let share = part(search, 4);
        let absurd = s.with_absurd();
        let reading = search.within(share, |search| interpret(&theory(task), &absurd, &[], search));
        *inhabitant = reading.map(|reading| reading_witness(task, s, "inhabited", &reading, None));
    }
    if bare {
        *inhabitant = inside.as_ref().map(|point| witness(task, s, "inhabited", point, None));
    }
    // A point where the plain sequent is false: with quantities only a doubt.
    let doubted = |zeal, hints: &[Vec<f64>], percent, search: &mut Search| {
        let share = part(search, percent);
        search.within(share, |search| refute(&plain, zeal, hints, search))
    };
    if bare && let Some(point) = doubted(Zeal::Quick, &[], 3, search) {
        return Outcome::Fails(witness(task, s, "fails", &point, None));
    }
    if !task.cases.is_empty() {
        let share = part(search, 50);
        if let Ok(proof) = search.within(share, |search| prove_by_cases(task, search)) {
            return holds(task, &proof);
        }
    }
    let mut told = Stuck::Exhausted;
    for percent in [25, 90] {
        let share = part(search, percent);
        match search.within(share, |search| prove_abstracted(s, task.signatures, search)) {
            // What follows from suppositions without a point is no verdict.
            Ok(proof) => {
                let vacuous = if inside.is_none() { vacuous(60, search) } else { None };
                return vacuous.unwrap_or_else(|| holds(task, &proof));
            }
            Err(stuck) => told = stuck,
        }
        let hints = match &told {
            Stuck::Counterexample(at) => vec![at.clone()],
            Stuck::Failed { region, .. } if !region.is_empty() => {
                vec![region.iter().map(|(a, b)| if b.is_finite() { (a + b) / 2.0 } else { *a }).collect()]
            }
            _ => Vec::new(),
        };
        if percent > 50 {
            break;
        }
        let Some(point) = doubted(Zeal::Thorough, &hints, if bare { 40 } else { 20 }, search) else {
            continue;
        };
        if bare {
            return Outcome::Fails(witness(task, s, "fails", &point, None));
        }
        let share = part(search, 60);
        let reading = search.within(share, |search| interpret(&theory(task), s, &[], search));
        return match reading {
            Some(reading) => Outcome::Fails(reading_witness(task, s, "fails", &reading, None)),
            None => Outcome::Undecided(doubt(&plain, &applications, &point)),
        };
    }
    Outcome::Undecided(undecided(&plain, &applications, told, search))
}

fn theory<'a>(task: &Task<'a>) -> Theory<'a> {
    Theory { signatures: task.signatures, facts: task.facts, uses: task.uses }
}

/// The certificate of a point.
fn witness(task: &Task, s: &Sequent, verdict: &str, point: &[Term], undefined: Option<&Relation>) -> Witness {
    let pairs: Vec<(Name, Term)> =
        s.variables.iter().map(|d| d.name.clone()).zip(point.iter().cloned()).collect();
    let mut text = format!("certificate 1 for {} {verdict} at ", task.obligation.id);
    let list: Vec<String> = pairs.iter().map(|(n, t)| format!("{n} = {t}")).collect();
    text.push_str(if list.is_empty() { "nothing" } else { "" });
    text.push_str(&list.join(", "));
    if let Some(r) = undefined {
        text.push_str(&format!(" undefined [{r}]"));
    }
    text.push_str(&format!(" bits {WITNESS_BITS};"));
    Witness { certificate: text, point: pairs, meanings: Vec::new(), undefined: undefined.cloned() }
}

/// The certificate of a point with meanings for the quantities.
fn reading_witness(
    task: &Task,
    s: &Sequent,
    verdict: &str,
    reading: &Reading,
    undefined: Option<&Relation>,
) -> Witness {
    let mut found = witness(task, s, verdict, &reading.point, undefined);
    let mut text = String::new();
    for m in &reading.meanings {
        text.push_str(&format!(" with {}({}) = {}", m.name, m.arguments.join(", "), m.value));
        m.steps.iter().for_each(|step| text.push_str(&format!(" {step}")));
    }
    for (name, steps) in &reading.facts {
        text.push_str(&format!(" fact {name}"));
        steps.iter().for_each(|step| text.push_str(&format!(" {step}")));
    }
    // Behind the point, before what is undefined and the precision.
    let place = undefined
        .and_then(|r| found.certificate.rfind(&format!(" undefined [{r}]")))
        .or_else(|| found.certificate.rfind(" bits "))
        .unwrap_or(found.certificate.len());
    found.certificate.insert_str(place, &text);
    found.meanings =
        reading.meanings.iter().map(|m| (m.name.clone(), m.arguments.clone(), m.value.clone())).collect();
    found
}

/// The sequent with a variable for every application of a quantity, and which
/// variable stands for which.
fn everything_abstracted(s: &Sequent, signatures: &[Signature]) -> (Sequent, Vec<(Name, Term)>) {
    let mut s = s.clone();
    let mut applications = Vec::new();
    for round in 0.. {
        let Some(application) = innermost_application(&s) else { break };
        let Node::Quantity(name, _) = application.node() else { break };
        let Some(signature) = signatures.iter().find(|q| q.name == *name) else { break };
        if round > 100 {
            break;
        }
        let fresh = unused_name(&s, name);
        let declaration = Declaration { name: fresh.clone(), domain: signature.range.clone() };
        s = abstracted(&s, &application, &declaration);
        applications.push((fresh, application));
    }
    (s, applications)
}

pub(super) fn unused_name(s: &Sequent, stem: &str) -> Name {
    let used = |n: &str| {
        let in_relation = |r: &Relation| r.left.mentions(n) || r.right.mentions(n);
        s.declaration(n).is_some()
            || s.hypotheses.iter().any(in_relation)
            || s.relation().is_some_and(in_relation)
    };
    let mut fresh = stem.to_string();
    while used(&fresh) {
        fresh.push('\'');
    }
    fresh.as_str().into()
}

/// All conditions proved, or one seen to be violated.
fn decide_defined(task: &Task, search: &mut Search) -> Outcome {
    let share = part(search, 40);
    let told = match search.within(share, |search| prove_defined(task, search)) {
        Ok(proof) => return holds(task, &proof),
        Err(stuck) => stuck,
    };
    for needed in &task.obligation.needed {
        let Some((context, alternatives)) = context_of(task, needed) else { continue };
        let Condition::OneOf { also, .. } = &needed.condition else { continue };
        let violated = |point: &[Term]| {
            let put = placed(&context, point);
            let false_here = |r: &Relation| truth(&r.under(&put), WITNESS_BITS) == Some(false);
            is_inside(&context, point, WITNESS_BITS)
                && alternatives.iter().chain(also).all(|all| all.iter().any(false_here))
        };
        let bare = innermost_application(&context).is_none();
        let Some(named) = alternatives.iter().flatten().next() else { continue };
        for guide in alternatives.iter().flatten() {
            let s = context.with_goal(guide.clone());
            let share = part(search, 15);
            let found = search.within(share, |search| {
                if bare {
                    let at = refute_by(&s, Zeal::Quick, &[], &violated, search);
                    let at = at.or_else(|| refute_by(&s, Zeal::Thorough, &[], &violated, search))?;
                    return Some(witness(task, &context, "fails", &at, Some(named)));
                }
                let all: Vec<Vec<Relation>> = alternatives.iter().chain(also).cloned().collect();
                let reading = interpret(&theory(task), &s, &all, search)?;
                Some(reading_witness(task, &context, "fails", &reading, Some(named)))
            });
            if let Some(witness) = found {
                return Outcome::Fails(witness);
            }
        }
    }
    if let Ok(proof) = prove_defined(task, search) {
        return holds(task, &proof);
    }
    Outcome::Undecided(undecided(&task.obligation.sequent, &[], told, search))
}

/// Why nothing was decided, from the diary, and what might help.
fn undecided(sequent: &Sequent, applications: &[(Name, Term)], stuck: Stuck, search: &Search) -> Undecided {
    let region: Vec<(Name, (f64, f64))> = match &stuck {
        Stuck::Failed { region, .. } => {
            sequent.variables.iter().map(|d| d.name.clone()).zip(region.iter().copied()).collect()
        }
        _ => Vec::new(),
    };
    let reason = match &stuck {
        Stuck::Failed { reason, .. } => reason.clone(),
        other => other.remark(),
    };
    // The last word of each method on the obligation itself.
    let outermost = search.diary.entries().iter().map(|e| e.depth).min();
    let mut tried: Vec<(&str, &str)> = Vec::new();
    for e in search.diary.entries().iter().filter(|e| Some(e.depth) == outermost) {
        let remark = e.remark.split(" on [").next().unwrap_or_default();
        tried.retain(|(method, _)| *method != e.method);
        tried.push((e.method, remark));
    }
    let tried: Vec<String> = tried.iter().map(|(method, why)| format!("{method} ({why})")).collect();
    let reason = if tried.is_empty() { reason } else { format!("{reason}; tried: {}", tried.join(", ")) };
    let hint = unbounded(sequent, applications).or_else(|| match &stuck {
        Stuck::Exhausted => Some("more effort, or a case distinction".to_string()),
        _ => place(&region).map(|place| format!("a case distinction at {place}, or a sharper fact there")),
    });
    let region = region.into_iter().map(|(name, (lo, hi))| (name, lo.to_string(), hi.to_string())).collect();
    Undecided { reason, region, hint }
}

/// The facts in use allow a point where the relation is false, but no meaning of
/// the quantities for all their arguments was found.
fn doubt(sequent: &Sequent, applications: &[(Name, Term)], point: &[Term]) -> Undecided {
    let values: Vec<String> = (sequent.variables.iter().zip(point))
        .map(|(d, value)| {
            let application = applications.iter().find(|(name, _)| *name == d.name);
            let what = application.map_or_else(|| d.name.to_string(), |(_, t)| for_people(t));
            format!("{what} = {}", for_people(value))
        })
        .collect();
    Undecided {
        reason: "does not follow by the methods tried".to_string(),
        region: Vec::new(),
        hint: Some(format!(
            "a further fact: those in use allow {}, where the relation is false",
            values.join(", ")
        )),
    }
}

/// Says which application of a quantity no fact in use speaks of, if there is one.
fn unbounded(sequent: &Sequent, applications: &[(Name, Term)]) -> Option<String> {
    let silent = |name: &Name| {
        let in_relation = |r: &Relation| r.left.mentions(name) || r.right.mentions(name);
        sequent.relation().is_some_and(in_relation) && !sequent.hypotheses.iter().any(in_relation)
    };
    let (_, application) = applications.iter().find(|(name, _)| silent(name))?;
    Some(format!("no fact in use bounds {}", for_people(application)))
}

/// A small region as a point of simple coordinates, for people.
fn place(region: &[(Name, (f64, f64))]) -> Option<String> {
    let coordinates: Option<Vec<String>> = region
        .iter()
        .map(|(name, (lo, hi))| {
            let (a, b) = (BigRational::from_float(*lo)?, BigRational::from_float(*hi)?);
            let small = hi - lo <= 1e-6 * hi.abs().max(1.0);
            (small && a <= b).then(|| format!("{name} = {}", simplest(&a, &b)))
        })
        .collect();
    coordinates.filter(|all| !all.is_empty()).map(|all| all.join(", "))
}

/// Proves the goal in each of the cases its author distinguishes.
fn prove_by_cases(task: &Task, search: &mut Search) -> Result<Proof, Stuck> {
    let s = &task.obligation.sequent;
    let mut proof = Proof::new("cases");
    let mut steps = Vec::new();
    for case in task.cases {
        let [condition] = case.condition.as_slice() else {
            return Err(Stuck::NotApplicable("a case of several conditions"));
        };
        let mut inner = s.clone();
        inner.hypotheses.push(condition.clone());
        let share = search.left() / 2;
        steps.push(search.within(share, |search| prove_abstracted(&inner, task.signatures, search))?);
        proof = proof.with(condition.clone());
    }
    let proof = proof.with_all(steps);
    // Whether they leave nothing out is seen from their shape, or from signs.
    let shown = proof.clone().with(Proof::new("sign"));
    search.accepted(s, proof).or_else(|_| search.accepted(s, shown))
}

/// Proves a sequent after replacing every application of a quantity by a variable.
fn prove_abstracted(
    sequent: &Sequent,
    signatures: &[Signature],
    search: &mut Search,
) -> Result<Proof, Stuck> {
    let Some(application) = innermost_application(sequent) else { return search.prove(sequent) };
    if let Some((word, new)) = rewritten(sequent) {
        return Ok(Proof::new("substitute").word(&word).with(prove_abstracted(&new, signatures, search)?));
    }
    let Node::Quantity(name, _) = application.node() else { return search.prove(sequent) };
    let Some(signature) = signatures.iter().find(|s| s.name == *name) else {
        return Err(Stuck::because(format!("the quantity {name} is not declared")));
    };
    let fresh = unused_name(sequent, name);
    let declaration = Declaration { name: fresh.clone(), domain: signature.range.clone() };
    let new = abstracted(sequent, &application, &declaration);
    let rest = prove_abstracted(&new, signatures, search)?;
    Ok(Proof::new("abstract").word(&fresh).with(application).with(rest))
}

/// The sequent with a hypothesis `a = b` put to use, if `a` occurs in the argument of a
/// quantity: equal arguments make one application.
fn rewritten(sequent: &Sequent) -> Option<(String, Sequent)> {
    let used = |left: &Term, own: &Relation| {
        let mut found = false;
        for r in sequent.hypotheses.iter().filter(|r| *r != own).chain(sequent.relation()) {
            for side in [&r.left, &r.right] {
                side.walk(&mut |t| {
                    if let Node::Quantity(_, args) = t.node() {
                        let closed = t.free_variables().iter().all(|v| sequent.declaration(v).is_some());
                        found |= closed && args.iter().any(|a| a.replace(left, &Term::integer(0)) != *a);
                    }
                    !found
                });
            }
        }
        found
    };
    let fits = |h: &Relation| {
        h.rel == Rel::Equal
            && h.left.as_number().is_none()
            && h.right.replace(&h.left, &h.right) == h.right
            && used(&h.left, h)
    };
    let (place, h) = sequent.hypotheses.iter().enumerate().find(|(_, h)| fits(h))?;
    let put = |r: &Relation| if r == h { r.clone() } else { r.map(|t| t.replace(&h.left, &h.right)) };
    let hypotheses = sequent.hypotheses.iter().map(put).collect();
    let goal = match &sequent.goal {
        Conclusion::Relation(r) => Conclusion::Relation(put(r)),
        Conclusion::Absurd => Conclusion::Absurd,
    };
    Some((format!("h{}", place + 1), Sequent { variables: sequent.variables.clone(), hypotheses, goal }))
}

/// An application of a quantity without applications in its arguments, the first in
/// the order of the sequent. Applications under the index of a series stay.
pub(super) fn innermost_application(sequent: &Sequent) -> Option<Term> {
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
pub(super) fn abstracted(sequent: &Sequent, application: &Term, declaration: &Declaration) -> Sequent {
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

/// Where a condition is needed, and its alternatives.
fn context_of<'a>(task: &Task<'a>, needed: &'a Needed) -> Option<(Sequent, &'a Vec<Vec<Relation>>)> {
    let Condition::OneOf { indices, alternatives, .. } = &needed.condition else { return None };
    let whole = &task.obligation.sequent;
    let mut variables = whole.variables[..needed.variables.min(whole.variables.len())].to_vec();
    variables.extend(indices.iter().cloned());
    let hypotheses = whole.hypotheses[..needed.hypotheses.min(whole.hypotheses.len())].to_vec();
    Some((Sequent { variables, hypotheses, goal: Conclusion::Absurd }, alternatives))
}

fn prove_needed(task: &Task, needed: &Needed, search: &mut Search) -> Result<Vec<(Relation, Proof)>, Stuck> {
    let (context, alternatives) = match &needed.condition {
        Condition::NotOfSort { term, sort } => {
            return Err(Stuck::because(format!("{term} is not {} by its shape", sort.name())));
        }
        Condition::Unshowable(what) => {
            return Err(Stuck::because(format!("cannot show definedness: {what}")));
        }
        Condition::OneOf { .. } => context_of(task, needed).ok_or_else(|| Stuck::because("no condition"))?,
    };
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

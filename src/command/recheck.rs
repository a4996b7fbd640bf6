//! `recheck`: the kernel alone over a stored audit.
//!
//! The audit carries the plain form of every dossier and all certificates. The
//! kernel derives from the plain form what has to be shown, checks each
//! certificate against it, and composes the results. Nothing that the audit
//! says is taken over: claims, verdicts and what is established are compared.

use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;

use rayon::prelude::*;

use crate::kernel::audit::{self, Docket, Standings};
use crate::report::{
    Audit, Claim, Composition, Dossier, Obligation, RECHECK_SCHEMA, Recheck, Tool, Verdict, fingerprint,
    from_json,
};

use super::arguments::{self, Rendering};
use super::exit::{Done, Exit, Failure, verdict_code};
use super::{files, guard, output};

/// Longest audit that is read, in bytes.
const MAX_AUDIT: usize = 1 << 30;

/// Re-checks an audit and writes what the kernel says. The code is 5 if the
/// kernel does not confirm it, else that of the audit's verdicts.
pub fn run(request: &arguments::Recheck) -> Done {
    let audit = read(&request.audit)?;
    let outcome = recheck(&audit)?;
    let text = match request.result.format {
        Rendering::Json => outcome.to_json(),
        Rendering::Terminal => outcome.to_terminal(output::style(request.result.output.as_deref())),
    };
    output::deliver(&text, request.result.output.as_deref())?;
    Ok(if outcome.accepted { verdict_code(&audit) } else { Exit::Rejected })
}

fn read(path: &Path) -> Result<Audit, Failure> {
    let bytes = if path == Path::new("-") {
        files::read_standard_input(MAX_AUDIT)?
    } else {
        files::read_limited(path, MAX_AUDIT).map_err(|error| files::unreadable(path, &error))?
    };
    if bytes.len() > MAX_AUDIT {
        return Err(Failure::input(format!("the audit is longer than {MAX_AUDIT} bytes")));
    }
    let text =
        String::from_utf8(bytes).map_err(|_| Failure::input("this is not an audit: it is not UTF-8 text"))?;
    from_json(&text).map_err(|error| Failure::input(error.to_string()))
}

/// Has the kernel check every dossier of an audit.
///
/// # Errors
/// If no threads can be had.
fn recheck(audit: &Audit) -> Result<Recheck, Failure> {
    let mut outcome = Recheck {
        schema: RECHECK_SCHEMA.to_string(),
        tool: Tool::this(),
        accepted: false,
        rejected: Vec::new(),
        obligations: Vec::new(),
        results: Vec::new(),
        summary: audit.summary,
    };
    if audit.counted() != audit.summary {
        outcome.rejected.push("the summary does not count the verdicts".to_string());
    }
    let pool = rayon::ThreadPoolBuilder::new()
        .stack_size(guard::STACK)
        .build()
        .map_err(|error| Failure::environment(format!("no threads could be started: {error}")))?;
    let mut known = BTreeSet::new();
    for dossier in &audit.dossiers {
        if !known.insert(&dossier.file) {
            outcome.rejected.push(format!("{} stands twice in the audit", dossier.file));
            continue;
        }
        match Docket::open(&dossier.plain) {
            Ok(docket) => pool.install(|| one(audit, dossier, &docket, &mut outcome)),
            Err(refusal) => outcome.rejected.push(format!("the plain form of {}: {refusal}", dossier.file)),
        }
    }
    let obligations = audit.obligations.iter().map(|one| (&one.id, &one.dossier));
    for (id, file) in obligations.chain(audit.items.iter().map(|one| (&one.id, &one.dossier))) {
        if !known.contains(file) {
            outcome.rejected.push(format!("{id} belongs to no dossier of the audit"));
        }
    }
    outcome.accepted = outcome.rejected.is_empty();
    Ok(outcome)
}

/// Checks one dossier of the audit.
fn one(audit: &Audit, dossier: &Dossier, docket: &Docket, outcome: &mut Recheck) {
    if docket.name() != dossier.stem {
        outcome.rejected.push(format!("the plain form of {} is that of `{}`", dossier.file, docket.name()));
    }
    let mut told: BTreeMap<&str, &Obligation> = BTreeMap::new();
    for obligation in audit.obligations.iter().filter(|one| one.dossier == dossier.file) {
        if told.insert(&obligation.id, obligation).is_some() {
            outcome.rejected.push(format!("{} stands twice in the audit", obligation.id));
        }
    }
    let prefix = format!("{}.", dossier.stem);
    let listed = docket.obligations();
    // What an audit of a part leaves out counts as undecided.
    let checked: Vec<(audit::Verdict, Vec<String>)> = (0..listed.len())
        .into_par_iter()
        .map(|position| match told.get(format!("{prefix}{}", listed[position].id).as_str()) {
            Some(obligation) => certified(docket, position, obligation),
            None => (audit::Verdict::Undecided, Vec::new()),
        })
        .collect();
    let mut verdicts = Vec::with_capacity(listed.len());
    for (obligation, (verdict, rejected)) in listed.iter().zip(checked) {
        let id = format!("{prefix}{}", obligation.id);
        if told.remove(id.as_str()).is_some() {
            outcome.obligations.push(Claim { id, verdict: in_words(&verdict), claim: obligation.claim() });
        }
        outcome.rejected.extend(rejected);
        verdicts.push(verdict);
    }
    // What is left has no counterpart: only a refusal by the kernel explains it.
    for (id, obligation) in told {
        let refused = id.strip_prefix(&prefix).is_some_and(|name| docket.refused().contains_key(name));
        if !refused
            || matches!(obligation.verdict, Verdict::Holds | Verdict::Vacuous)
            || obligation.certificate.is_some()
        {
            outcome.rejected.push(format!("{id} is nothing that had to be shown"));
        }
    }
    let (facts, goals) = docket.conclude(&verdicts);
    compare(audit, dossier, &facts, &goals, outcome);
}

/// The kernel's verdict on one obligation, and where the audit says otherwise.
fn certified(docket: &Docket, position: usize, told: &Obligation) -> (audit::Verdict, Vec<String>) {
    let mut rejected = Vec::new();
    let id = &told.id;
    if told.claim != docket.obligations()[position].claim() {
        rejected.push(format!("{id}: the claim is not what the plain form obliges to show"));
    }
    if told.certificate.as_deref().map(fingerprint) != told.fingerprint {
        rejected.push(format!("{id}: the certificate is not the one that was written"));
    }
    let inhabitant = told.inhabitant.as_ref();
    if inhabitant.is_some_and(|found| fingerprint(&found.certificate) != found.fingerprint) {
        rejected.push(format!("{id}: the certificate of the inhabitant is not the one that was written"));
    }
    let texts: Vec<&str> = told
        .certificate
        .as_deref()
        .into_iter()
        .chain(inhabitant.map(|found| found.certificate.as_str()))
        .collect();
    let decision = docket.decide(position, &texts);
    rejected.extend(decision.rejected.iter().map(|refusal| format!("{id}: {refusal}")));
    if in_words(&decision.verdict) != told.verdict {
        let (kernel, audit) = (in_words(&decision.verdict).word(), told.verdict.word());
        rejected.push(format!("{id}: the audit says `{audit}`, the certificate gives `{kernel}`"));
    }
    if inhabitant.is_some() && decision.inhabitant.is_none() {
        rejected.push(format!("{id}: the inhabitant is not certified"));
    }
    (decision.verdict, rejected)
}

/// Compares what is established with what the audit says.
fn compare(
    audit: &Audit,
    dossier: &Dossier,
    facts: &[Standings],
    goals: &[Standings],
    outcome: &mut Recheck,
) {
    let mut composed: BTreeMap<String, &Standings> = BTreeMap::new();
    for standing in goals.iter().chain(facts) {
        composed.insert(format!("{}.{}", dossier.stem, standing.name), standing);
    }
    let obligations = audit
        .obligations
        .iter()
        .filter(|one| one.kind == "link")
        .map(|one| (&one.id, &one.dossier, one.established));
    let items = audit.items.iter().map(|one| (&one.id, &one.dossier, one.established));
    for (id, file, established) in obligations.chain(items) {
        if *file != dossier.file || !established {
            continue;
        }
        if !composed.get(id).is_some_and(|standing| standing.established) {
            outcome.rejected.push(format!("{id}: the audit says it is established, the kernel does not"));
        }
    }
    for (id, standing) in composed {
        let basis = &standing.basis;
        let names = basis.assumptions.iter().chain(&basis.cited).chain(&basis.argued).chain(&basis.proved);
        outcome.results.push(Composition {
            id,
            established: standing.established,
            rests_on: names.map(ToString::to_string).collect(),
            unsettled: standing.missing.clone(),
        });
    }
}

fn in_words(verdict: &audit::Verdict) -> Verdict {
    match verdict {
        audit::Verdict::Holds => Verdict::Holds,
        audit::Verdict::Fails(_) => Verdict::Fails,
        audit::Verdict::Vacuous => Verdict::Vacuous,
        audit::Verdict::Undecided => Verdict::Undecided,
    }
}

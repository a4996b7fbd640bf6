//! `check`: every step of dossiers, for all parameter values.
//!
//! Read the files, list what has to be shown, search in parallel, let the
//! kernel decide, report. Threads change the speed only: each obligation has its
//! own budget of counted work, and results are collected in order.

mod build;
mod case;
mod needless;
mod values;
mod written;

use std::collections::{BTreeMap, BTreeSet};

use rayon::prelude::*;

use crate::diagnostic::render_all;
use crate::report::{self, Audit, SCHEMA, Tool};
use crate::search::Effort;

use super::arguments::{Check, Destination, Rendering};
use super::dossier::load;
use super::exit::{Done, Exit, Failure, verdict_code};
use super::{files, guard, output, progress};
use case::{Case, Found, belongs};

/// Checks the dossiers and writes the report. A dossier that cannot be read
/// leaves the others to be checked; the code is the worst of all.
pub fn run(request: &Check) -> Done {
    let mut exit = Exit::Success;
    let mut cases = Vec::new();
    for dossier in files::gather(&request.paths)? {
        match load(&dossier).and_then(Case::open) {
            Ok(case) => cases.push(case),
            Err(failure) => {
                output::tell_failure(&failure);
                exit = exit.worse(failure.exit);
            }
        }
    }
    let effort = request.effort.map_or_else(Effort::default, Effort);
    let asked: Vec<String> = request.only.iter().chain(&request.explain).cloned().collect();
    known(&asked, request.at.as_deref(), &cases)?;
    let only: Vec<BTreeSet<String>> =
        cases.iter().map(|case| case.with_basis(names_for(case, &asked))).collect();
    let jobs: Vec<(usize, usize)> = cases
        .iter()
        .zip(&only)
        .enumerate()
        .filter(|(_, (_, only))| asked.is_empty() || !only.is_empty())
        .flat_map(|(number, (case, only))| {
            case.positions(only).into_iter().map(move |position| (number, position))
        })
        .collect();
    let threads = threads(request.jobs)?;
    let found = threads.install(|| decide_all(&cases, &jobs, effort));
    let broken = found.iter().any(|one| one.broken);
    let mut per_case: Vec<BTreeMap<usize, Found>> = cases.iter().map(|_| BTreeMap::new()).collect();
    for ((number, position), one) in jobs.into_iter().zip(found) {
        per_case[number].insert(position, one);
    }
    let mut audit = empty_audit(effort);
    for ((case, found), only) in cases.iter().zip(&per_case).zip(&only) {
        if !asked.is_empty() && only.is_empty() {
            continue;
        }
        let needless = threads.install(|| needless::warnings(case, found));
        output::tell(&render_all(&needless, &case.loaded.sources));
        build::add(&mut audit, case, found, only);
        explain(&mut audit, case, &names_for(case, &request.explain));
        if let Some(numbers) = &request.at {
            values::add(&mut audit, case, numbers, only);
        }
    }
    audit.summary = audit.counted();
    if !cases.is_empty() {
        deliver(&audit, &request.result)?;
    }
    let exit = if broken { exit.worse(Exit::Internal) } else { exit };
    Ok(exit.worse(verdict_code(&audit)))
}

fn deliver(audit: &Audit, result: &Destination) -> Result<(), Failure> {
    let text = match result.format {
        Rendering::Json => report::to_json(audit),
        Rendering::Terminal => report::to_terminal(audit, output::style(result.output.as_deref())),
    };
    output::deliver(&text, result.output.as_deref())
}

/// Puts the arguments of the links named into the audit.
fn explain(audit: &mut Audit, case: &Case, names: &BTreeSet<String>) {
    let prefix = format!("{}.", case.loaded.theory.stem);
    for one in audit.obligations.iter_mut().filter(|one| one.dossier == case.loaded.name) {
        let id = one.id.strip_prefix(&prefix).unwrap_or(&one.id);
        if let (true, Some(certificate)) = (names.iter().any(|name| belongs(id, name)), &one.certificate) {
            one.argument = report::argument(certificate);
        }
    }
}

fn empty_audit(effort: Effort) -> Audit {
    Audit {
        schema: SCHEMA.to_string(),
        tool: Tool::this(),
        effort: effort.0,
        dossiers: Vec::new(),
        items: Vec::new(),
        obligations: Vec::new(),
        values: Vec::new(),
        summary: report::Summary::default(),
    }
}

fn threads(count: Option<u16>) -> Result<rayon::ThreadPool, Failure> {
    rayon::ThreadPoolBuilder::new()
        .num_threads(count.map_or(0, usize::from))
        .stack_size(guard::STACK)
        .build()
        .map_err(|error| Failure::environment(format!("no threads could be started: {error}")))
}

fn decide_all(cases: &[Case], jobs: &[(usize, usize)], effort: Effort) -> Vec<Found> {
    let progress = progress::bar(jobs.len());
    let found = jobs
        .par_iter()
        .map(|(number, position)| {
            let found = cases[*number].decide(*position, effort);
            progress.inc(1);
            found
        })
        .collect();
    progress.finish_and_clear();
    found
}

/// The names of `--only` that mean something in this dossier, without its stem.
fn names_for(case: &Case, only: &[String]) -> BTreeSet<String> {
    let theory = &case.loaded.theory;
    let prefix = format!("{}.", theory.stem);
    only.iter()
        .flat_map(|name| [Some(name.as_str()), name.strip_prefix(&prefix)])
        .flatten()
        .filter(|name| {
            let ids = case.docket.obligations().iter().map(|one| one.id.as_str());
            let items = theory.items.iter().map(|item| &*item.name);
            let goals = theory.goals.iter().map(|goal| &*goal.name);
            ids.chain(items).chain(goals).any(|id| belongs(id, name))
        })
        .map(ToString::to_string)
        .collect()
}

/// Checks that every name on the command line means something somewhere.
fn known(asked: &[String], at: Option<&str>, cases: &[Case]) -> Result<(), Failure> {
    if cases.is_empty() {
        return Ok(());
    }
    for name in asked {
        if cases.iter().all(|case| names_for(case, std::slice::from_ref(name)).is_empty()) {
            let items =
                cases.iter().flat_map(|case| &case.loaded.theory.items).map(|item| item.name.to_string());
            let items: Vec<String> = items.take(20).collect();
            return Err(Failure::input(format!(
                "`{}` is no item here; there are: {}",
                crate::diagnostic::escape(name),
                items.join(", ")
            )));
        }
    }
    if let Some(name) = at {
        let mut sets = cases.iter().flat_map(|case| &case.loaded.theory.numbers);
        if !sets.any(|set| *set.name == *name) {
            return Err(Failure::input(format!(
                "there is no set of numbers `{}`",
                crate::diagnostic::escape(name)
            )));
        }
    }
    Ok(())
}

//! One dossier with what has to be shown for it, and the search for each part.
//!
//! The search proposes certificates, the kernel disposes: a verdict is what the
//! kernel says about the texts, and nothing else.

use std::collections::{BTreeMap, BTreeSet};
use std::panic::{AssertUnwindSafe, catch_unwind};

use crate::kernel::audit::{self, Docket};
use crate::language;
use crate::search::{self, Effort, Outcome, Referee, Task};
use crate::statement::{Goal, Obligation, Signature, Standing, Theory, obligations, plain};

use super::super::dossier::Loaded;
use super::super::exit::Failure;
use super::written::{Written, relations};

/// Certificates that the kernel refused before the search gives up.
const MOST_REFUSALS: u32 = 3;

/// A dossier to be decided.
pub struct Case {
    /// The dossier.
    pub loaded: Loaded,
    /// What its author wrote, by the names of its items.
    pub written: BTreeMap<String, Vec<Written>>,
    /// Its whole logic as the kernel reads it.
    pub plain: String,
    /// The kernel's side of it.
    pub docket: Docket,
    /// What the search needs to know, by the kernel's name.
    obligations: BTreeMap<String, Obligation>,
}

/// What was found about one obligation.
pub struct Found {
    /// What the kernel says.
    pub decision: audit::Decision,
    /// The certificate of the verdict, if there is a verdict.
    pub certificate: Option<String>,
    /// What the search says beside the certificate.
    pub search: Option<search::Decision>,
    /// Whether the search broke down, which is an internal error.
    pub broken: bool,
}

impl Case {
    /// Writes the plain form and lets the kernel read it.
    ///
    /// # Errors
    /// If the kernel refuses the plain form. A dossier that was read without
    /// errors should never come to this.
    pub fn open(loaded: Loaded) -> Result<Case, Failure> {
        let plain = plain(&loaded.theory);
        let docket = Docket::open(&plain).map_err(|refusal| {
            Failure::internal(format!("{}: the kernel cannot read it: {refusal}", loaded.name))
        })?;
        let obligations = obligations(&loaded.theory).into_iter().map(|one| (one.id.clone(), one)).collect();
        let source = loaded.sources.iter().find(|source| source.name() == loaded.name);
        let written = source.map(|source| relations(&language::parse(source).value)).unwrap_or_default();
        Ok(Case { loaded, written, plain, docket, obligations })
    }

    /// The search's view of the obligation that the kernel lists at `position`.
    pub fn obligation(&self, position: usize) -> Option<&Obligation> {
        self.obligations.get(&self.docket.obligations()[position].id)
    }

    /// The names given and those of everything that rests under them.
    pub fn with_basis(&self, only: BTreeSet<String>) -> BTreeSet<String> {
        under(&self.loaded.theory, only)
    }

    /// The positions of the obligations that belong to `names`; all if there are none.
    pub fn positions(&self, names: &BTreeSet<String>) -> Vec<usize> {
        let listed = self.docket.obligations().iter().enumerate();
        listed.filter(|(_, one)| wanted(&one.id, names)).map(|(position, _)| position).collect()
    }

    /// Searches for a certificate of one obligation and has the kernel check it.
    pub fn decide(&self, position: usize, effort: Effort) -> Found {
        let nothing = Found {
            decision: self.docket.decide(position, &[]),
            certificate: None,
            search: None,
            broken: false,
        };
        let Some(obligation) = self.obligation(position) else { return nothing };
        let theory = &self.loaded.theory;
        let goal = obligation.goal.as_ref().and_then(|name| theory.goal(name));
        let signatures = self.signatures(obligation, goal);
        let uses = goal.map_or(&[][..], |goal| &goal.uses[..obligation.side_of.unwrap_or(goal.uses.len())]);
        let examine = |sequent: &str, step: &str| {
            self.docket.examine(position, sequent, step).map_err(|refusal| refusal.to_string())
        };
        let mut task = Task {
            obligation,
            signatures: &signatures,
            facts: &theory.facts,
            uses,
            cases: goal.map_or(&[][..], |goal| &goal.cases),
            caution: 0,
            referee: Referee(&examine),
        };
        // A breakdown in one search must not take the other verdicts with it; it is
        // told by the hook for panics and ends in the exit code.
        let work = catch_unwind(AssertUnwindSafe(|| {
            loop {
                let found = self.consult(position, &task, effort);
                let refused = found.certificate.is_none() && !found.decision.rejected.is_empty();
                task.caution += 1;
                if !refused || task.caution > MOST_REFUSALS {
                    return found;
                }
            }
        }));
        work.unwrap_or(Found { broken: true, ..nothing })
    }

    fn consult(&self, position: usize, task: &Task, effort: Effort) -> Found {
        let search = search::decide(task, effort);
        let proposed = match &search.outcome {
            Outcome::Holds { certificate, .. } | Outcome::Vacuous { certificate } => {
                Some(certificate.clone())
            }
            Outcome::Fails(witness) => Some(witness.certificate.clone()),
            Outcome::Undecided(_) => None,
        };
        let inhabitant = search.inhabitant.as_ref().map(|witness| witness.certificate.as_str());
        let texts: Vec<&str> = proposed.as_deref().into_iter().chain(inhabitant).collect();
        let decision = self.docket.decide(position, &texts);
        let decided = decision.verdict != audit::Verdict::Undecided;
        Found { decision, certificate: proposed.filter(|_| decided), search: Some(search), broken: false }
    }

    fn signatures(&self, obligation: &Obligation, goal: Option<&Goal>) -> Vec<Signature> {
        let theory = &self.loaded.theory;
        let fact = theory.fact(&obligation.item);
        let context = goal.map(|goal| &goal.context).or(fact.map(|fact| &fact.context));
        let own = context.map_or(&[][..], |context| &context.schema[..]);
        // A schema's quantities hide those of the dossier.
        let hidden = |name: &str| own.iter().any(|signature| &*signature.name == name);
        let global = theory.quantities.iter().map(|quantity| &quantity.signature);
        own.iter().chain(global.filter(|signature| !hidden(&signature.name))).cloned().collect()
    }
}

/// Whether an obligation belongs to what `name` names: an item, a link, a fact.
pub fn belongs(id: &str, name: &str) -> bool {
    id.strip_prefix(name).is_some_and(|rest| rest.is_empty() || rest.starts_with('.'))
}

/// Whether a name inside a dossier is asked for: all are if no names are given,
/// and the domain's definedness is part of everything.
pub fn wanted(id: &str, names: &BTreeSet<String>) -> bool {
    names.is_empty() || id == "domain.d1" || names.iter().any(|name| belongs(id, name))
}

/// The names given and those of all facts and goals under them.
fn under(theory: &Theory, mut needed: BTreeSet<String>) -> BTreeSet<String> {
    // Facts and goals use earlier ones only, so one walk backwards would do if
    // they stood in one list; they stand in two, hence the repetition.
    loop {
        let before = needed.len();
        for goal in &theory.goals {
            if needed.iter().any(|name| belongs(&goal.name, name)) {
                needed.extend(goal.uses.iter().map(|instance| instance.fact.to_string()));
            }
        }
        for fact in &theory.facts {
            if let (Standing::Proved(proof), true) = (&fact.standing, needed.contains(&*fact.name)) {
                needed.extend(proof.goals().into_iter().map(ToString::to_string));
            }
        }
        if needed.len() == before {
            return needed;
        }
    }
}

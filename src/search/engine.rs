//! The loop: which method is tried when, on what budget, and how the search ends.

use std::collections::BTreeMap;
use std::fmt;

use crate::expression::{Name, Term};
use crate::statement::{Conclusion, Sequent};

use super::budget::{Budget, Effort};
use super::diary::Diary;
use super::method;
use super::proof::Proof;
use super::sample::{approximate, quick};

/// Reductions inside reductions inside reductions: deeper is not tried.
pub const MAX_DEPTH: usize = 8;

/// How a refusal reads that is due to an open step.
const OPEN_REFUSED: &str = "unknown rule: `open`";

/// What is said of a proof that the referee refuses.
const REFUSED: &str = "the kernel refuses the proof found";

/// Proofs of premises with more steps are not shown to the referee by themselves.
const MOST_STEPS_INSIDE: usize = 40;

/// What is heard where there is no referee.
const SILENCE: &str = "nobody to ask";

/// A way of proving sequents.
///
/// A method either proves the sequent by itself, or reduces it and asks
/// [`Search::prove`] for the premises, or says why it does not apply. What it
/// returns must be a step that the kernel accepts for exactly this sequent.
pub trait Method: Sync {
    /// The name in diaries and reports.
    fn name(&self) -> &'static str;

    /// The part of the budget left that one attempt may use, in percent.
    fn share(&self) -> u64 {
        30
    }

    /// Tries to prove the sequent.
    ///
    /// # Errors
    /// [`Stuck`] says why there is no proof.
    fn attempt(&self, sequent: &Sequent, search: &mut Search) -> Result<Proof, Stuck>;
}

/// Why a method or the whole portfolio has no proof.
#[derive(Clone, Debug, PartialEq)]
pub enum Stuck {
    /// The method is not for sequents of this shape; says what is missing.
    NotApplicable(&'static str),
    /// The budget is used up.
    Exhausted,
    /// A point where the sequent is false, as far as the numbers tell: proving
    /// it is pointless. One approximate value a variable, in declaration order.
    Counterexample(Vec<f64>),
    /// Tried and got stuck: the reason and the region, one range a variable in
    /// declaration order (empty if there is no particular region).
    Failed {
        /// In a few words.
        reason: String,
        /// Where.
        region: Vec<(f64, f64)>,
    },
}

impl Stuck {
    /// Stuck without a particular region.
    pub fn because(reason: impl Into<String>) -> Stuck {
        Stuck::Failed { reason: reason.into(), region: Vec::new() }
    }

    /// For the diary.
    #[must_use]
    pub fn remark(&self) -> String {
        match self {
            Stuck::NotApplicable(why) => format!("not applicable: {why}"),
            Stuck::Exhausted => "out of budget".into(),
            Stuck::Counterexample(at) => format!("false at {at:?}"),
            Stuck::Failed { reason, region } if region.is_empty() => reason.clone(),
            Stuck::Failed { reason, region } => format!("{reason} on {region:?}"),
        }
    }
}

impl From<super::budget::Exhausted> for Stuck {
    fn from(_: super::budget::Exhausted) -> Stuck {
        Stuck::Exhausted
    }
}

/// Someone who checks steps while the search goes on: given the texts of a sequent
/// and of a step, the reason for refusing it. In use, the kernel; so the search
/// need not guess which signs and normal forms the kernel will see. What the
/// referee accepts is still checked as a part of the whole certificate.
#[derive(Clone, Copy)]
pub struct Referee<'a>(pub &'a dyn Fn(&str, &str) -> Result<(), String>);

impl Referee<'_> {
    /// One who accepts nothing; methods that ask do without.
    pub const NOBODY: Referee<'static> = Referee(&|_, _| Err(SILENCE.into()));
}

impl fmt::Debug for Referee<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("Referee")
    }
}

/// What the referee says.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Answer {
    /// The step proves the sequent.
    Accepted,
    /// All is well up to the first [`Proof::open`] step.
    Open,
    /// Something is wrong with the step.
    Refused,
    /// There is no referee.
    Silent,
}

/// The state of the search for one obligation.
pub struct Search<'a> {
    referee: Referee<'a>,
    budget: Budget,
    /// What was tried.
    pub diary: Diary,
    depth: usize,
    /// How wary to be of the kernel's slightly different roundings: 0 at first,
    /// one more after each rejection of a certificate.
    pub caution: u32,
    // Sequents in progress, so that no reduction chases its own tail, and those
    // that failed with the budget they had.
    open: Vec<String>,
    failed: BTreeMap<String, (u64, Stuck)>,
    fresh: u32,
}

impl<'a> Search<'a> {
    /// A search with this much effort.
    #[must_use]
    pub fn new(effort: Effort, caution: u32) -> Search<'a> {
        Search {
            referee: Referee::NOBODY,
            budget: Budget::new(effort),
            diary: Diary::default(),
            depth: 0,
            caution,
            open: Vec::new(),
            failed: BTreeMap::new(),
            fresh: 0,
        }
    }

    /// The same search with someone to ask.
    #[must_use]
    pub fn asking(self, referee: Referee<'a>) -> Search<'a> {
        Search { referee, ..self }
    }

    /// Whom to ask; what it costs is the asker's care.
    #[must_use]
    pub fn referee(&self) -> Referee<'a> {
        self.referee
    }

    /// Asks the referee about a step.
    ///
    /// # Errors
    /// When the budget is used up.
    pub fn examine(&mut self, sequent: &Sequent, proof: &Proof) -> Result<Answer, Stuck> {
        let (sequent, step) = (sequent.to_string(), proof.to_string());
        self.spend(10 + (sequent.len() + step.len()) as u64 / 5)?;
        Ok(match (self.referee.0)(&sequent, &step) {
            Ok(()) => Answer::Accepted,
            Err(why) if why.contains(OPEN_REFUSED) => Answer::Open,
            Err(why) if why == SILENCE => Answer::Silent,
            Err(_) => Answer::Refused,
        })
    }

    /// The step, if the referee accepts it.
    ///
    /// # Errors
    /// [`Stuck`] if not, or when the budget is used up.
    pub fn accepted(&mut self, sequent: &Sequent, proof: Proof) -> Result<Proof, Stuck> {
        match self.examine(sequent, &proof)? {
            Answer::Accepted => Ok(proof),
            _ => Err(Stuck::because("a step was refused")),
        }
    }

    /// Counts work: one unit is about one evaluation of a small term over a box.
    ///
    /// # Errors
    /// [`Stuck::Exhausted`] when the present scope has no more.
    pub fn spend(&mut self, units: u64) -> Result<(), Stuck> {
        Ok(self.budget.spend(units)?)
    }

    /// Work done so far.
    #[must_use]
    pub fn spent(&self) -> u64 {
        self.budget.spent()
    }

    /// Work left in the present scope.
    #[must_use]
    pub fn left(&self) -> u64 {
        self.budget.left()
    }

    /// How many reductions deep the search is.
    #[must_use]
    pub fn depth(&self) -> usize {
        self.depth
    }

    /// Runs `f` with at most `units` of what is left.
    pub fn within<T>(&mut self, units: u64, f: impl FnOnce(&mut Search<'a>) -> T) -> T {
        let former = self.budget.tighten(units);
        let result = f(self);
        self.budget.restore(former);
        result
    }

    /// A variable name that no sequent of this search has used, from a stem.
    pub fn fresh_variable(&mut self, stem: &str, sequent: &Sequent) -> Name {
        loop {
            self.fresh += 1;
            let name = format!("{stem}{}", self.fresh);
            let used = sequent.declaration(&name).is_some()
                || sequent.hypotheses.iter().any(|h| h.left.mentions(&name) || h.right.mentions(&name));
            if !used {
                return name.into();
            }
        }
    }

    /// Runs the portfolio on a sequent.
    ///
    /// # Errors
    /// The most telling [`Stuck`] of the methods; a counterexample as soon as one is seen.
    pub fn prove(&mut self, sequent: &Sequent) -> Result<Proof, Stuck> {
        self.spend(1)?;
        if self.depth >= MAX_DEPTH {
            return Err(Stuck::because("too many reductions inside each other"));
        }
        let key = sequent.to_string();
        if self.open.contains(&key) {
            return Err(Stuck::because("came back to a sequent in progress"));
        }
        if let Some((budget, stuck)) = self.failed.get(&key)
            && *budget >= self.left()
        {
            return Err(stuck.clone());
        }
        let had = self.left();
        self.open.push(key.clone());
        self.depth += 1;
        let result = self.portfolio(sequent);
        self.depth -= 1;
        self.open.pop();
        // A false premise refutes a reduction, not what was reduced.
        let result = match result {
            Err(Stuck::Counterexample(at)) if self.depth > 0 => {
                Err(Stuck::because(format!("a premise is false at {at:?}")))
            }
            other => other,
        };
        if let Err(stuck) = &result {
            self.failed.insert(key, (had, stuck.clone()));
        }
        result
    }

    /// Runs one method on a sequent, within its share, with a line in the diary. What
    /// the referee refuses is no proof, so that another method may find one; since
    /// its roundings differ from ours, the method is first given a second try that
    /// keeps more distance from them.
    ///
    /// # Errors
    /// What the method says.
    pub fn attempt(&mut self, method: &dyn Method, sequent: &Sequent) -> Result<Proof, Stuck> {
        let former = self.caution;
        let mut result = self.attempt_once(method, sequent);
        if matches!(&result, Err(stuck) if *stuck == Stuck::because(REFUSED)) {
            self.caution += 1;
            result = self.attempt_once(method, sequent);
        }
        self.caution = former;
        match &result {
            Ok(_) => self.diary.write(self.depth, method.name(), "proved"),
            Err(Stuck::NotApplicable(_)) => {}
            Err(stuck) => self.diary.write(self.depth, method.name(), stuck.remark()),
        }
        result
    }

    fn attempt_once(&mut self, method: &dyn Method, sequent: &Sequent) -> Result<Proof, Stuck> {
        let share = (self.left() / 100).max(1).saturating_mul(method.share());
        let proof = self.within(share, |search| method.attempt(sequent, search))?;
        // Inside reductions long proofs are left to be seen with the whole.
        let seen = self.depth <= 1 || proof.steps() <= MOST_STEPS_INSIDE;
        if seen && self.examine(sequent, &proof)? == Answer::Refused {
            return Err(Stuck::because(REFUSED));
        }
        Ok(proof)
    }

    fn portfolio(&mut self, sequent: &Sequent) -> Result<Proof, Stuck> {
        if let Some(point) = quick(sequent, 48, self) {
            let stuck = approximate(&point);
            self.diary.write(self.depth, "sample", stuck.remark());
            return Err(stuck);
        }
        let mut told: Option<Stuck> = None;
        for method in method::portfolio() {
            match self.attempt(*method, sequent) {
                Ok(proof) => return Ok(proof),
                Err(found @ Stuck::Counterexample(_)) => return Err(found),
                Err(Stuck::NotApplicable(_)) => {}
                // The scope of one method may be exhausted while ours is not.
                Err(Stuck::Exhausted) if self.left() == 0 => return Err(Stuck::Exhausted),
                Err(stuck) => {
                    let better = match (&told, &stuck) {
                        (None, _) => true,
                        (Some(Stuck::Failed { region, .. }), Stuck::Failed { region: new, .. }) => {
                            region.is_empty() && !new.is_empty()
                        }
                        (Some(Stuck::Exhausted), Stuck::Failed { .. }) => true,
                        _ => false,
                    };
                    if better {
                        told = Some(stuck);
                    }
                }
            }
        }
        Err(told.unwrap_or_else(|| Stuck::because("no method applies")))
    }
}

/// The term that is `>= 0`, `> 0`, `= 0` or `!= 0` by the goal.
#[must_use]
pub fn difference(sequent: &Sequent) -> Option<Term> {
    match &sequent.goal {
        Conclusion::Relation(r) => Some(r.difference()),
        Conclusion::Absurd => None,
    }
}

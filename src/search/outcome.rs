//! How a search ends. Nothing here is believed: every claim carries the text of
//! a certificate that the kernel checks.

use crate::expression::{Name, Term};
use crate::statement::Relation;

use super::diary::Diary;

/// The end of the search for one obligation.
#[derive(Clone, Debug)]
pub struct Decision {
    /// What was found.
    pub outcome: Outcome,
    /// A point, with an interpretation of the quantities, that satisfies
    /// everything the obligation supposes: shows that it is not vacuous.
    pub inhabitant: Option<Witness>,
    /// Work units spent.
    pub effort: u64,
    /// What was tried.
    pub diary: Diary,
}

/// What a search found.
#[derive(Clone, Debug)]
pub enum Outcome {
    /// A proof.
    Holds {
        /// Certificate text, a whole `certificate ... ;`.
        certificate: String,
        /// The method that carried the proof.
        method: &'static str,
        /// Certified room, where the method gives it.
        margin: Option<Margin>,
    },
    /// A point at which the relation is false or a side undefined.
    Fails(Witness),
    /// A proof that the suppositions exclude each other.
    Vacuous {
        /// Certificate text.
        certificate: String,
    },
    /// Neither.
    Undecided(Undecided),
}

/// A point, the meaning of the quantities there, and the certificate of both.
#[derive(Clone, Debug)]
pub struct Witness {
    /// Certificate text: verdict `fails` or `inhabited`.
    pub certificate: String,
    /// A closed term for every variable.
    pub point: Vec<(Name, Term)>,
    /// An expression in the arguments for every quantity.
    pub meanings: Vec<(Name, Vec<Name>, Term)>,
    /// The violated condition, if a side is undefined there.
    pub undefined: Option<Relation>,
}

/// Certified room of a relation: the difference `right - left` of `left <= right`.
#[derive(Clone, Debug, PartialEq)]
pub struct Margin {
    /// The difference is at least this everywhere (a decimal rounded down).
    pub at_least: Option<String>,
    /// It is at most this at `at` (a decimal rounded up).
    pub at_most: Option<String>,
    /// A point where it is that small.
    pub at: Vec<(Name, Term)>,
}

/// Why a search ended without a verdict.
#[derive(Clone, Debug, Default)]
pub struct Undecided {
    /// The reason in one sentence.
    pub reason: String,
    /// The smallest region where it got stuck: variable, lower and upper end as decimals.
    pub region: Vec<(Name, String, String)>,
    /// What might help.
    pub hint: Option<String>,
}

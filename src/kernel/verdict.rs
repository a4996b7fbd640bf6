//! What the kernel says: accepted, or rejected with a named reason.

use std::fmt;

/// Why a text or a step was refused. The kernel never says merely "no".
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Reason {
    /// The text does not follow the grammar.
    Syntax,
    /// A name is not declared, declared twice, or of the wrong kind.
    Name,
    /// The rule is not one the kernel knows.
    UnknownRule,
    /// The rule's fields are missing, too many, or of the wrong kind.
    Fields,
    /// A side condition of a rule is not satisfied.
    Condition,
    /// The rule does not prove the goal at hand.
    NotProved,
    /// Something is not shown to be defined.
    Undefined,
    /// A limit on size, depth, precision or work was reached.
    Limit,
    /// An obligation has no certificate, or a certificate no obligation.
    Missing,
}

impl Reason {
    /// The word used in reports and in the names of rejected cases.
    pub fn name(self) -> &'static str {
        match self {
            Reason::Syntax => "syntax",
            Reason::Name => "name",
            Reason::UnknownRule => "unknown rule",
            Reason::Fields => "fields",
            Reason::Condition => "side condition",
            Reason::NotProved => "not proved",
            Reason::Undefined => "not shown to be defined",
            Reason::Limit => "limit",
            Reason::Missing => "missing",
        }
    }
}

/// A refusal: its reason and the particulars.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Reject {
    /// The kind of refusal.
    pub reason: Reason,
    /// What exactly was refused, innermost first, with the rules it happened under.
    pub detail: String,
}

impl Reject {
    /// A refusal with its particulars.
    pub fn new(reason: Reason, detail: impl Into<String>) -> Reject {
        Reject { reason, detail: detail.into() }
    }

    /// The same refusal, told to have happened inside `place`.
    pub fn within(mut self, place: &str) -> Reject {
        // A deep certificate would otherwise repeat hundreds of places.
        if self.detail.len() < 2000 {
            self.detail.push_str(" < ");
            self.detail.push_str(place);
        }
        self
    }
}

impl fmt::Display for Reject {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: {}", self.reason.name(), self.detail)
    }
}

/// Shorthand used throughout the kernel.
pub type Checked<T = ()> = Result<T, Reject>;

/// `Err` with a reason and its particulars.
pub fn refuse<T>(reason: Reason, detail: impl Into<String>) -> Checked<T> {
    Err(Reject::new(reason, detail))
}

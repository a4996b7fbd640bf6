//! What we tell people about their text.
//!
//! Contract: uses `source` only. A [`Diagnostic`] is data; [`render`] draws it
//! as plain text with the source line and a caret. Nothing from the source is
//! ever emitted raw: control and direction characters are shown escaped. Every
//! diagnostic has a [`Code`], explained in `code.rs`.

mod caret;
mod code;

pub(crate) use caret::is_unsafe;
pub use caret::{escape, render, render_all};
pub use code::Code;

use crate::source::Place;

/// How much a diagnostic matters.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Severity {
    /// Worth a look; never changes a verdict or an exit code.
    Warning,
    /// The text cannot be used as it stands.
    Error,
}

/// A second place that matters, and why.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Label {
    /// Where.
    pub place: Place,
    /// Why it matters, a few words.
    pub text: String,
}

/// One message about a text.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Diagnostic {
    /// What kind of message it is.
    pub code: Code,
    /// Error or warning.
    pub severity: Severity,
    /// One sentence, lower case, without a full stop.
    pub message: String,
    /// The text it is about; `None` if it is about no text (a missing file).
    pub place: Option<Place>,
    /// A few words beside the caret; may be empty.
    pub caption: String,
    /// Other places that matter.
    pub labels: Vec<Label>,
    /// What to do, one sentence each.
    pub hints: Vec<String>,
}

impl Diagnostic {
    /// An error at a place.
    pub fn error(code: Code, place: Place, message: impl Into<String>) -> Diagnostic {
        Diagnostic {
            code,
            severity: Severity::Error,
            message: message.into(),
            place: Some(place),
            caption: String::new(),
            labels: Vec::new(),
            hints: Vec::new(),
        }
    }

    /// A warning at a place.
    pub fn warning(code: Code, place: Place, message: impl Into<String>) -> Diagnostic {
        Diagnostic { severity: Severity::Warning, ..Diagnostic::error(code, place, message) }
    }

    /// An error about no particular text.
    pub fn placeless(code: Code, message: impl Into<String>) -> Diagnostic {
        Diagnostic {
            code,
            severity: Severity::Error,
            message: message.into(),
            place: None,
            caption: String::new(),
            labels: Vec::new(),
            hints: Vec::new(),
        }
    }

    /// Adds words beside the caret.
    pub fn caption(mut self, text: impl Into<String>) -> Diagnostic {
        self.caption = text.into();
        self
    }

    /// Adds another place.
    pub fn label(mut self, place: Place, text: impl Into<String>) -> Diagnostic {
        self.labels.push(Label { place, text: text.into() });
        self
    }

    /// Adds a hint: what to do.
    pub fn hint(mut self, text: impl Into<String>) -> Diagnostic {
        self.hints.push(text.into());
        self
    }

    /// Whether this is an error.
    pub fn is_error(&self) -> bool {
        self.severity == Severity::Error
    }
}

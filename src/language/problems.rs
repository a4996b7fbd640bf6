//! The list of diagnostics of one file while it is read.

use crate::diagnostic::{Code, Diagnostic};
use crate::source::{FileId, Place, Span};

/// Most diagnostics kept for one file.
const MAX_PROBLEMS: usize = 100;

/// Collects diagnostics; keeps the first hundred.
#[derive(Debug)]
pub struct Problems {
    file: FileId,
    list: Vec<Diagnostic>,
    dropped: Option<Place>,
}

impl Problems {
    /// None yet, for `file`.
    pub fn new(file: FileId) -> Problems {
        Problems { file, list: Vec::new(), dropped: None }
    }

    /// Whether nothing is wrong so far.
    pub fn is_empty(&self) -> bool {
        self.list.is_empty()
    }

    /// An error at `span`, not yet in the list.
    pub fn error(&self, code: Code, span: Span, message: impl Into<String>) -> Diagnostic {
        Diagnostic::error(code, span.within(self.file), message)
    }

    /// `span` as a place in this file.
    pub fn place(&self, span: Span) -> Place {
        span.within(self.file)
    }

    /// Adds one.
    pub fn push(&mut self, diagnostic: Diagnostic) {
        if self.list.len() < MAX_PROBLEMS {
            self.list.push(diagnostic);
        } else if self.dropped.is_none() {
            self.dropped = diagnostic.place;
        }
    }

    /// All of them in the order of their places.
    pub fn into_list(self) -> Vec<Diagnostic> {
        let mut list = self.list;
        list.sort_by_key(|one| one.place);
        if let Some(place) = self.dropped {
            let text = format!("more than {MAX_PROBLEMS} mistakes; the others are not listed");
            list.push(Diagnostic::error(Code::TooManyErrors, place, text));
        }
        list
    }
}

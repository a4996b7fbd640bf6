//! What was tried and why it stopped. The diary feeds the messages of
//! `undecided`; no verdict depends on it.

use std::fmt;

/// One line of the diary.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Entry {
    /// How deep in the reductions.
    pub depth: usize,
    /// The method.
    pub method: &'static str,
    /// Why it stopped, or what it did.
    pub remark: String,
}

/// The lines in order, at most [`Diary::MOST`] of them.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Diary {
    entries: Vec<Entry>,
    dropped: usize,
}

impl Diary {
    /// Lines kept; the rest is only counted.
    pub const MOST: usize = 400;

    /// Adds a line.
    pub fn write(&mut self, depth: usize, method: &'static str, remark: impl Into<String>) {
        if self.entries.len() < Diary::MOST {
            self.entries.push(Entry { depth, method, remark: remark.into() });
        } else {
            self.dropped += 1;
        }
    }

    /// The lines.
    #[must_use]
    pub fn entries(&self) -> &[Entry] {
        &self.entries
    }
}

impl fmt::Display for Diary {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for e in &self.entries {
            writeln!(f, "{:indent$}{}: {}", "", e.method, e.remark, indent = 2 * e.depth)?;
        }
        if self.dropped > 0 {
            writeln!(f, "... and {} more", self.dropped)?;
        }
        Ok(())
    }
}

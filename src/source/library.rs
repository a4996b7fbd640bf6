//! The outside world, as far as reading text needs it.

use std::collections::BTreeMap;
use std::fmt;

/// Why a file could not be had.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum LibraryError {
    /// There is no such file.
    Missing,
    /// It exists but lies outside the project (for instance through a link).
    Outside,
    /// Reading failed; the text says how.
    Failed(String),
}

impl fmt::Display for LibraryError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            LibraryError::Missing => out.write_str("there is no such file"),
            LibraryError::Outside => out.write_str("the file lies outside the project"),
            LibraryError::Failed(how) => write!(out, "the file cannot be read: {how}"),
        }
    }
}

impl std::error::Error for LibraryError {}

/// Where texts come from. The core knows files only through this trait.
pub trait Library {
    /// The bytes of the file `name`, a path relative to the project root with
    /// `/` between its parts, as [`resolve`](super::resolve) gives it.
    ///
    /// An implementation may stop reading after [`MAX_BYTES`](super::MAX_BYTES) + 1
    /// bytes; longer files are refused anyway.
    ///
    /// # Errors
    /// If the file is missing, outside the project, or unreadable.
    fn fetch(&self, name: &str) -> Result<Vec<u8>, LibraryError>;
}

/// A library held in memory.
#[derive(Debug, Clone, Default)]
pub struct MemoryLibrary {
    files: BTreeMap<String, Vec<u8>>,
}

impl MemoryLibrary {
    /// An empty library.
    pub fn new() -> MemoryLibrary {
        MemoryLibrary::default()
    }

    /// Adds or replaces a file.
    pub fn with(mut self, name: &str, bytes: impl Into<Vec<u8>>) -> MemoryLibrary {
        self.files.insert(name.to_string(), bytes.into());
        self
    }
}

impl Library for MemoryLibrary {
    fn fetch(&self, name: &str) -> Result<Vec<u8>, LibraryError> {
        self.files.get(name).cloned().ok_or(LibraryError::Missing)
    }
}

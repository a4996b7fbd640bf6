//! Byte spans inside one file, and places: a file with a span.

/// A file inside [`Sources`](super::Sources); numbers follow the order of reading.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct FileId(pub u32);

/// A half-open range of bytes `start..end` in one file's text.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub struct Span {
    /// First byte.
    pub start: u32,
    /// One past the last byte.
    pub end: u32,
}

impl Span {
    /// The span `start..end`; a reversed pair gives the empty span at `start`.
    pub fn new(start: u32, end: u32) -> Span {
        Span { start, end: end.max(start) }
    }

    /// The empty span at `at`.
    pub fn empty(at: u32) -> Span {
        Span { start: at, end: at }
    }

    /// The smallest span that covers both.
    pub fn to(self, other: Span) -> Span {
        Span { start: self.start.min(other.start), end: self.end.max(other.end) }
    }

    /// The covered bytes as indices of a string.
    pub fn range(self) -> std::ops::Range<usize> {
        self.start as usize..self.end as usize
    }

    /// This span in `file`.
    pub fn within(self, file: FileId) -> Place {
        Place { file, span: self }
    }
}

/// A span together with the file it lies in.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Place {
    /// The file.
    pub file: FileId,
    /// The bytes in that file.
    pub span: Span,
}

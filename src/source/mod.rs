//! Text we were given: files, byte spans, lines and columns.
//!
//! Contract: this room uses no other room and touches no file system. A
//! [`Library`] stands for everything outside; [`Sources`] keeps every text
//! read so far under a [`FileId`]. Nothing here knows the language; damage
//! that makes a file unreadable (size, encoding) is recorded, not reported.
//! Start with `span.rs`, then `sources.rs`.

mod library;
mod lines;
mod path;
mod sources;
mod span;

pub use library::{Library, LibraryError, MemoryLibrary};
pub use lines::{LineColumn, Lines};
pub use path::{PathError, resolve};
pub use sources::{Damage, MAX_BYTES, MAX_FILES, SourceFile, Sources};
pub use span::{FileId, Place, Span};

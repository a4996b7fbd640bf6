//! Every text read so far.

use std::collections::BTreeMap;

use super::{FileId, Library, LibraryError, LineColumn, Lines, Span};

/// Largest file we read, in bytes.
pub const MAX_BYTES: usize = 4 * 1024 * 1024;

/// Largest number of files one run reads.
pub const MAX_FILES: usize = 4096;

/// Why the text of a file is not usable as a whole.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Damage {
    /// More than [`MAX_BYTES`] bytes; nothing was kept.
    TooLarge,
    /// Not UTF-8. The text holds replacement characters; the span marks the first.
    NotText(Span),
}

/// One file: its name relative to the project root, and its text.
#[derive(Debug, Clone)]
pub struct SourceFile {
    id: FileId,
    name: String,
    text: String,
    lines: Lines,
    damage: Option<Damage>,
}

impl SourceFile {
    /// A file that stands alone, outside any [`Sources`]; its id is 0.
    pub fn alone(name: &str, bytes: impl Into<Vec<u8>>) -> SourceFile {
        SourceFile::new(FileId(0), name, bytes.into())
    }

    fn new(id: FileId, name: &str, bytes: Vec<u8>) -> SourceFile {
        let (text, damage) = if bytes.len() > MAX_BYTES {
            (String::new(), Some(Damage::TooLarge))
        } else {
            match String::from_utf8(bytes) {
                Ok(text) => (text, None),
                Err(wrong) => {
                    let at = wrong.utf8_error().valid_up_to() as u32;
                    let text = String::from_utf8_lossy(wrong.as_bytes()).into_owned();
                    let mark = '\u{fffd}'.len_utf8() as u32;
                    (text, Some(Damage::NotText(Span::new(at, at + mark))))
                }
            }
        };
        let lines = Lines::new(&text);
        SourceFile { id, name: name.to_string(), text, lines, damage }
    }

    /// Its number.
    pub fn id(&self) -> FileId {
        self.id
    }

    /// Its name, relative to the project root.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// The name without folders and without its last extension; the first part of obligation ids.
    pub fn stem(&self) -> &str {
        let base = self.name.rsplit('/').next().unwrap_or(&self.name);
        match base.rsplit_once('.') {
            Some((stem, _)) if !stem.is_empty() => stem,
            _ => base,
        }
    }

    /// Its text.
    pub fn text(&self) -> &str {
        &self.text
    }

    /// Its lines.
    pub fn lines(&self) -> &Lines {
        &self.lines
    }

    /// Why it is not usable, if it is not.
    pub fn damage(&self) -> Option<Damage> {
        self.damage
    }

    /// Line and column of a byte offset.
    pub fn position(&self, offset: u32) -> LineColumn {
        self.lines.position(&self.text, offset)
    }

    /// The text under `span`; empty where the span does not fit the text.
    pub fn slice(&self, span: Span) -> &str {
        self.text.get(span.range()).unwrap_or("")
    }
}

/// All files read so far, each once.
#[derive(Debug, Clone, Default)]
pub struct Sources {
    files: Vec<SourceFile>,
    by_name: BTreeMap<String, FileId>,
}

impl Sources {
    /// No files yet.
    pub fn new() -> Sources {
        Sources::default()
    }

    /// Adds a text under `name`. A name already present keeps its first text.
    pub fn add(&mut self, name: &str, bytes: impl Into<Vec<u8>>) -> FileId {
        if let Some(id) = self.by_name.get(name) {
            return *id;
        }
        let id = FileId(self.files.len() as u32);
        self.files.push(SourceFile::new(id, name, bytes.into()));
        self.by_name.insert(name.to_string(), id);
        id
    }

    /// The file `name`, fetched from `library` unless it was read before.
    ///
    /// # Errors
    /// As [`Library::fetch`]; also if more than [`MAX_FILES`] files would be read.
    pub fn load(&mut self, library: &dyn Library, name: &str) -> Result<FileId, LibraryError> {
        if let Some(id) = self.by_name.get(name) {
            return Ok(*id);
        }
        if self.files.len() >= MAX_FILES {
            return Err(LibraryError::Failed(format!("more than {MAX_FILES} files are in use")));
        }
        let bytes = library.fetch(name)?;
        Ok(self.add(name, bytes))
    }

    /// The file with this id, if it came from here.
    pub fn get(&self, id: FileId) -> Option<&SourceFile> {
        self.files.get(id.0 as usize)
    }

    /// All files in the order of reading.
    pub fn iter(&self) -> impl Iterator<Item = &SourceFile> {
        self.files.iter()
    }
}

#[cfg(test)]
mod tests {
    use super::super::MemoryLibrary;
    use super::*;

    #[test]
    fn reads_each_file_once() {
        let library = MemoryLibrary::new().with("a.obl", "one");
        let mut sources = Sources::new();
        let first = sources.load(&library, "a.obl").unwrap();
        assert_eq!(sources.load(&library, "a.obl"), Ok(first));
        assert_eq!(sources.load(&library, "b.obl"), Err(LibraryError::Missing));
        assert_eq!(sources.get(first).unwrap().text(), "one");
    }

    #[test]
    fn records_damage() {
        let file = SourceFile::alone("x.obl", vec![b'a', 0xff, b'b']);
        assert_eq!(file.damage(), Some(Damage::NotText(Span::new(1, 4))));
        let file = SourceFile::alone("x.obl", vec![b' '; MAX_BYTES + 1]);
        assert_eq!(file.damage(), Some(Damage::TooLarge));
        assert_eq!(SourceFile::alone("x.obl", vec![b' '; MAX_BYTES]).damage(), None);
    }

    #[test]
    fn stems() {
        for (name, stem) in [("a/b.obl", "b"), ("x", "x"), (".obl", ".obl"), ("d.e/f.g.obl", "f.g")] {
            assert_eq!(SourceFile::alone(name, "").stem(), stem);
        }
    }
}

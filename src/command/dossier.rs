//! From a file to its statements.

use crate::diagnostic::{Diagnostic, render_all};
use crate::language;
use crate::source::{FileId, Place, Sources};
use crate::statement::Theory;

use super::exit::Failure;
use super::files::Dossier;
use super::output;

/// A dossier that was read without errors.
pub struct Loaded {
    /// Its name relative to the project root.
    pub name: String,
    /// It and the files it uses.
    pub sources: Sources,
    /// What it says.
    pub theory: Theory,
}

/// Reads a dossier with all files it uses. Diagnostics are told on standard error.
///
/// # Errors
/// Wrong input if there is an error among the diagnostics, and a failure of the
/// environment if the file cannot be read.
pub fn load(dossier: &Dossier) -> Result<Loaded, Failure> {
    let mut sources = Sources::new();
    let file = fetch(dossier, &mut sources)?;
    let lowered = language::lower::lower(&mut sources, &dossier.project, file);
    output::tell(&render_all(&lowered.diagnostics, &sources));
    if lowered.has_errors() {
        return Err(told(&lowered.diagnostics, &dossier.name));
    }
    Ok(Loaded { name: dossier.name.clone(), sources, theory: lowered.theory })
}

/// Brings the text of a dossier into `sources`.
///
/// # Errors
/// If the file cannot be read.
pub fn fetch(dossier: &Dossier, sources: &mut Sources) -> Result<FileId, Failure> {
    sources
        .load(&dossier.project, &dossier.name)
        .map_err(|error| Failure::environment(format!("`{}`: {error}", dossier.name)))
}

fn told(diagnostics: &[Diagnostic], name: &str) -> Failure {
    let count = diagnostics.iter().filter(|one| one.is_error()).count();
    let noun = if count == 1 { "mistake" } else { "mistakes" };
    Failure::input(format!("{name}: {count} {noun}; nothing was checked"))
}

impl Loaded {
    /// The file in which `place` lies and its line, from 1.
    pub fn line(&self, place: Option<Place>) -> (String, u32) {
        let found = place.and_then(|place| Some((self.sources.get(place.file)?, place.span.start)));
        match found {
            Some((source, start)) => (source.name().to_string(), source.position(start).line),
            None => (self.name.clone(), 1),
        }
    }
}

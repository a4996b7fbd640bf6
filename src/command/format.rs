//! `format`: lays out dossiers in the canonical way.

use std::path::Path;

use crate::diagnostic::render_all;
use crate::language;
use crate::source::Sources;

use super::arguments::Format;
use super::dossier::fetch;
use super::exit::{Done, Exit, Failure};
use super::files::{self, Dossier};
use super::output;

/// Formats every dossier in place. With `--check` nothing is written and the
/// code is 1 if something would change. Standard input goes to standard output.
pub fn run(request: &Format) -> Done {
    let mut exit = Exit::Success;
    for dossier in files::gather(&request.paths)? {
        exit = exit.worse(one(&dossier, request.check)?);
    }
    Ok(exit)
}

fn one(dossier: &Dossier, check: bool) -> Done {
    let mut sources = Sources::new();
    let id = fetch(dossier, &mut sources)?;
    let Some(source) = sources.get(id) else {
        return Err(Failure::environment(format!("`{}` was not read", dossier.name)));
    };
    let parsed = language::parse(source);
    output::tell(&render_all(&parsed.diagnostics, &sources));
    if parsed.has_errors() {
        return Ok(Exit::Input);
    }
    let formatted = language::format(source.text(), &parsed.value);
    let changed = formatted != source.text();
    let shown = dossier
        .file
        .as_deref()
        .map_or_else(|| "standard input".to_string(), |path: &Path| output::shown(path));
    match &dossier.file {
        _ if check && changed => {
            output::print(&format!("{shown} would change\n"))?;
            return Ok(Exit::Fails);
        }
        _ if check => {}
        None => output::print(&formatted)?,
        Some(file) if changed => {
            output::replace(file, &formatted)?;
            output::tell(&format!("{shown}: formatted\n"));
        }
        Some(_) => {}
    }
    Ok(Exit::Success)
}

//! `new`: a short commented dossier to start from.

use std::path::Path;

use super::arguments::New;
use super::exit::{Done, Exit, Failure};
use super::output;

/// The dossier that `new` writes. The tests check that it passes.
pub const FIRST_DOSSIER: &str = include_str!("first.obl");

/// Writes the dossier; a file that exists is left alone.
pub fn run(request: &New) -> Done {
    if request.file == Path::new("-") {
        output::print(FIRST_DOSSIER)?;
        return Ok(Exit::Success);
    }
    let name = output::shown(&request.file);
    // A dangling link counts as existing: what it names is not ours to create.
    if std::fs::symlink_metadata(&request.file).is_ok() {
        return Err(Failure::input(format!("`{name}` exists already and is left as it is")));
    }
    output::replace(&request.file, FIRST_DOSSIER)?;
    output::tell(&format!("wrote {name}; check it with `boundwright check {name}`\n"));
    Ok(Exit::Success)
}

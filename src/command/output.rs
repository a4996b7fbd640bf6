//! Where results go: standard output, or a file that is replaced whole.

use std::fs::{self, File, OpenOptions};
use std::io::{self, ErrorKind, IsTerminal, Write};
use std::path::{Path, PathBuf};

use crate::report::Style;

use super::exit::Failure;
use super::guard;

/// Writes to standard error. Nothing depends on its success.
pub fn tell(text: &str) {
    let _ = io::stderr().lock().write_all(text.as_bytes());
}

/// Tells a failure on standard error.
pub fn tell_failure(failure: &Failure) {
    tell(&format!("boundwright: {failure}\n"));
}

/// Writes a result to standard output. A reader that went away is no failure.
///
/// # Errors
/// If standard output cannot be written, for instance on a full disk.
pub fn print(text: &str) -> Result<(), Failure> {
    let _whole = guard::uninterrupted();
    let mut out = io::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(error) if error.kind() != ErrorKind::BrokenPipe => {
            Err(Failure::environment(format!("standard output cannot be written: {}", plain(&error))))
        }
        _ => Ok(()),
    }
}

/// Writes a result to `file`, or to standard output if there is none or it is `-`.
///
/// # Errors
/// If the place cannot be written.
pub fn deliver(text: &str, file: Option<&Path>) -> Result<(), Failure> {
    match file {
        Some(file) if file != Path::new("-") => replace(file, text),
        _ => print(text),
    }
}

/// Gives `file` the content `text`: either all of it or, on failure, nothing changes.
///
/// The new content is written beside the file and then takes its name. The mode
/// of a file that was there is kept, and a link keeps pointing to it. What is
/// not an ordinary file (a device, a pipe) is written in place.
///
/// # Errors
/// If the file or its folder cannot be written.
pub fn replace(file: &Path, text: &str) -> Result<(), Failure> {
    write_whole(file, text).map_err(|error| {
        Failure::environment(format!("`{}` cannot be written: {}", shown(file), plain(&error)))
    })
}

fn write_whole(file: &Path, text: &str) -> io::Result<()> {
    let _whole = guard::uninterrupted();
    let there = fs::metadata(file).ok();
    if there.as_ref().is_some_and(|there| !there.is_file()) {
        let mut device = OpenOptions::new().write(true).open(file)?;
        return device.write_all(text.as_bytes());
    }
    let target: PathBuf = if there.is_some() { fs::canonicalize(file)? } else { file.to_path_buf() };
    if there.as_ref().is_some_and(|there| there.permissions().readonly()) {
        return Err(io::Error::new(ErrorKind::PermissionDenied, "the file is read-only"));
    }
    let folder = match target.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder,
        _ => Path::new("."),
    };
    let mut beside = fresh_file(folder)?;
    beside.write_all(text.as_bytes())?;
    if let Some(there) = there {
        beside.as_file().set_permissions(there.permissions())?;
    }
    beside.as_file().sync_all()?;
    beside.persist(&target).map_err(|error| error.error)?;
    // The name is durable once the folder is; not every system can open one.
    if let Ok(folder) = File::open(folder) {
        let _ = folder.sync_all();
    }
    Ok(())
}

fn fresh_file(folder: &Path) -> io::Result<tempfile::NamedTempFile> {
    let mut builder = tempfile::Builder::new();
    builder.prefix(".boundwright-");
    #[cfg(unix)]
    {
        // Readable by others as far as the user's mask allows, like any new file.
        use std::os::unix::fs::PermissionsExt;
        builder.permissions(fs::Permissions::from_mode(0o666));
    }
    builder.tempfile_in(folder)
}

/// An error of the system without the name of a temporary file in it.
pub fn plain(error: &io::Error) -> String {
    match error.raw_os_error() {
        Some(code) => io::Error::from_raw_os_error(code).to_string(),
        None => error.to_string(),
    }
}

/// A path as it may be printed.
pub fn shown(path: &Path) -> String {
    crate::diagnostic::escape(&path.to_string_lossy()).into_owned()
}

/// Whether standard output shows colour: a terminal that is not dumb, and `NO_COLOR` unset or empty.
pub fn colour() -> bool {
    let refused = std::env::var_os("NO_COLOR").is_some_and(|value| !value.is_empty());
    let dumb = std::env::var_os("TERM").is_some_and(|value| value == "dumb");
    io::stdout().is_terminal() && !refused && !dumb
}

/// How a report for people is drawn: as the terminal allows, or plain in 80 columns for a file.
pub fn style(file: Option<&Path>) -> Style {
    match file {
        Some(file) if file != Path::new("-") => Style { colour: false, width: 80 },
        _ => Style { colour: colour(), width: width() },
    }
}

/// Columns of the terminal that standard output is, or 80.
fn width() -> usize {
    if !io::stdout().is_terminal() {
        return 80;
    }
    let (_, columns) = console::Term::stdout().size();
    usize::from(columns).clamp(40, 200)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn replacing_keeps_mode_and_leaves_nothing_beside() {
        let folder = tempfile::tempdir().unwrap();
        let file = folder.path().join("a.obl");
        replace(&file, "one").unwrap();
        assert_eq!(fs::read_to_string(&file).unwrap(), "one");
        #[cfg(unix)]
        {
            use std::os::unix::fs::PermissionsExt;
            fs::set_permissions(&file, fs::Permissions::from_mode(0o640)).unwrap();
            let link = folder.path().join("link.obl");
            std::os::unix::fs::symlink(&file, &link).unwrap();
            replace(&link, "two").unwrap();
            assert!(fs::symlink_metadata(&link).unwrap().file_type().is_symlink());
            assert_eq!(fs::metadata(&file).unwrap().permissions().mode() & 0o777, 0o640);
        }
        #[cfg(not(unix))]
        replace(&file, "two").unwrap();
        assert_eq!(fs::read_to_string(&file).unwrap(), "two");
        let hidden = fs::read_dir(folder.path())
            .unwrap()
            .filter(|entry| entry.as_ref().unwrap().file_name().to_string_lossy().starts_with(".boundwright"))
            .count();
        assert_eq!(hidden, 0);
    }

    #[test]
    fn a_missing_folder_is_a_failure_of_the_environment() {
        let failure = replace(Path::new("no/such/folder/x"), "one").unwrap_err();
        assert_eq!(failure.exit, super::super::Exit::Environment);
    }
}

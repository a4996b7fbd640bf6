//! From paths on the command line to dossiers and the project they stand in.

use std::collections::BTreeSet;
use std::fs::{self, File};
use std::io::{self, Read};
use std::path::{Component, Path, PathBuf};

use crate::source::{Library, LibraryError, MAX_BYTES, MAX_FILES};

use super::exit::Failure;
use super::output::{plain, shown};

/// The name under which standard input takes part in a project.
const STANDARD_INPUT: &str = "stdin.obl";

/// One dossier to work on.
#[derive(Debug, Clone)]
pub struct Dossier {
    /// Its name relative to the project root, parts joined by `/`.
    pub name: String,
    /// Where its project's files come from.
    pub project: Project,
    /// The file itself; none for standard input.
    pub file: Option<PathBuf>,
}

/// A project: the folder that `use` never leaves.
#[derive(Debug, Clone)]
pub struct Project {
    root: PathBuf,
    /// The text of standard input and the name it goes by.
    given: Option<(String, Vec<u8>)>,
}

impl Library for Project {
    fn fetch(&self, name: &str) -> Result<Vec<u8>, LibraryError> {
        if let Some((given, text)) = &self.given
            && given == name
        {
            return Ok(text.clone());
        }
        let path = self.root.join(name);
        // A link inside the project may point out of it.
        let real = fs::canonicalize(&path).map_err(|error| match error.kind() {
            io::ErrorKind::NotFound => LibraryError::Missing,
            _ => LibraryError::Failed(plain(&error)),
        })?;
        if !real.starts_with(&self.root) {
            return Err(LibraryError::Outside);
        }
        read_limited(&real, MAX_BYTES).map_err(|error| LibraryError::Failed(plain(&error)))
    }
}

/// The bytes of an ordinary file, at most one more than `limit`.
pub fn read_limited(path: &Path, limit: usize) -> io::Result<Vec<u8>> {
    // Opening a pipe would wait for a writer that may never come.
    if !fs::metadata(path)?.is_file() {
        return Err(io::Error::new(io::ErrorKind::InvalidInput, "it is not an ordinary file"));
    }
    let mut bytes = Vec::new();
    File::open(path)?.take(limit as u64 + 1).read_to_end(&mut bytes)?;
    Ok(bytes)
}

/// All dossiers meant by `paths`, in order and each once. A folder means every
/// `*.obl` file below it in the order of names, without hidden files and those
/// that ignore files exclude. `-` means standard input.
///
/// # Errors
/// If a path is missing or unreadable, or a folder holds no dossier.
pub fn gather(paths: &[PathBuf]) -> Result<Vec<Dossier>, Failure> {
    let mut seen = BTreeSet::new();
    let mut dossiers = Vec::new();
    let mut input_read = false;
    for path in paths {
        if path == Path::new("-") {
            if !std::mem::replace(&mut input_read, true) {
                dossiers.push(standard_input()?);
            }
            continue;
        }
        let about = fs::metadata(path).map_err(|error| unreadable(path, &error))?;
        let found = if about.is_dir() { walk(path)? } else { vec![path.clone()] };
        for file in found {
            let real = fs::canonicalize(&file).map_err(|error| unreadable(&file, &error))?;
            if seen.insert(real.clone()) {
                dossiers.push(dossier(&file, real)?);
            }
        }
        if dossiers.len() > MAX_FILES {
            return Err(Failure::input(format!("more than {MAX_FILES} dossiers are given")));
        }
    }
    Ok(dossiers)
}

/// All bytes of standard input up to `limit`.
///
/// # Errors
/// If it cannot be read or is longer.
pub fn read_standard_input(limit: usize) -> Result<Vec<u8>, Failure> {
    let mut bytes = Vec::new();
    io::stdin()
        .lock()
        .take(limit as u64 + 1)
        .read_to_end(&mut bytes)
        .map_err(|error| Failure::environment(format!("standard input cannot be read: {}", plain(&error))))?;
    if bytes.len() > limit {
        return Err(Failure::input(format!("standard input is longer than {limit} bytes")));
    }
    Ok(bytes)
}

/// A failure to read a path the user gave.
pub fn unreadable(path: &Path, error: &io::Error) -> Failure {
    Failure::environment(format!("`{}` cannot be read: {}", shown(path), plain(error)))
}

fn standard_input() -> Result<Dossier, Failure> {
    let mut text = Vec::new();
    io::stdin()
        .lock()
        .take(MAX_BYTES as u64 + 1)
        .read_to_end(&mut text)
        .map_err(|error| Failure::environment(format!("standard input cannot be read: {}", plain(&error))))?;
    let here = std::env::current_dir().and_then(fs::canonicalize).map_err(|error| {
        Failure::environment(format!("the current folder cannot be read: {}", plain(&error)))
    })?;
    let root = project_root(&here);
    let name = relative(&root, &here.join(STANDARD_INPUT))?;
    Ok(Dossier { name: name.clone(), project: Project { root, given: Some((name, text)) }, file: None })
}

fn dossier(file: &Path, real: PathBuf) -> Result<Dossier, Failure> {
    // Read problems of a file that was named are the environment's, not the text's.
    File::open(&real).map_err(|error| unreadable(file, &error))?;
    if !fs::metadata(&real).map_err(|error| unreadable(file, &error))?.is_file() {
        return Err(Failure::environment(format!("`{}` is neither a file nor a folder", shown(file))));
    }
    let root = project_root(real.parent().unwrap_or(Path::new("/")));
    let name = relative(&root, &real)?;
    Ok(Dossier { name, project: Project { root, given: None }, file: Some(file.to_path_buf()) })
}

/// The project that a file in `folder` belongs to: the nearest folder upwards
/// with `boundwright.toml`, else with `Cargo.toml` or `.git`, else `folder`.
fn project_root(folder: &Path) -> PathBuf {
    let with = |names: &[&str]| {
        folder
            .ancestors()
            .find(|above| names.iter().any(|name| above.join(name).exists()))
            .map(Path::to_path_buf)
    };
    with(&["boundwright.toml"])
        .or_else(|| with(&["Cargo.toml", ".git"]))
        .unwrap_or_else(|| folder.to_path_buf())
}

fn relative(root: &Path, file: &Path) -> Result<String, Failure> {
    let inside = file.strip_prefix(root).unwrap_or(file);
    let parts: Option<Vec<&str>> = inside
        .components()
        .map(|part| match part {
            Component::Normal(name) => name.to_str(),
            _ => None,
        })
        .collect();
    parts.map(|parts| parts.join("/")).ok_or_else(|| {
        Failure::input(format!(
            "`{}` has a name that is not UTF-8 text",
            shown(file.file_name().map_or(file, Path::new))
        ))
    })
}

fn walk(folder: &Path) -> Result<Vec<PathBuf>, Failure> {
    let mut found = Vec::new();
    // `require_git(false)`: an ignore file means the same outside a repository.
    let walk = ignore::WalkBuilder::new(folder)
        .require_git(false)
        .follow_links(false)
        .sort_by_file_name(|a, b| a.cmp(b))
        .build();
    for entry in walk {
        let entry = entry.map_err(|error| {
            let why = error.io_error().map_or_else(|| error.to_string(), plain);
            Failure::environment(format!("`{}` cannot be searched: {why}", shown(folder)))
        })?;
        let ordinary = entry.file_type().is_some_and(|kind| kind.is_file());
        if ordinary && entry.path().extension().is_some_and(|extension| extension == "obl") {
            found.push(entry.into_path());
        }
    }
    if found.is_empty() {
        return Err(Failure::input(format!("there is no dossier (*.obl) below `{}`", shown(folder))));
    }
    Ok(found)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn put(root: &Path, name: &str, text: &str) {
        let path = root.join(name);
        fs::create_dir_all(path.parent().unwrap()).unwrap();
        fs::write(path, text).unwrap();
    }

    #[test]
    fn the_nearest_marker_makes_the_project() {
        let folder = tempfile::tempdir().unwrap();
        let top = fs::canonicalize(folder.path()).unwrap();
        put(&top, "boundwright.toml", "");
        put(&top, "a/Cargo.toml", "");
        put(&top, "a/b/x.obl", "");
        assert_eq!(project_root(&top.join("a/b")), top);
        fs::remove_file(top.join("boundwright.toml")).unwrap();
        assert_eq!(project_root(&top.join("a/b")), top.join("a"));
        let dossiers = gather(&[top.join("a/b/x.obl")]).unwrap();
        assert_eq!(dossiers[0].name, "b/x.obl");
    }

    #[test]
    fn folders_are_walked_in_order_and_ignore_files_count() {
        let folder = tempfile::tempdir().unwrap();
        let top = folder.path();
        put(top, "boundwright.toml", "");
        for name in ["z.obl", "b/y.obl", "b/a.obl", "drafts/d.obl", ".hidden/h.obl", "b/readme.md"] {
            put(top, name, "");
        }
        put(top, ".gitignore", "drafts/\n");
        let names: Vec<String> = gather(&[top.to_path_buf(), top.join("z.obl")])
            .unwrap()
            .into_iter()
            .map(|one| one.name)
            .collect();
        assert_eq!(names, ["b/a.obl", "b/y.obl", "z.obl"]);
    }

    #[test]
    fn what_is_missing_or_empty_is_told_apart() {
        let folder = tempfile::tempdir().unwrap();
        assert_eq!(gather(&[folder.path().to_path_buf()]).unwrap_err().exit, super::super::Exit::Input);
        assert_eq!(
            gather(&[folder.path().join("no.obl")]).unwrap_err().exit,
            super::super::Exit::Environment
        );
    }

    #[cfg(unix)]
    #[test]
    fn a_link_out_of_the_project_is_not_followed() {
        let outside = tempfile::tempdir().unwrap();
        put(outside.path(), "secret.obl", "x");
        let folder = tempfile::tempdir().unwrap();
        put(folder.path(), "a.obl", "");
        std::os::unix::fs::symlink(outside.path().join("secret.obl"), folder.path().join("b.obl")).unwrap();
        let project = gather(&[folder.path().join("a.obl")]).unwrap().remove(0).project;
        assert_eq!(project.fetch("b.obl"), Err(LibraryError::Outside));
        assert_eq!(project.fetch("c.obl"), Err(LibraryError::Missing));
        assert_eq!(project.fetch("a.obl"), Ok(Vec::new()));
    }
}

//! Names of files inside a project: relative to its root, parts joined by `/`.

use std::fmt;

/// Why a path written in a dossier cannot be followed.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum PathError {
    /// Nothing is written.
    Empty,
    /// It starts at the root of a file system (`/x`, `C:\x`).
    Absolute,
    /// It uses `\`, which only some systems read as a separator, or a control character.
    Character,
    /// It leaves the project root.
    Outside,
}

impl fmt::Display for PathError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        out.write_str(match self {
            PathError::Empty => "the path is empty",
            PathError::Absolute => "the path is absolute; paths are relative to the file that uses them",
            PathError::Character => {
                "the path contains a backslash, colon or control character; separate folders with `/`"
            }
            PathError::Outside => "the path leaves the project root",
        })
    }
}

impl std::error::Error for PathError {}

/// The file that `target`, written in the file named `from`, means.
///
/// `from` is relative to the project root; so is the result.
///
/// # Errors
/// If `target` is empty, absolute, contains `\`, `:` or control characters, or
/// climbs above the project root.
pub fn resolve(from: &str, target: &str) -> Result<String, PathError> {
    if target.is_empty() {
        return Err(PathError::Empty);
    }
    let drive = target.as_bytes().get(1) == Some(&b':');
    if target.starts_with('/') || target.starts_with('\\') || drive {
        return Err(PathError::Absolute);
    }
    if target.chars().any(|c| c == '\\' || c == ':' || c.is_control()) {
        return Err(PathError::Character);
    }
    let mut parts: Vec<&str> = from.split('/').collect();
    parts.pop();
    for part in target.split('/') {
        match part {
            "" | "." => {}
            ".." => {
                parts.pop().ok_or(PathError::Outside)?;
            }
            name => parts.push(name),
        }
    }
    if parts.is_empty() {
        return Err(PathError::Empty);
    }
    Ok(parts.join("/"))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn follows_relative_paths() {
        assert_eq!(resolve("notes/a.obl", "../shared/t.obl"), Ok("shared/t.obl".into()));
        assert_eq!(resolve("a.obl", "./b.obl"), Ok("b.obl".into()));
        assert_eq!(resolve("x/y/a.obl", "b.obl"), Ok("x/y/b.obl".into()));
    }

    #[test]
    fn never_leaves_the_root() {
        assert_eq!(resolve("a.obl", "../b.obl"), Err(PathError::Outside));
        assert_eq!(resolve("x/a.obl", "../../x/b.obl"), Err(PathError::Outside));
        assert_eq!(resolve("a.obl", "/etc/passwd"), Err(PathError::Absolute));
        assert_eq!(resolve("a.obl", "C:/x"), Err(PathError::Absolute));
        assert_eq!(resolve("a.obl", "..\\x"), Err(PathError::Character));
        assert_eq!(resolve("a.obl", ""), Err(PathError::Empty));
        assert_eq!(resolve("a.obl", "."), Err(PathError::Empty));
    }
}

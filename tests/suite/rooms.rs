//! Who may use whom: the rooms of `src/` and the crates they may name, as data.
//!
//! The source is read as text. A room is used where a path starts with
//! `crate::room`, or climbs to the crate's root with `super::`; unit tests, which
//! stand at the end of a file under `#[cfg(test)]`, may use every room.

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};

/// Rooms in reading order, each with the rooms it may use.
const ROOMS: &[(&str, &[&str])] = &[
    ("source", &[]),
    ("diagnostic", &["source"]),
    ("enclosure", &[]),
    ("expression", &["enclosure"]),
    ("statement", &["expression", "enclosure", "source", "diagnostic"]),
    ("language", &["statement", "expression", "enclosure", "source", "diagnostic"]),
    ("search", &["statement", "expression", "enclosure"]),
    ("kernel", &[]),
    ("report", &["statement", "kernel", "diagnostic", "source"]),
    (
        "command",
        &[
            "source",
            "diagnostic",
            "enclosure",
            "expression",
            "statement",
            "language",
            "search",
            "kernel",
            "report",
        ],
    ),
];

/// Every dependency, with the folders or files that may name it.
const CRATES: &[(&str, &[&str])] = &[
    ("annotate_snippets", &["diagnostic/caret.rs"]),
    ("clap", &["command/"]),
    ("console", &["command/"]),
    ("core_math", &["enclosure/"]),
    ("ctrlc", &["command/"]),
    ("gmp_mpfr_sys", &[]),
    ("ignore", &["command/"]),
    ("indicatif", &["command/"]),
    ("nom", &["language/"]),
    (
        "num_bigint",
        &["enclosure/", "expression/", "statement/", "language/", "search/", "kernel/", "command/"],
    ),
    (
        "num_integer",
        &["enclosure/", "expression/", "statement/", "language/", "search/", "kernel/", "command/"],
    ),
    (
        "num_rational",
        &["enclosure/", "expression/", "statement/", "language/", "search/", "kernel/", "command/"],
    ),
    (
        "num_traits",
        &["enclosure/", "expression/", "statement/", "language/", "search/", "kernel/", "command/"],
    ),
    ("rayon", &["command/"]),
    ("rug", &["enclosure/mpfr.rs"]),
    ("serde", &["report/", "command/"]),
    ("serde_json", &["report/", "command/"]),
    ("tempfile", &["command/"]),
    ("unicode_ident", &["language/"]),
    ("unicode_normalization", &["language/"]),
];

fn top() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

/// All Rust files below `folder`, in order.
fn rust_files(folder: &Path) -> Vec<PathBuf> {
    let mut entries: Vec<PathBuf> =
        fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    entries.sort();
    let mut files = Vec::new();
    for entry in entries {
        if entry.is_dir() {
            files.extend(rust_files(&entry));
        } else if entry.extension().is_some_and(|extension| extension == "rs") {
            files.push(entry);
        }
    }
    files
}

/// A file of `src/`: its path below it, and its code without comments, texts and tests.
struct Code {
    path: String,
    text: String,
}

fn code() -> Vec<Code> {
    let src = top().join("src");
    let mut files = Vec::new();
    let mut tests_only = BTreeSet::new();
    for file in rust_files(&src) {
        let text = fs::read_to_string(&file).unwrap();
        let path = file.strip_prefix(&src).unwrap().to_string_lossy().replace('\\', "/");
        let (text, modules) = without_tests(&text);
        let folder = path.rsplit_once('/').map_or("", |(folder, _)| folder);
        tests_only.extend(modules.iter().map(|name| format!("{folder}/{name}.rs")));
        files.push(Code { path, text: without_texts(&text) });
    }
    files.retain(|file| !tests_only.contains(&file.path));
    files
}

/// The code before the unit tests, and the names of modules that are tests as a whole.
fn without_tests(text: &str) -> (String, Vec<String>) {
    let mut kept = String::new();
    let mut modules = Vec::new();
    let mut lines = text.lines();
    while let Some(line) = lines.next() {
        if line.trim() != "#[cfg(test)]" {
            kept.push_str(line);
            kept.push('\n');
            continue;
        }
        let Some(next) = lines.find(|line| !line.trim_start().starts_with("#[")) else { break };
        match next.trim().strip_suffix(';').and_then(|line| line.rsplit_once("mod ")) {
            Some((_, name)) => modules.push(name.to_string()),
            None if next.contains("mod ") => break,
            None => {}
        }
    }
    (kept, modules)
}

/// The code without comments and the contents of quoted texts.
fn without_texts(code: &str) -> String {
    let mut kept = String::new();
    let mut characters = code.chars().peekable();
    while let Some(c) = characters.next() {
        match c {
            '/' if characters.peek() == Some(&'/') => {
                characters.by_ref().find(|c| *c == '\n');
                kept.push('\n');
            }
            '\'' if characters.peek() == Some(&'"') => {
                characters.by_ref().nth(1);
            }
            '"' => {
                while let Some(c) = characters.next() {
                    match c {
                        '\\' => drop(characters.next()),
                        '"' => break,
                        _ => {}
                    }
                }
                kept.push_str("\"\"");
            }
            c => kept.push(c),
        }
    }
    kept
}

fn is_name(c: char) -> bool {
    c.is_alphanumeric() || c == '_'
}

/// The names that follow a path prefix: `prefix::a` gives `a`, `prefix::{a, b::c}` gives `a` and `b`.
fn names_after(rest: &str) -> Vec<String> {
    let name = |text: &str| text.trim_start().chars().take_while(|c| is_name(*c)).collect::<String>();
    let Some(group) = rest.strip_prefix('{') else { return vec![name(rest)] };
    let mut depth = 0;
    let mut names = vec![name(group)];
    for (at, c) in group.char_indices() {
        match c {
            '{' => depth += 1,
            '}' if depth == 0 => break,
            '}' => depth -= 1,
            ',' if depth == 0 => names.push(name(&group[at + 1..])),
            _ => {}
        }
    }
    names
}

/// Every place where `word` starts a path in `text`: what follows it.
fn paths<'a>(text: &'a str, word: &str) -> Vec<&'a str> {
    let start = format!("{word}::");
    text.match_indices(&start)
        .filter(|(at, _)| !text[..*at].ends_with(|c: char| is_name(c) || c == ':'))
        .map(|(at, _)| &text[at + start.len()..])
        .collect()
}

/// Names at the crate's root that a file uses.
fn roots(file: &Code) -> BTreeSet<String> {
    let mut found: BTreeSet<String> = paths(&file.text, "crate").into_iter().flat_map(names_after).collect();
    let folders = file.path.matches('/').count();
    let depth = if file.path.ends_with("/mod.rs") { folders } else { folders + 1 };
    let climb = format!("super::{}", "super::".repeat(depth - 1));
    for (at, _) in file.text.match_indices(&climb) {
        let before = &file.text[..at];
        if !before.ends_with(|c: char| is_name(c) || c == ':') {
            found.extend(names_after(&file.text[at + climb.len()..]));
        }
    }
    found.remove("");
    found
}

#[test]
fn rooms_use_only_the_rooms_they_may() {
    let mut wrong = Vec::new();
    let mut seen = BTreeSet::new();
    for file in code() {
        let Some((room, _)) = file.path.split_once('/') else { continue };
        seen.insert(room.to_string());
        let Some((_, allowed)) = ROOMS.iter().find(|(name, _)| *name == room) else {
            wrong.push(format!("{}: the room `{room}` is not in the table", file.path));
            continue;
        };
        for used in roots(&file) {
            let is_room = ROOMS.iter().any(|(name, _)| *name == used);
            if is_room && used != room && !allowed.contains(&used.as_str()) {
                wrong.push(format!("{}: `{room}` must not use `{used}`", file.path));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
    assert!(seen.contains("kernel") && seen.contains("command"), "the source was not found: {seen:?}");
}

#[test]
fn crates_are_named_only_where_they_may_be() {
    let manifest = fs::read_to_string(top().join("Cargo.toml")).unwrap();
    let dependencies: BTreeSet<String> = manifest
        .lines()
        .skip_while(|line| *line != "[dependencies]")
        .skip(1)
        .take_while(|line| !line.starts_with('['))
        .filter_map(|line| line.split_once('=').filter(|_| !line.starts_with('#')))
        .map(|(name, _)| name.trim().replace('-', "_"))
        .collect();
    let table: BTreeSet<String> = CRATES.iter().map(|(name, _)| (*name).to_string()).collect();
    assert_eq!(dependencies, table, "the table lists exactly the dependencies of Cargo.toml");
    let mut wrong = Vec::new();
    for file in code() {
        for (name, places) in CRATES {
            let named = !paths(&file.text, name).is_empty();
            if named && !places.iter().any(|place| file.path.starts_with(place)) {
                wrong.push(format!("{}: must not name `{name}`", file.path));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

#[test]
fn every_room_opens_with_its_contract() {
    for (room, _) in ROOMS {
        let path = top().join("src").join(room).join("mod.rs");
        let Ok(text) = fs::read_to_string(&path) else { panic!("the room `{room}` has no mod.rs") };
        let opening: Vec<&str> = text.lines().take_while(|line| line.starts_with("//!")).collect();
        assert!(opening.len() >= 3, "`{room}/mod.rs` opens with its contract");
    }
}

#[test]
fn the_reader_of_this_test_sees_what_it_should() {
    let file = |path: &str, text: &str| Code { path: path.into(), text: without_texts(text) };
    let used = |path: &str, text: &str| roots(&file(path, text)).into_iter().collect::<Vec<_>>();
    assert_eq!(used("a/b.rs", "use crate::kernel::x; // crate::search"), ["kernel"]);
    assert_eq!(used("a/b.rs", "use crate::{kernel::{x, y}, report};"), ["kernel", "report"]);
    assert_eq!(used("a/b.rs", "use super::super::search; use super::c;"), ["search"]);
    assert_eq!(used("a/mod.rs", "use super::search;"), ["search"]);
    assert_eq!(used("a/b.rs", "let s = \"crate::search\"; let c = '\"'; crate::kernel::f()"), ["kernel"]);
    let (kept, modules) =
        without_tests("a\n#[cfg(test)]\npub(crate) mod sample;\nb\n#[cfg(test)]\nmod tests {\nc\n}\n");
    assert_eq!((kept.as_str(), modules), ("a\nb\n", vec!["sample".to_string()]));
}

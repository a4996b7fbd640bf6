//! The corpus of dossiers, good and broken, and texts meant to break the reader.

use std::fs;
use std::path::PathBuf;

use boundwright::diagnostic::{Code, render_all};
use boundwright::language::tree::Tree;
use boundwright::language::{format, parse};
use boundwright::source::{MAX_BYTES, SourceFile, Sources};
use proptest::prelude::*;

/// The files of a folder of cases, by name.
fn cases(folder: &str) -> Vec<(String, Vec<u8>)> {
    let path = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join(folder);
    let mut list: Vec<(String, Vec<u8>)> = fs::read_dir(&path)
        .unwrap_or_else(|error| panic!("{}: {error}", path.display()))
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|extension| extension == "obl"))
        .map(|path| {
            let name = path.file_name().unwrap().to_string_lossy().into_owned();
            (name, fs::read(&path).unwrap())
        })
        .collect();
    list.sort();
    list
}

/// A tree without its spans and comments, for comparisons.
pub fn bare(tree: &Tree) -> String {
    let shown = format!("{:?}", tree.statements);
    let mut parts = shown.split("Span { start: ");
    let mut out = parts.next().unwrap_or_default().to_string();
    for part in parts {
        out.push_str(part.split_once('}').map_or(part, |(_, rest)| rest));
    }
    out
}

fn codes(text: &str) -> Vec<Code> {
    let parsed = parse(&SourceFile::alone("a.obl", text));
    parsed.diagnostics.into_iter().map(|one| one.code).collect()
}

#[test]
fn good_cases_are_read_and_printed() {
    let mut list = cases("tests/cases/language/good");
    list.extend(cases("grammar/examples"));
    assert!(list.len() >= 4);
    for (name, bytes) in list {
        let mut sources = Sources::new();
        let id = sources.add(&name, bytes);
        let file = sources.get(id).unwrap();
        let parsed = parse(file);
        let shown = render_all(&parsed.diagnostics, &sources);
        assert!(parsed.diagnostics.is_empty(), "{shown}");
        let once = format(file.text(), &parsed.value);
        let again = parse(&SourceFile::alone(&name, once.as_str()));
        assert_eq!(bare(&parsed.value), bare(&again.value), "{name}");
        assert_eq!(parsed.value.comments.len(), again.value.comments.len(), "{name}");
        assert_eq!(format(&once, &again.value), once, "{name}");
        insta::with_settings!({ snapshot_path => "../cases/language/good", prepend_module_to_snapshot => false, omit_expression => true }, {
            insta::assert_snapshot!(name, once);
        });
    }
}

#[test]
fn broken_cases_are_explained() {
    let list = cases("tests/cases/language/broken");
    assert!(list.len() >= 20);
    for (name, bytes) in list {
        let mut sources = Sources::new();
        let id = sources.add(&name, bytes);
        let parsed = parse(sources.get(id).unwrap());
        let shown = render_all(&parsed.diagnostics, &sources);
        assert!(parsed.has_errors(), "{name} is read without an error");
        let wanted = name.trim_end_matches(".obl").trim_end_matches(|c: char| c.is_ascii_digit() || c == '_');
        let named = parsed.diagnostics.iter().any(|one| one.code.name() == wanted);
        assert!(named, "{name} does not show the code it is named after:\n{shown}");
        insta::with_settings!({ snapshot_path => "../cases/language/broken", prepend_module_to_snapshot => false, omit_expression => true }, {
            insta::assert_snapshot!(name, shown);
        });
    }
}

#[test]
fn both_spellings_mean_the_same() {
    let ascii = "claim c for x in [0, infinity): 2*pi*x - sqrt(x) <= sqrt(1 + x)*3 >= x'";
    let ascii = ascii.replace(">= x'", "<= x'");
    let signs = "claim c for x in [0, ∞): 2·π×x − √x ≤ √(1 + x)⋅3 ≤ x′";
    let read = |text: &str| {
        let parsed = parse(&SourceFile::alone("a.obl", text));
        assert!(!parsed.has_errors(), "{:?}", parsed.diagnostics);
        bare(&parsed.value)
    };
    assert_eq!(read(&ascii), read(signs));
}

#[test]
fn powers_group_to_the_right_and_bind_tighter_than_signs() {
    let read = |term: &str| {
        let parsed = parse(&SourceFile::alone("a.obl", format!("define a = {term}")));
        assert!(!parsed.has_errors(), "{:?}", parsed.diagnostics);
        bare(&parsed.value).replace("Group(", "(")
    };
    for (plain, grouped) in [
        ("-x^2", "-(x^2)"),
        ("2^3^4", "2^(3^4)"),
        ("10^10^10^10", "10^(10^(10^10))"),
        ("2^-x^2", "2^(-(x^2))"),
        ("-n!", "-(n!)"),
        ("2^n!", "2^(n!)"),
        ("a*b^c", "a*(b^c)"),
        ("-a*b", "(-a)*b"),
        ("a - b*c", "a - (b*c)"),
    ] {
        let strip = |text: String| text.replace("Expression { kind: (Expression", "Expression");
        let (plain, grouped) = (strip(read(plain)), strip(read(grouped)));
        let letters = |text: &str| {
            text.replace(['(', ')', ' ', ',', '{', '}'], "")
                .replace("kind:", "")
                .replace("span:", "")
                .replace("Expression", "")
        };
        assert_eq!(letters(&plain), letters(&grouped));
    }
    let differ = |one: &str, other: &str| assert_ne!(read(one), read(other));
    differ("(-x)^2", "-x^2");
    differ("(2^3)^4", "2^3^4");
}

#[test]
fn extreme_texts_are_refused_politely() {
    let nested = |count: usize| format!("claim c: {}x{} < 1", "(".repeat(count), ")".repeat(count));
    assert_eq!(codes(&nested(199)), []);
    assert_eq!(codes(&nested(10_000)), [Code::TooDeep]);
    assert_eq!(codes(&format!("claim c: {}x < 1", "-".repeat(100_000))), [Code::TooDeep]);
    assert_eq!(codes(&format!("claim c: {}x < 1", "2^".repeat(100_000))), [Code::TooDeep]);
    assert_eq!(codes(&format!("claim c: {}x < 1", "f(".repeat(100_000))), [Code::TooDeep]);
    assert_eq!(codes(&format!("claim c: {}x < 1", "√".repeat(100_000))), [Code::AmbiguousNotation]);
    assert_eq!(codes(&format!("claim c: x{} < 1", " + x*y".repeat(100_000))), []);
    let blocks: String = (0..1000).map(|at| format!("{}for x in [0, 1]:\n", " ".repeat(at))).collect();
    assert!(codes(&blocks).contains(&Code::TooDeep));
    assert_eq!(codes(""), [Code::EmptyFile]);
    assert_eq!(codes(" \r\n\t# only a comment"), [Code::EmptyFile]);
    assert_eq!(codes(&" ".repeat(MAX_BYTES + 1)), [Code::FileTooLarge]);
    let binary: Vec<u8> = (0..=255).cycle().take(100_000).collect();
    let parsed = parse(&SourceFile::alone("a.obl", binary));
    assert_eq!(parsed.diagnostics[0].code, Code::NotText);
    let prose = codes(&"every line is prose\n".repeat(100_000));
    assert_eq!(prose, [Code::UnknownStatement]);
    let many = codes(&"claim x\n".repeat(1000));
    assert_eq!((many.len(), many.last()), (101, Some(&Code::TooManyErrors)));
}

#[test]
fn layout_tolerates_what_editors_do() {
    let text = "dossier \"T\"\nchain c\n    x\n      <= y  # why\n\nclaim d: 1 < 2\n";
    let plain = parse(&SourceFile::alone("a.obl", text));
    assert!(!plain.has_errors());
    for other in [
        format!("\u{feff}{text}"),
        text.replace('\n', "\r\n"),
        text.replace("    x", "\tx").replace("      <=", "\t\t<="),
        text.trim_end().to_string(),
        text.replace('\n', "  \n"),
    ] {
        let parsed = parse(&SourceFile::alone("a.obl", other.as_str()));
        assert!(!parsed.has_errors(), "{other:?} {:?}", parsed.diagnostics);
        assert_eq!(bare(&plain.value), bare(&parsed.value), "{other:?}");
    }
}

/// Reading must end without a panic, draw its messages, and print what it read.
fn survives(bytes: Vec<u8>) {
    let mut sources = Sources::new();
    let id = sources.add("a.obl", bytes);
    let file = sources.get(id).unwrap();
    let parsed = parse(file);
    let shown = render_all(&parsed.diagnostics, &sources);
    let raw = |c: char| c.is_control() && c != '\n' || ('\u{202a}'..='\u{202e}').contains(&c);
    assert!(!shown.contains(raw), "{shown:?}");
    let _printed = format(file.text(), &parsed.value);
    if !parsed.has_errors() {
        let once = format(file.text(), &parsed.value);
        let again = parse(&SourceFile::alone("a.obl", once.as_str()));
        assert_eq!(bare(&parsed.value), bare(&again.value), "{}", file.text());
        assert_eq!(format(&once, &again.value), once, "{}", file.text());
    }
}

fn corpus() -> Vec<Vec<u8>> {
    let folders = ["tests/cases/language/good", "tests/cases/language/broken"];
    folders.iter().flat_map(|folder| cases(folder)).map(|(_, bytes)| bytes).collect()
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 300, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn any_bytes_are_survived(bytes in prop::collection::vec(any::<u8>(), 0..400)) {
        survives(bytes);
    }

    #[test]
    fn any_text_is_survived(text in "(\\PC|[ -~\n\t\r\"#()\\[\\]^*/:<>=≤≥√∞π]){0,200}") {
        survives(text.into_bytes());
    }

    #[test]
    fn mutated_corpus_is_survived(
        pick in any::<prop::sample::Index>(),
        edits in prop::collection::vec(
            (any::<prop::sample::Index>(), 0_usize..12, "(\\PC|[ \n()\\[\\]:,\"#^!*=<]|claim|for x in|\u{202e}){0,4}"), 1..5),
    ) {
        let corpus = corpus();
        let mut bytes = corpus[pick.index(corpus.len())].clone();
        for (at, cut, text) in edits {
            let at = at.index(bytes.len() + 1);
            let end = (at + cut).min(bytes.len());
            bytes.splice(at..end, text.into_bytes());
        }
        survives(bytes);
    }
}

//! From a dossier's text to the plain form, and what it obliges one to show.
//!
//! Every file in `tests/cases/statement/good` is lowered without an error; its plain
//! form is recorded, the kernel reads it and must derive the same obligations. Every
//! file in `broken` is recorded with its messages.

use std::path::{Path, PathBuf};

use boundwright::diagnostic::render_all;
use boundwright::kernel::{obligation, theory};
use boundwright::language::lower::{Lowered, lower};
use boundwright::source::{Library, LibraryError, MemoryLibrary, Sources};
use boundwright::statement::{obligations, plain};

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/cases/statement")
}

/// The files of the cases, as a library.
struct Cases;

impl Library for Cases {
    fn fetch(&self, name: &str) -> Result<Vec<u8>, LibraryError> {
        std::fs::read(root().join(name)).map_err(|_| LibraryError::Missing)
    }
}

fn lowered(library: &dyn Library, name: &str) -> (Lowered, Sources) {
    let mut sources = Sources::new();
    let file = sources.load(library, name).unwrap_or_else(|e| panic!("{name}: {e}"));
    let lowered = lower(&mut sources, library, file);
    (lowered, sources)
}

fn files(folder: &str) -> Vec<String> {
    let mut names: Vec<String> = std::fs::read_dir(root().join(folder))
        .expect("the folder of cases")
        .map(|entry| entry.expect("an entry").file_name().to_string_lossy().into_owned())
        .filter(|name| name.ends_with(".obl"))
        .map(|name| format!("{folder}/{name}"))
        .collect();
    names.sort();
    assert!(!names.is_empty());
    names
}

/// The kernel's obligations and ours, as comparable lines.
fn compare(lowered: &Lowered, name: &str) {
    let text = plain(&lowered.theory);
    let read = theory::read(&text).unwrap_or_else(|e| panic!("{name}: {e:?}\n{text}"));
    let theirs = obligation::obligations(&read);
    let missing: Vec<&str> =
        lowered.theory.goals.iter().filter(|g| !g.missing.is_empty()).map(|g| &*g.name).collect();
    let refused: Vec<&str> = theirs.refused.iter().map(|(name, _)| &**name).collect();
    assert_eq!(
        refused,
        missing,
        "{name}: {:?}\n{text}",
        theirs.refused.iter().map(|(_, r)| r).collect::<Vec<_>>()
    );
    let theirs: Vec<String> =
        theirs.list.iter().map(|o| format!("{} {:?} {}", o.id, o.kind, o.sequent)).collect();
    let ours: Vec<String> =
        obligations(&lowered.theory).iter().map(|o| format!("{} {:?} {}", o.id, o.kind, o.sequent)).collect();
    assert_eq!(ours.join("\n"), theirs.join("\n"), "{name}");
}

#[test]
fn good_dossiers_become_the_plain_form_that_the_kernel_reads() {
    for name in files("good") {
        let (lowered, sources) = lowered(&Cases, &name);
        let told = render_all(&lowered.diagnostics, &sources);
        assert!(!lowered.has_errors(), "{name}\n{told}");
        compare(&lowered, &name);
        let list: Vec<String> =
            obligations(&lowered.theory).iter().map(|o| format!("{}: {}", o.id, o.sequent)).collect();
        let key = name.replace(['/', '.'], "_");
        insta::assert_snapshot!(key, format!("{told}{}\n{}", plain(&lowered.theory), list.join("\n")));
    }
}

#[test]
fn broken_dossiers_are_explained() {
    for name in files("broken") {
        let (lowered, sources) = lowered(&Cases, &name);
        assert!(lowered.has_errors(), "{name}");
        let key = name.replace(['/', '.'], "_");
        insta::assert_snapshot!(key, render_all(&lowered.diagnostics, &sources));
    }
}

fn check(text: &str) -> (Lowered, String) {
    let library = MemoryLibrary::new().with("a.obl", text);
    let (lowered, sources) = lowered(&library, "a.obl");
    let told = render_all(&lowered.diagnostics, &sources);
    (lowered, told)
}

#[test]
fn a_million_doublings_are_refused_quickly() {
    let mut text = String::from("parameter x : real in [0, 1]\ndefine d0 = x + x\n");
    for i in 1..60 {
        text += &format!("define d{i} = d{} + d{}\n", i - 1, i - 1);
    }
    text += "claim c: d59 <= 1\n";
    let (lowered, told) = check(&text);
    assert!(lowered.has_errors());
    assert!(told.contains("too-large"), "{told}");
}

#[test]
fn a_long_sum_is_refused_or_read_but_never_overflows() {
    let sum = vec!["x"; 20_000].join(" + ");
    let (lowered, told) = check(&format!("parameter x : real in [0, 1]\nclaim c: {sum} <= 1\n"));
    assert!(lowered.has_errors());
    assert!(told.contains("too-large"), "{}", &told[..told.len().min(2000)]);
    let sum = vec!["x"; 500].join(" + ");
    let (lowered, told) = check(&format!("parameter x : real in [0, 1]\nclaim c: {sum} <= 500\n"));
    assert!(!lowered.has_errors(), "{told}");
    compare(&lowered, "a.obl");
}

#[test]
fn a_hundred_links_take_no_time() {
    let mut text =
        String::from("parameter x : real in [0, 1]\nquantity q(t : real in [0, infinity)) : real\n");
    text += "assume a for t in [0, infinity): q(t) <= t\nchain c\n  q(x)\n  <= x [a]\n";
    for i in 1..400 {
        text += &format!("  <= x + {i} [c.{i}]\n");
    }
    let start = std::time::Instant::now();
    let (lowered, told) = check(&text);
    assert!(!lowered.has_errors(), "{told}");
    compare(&lowered, "a.obl");
    // Generous: the point is that nothing here is exponential or cubic.
    assert!(start.elapsed().as_secs() < 20);
}

/// Whatever is lowered without an error, the kernel reads as it was meant.
#[test]
fn mutated_dossiers_never_panic_and_never_disagree_with_the_kernel() {
    let mut state = 0x2545_f491_4f6c_dd1du64;
    let mut random = move |below: usize| {
        state ^= state << 13;
        state ^= state >> 7;
        state ^= state << 17;
        (state % below.max(1) as u64) as usize
    };
    let corpus: Vec<String> = files("good")
        .iter()
        .chain(&files("shared"))
        .map(|name| std::fs::read_to_string(root().join(name)).expect("a case"))
        .collect();
    let mut library = MemoryLibrary::new();
    for name in files("shared") {
        library = library.with(&name, std::fs::read(root().join(&name)).expect("a case"));
    }
    let words: Vec<&str> =
        corpus.iter().flat_map(|text| text.split_inclusive([' ', '\n', '(', ')', ','])).collect();
    let (mut sound, mut broken) = (0, 0);
    for round in 0..600 {
        let text = &corpus[round % corpus.len()];
        let mut parts: Vec<&str> = text.split_inclusive([' ', '\n', '(', ')', ',']).collect();
        for _ in 0..=random(2) {
            let at = random(parts.len());
            match random(4) {
                0 => drop(parts.remove(at)),
                1 => parts.insert(at, words[random(words.len())]),
                2 => parts[at] = words[random(words.len())],
                _ => {
                    let other = random(parts.len());
                    parts.swap(at, other);
                }
            }
        }
        let text: String = parts.concat();
        let library = library.clone().with("good/a.obl", text.as_str());
        let (lowered, sources) = lowered(&library, "good/a.obl");
        let told = render_all(&lowered.diagnostics, &sources);
        assert!(!told.is_empty() || !lowered.has_errors());
        if lowered.has_errors() {
            broken += 1;
        } else {
            sound += 1;
            compare(&lowered, &text);
        }
    }
    // Both kinds must occur, or the test tests nothing.
    assert!(sound > 30 && broken > 30, "{sound} sound, {broken} broken");
}

/// The deepest terms that lowering lets through are read by the kernel.
#[test]
fn the_kernel_reads_the_deepest_terms() {
    for shape in [
        "sqrt(#)",
        "1/(1 + #)",
        "x^(2*#)",
        "x^#",
        "-(-#)",
        "x - (x - #)",
        "2*(x + #)",
        "min(1, #)",
        "(1 + #)^2",
        "(2*#)^x",
        "-#",
        "#!",
        "sum(k = 0 .. 3, x*#)",
        "x*(x/#)",
    ] {
        let build = |levels: usize| {
            let mut text = String::from("parameter x : real in [1, 2]\ndefine d0 = x + 1\n");
            for i in 1..=levels {
                text += &format!(
                    "define d{i} = {}\n",
                    shape.replace('#', &format!("d{}", i - 1)).replace("k =", &format!("k{i} ="))
                );
            }
            text + &format!("claim c: d{levels} <= 1 + d{levels}\n")
        };
        let fits = |levels: usize| {
            let (lowered, told) = check(&build(levels));
            let errors = lowered.diagnostics.iter().filter(|d| d.is_error());
            let mut sort_errors_only =
                errors.filter(|d| d.code != boundwright::diagnostic::Code::BadArgument);
            (sort_errors_only.next().is_none(), lowered, told)
        };
        let (mut low, mut high) = (1, 400);
        while high - low > 1 {
            let middle = (low + high) / 2;
            if fits(middle).0 { low = middle } else { high = middle }
        }
        assert!(low > 20, "{shape} only {low} levels");
        let (_, lowered, told) = fits(low);
        if !lowered.has_errors() {
            compare(&lowered, &format!("{shape} {low}: {told}"));
        }
    }
}

/// Large terms and many reasons together.
#[test]
fn matching_stays_quick_on_large_terms() {
    let sum: Vec<String> = (1..=900).map(|i| format!("q({i}*x)")).collect();
    let text = format!(
        "parameter x : real in [1, 2]\nquantity q(t : real in [0, infinity)) : real\n\
         assume a for u in [0, infinity), v in [0, infinity): q(u) <= q(v) + u - v\n\
         assume b for u in [0, infinity): q(u) <= u*exp(u)*x\n\
         claim c: {} <= 10^6 [a, b]\n",
        sum.join(" + ")
    );
    let start = std::time::Instant::now();
    let (lowered, told) = check(&text);
    assert!(start.elapsed().as_secs() < 20);
    assert!(
        !lowered.has_errors() && told.contains("more than 24 instances"),
        "{}",
        &told[..told.len().min(1000)]
    );
    // The number of instances is bounded, and the kernel accepts them.
    assert!(lowered.theory.goals[0].uses.len() <= 48);
    compare(&lowered, "a.obl");
}

//! Bad input as a user meets it: a message that says where and what to do, the
//! right exit code, no breakdown, little time and little memory.

use std::fs;
use std::path::Path;
use std::process::Command;

use crate::command::{Outcome, project};

const HEAD: &str = "dossier \"Bad input\"\nparameter x : real in [0, 1]\n";

/// The command that reads the most of a dossier.
const READING: &str = if cfg!(feature = "mpfr") { "check" } else { "facts" };

/// Runs a command and sees to it that it ends well, whatever it says, within half a
/// minute of processor time and 4 GB.
fn ended(folder: &Path, arguments: &[&str]) -> Outcome {
    let output = Command::new("sh")
        .args([
            "-c",
            "ulimit -t 30; ulimit -v 4000000; exec \"$0\" \"$@\"",
            env!("CARGO_BIN_EXE_boundwright"),
        ])
        .args(arguments)
        .current_dir(folder)
        .env("NO_COLOR", "1")
        .output()
        .unwrap();
    let told = String::from_utf8(output.stderr).unwrap();
    let start = &told[..told.len().min(2000)];
    let code = output.status.code();
    assert!(code.is_some_and(|code| code <= 4), "{arguments:?}: {:?}, {start}", output.status);
    assert!(told.len() < 20_000, "{arguments:?}: too much is said");
    Outcome { code: code.unwrap(), out: String::from_utf8(output.stdout).unwrap(), err: told }
}

/// The dossier is refused; the message stands at `place` and has all `parts`.
fn refused(text: impl AsRef<[u8]>, place: &str, parts: &[&str]) {
    let folder = project(&[]);
    fs::write(folder.path().join("a.obl"), text).unwrap();
    for command in [READING, "facts"] {
        let outcome = ended(folder.path(), &[command, "a.obl"]);
        assert_eq!(outcome.code, 3, "{command}: {}", outcome.err);
        for part in parts.iter().chain(&[place]) {
            assert!(outcome.err.contains(part), "{command}: no `{part}` in\n{}", outcome.err);
        }
    }
}

#[test]
fn files_that_are_no_dossiers() {
    refused("", "a.obl:1:1", &["no statement", "begin with a title"]);
    refused("# only this\n\n", "a.obl:", &["no statement"]);
    let bytes: Vec<u8> = (0..20_000_u32).map(|i| (i.wrapping_mul(i) % 251) as u8 ^ 0x80).collect();
    refused(&bytes, "a.obl:1:1", &["not UTF-8"]);
    refused([b"dossier \"A\"\nclaim \xff".as_slice(), &[0xfe]].concat(), "a.obl:2:7", &["not UTF-8"]);
    refused("dossier \"A\"\nparameter x\u{0} : real in [0, 1]\n", "a.obl:2:", &["control"]);
    refused(format!("{HEAD}{}", "# filler line\n".repeat(400_000)), "a.obl", &["larger than 4 MB"]);
}

#[test]
fn texts_that_are_too_deep_or_too_long() {
    let nested = format!("{HEAD}claim top: {}x{} <= 1\n", "(".repeat(10_000), ")".repeat(10_000));
    refused(nested, "a.obl:3:", &["deeper than 200", "`define`"]);
    let powers = format!("{HEAD}claim top: x{} <= 1\n", "^2".repeat(10_000));
    refused(powers, "a.obl:3:", &["deeper than 200"]);
    let calls = format!("{HEAD}claim top: {}x{} <= 1\n", "exp(".repeat(10_000), ")".repeat(10_000));
    refused(calls, "a.obl:3:", &["deeper than 200"]);
    let sum = format!("{HEAD}claim top: x{} <= 1\n", " + 0*x".repeat(400_000));
    refused(sum, "a.obl:3:", &["too large"]);
    let digits = format!("{HEAD}claim top: x <= {}\n", "9".repeat(100_000));
    refused(digits, "a.obl:3:", &["4096"]);
    // Each definition doubles the one before: 2^60 summands, written in 60 lines.
    let mut doubling = format!("{HEAD}define d0 = x\n");
    for i in 1..60 {
        doubling.push_str(&format!("define d{i} = d{0} + d{0}\n", i - 1));
    }
    doubling.push_str("claim top: d59 <= 1\n");
    refused(doubling, "a.obl:", &["too large"]);
    // Every line is a mistake; the list of them ends.
    refused("claim : <= <= 2 x (\n".repeat(50_000), "a.obl:1:", &["more than 100 mistakes"]);
}

#[test]
fn files_that_use_what_they_must_not() {
    let body = "parameter x : real in [0, 1]\nclaim top: x <= 1\n";
    let using = |path: &str| format!("use \"{path}\" as p\n{body}");
    refused(using("/etc/passwd"), "a.obl:1:5", &["absolute", "relative to the file"]);
    refused(using("../../../../../etc/passwd"), "a.obl:1:5", &["leaves the project"]);
    refused(using("../.."), "a.obl:1:5", &["leaves the project"]);
    refused(using("missing.obl"), "a.obl:1:5", &["missing.obl"]);
    refused(using("a.obl"), "a.obl:1:5", &["circle"]);
    let folder =
        project(&[("a.obl", &using("b.obl")), ("b.obl", &using("c.obl")), ("c.obl", &using("a.obl"))]);
    let outcome = ended(folder.path(), &[READING, "a.obl"]);
    assert_eq!(outcome.code, 3);
    assert!(
        outcome.err.contains("c.obl:1:5")
            && outcome.err.contains("`a.obl` uses `b.obl` uses `c.obl` uses `a.obl`"),
        "{}",
        outcome.err
    );
    #[cfg(unix)]
    {
        // Nor through a link.
        let outside = tempfile::tempdir().unwrap();
        fs::write(outside.path().join("secret.obl"), body).unwrap();
        let folder = project(&[("a.obl", &using("link.obl"))]);
        std::os::unix::fs::symlink(outside.path().join("secret.obl"), folder.path().join("link.obl"))
            .unwrap();
        let outcome = ended(folder.path(), &[READING, "a.obl"]);
        assert_eq!(outcome.code, 3, "{}", outcome.err);
        assert!(outcome.err.contains("a.obl:1:5"), "{}", outcome.err);
    }
}

#[test]
fn mistakes_in_what_is_said() {
    let says = |lines: &str, place: &str, parts: &[&str]| refused(format!("{HEAD}{lines}\n"), place, parts);
    let quantity = "quantity weight(cutoff : real in (0, 1]) : real in [0, 1]\n";
    // An unknown name, with the nearest known one; none for a letter that resembles all others.
    says(
        &format!("{quantity}claim top: wieght(x) <= 1"),
        "a.obl:4:12",
        &["`wieght`", "perhaps `weight` is meant"],
    );
    says("claim top: expp(x) <= 3", "a.obl:3:12", &["perhaps `exp` is meant"]);
    says("claim top: x <= y", "a.obl:3:17", &["`y` is not declared", "declare it above"]);
    says("claim top: 2 x <= 2", "a.obl:3:13", &["`2*x`"]);
    says("chain top\n    x\n      <= 1\n      >= 0", "a.obl:6:7", &["`<=` and `>=`", "split it"]);
    says("constant K\nclaim top: x <= K", "a.obl:3:10", &["`K` has no value", "= value"]);
    says(
        "define f(t) = g(t)\ndefine g(t) = f(t)\nclaim top: f(x) <= 1",
        "a.obl:3:15",
        &["depend on each other"],
    );
    says(&format!("{quantity}claim top: weight(x, x) <= 1"), "a.obl:4:12", &["takes 1 argument, not 2"]);
    says(&format!("{quantity}claim top: weight <= 1"), "a.obl:4:12", &["takes 1 argument, not 0"]);
    says(
        &format!("{quantity}claim top: weight(2) <= 1"),
        "a.obl:4:19",
        &["`2` is outside the declared domain of `weight`", "(0, 1]"],
    );
    says(
        &format!("{quantity}define far = 2\ndefine w(t) = weight(far*t)\nclaim top: w(3) <= 1"),
        "a.obl:6:",
        &["`2*3` is outside", "(0, 1]"],
    );
    says("claim top: x <= 1  [loacl]", "a.obl:3:21", &["there is no fact `loacl`"]);
    says("assume local: x <= 1\nclaim top: x <= 1  [loacl]", "a.obl:4:21", &["perhaps `local` is meant"]);
}

#[cfg(feature = "mpfr")]
mod with_search {
    use super::*;

    fn checked(lines: &str) -> Outcome {
        let folder = project(&[("a.obl", &format!("{HEAD}{lines}\n"))]);
        ended(folder.path(), &["check", "a.obl"])
    }

    #[test]
    fn numbers_that_nothing_can_hold() {
        assert_eq!(checked("claim top: x <= 10^10^10^10").code, 0);
        assert_eq!(checked("claim top: 10^10^10^10 <= x").code, 1);
        let folder = project(&[]);
        for tower in
            ["10^10^10^10", "-10^10^10^10", "exp(exp(exp(exp(9))))", "1/10^10^10^10", "factorial(10^10)"]
        {
            assert_eq!(ended(folder.path(), &["enclose", tower]).code, 0, "{tower}");
        }
    }

    #[test]
    fn assumptions_that_exclude_each_other() {
        let outcome = checked("assume a: x >= 0.9\nassume b: x <= 0.1\nclaim top: x = 7  [a, b]");
        assert_eq!(outcome.code, 1);
        assert!(outcome.out.contains("vacuous"), "{}", outcome.out);
    }

    #[test]
    fn a_property_that_nobody_supplies() {
        let outcome = checked(
            "quantity mean : real in [0, infinity)\n\
             quantity tail(c : real in (0, infinity)) : real in [0, 1]\nproperty upper_tail(tail, mean)\n\
             lemma markov source \"Markov 1884\" for c in (0, infinity) requires upper_tail(tail, mean)\n    \
             : tail(c) <= mean/c\nclaim top: tail(2) <= x + mean/2  [markov(c = 2)]",
        );
        assert_eq!(outcome.code, 1);
        let told = "missing property upper_tail(tail, mean)";
        assert!(outcome.out.contains(told) && outcome.out.contains("a.obl:8"), "{}", outcome.out);
    }

    #[test]
    fn what_is_not_needed_is_a_warning() {
        let outcome = checked("parameter idle : real in [0, 1]\nclaim top: x <= 1");
        assert_eq!(outcome.code, 0);
        assert!(
            outcome.err.contains("a.obl:3:11") && outcome.err.contains("`idle` is not used"),
            "{}",
            outcome.err
        );
        let outcome = checked("assume a: x <= 1/2\nclaim top: x <= 0.6  [a, a]");
        assert_eq!(outcome.code, 0);
        assert!(outcome.err.contains("a.obl:4:26") && outcome.err.contains("named twice"), "{}", outcome.err);
    }

    #[test]
    fn a_reason_that_no_certificate_uses_is_a_warning() {
        let lines = "parameter y : real in [0, 1]\nassume bounded: x <= 1/2\nassume also: y <= 1/2\n\
                     lemma grows for t in [0, 1]: t <= t + 0.1\n";
        let told = |reasons: &str| {
            let outcome = checked(&format!("{lines}claim top: x + 0*y <= 0.6  {reasons}"));
            assert_eq!(outcome.code, 0, "{}{}", outcome.out, outcome.err);
            outcome.err.lines().filter(|line| line.starts_with("warning[unused-reason]")).count()
        };
        assert_eq!(told("[bounded]"), 0);
        assert_eq!(told("[bounded, also]"), 1);
        assert_eq!(told("[also, bounded]"), 1);
        assert_eq!(told("[bounded, grows(t = x), also]"), 2);
        let outcome = checked(&format!("{lines}claim top: x + 0*y <= 0.6  [also, bounded]"));
        assert!(
            outcome.err.contains("a.obl:7:29") && outcome.err.contains("holds without"),
            "{}",
            outcome.err
        );
        // A lemma that is needed needs the property it requires.
        let outcome = checked(
            "quantity mean : real in [0, 1]\nquantity tail(c : real in (0, infinity)) : real in [0, 1]\n\
             property upper_tail(tail, mean)\nassume is_tail: upper_tail(tail, mean)\n\
             lemma markov source \"Markov 1884\" for c in (0, infinity) requires upper_tail(tail, mean)\n    \
             : tail(c) <= mean/c\nclaim top: tail(4) <= x + mean/4 + 0.1  [markov(c = 4), is_tail]\n\
             claim all: tail(4) <= 1 + x  [markov(c = 4), is_tail]",
        );
        let warned = outcome.err.lines().filter(|line| line.starts_with("warning[unused-reason]")).count();
        assert_eq!((outcome.code, warned), (0, 2), "{}{}", outcome.out, outcome.err);
        assert!(!outcome.err.contains("a.top.1 holds"), "{}", outcome.err);
    }
}

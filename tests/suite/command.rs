//! The program as a user meets it: arguments, streams, files, exit codes.

use std::fs;
use std::io::Write;
use std::path::Path;
use std::process::{Command, Stdio};

use tempfile::TempDir;

pub struct Outcome {
    pub code: i32,
    pub out: String,
    pub err: String,
}

/// Runs the program in `folder` with `input` on standard input.
pub fn run(folder: &Path, arguments: &[&str], input: &[u8]) -> Outcome {
    run_to(folder, arguments, input, Stdio::piped())
}

pub fn run_to(folder: &Path, arguments: &[&str], input: &[u8], out: Stdio) -> Outcome {
    let mut child = Command::new(env!("CARGO_BIN_EXE_boundwright"))
        .args(arguments)
        .current_dir(folder)
        .env("NO_COLOR", "1")
        .stdin(Stdio::piped())
        .stdout(out)
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    // The program may end without reading.
    let _ = child.stdin.take().unwrap().write_all(input);
    let output = child.wait_with_output().unwrap();
    Outcome {
        code: output.status.code().unwrap_or(-1),
        out: String::from_utf8(output.stdout).unwrap(),
        err: String::from_utf8(output.stderr).unwrap(),
    }
}

/// A folder that is a project of its own.
pub fn project(files: &[(&str, &str)]) -> TempDir {
    let folder = tempfile::tempdir().unwrap();
    for (name, text) in [("boundwright.toml", "")].iter().chain(files) {
        let path = folder.path().join(name);
        fs::create_dir_all(path.parent().unwrap()).unwrap();
        fs::write(path, text).unwrap();
    }
    folder
}

const HOLDS: &str = "dossier \"Holds\"\nparameter x : real in [0, 1]\nclaim top: exp(x) <= 2.72\n";
const MISTAKE: &str = "dossier \"Mistake\"\nparameter x : real in [0, 1]\nclaim top: 2 x <= 2\n";
#[test]
fn usage_is_explained_and_has_its_own_code() {
    let folder = project(&[]);
    for wrong in [&[][..], &["chek"], &["check"], &["check", "a.obl", "--jobs", "0"], &["check", "--speed"]] {
        let outcome = run(folder.path(), wrong, b"");
        assert_eq!((outcome.code, outcome.out.as_str()), (3, ""), "{wrong:?}");
        assert!(outcome.err.contains("Usage") || outcome.err.contains("error"), "{wrong:?}: {}", outcome.err);
    }
    let help = run(folder.path(), &["--help"], b"");
    assert_eq!(help.code, 0);
    assert!(help.out.contains("Exit codes") && help.out.contains("130"), "{}", help.out);
    let version = run(folder.path(), &["--version"], b"");
    assert_eq!(version.out, format!("boundwright {}\n", env!("CARGO_PKG_VERSION")));
}

#[test]
fn a_mistake_in_a_dossier_is_shown_where_it_stands() {
    let folder = project(&[("a.obl", MISTAKE)]);
    for command in ["check", "facts", "format"] {
        if command == "check" && !cfg!(feature = "mpfr") {
            continue;
        }
        let outcome = run(folder.path(), &[command, "a.obl"], b"");
        assert_eq!(outcome.code, 3, "{command}: {}", outcome.err);
        assert!(
            outcome.err.contains("a.obl:3:") && outcome.err.contains("`*`"),
            "{command}: {}",
            outcome.err
        );
    }
    assert_eq!(fs::read_to_string(folder.path().join("a.obl")).unwrap(), MISTAKE, "nothing was changed");
}

#[test]
fn new_writes_once() {
    let folder = project(&[]);
    assert_eq!(run(folder.path(), &["new", "first.obl"], b"").code, 0);
    let text = fs::read_to_string(folder.path().join("first.obl")).unwrap();
    assert_eq!(run(folder.path(), &["new", "first.obl"], b"").code, 3);
    assert_eq!(run(folder.path(), &["new", "no/folder/first.obl"], b"").code, 4);
    assert_eq!(run(folder.path(), &["new", "-"], b"").out, text);
    assert_eq!(
        run(folder.path(), &["format", "--check", "first.obl"], b"").code,
        0,
        "it is in canonical layout"
    );
}

#[test]
fn formatting_is_in_place_and_whole() {
    let loose = "dossier   \"Loose\"\nparameter x:real in [0,1]\nclaim top : x<=1 # kept\n";
    let folder = project(&[("a.obl", loose), ("b.obl", HOLDS)]);
    let before = run(folder.path(), &["format", "--check", "."], b"");
    assert_eq!((before.code, before.out.contains("a.obl would change")), (1, true), "{}", before.out);
    assert_eq!(fs::read_to_string(folder.path().join("a.obl")).unwrap(), loose);
    assert_eq!(run(folder.path(), &["format", "."], b"").code, 0);
    let formatted = fs::read_to_string(folder.path().join("a.obl")).unwrap();
    assert!(formatted.contains("claim top: x <= 1") && formatted.contains("# kept"), "{formatted}");
    assert_eq!(run(folder.path(), &["format", "--check", "."], b"").code, 0);
    assert_eq!(run(folder.path(), &["format", "-"], loose.as_bytes()).out, formatted);
    let left = fs::read_dir(folder.path()).unwrap().count();
    assert_eq!(left, 3, "no file was left beside");
}

#[test]
fn facts_are_listed_with_their_hypotheses() {
    let folder = project(&[]);
    run(folder.path(), &["new", "first.obl"], b"");
    let facts = run(folder.path(), &["facts", "first.obl"], b"");
    assert_eq!(facts.code, 0, "{}", facts.err);
    for part in
        ["markov", "cited (any text on probability)", "c : real in (0, inf)", "local_mean", "cut_tail"]
    {
        assert!(facts.out.contains(part), "{part}: {}", facts.out);
    }
    let json = run(folder.path(), &["facts", "first.obl", "--format", "json"], b"").out;
    let json: serde_json::Value = serde_json::from_str(&json).unwrap();
    assert_eq!(json["schema"], "boundwright-facts/1");
    assert!(json["facts"].as_array().unwrap().iter().any(|fact| fact["standing"] == "proved"));
}

#[test]
fn what_cannot_be_read_or_written_is_the_environments_fault() {
    let folder = project(&[("a.obl", HOLDS)]);
    let missing = run(folder.path(), &["format", "missing.obl"], b"");
    assert_eq!((missing.code, missing.err.contains("missing.obl")), (4, true));
    assert_eq!(run(folder.path(), &["recheck", "missing.json"], b"").code, 4);
    assert_eq!(run(folder.path(), &["facts", "a.obl", "--output", "no/folder/x"], b"").code, 4);
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        let closed = folder.path().join("closed.obl");
        fs::write(&closed, HOLDS).unwrap();
        fs::set_permissions(&closed, fs::Permissions::from_mode(0o000)).unwrap();
        // Whoever may read everything cannot be shown an unreadable file.
        if fs::read(&closed).is_err() {
            assert_eq!(run(folder.path(), &["facts", "closed.obl"], b"").code, 4);
        }
    }
    if Path::new("/dev/full").exists() {
        let full = || Stdio::from(fs::OpenOptions::new().write(true).open("/dev/full").unwrap());
        for arguments in [&["facts", "a.obl"][..], &["format", "-"], &["new", "-"], &["--help"]] {
            let outcome = run_to(folder.path(), arguments, HOLDS.as_bytes(), full());
            assert_eq!(outcome.code, 4, "{arguments:?}: {}", outcome.err);
        }
        assert_eq!(run(folder.path(), &["facts", "a.obl", "--output", "/dev/full"], b"").code, 4);
    }
}

#[test]
fn a_reader_that_goes_away_is_no_error() {
    let folder = project(&[("a.obl", HOLDS)]);
    let mut child = Command::new(env!("CARGO_BIN_EXE_boundwright"))
        .args(["facts", "a.obl"])
        .current_dir(folder.path())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stdout.take());
    let output = child.wait_with_output().unwrap();
    assert_eq!(output.status.code(), Some(0));
    assert_eq!(String::from_utf8_lossy(&output.stderr), "");
}

#[test]
fn what_is_no_audit_is_wrong_input() {
    let folder = project(&[("a.json", "{\"schema\": \"other/1\"}"), ("b.json", "nothing")]);
    for file in ["a.json", "b.json"] {
        assert_eq!(run(folder.path(), &["recheck", file], b"").code, 3, "{file}");
    }
    assert_eq!(run(folder.path(), &["recheck", "-"], &[0xff, 0xfe]).code, 3);
}

#[cfg(not(feature = "mpfr"))]
#[test]
fn a_build_without_the_search_says_so() {
    let folder = project(&[("a.obl", HOLDS)]);
    for arguments in [&["check", "a.obl"][..], &["enclose", "exp(1)"]] {
        let outcome = run(folder.path(), arguments, b"");
        assert_eq!(outcome.code, 3);
        assert!(outcome.err.contains("lacks the search"), "{}", outcome.err);
    }
}

#[cfg(feature = "mpfr")]
mod with_search {
    use std::io::{BufRead, BufReader};

    use super::super::report::against_schema;
    use super::*;

    const FAILS: &str = "dossier \"Fails\"\nparameter x : real in [0, 1]\nclaim top: x <= 1/2\n";
    const VACUOUS: &str =
        "dossier \"Vacuous\"\nparameter x : real in [0, 1]\nassume far: x >= 2\nclaim top: x = 7  [far]\n";
    const CONDITIONAL: &str = "dossier \"Conditional\"\nparameter x : real in [0, 1]\nclaim low: x <= 1/2\n\
                           claim top: x <= 0.6  [low]\n";
    /// Two sides that agree everywhere in a way the search has no method for.
    const UNDECIDED: &str = "dossier \"Undecided\"\nquantity q(t : real in [0, 1]) : real in [0, 1]\n\
                         quantity r(t : real in [0, 1]) : real in [0, 1]\nparameter x : real in [0, 1]\n\
                         assume same for t in [0, 1]: q(t)^3 + q(t) = r(t)^3 + r(t)\n\
                         claim top: sin(q(x)) = sin(r(x))  [same]\n";

    fn audit(folder: &Path, arguments: &[&str]) -> (i32, serde_json::Value, String) {
        let outcome = run(folder, &[&["check", "--format", "json"], arguments].concat(), b"");
        assert_eq!(against_schema(&outcome.out), Vec::<String>::new(), "{}", outcome.out);
        (outcome.code, serde_json::from_str(&outcome.out).unwrap(), outcome.out)
    }

    #[test]
    fn every_verdict_has_its_code() {
        let folder = project(&[
            ("holds.obl", HOLDS),
            ("fails.obl", FAILS),
            ("vacuous.obl", VACUOUS),
            ("conditional.obl", CONDITIONAL),
            ("undecided.obl", UNDECIDED),
            ("mistake.obl", MISTAKE),
        ]);
        for (file, code, count) in [
            ("holds.obl", 0, "holds"),
            ("fails.obl", 1, "fails"),
            ("vacuous.obl", 1, "vacuous"),
            ("conditional.obl", 1, "conditional"),
            ("undecided.obl", 2, "undecided"),
        ] {
            let (found, audit, _) = audit(folder.path(), &[file]);
            assert_eq!(found, code, "{file}");
            assert_eq!(audit["summary"]["items"][count], 1, "{file}: {}", audit["summary"]);
        }
        // Over several files the worst counts: 4, 3, 1, 2, 0.
        let worst = |files: &[&str]| run(folder.path(), &[&["check"], files].concat(), b"").code;
        assert_eq!(worst(&["holds.obl", "undecided.obl"]), 2);
        assert_eq!(worst(&["undecided.obl", "fails.obl"]), 1);
        assert_eq!(worst(&["fails.obl", "mistake.obl", "holds.obl"]), 3);
        assert_eq!(worst(&["mistake.obl", "missing.obl"]), 4);
        assert_eq!(worst(&["."]), 3);
    }

    #[test]
    fn a_missing_property_fails_without_a_witness() {
        let text = "dossier \"Property\"\nquantity mean : real in [0, infinity)\n\
                    quantity tail(c : real in (0, infinity)) : real in [0, 1]\n\
                    property upper_tail(tail, mean)\n\
                    lemma markov source \"Markov 1884\" for c in (0, infinity) requires upper_tail(tail, mean)\n    \
                    : tail(c) <= mean/c\nclaim top: tail(2) <= mean/2  [markov(c = 2)]\n";
        let folder = project(&[("a.obl", text)]);
        let (code, audit, text) = audit(folder.path(), &["a.obl"]);
        let top = audit["obligations"].as_array().unwrap().iter().find(|one| one["id"] == "a.top.1").unwrap();
        assert_eq!((code, &top["verdict"], &top["witness"]), (1, &"fails".into(), &serde_json::Value::Null));
        assert!(top["stuck"]["reason"].as_str().unwrap().starts_with("missing property upper_tail"), "{top}");
        assert_eq!(run(folder.path(), &["recheck", "-"], text.as_bytes()).code, 1, "the kernel agrees");
    }

    #[test]
    fn standard_input_and_folders_are_read() {
        let folder = project(&[("b/holds.obl", HOLDS), ("b/two.obl", HOLDS), (".gitignore", "drafts/\n")]);
        fs::create_dir(folder.path().join("drafts")).unwrap();
        fs::write(folder.path().join("drafts/x.obl"), FAILS).unwrap();
        let (code, found, _) = audit(folder.path(), &["."]);
        let files: Vec<&str> =
            found["dossiers"].as_array().unwrap().iter().map(|one| one["file"].as_str().unwrap()).collect();
        assert_eq!((code, files), (0, vec!["b/holds.obl", "b/two.obl"]));
        assert_eq!(run(folder.path(), &["check", "-"], FAILS.as_bytes()).code, 1);
        let empty = project(&[]);
        assert_eq!(run(empty.path(), &["check", "."], b"").code, 3);
    }

    #[test]
    fn the_same_input_gives_the_same_bytes() {
        let folder = project(&[
            ("a.obl", CONDITIONAL),
            ("b.obl", UNDECIDED),
            ("c.obl", HOLDS),
            ("d.obl", FAILS),
            ("e.obl", VACUOUS),
        ]);
        run(folder.path(), &["new", "first.obl"], b"");
        let bytes = |jobs: &str| {
            let outcome = run(folder.path(), &["check", ".", "--format", "json", "--jobs", jobs], b"");
            (outcome.code, outcome.out, outcome.err)
        };
        let (_, _, one) = audit(folder.path(), &[".", "--jobs", "1"]);
        let first = bytes("1");
        assert_eq!(first.1, one, "the same twice");
        for jobs in ["2", "8", "8"] {
            assert!(bytes(jobs) == first, "with {jobs} threads");
        }
        let here = folder.path().to_string_lossy().into_owned();
        assert!(!one.contains(&here), "no path of the machine in an audit");
    }

    #[test]
    fn a_part_is_checked_with_what_it_rests_on() {
        let chain =
            "dossier \"Chain\"\nparameter x : real in [0, 1]\nchain two\n    x^2\n      <= 1\n      <= 2\n";
        let folder = project(&[("a.obl", CONDITIONAL), ("chain.obl", chain)]);
        let (code, found, _) = audit(folder.path(), &["a.obl", "--only", "low"]);
        assert_eq!((code, found["items"].as_array().unwrap().len()), (1, 1));
        let (code, found, text) = audit(folder.path(), &["a.obl", "--only", "a.top"]);
        assert_eq!(code, 1);
        assert_eq!(found["items"][0]["id"], "a.low", "it is what `top` rests on");
        assert_eq!(found["items"][1]["rests_on"]["unsettled"][0], "low.1 (fails)");
        assert_eq!(run(folder.path(), &["recheck", "-"], text.as_bytes()).code, 1, "the part stands alone");
        let (code, found, text) = audit(folder.path(), &["chain.obl", "--only", "two.2"]);
        assert_eq!((code, found["items"].as_array().unwrap().len()), (0, 0), "one link is no whole item");
        assert_eq!(found["obligations"].as_array().unwrap().len(), 1);
        assert_eq!(run(folder.path(), &["recheck", "-"], text.as_bytes()).code, 0);
        let unknown = run(folder.path(), &["check", "a.obl", "--only", "tpo"], b"");
        assert_eq!((unknown.code, unknown.err.contains("low, top")), (3, true), "{}", unknown.err);
    }

    #[test]
    fn the_argument_of_a_link_is_told_from_its_certificate() {
        let folder = project(&[("a.obl", HOLDS)]);
        let (code, found, text) = audit(folder.path(), &["a.obl", "--explain", "top.1"]);
        assert_eq!(code, 0);
        let obligations = found["obligations"].as_array().unwrap();
        let link = obligations.iter().find(|one| one["id"] == "a.top.1").unwrap();
        assert!(!link["argument"].as_array().unwrap().is_empty(), "{link}");
        assert_eq!(run(folder.path(), &["recheck", "-"], text.as_bytes()).code, 0);
        let told = run(folder.path(), &["check", "a.obl", "--explain", "a.top"], b"");
        assert!(told.out.contains("  argument "), "{}", told.out);
        let plain = run(folder.path(), &["check", "a.obl"], b"");
        assert!(!plain.out.contains("argument"), "{}", plain.out);
        assert_eq!(run(folder.path(), &["check", "a.obl", "--explain", "tpo"], b"").code, 3);
    }

    #[test]
    fn values_at_named_numbers() {
        let text = "dossier \"Values\"\nparameter x : real in (0, 1]\nquantity q : real in [0, 1]\n\
                    chain two\n    x^2\n      <= x\n      <= exp(x)\nclaim third: q <= 1\nnumbers half: x = 1/2\n";
        let folder = project(&[("a.obl", text)]);
        let (_, found, _) = audit(folder.path(), &["a.obl", "--at", "half"]);
        let terms = &found["values"][0]["terms"];
        assert_eq!(terms[0]["value"]["at_least"], "0.25");
        assert_eq!(terms[2]["term"], "<= exp(x)");
        // exp(1/2) = 1.6487212707001281468...
        assert_eq!(terms[2]["value"]["at_least"], "1.6487212");
        assert_eq!(terms[2]["value"]["at_most"], "1.6487213");
        assert!(found["values"][1]["terms"][0]["why_not"].as_str().unwrap().contains("quantity"));
        assert_eq!(run(folder.path(), &["check", "a.obl", "--at", "third"], b"").code, 3);
    }

    #[test]
    fn the_kernel_confirms_an_audit_and_refuses_an_altered_one() {
        let folder = project(&[("a.obl", HOLDS)]);
        let (_, _, text) = audit(folder.path(), &["a.obl"]);
        let recheck = |text: &str| run(folder.path(), &["recheck", "-"], text.as_bytes());
        let confirmed = recheck(&text);
        assert_eq!(confirmed.code, 0, "{}{}", confirmed.out, confirmed.err);
        assert!(confirmed.out.contains("exp(x) <= 68/25"), "claims are printed: {}", confirmed.out);
        // Every digit of the certificate, of the plain form and of the claim counts.
        let digits: Vec<usize> = text
            .match_indices(|c: char| c.is_ascii_digit())
            .map(|(at, _)| at)
            .filter(|at| {
                let line = text[..*at].rfind('\n').map_or(0, |start| start + 1);
                ["\"certificate\"", "\"plain\"", "\"claim\""]
                    .iter()
                    .any(|key| text[line..].trim_start().starts_with(key))
            })
            .collect();
        assert!(digits.len() > 5, "{text}");
        for at in digits {
            let other = if &text[at..=at] == "3" { "4" } else { "3" };
            let altered = format!("{}{other}{}", &text[..at], &text[at + 1..]);
            assert_eq!(recheck(&altered).code, 5, "byte {at}");
        }
        let forged = text.replace("\"verdict\": \"holds\"", "\"verdict\": \"fails\"");
        assert_eq!(recheck(&forged).code, 5);
    }

    #[test]
    fn a_forged_certificate_is_refused_whatever_its_fingerprint() {
        let folder = project(&[("a.obl", FAILS)]);
        let (_, mut audit, _) = audit(folder.path(), &["a.obl"]);
        let certificate = "certificate 1 for top.1 holds {identity};";
        audit["obligations"][0]["certificate"] = certificate.into();
        audit["obligations"][0]["fingerprint"] = boundwright::report::fingerprint(certificate).into();
        audit["obligations"][0]["verdict"] = "holds".into();
        audit["obligations"][0]["established"] = true.into();
        let outcome = run(folder.path(), &["recheck", "-"], audit.to_string().as_bytes());
        assert_eq!(outcome.code, 5, "{}", outcome.out);
    }

    #[test]
    fn results_go_where_they_are_sent() {
        let folder = project(&[("a.obl", HOLDS)]);
        let outcome =
            run(folder.path(), &["check", "a.obl", "--format", "json", "--output", "out.json"], b"");
        assert_eq!((outcome.code, outcome.out.as_str(), outcome.err.as_str()), (0, "", ""));
        assert_eq!(run(folder.path(), &["recheck", "out.json"], b"").code, 0);
    }

    #[test]
    fn enclosures_on_request() {
        let folder = project(&[]);
        let point = run(folder.path(), &["enclose", "exp(x)", "x=1", "--digits", "8"], b"");
        assert_eq!(point.out, "[2.718281828, 2.718281829]\ndefined everywhere on the box\n");
        let negative = run(folder.path(), &["enclose", "-x^2", "x=[-2, 1]"], b"");
        assert_eq!((negative.code, negative.out.lines().next()), (0, Some("[-4, 0]")), "{}", negative.err);
        for wrong in [
            &["enclose", "x"][..],
            &["enclose", "2 x", "x=1"],
            &["enclose", "x", "x"],
            &["enclose", "x", "x=[1,0]"],
        ] {
            assert_eq!(run(folder.path(), wrong, b"").code, 3, "{wrong:?}");
        }
        let requests = "{\"expr\": \"log(x)\", \"box\": {\"x\": [\"1\", \"inf\"]}}\n\n{\"expr\": \"x +\"}\n\
                        {\"expr\": \"sqrt(-1)\"}\n";
        let replies = run(folder.path(), &["enclose", "-"], requests.as_bytes());
        let lines: Vec<&str> = replies.out.lines().collect();
        assert_eq!(replies.code, 3, "one request was wrong");
        assert_eq!(lines.len(), 3);
        assert_eq!(lines[0], "{\"lo\":\"0\",\"hi\":\"inf\",\"defined\":\"everywhere\"}");
        assert!(lines[1].starts_with("{\"error\":"));
        assert_eq!(lines[2], "{\"lo\":null,\"hi\":null,\"defined\":\"nowhere\"}");
    }

    /// Interrupted at whatever moment, the file is the old one or the new one.
    #[cfg(unix)]
    #[test]
    fn an_interrupt_leaves_no_half_written_file() {
        let claims: String = (0..150).map(|i| format!("claim c{i}: x^2 + exp(x) <= {i} + 4\n")).collect();
        let text = format!("dossier \"Many\"\nparameter x : real in [0, 1]\n{claims}");
        let folder = project(&[("a.obl", &text), ("out.json", "what was here before\n")]);
        let path = folder.path().join("out.json");
        let mut interrupted = 0;
        for pause in [5, 40, 120, 300] {
            let mut child = Command::new(env!("CARGO_BIN_EXE_boundwright"))
                .args(["check", "a.obl", "--format", "json", "--output", "out.json"])
                .current_dir(folder.path())
                .stdin(Stdio::null())
                .stdout(Stdio::null())
                .stderr(Stdio::null())
                .spawn()
                .unwrap();
            std::thread::sleep(std::time::Duration::from_millis(pause));
            Command::new("kill").args(["-INT", &child.id().to_string()]).status().unwrap();
            let code = child.wait().unwrap().code();
            let found = fs::read_to_string(&path).unwrap();
            let whole = found == "what was here before\n" || against_schema(&found).is_empty();
            assert!(whole, "after {pause} ms: {found}");
            assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 3, "nothing is left beside");
            // Before the program listens for it, the signal simply ends it.
            assert!(matches!(code, Some(0 | 130) | None), "{code:?}");
            interrupted += usize::from(code == Some(130));
        }
        assert!(interrupted > 0, "no run lasted long enough");
    }

    #[cfg(unix)]
    #[test]
    fn an_interrupt_ends_the_program_with_its_code() {
        let folder = project(&[]);
        let mut child = Command::new(env!("CARGO_BIN_EXE_boundwright"))
            .args(["enclose", "-"])
            .current_dir(folder.path())
            .stdin(Stdio::piped())
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .unwrap();
        // An answered request shows that the program is at work.
        let mut input = child.stdin.take().unwrap();
        input.write_all(b"{\"expr\": \"1\"}\n").unwrap();
        let mut reply = String::new();
        BufReader::new(child.stdout.as_mut().unwrap()).read_line(&mut reply).unwrap();
        assert!(reply.contains("\"lo\":\"1\""), "{reply}");
        let sent = Command::new("kill").args(["-INT", &child.id().to_string()]).status().unwrap();
        assert!(sent.success());
        assert_eq!(child.wait().unwrap().code(), Some(130));
        drop(input);
    }
}

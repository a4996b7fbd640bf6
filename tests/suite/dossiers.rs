//! The dossiers of the example collaboration in `obligations/`, the shelf in
//! `shared/`, and wrong variants under `tests/cases/dossiers/wrong/`.

use std::path::{Path, PathBuf};

use boundwright::diagnostic::render_all;
use boundwright::kernel::audit::Docket;
use boundwright::language::lower::{Lowered, lower};
use boundwright::source::{Library, LibraryError, Sources};
use boundwright::statement::plain;

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

/// The project as a library.
struct Project;

impl Library for Project {
    fn fetch(&self, name: &str) -> Result<Vec<u8>, LibraryError> {
        std::fs::read(root().join(name)).map_err(|_| LibraryError::Missing)
    }
}

fn files(folder: &str) -> Vec<String> {
    let found = std::fs::read_dir(root().join(folder)).expect("the folder");
    let paths: Vec<PathBuf> = found.map(|entry| entry.expect("an entry").path()).collect();
    let mut names: Vec<String> = paths
        .iter()
        .filter(|path| path.extension().is_some_and(|e| e == "obl"))
        .filter_map(|path| path.file_name())
        .map(|name| format!("{folder}/{}", name.to_string_lossy()))
        .collect();
    names.sort();
    assert!(!names.is_empty(), "{folder} is empty");
    names
}

fn lowered(name: &str) -> (Lowered, String) {
    let mut sources = Sources::new();
    let file = sources.load(&Project, name).unwrap_or_else(|e| panic!("{name}: {e}"));
    let lowered = lower(&mut sources, &Project, file);
    let told = render_all(&lowered.diagnostics, &sources);
    (lowered, told)
}

/// The plain forms of dossiers and shelf.
pub fn plain_forms() -> Vec<String> {
    let names = [files("obligations"), files("shared"), files("tests/cases/statement/good")].concat();
    names.iter().map(|name| plain(&lowered(name).0.theory)).collect()
}

#[test]
fn dossiers_and_shelf_are_read_without_remarks_and_the_kernel_refuses_nothing() {
    for name in files("obligations").iter().chain(&files("shared")) {
        let (lowered, told) = lowered(name);
        assert!(told.is_empty(), "{name}\n{told}");
        let docket = Docket::open(&plain(&lowered.theory)).unwrap_or_else(|e| panic!("{name}: {e}"));
        assert!(docket.refused().is_empty(), "{name}: {:?}", docket.refused());
    }
}

#[cfg(feature = "mpfr")]
pub use verdicts::certificates;

#[cfg(feature = "mpfr")]
mod verdicts {
    use super::{Project, files, lowered};
    use boundwright::kernel::audit::{Docket, Verdict};
    use boundwright::language::lower::Lowered;
    use boundwright::search::{Effort, Outcome, Referee, Task, decide};
    use boundwright::source::Library;
    use boundwright::statement::{Obligation, Signature, obligations, plain};
    use rayon::prelude::*;

    /// The verdict on each obligation of a dossier, and on its goals.
    struct Judged {
        docket: Docket,
        verdicts: Vec<Verdict>,
    }

    /// Little, for the hundreds of obligations on record: what needs more is tried by hand.
    const LITTLE: Effort = Effort(200_000);

    fn judge(lowered: &Lowered, effort: Effort) -> Judged {
        let docket = Docket::open(&plain(&lowered.theory)).expect("the kernel reads the plain form");
        let ours = obligations(&lowered.theory);
        // As much room for deep terms as the program gives its own threads.
        let pool = rayon::ThreadPoolBuilder::new().stack_size(256 << 20).build().expect("threads");
        let verdicts = pool.install(|| {
            (0..docket.obligations().len())
                .into_par_iter()
                .map(|position| {
                    let id = &docket.obligations()[position].id;
                    let obligation = ours.iter().find(|o| o.id == *id).expect("the same obligations");
                    let found = decided(lowered, &docket, position, obligation, effort);
                    found.map_or(Verdict::Undecided, |(_, verdict)| verdict)
                })
                .collect()
        });
        Judged { docket, verdicts }
    }

    /// A certificate that the kernel accepts, and its verdict.
    fn decided(
        lowered: &Lowered,
        docket: &Docket,
        position: usize,
        obligation: &Obligation,
        effort: Effort,
    ) -> Option<(String, Verdict)> {
        let theory = &lowered.theory;
        let stands_for = |name: &str| {
            obligation.id.strip_prefix(name).is_some_and(|rest| rest.is_empty() || rest.starts_with('.'))
        };
        let goal = theory.goals.iter().filter(|g| stands_for(&g.name)).max_by_key(|g| g.name.len());
        let fact = theory.facts.iter().find(|f| stands_for(&f.name));
        let signatures: Vec<Signature> = (goal.iter().flat_map(|g| &g.context.schema))
            .chain(fact.iter().flat_map(|f| &f.context.schema))
            .chain(theory.quantities.iter().map(|q| &q.signature))
            .cloned()
            .collect();
        let (uses, cases) = goal.map_or((&[][..], &[][..]), |g| (&g.uses[..], &g.cases[..]));
        let examine = |sequent: &str, step: &str| {
            docket.examine(position, sequent, step).map_err(|refusal| refusal.to_string())
        };
        let (signatures, facts, referee) = (&signatures[..], &theory.facts[..], Referee(&examine));
        for caution in 0..3 {
            let task = Task { obligation, signatures, facts, uses, cases, caution, referee };
            let decision = decide(&task, effort);
            let certificate = match &decision.outcome {
                Outcome::Holds { certificate, .. } | Outcome::Vacuous { certificate } => certificate,
                Outcome::Fails(witness) => &witness.certificate,
                Outcome::Undecided(_) => break,
            };
            let decided = docket.decide(position, &[certificate]);
            if decided.rejected.is_empty() {
                return Some((certificate.to_string(), decided.verdict));
            }
        }
        None
    }

    /// Certificates for a few dossiers, of steps that hold and of steps that fail.
    pub fn certificates() -> Vec<String> {
        let mut list = Vec::new();
        for name in files("grammar/examples").iter().chain(&files("tests/cases/dossiers/wrong")[..2]) {
            let (lowered, _) = lowered(name);
            let docket = Docket::open(&plain(&lowered.theory)).expect("the kernel reads the plain form");
            let ours = obligations(&lowered.theory);
            for (position, here) in docket.obligations().iter().enumerate() {
                let obligation = ours.iter().find(|o| o.id == here.id).expect("the same obligations");
                list.extend(decided(&lowered, &docket, position, obligation, LITTLE).map(|(text, _)| text));
            }
        }
        list
    }

    fn word(verdict: &Verdict) -> &'static str {
        match verdict {
            Verdict::Holds => "holds",
            Verdict::Fails(_) => "fails",
            Verdict::Vacuous => "vacuous",
            Verdict::Undecided => "undecided",
        }
    }

    #[test]
    fn verdicts_on_the_dossiers_are_those_on_record() {
        for name in files("obligations") {
            let (lowered, told) = lowered(&name);
            assert!(told.is_empty(), "{name}\n{told}");
            let judged = judge(&lowered, LITTLE);
            let mut lines: Vec<String> = Vec::new();
            for (obligation, verdict) in judged.docket.obligations().iter().zip(&judged.verdicts) {
                assert!(!matches!(verdict, Verdict::Fails(_)), "{name} {}: {verdict:?}", obligation.id);
                lines.push(format!("{} {}", obligation.id, word(verdict)));
            }
            for goal in judged.docket.conclude(&judged.verdicts).1 {
                lines.push(format!(
                    "{} {}",
                    goal.name,
                    if goal.established { "established" } else { "not established" }
                ));
            }
            insta::assert_snapshot!(name.replace(['/', '.'], "_"), lines.join("\n"));
        }
    }

    /// The first line of each file says `# expect: fails ID`, or `# expect: missing
    /// GOAL` where a property is missing.
    #[test]
    fn wrong_variants_give_what_they_expect() {
        for name in files("tests/cases/dossiers/wrong") {
            let text = Project.fetch(&name).expect("the file");
            let text = String::from_utf8(text).expect("UTF-8");
            let expected = text.lines().next().and_then(|l| l.strip_prefix("# expect: "));
            let (kind, id) = expected.and_then(|e| e.split_once(' ')).expect("a first line of comment");
            let (lowered, told) = lowered(&name);
            assert!(told.is_empty() || kind == "missing", "{name}\n{told}");
            assert!(!lowered.has_errors(), "{name}\n{told}");
            let judged = judge(&lowered, Effort::default());
            match kind {
                "missing" => {
                    let why = judged.docket.refused().get(id).map(ToString::to_string);
                    let why = why.unwrap_or_else(|| panic!("{name}: {id} is not refused"));
                    assert!(why.contains("missing property"), "{name}: {why}");
                }
                "fails" => {
                    let position = judged.docket.obligations().iter().position(|o| o.id == id);
                    let verdict = &judged.verdicts[position.unwrap_or_else(|| panic!("{name}: no {id}"))];
                    assert!(matches!(verdict, Verdict::Fails(_)), "{name} {id}: {verdict:?}");
                }
                _ => panic!("{name}: unknown expectation {kind}"),
            }
            let (_, goals) = judged.docket.conclude(&judged.verdicts);
            assert!(goals.iter().any(|goal| !goal.established), "{name} is established");
        }
    }
}

//! Failures and doubts about statements with quantities: a failure needs a meaning
//! for every quantity under which all named facts are proved; values at the
//! arguments in sight are not enough.

use boundwright::kernel::audit::{Docket, Verdict};
use boundwright::language::lower::lower;
use boundwright::search::{Decision, Effort, Outcome, Referee, Task, decide};
use boundwright::source::{Library, LibraryError, Sources};
use boundwright::statement::{Signature, obligations, plain};

/// A library of one dossier.
struct One<'a>(&'a str);

impl Library for One<'_> {
    fn fetch(&self, _: &str) -> Result<Vec<u8>, LibraryError> {
        Ok(self.0.as_bytes().to_vec())
    }
}

/// What search and kernel say about one obligation, and the kernel's inhabitant.
fn judge(dossier: &str, id: &str) -> (Verdict, Option<String>, Decision) {
    let mut sources = Sources::new();
    let text = format!("dossier \"Test\"\n{dossier}");
    let library = One(&text);
    let file = sources.load(&library, "test.obl").expect("the file");
    let lowered = lower(&mut sources, &library, file);
    assert!(!lowered.has_errors(), "{dossier}");
    let theory = &lowered.theory;
    let docket = Docket::open(&plain(theory)).expect("the kernel reads the plain form");
    let position = docket.obligations().iter().position(|o| o.id == id).expect("the obligation");
    let ours = obligations(theory);
    let obligation = ours.iter().find(|o| o.id == id).expect("the obligation");
    let signatures: Vec<Signature> = theory.quantities.iter().map(|q| q.signature.clone()).collect();
    let goal = obligation.goal.as_ref().and_then(|name| theory.goal(name));
    let uses = goal.map_or(&[][..], |g| &g.uses[..]);
    let examine = |sequent: &str, step: &str| {
        docket.examine(position, sequent, step).map_err(|refusal| refusal.to_string())
    };
    let (signatures, facts, referee) = (&signatures[..], &theory.facts[..], Referee(&examine));
    let task = Task { obligation, signatures, facts, uses, cases: &[], caution: 0, referee };
    let decision = decide(&task, Effort(400_000));
    let certificate = match &decision.outcome {
        Outcome::Holds { certificate, .. } | Outcome::Vacuous { certificate } => Some(certificate.as_str()),
        Outcome::Fails(witness) => Some(witness.certificate.as_str()),
        Outcome::Undecided(_) => None,
    };
    let inhabitant = decision.inhabitant.as_ref().map(|w| w.certificate.as_str());
    let texts: Vec<&str> = certificate.into_iter().chain(inhabitant).collect();
    let ruling = docket.decide(position, &texts);
    assert!(ruling.rejected.is_empty(), "{texts:?}: {:?}", ruling.rejected);
    (ruling.verdict, ruling.inhabitant, decision)
}

fn fails(dossier: &str, id: &str) -> String {
    match judge(dossier, id) {
        (Verdict::Fails(how), _, _) => how,
        (other, _, decision) => panic!("{dossier}\n{other:?}\n{:?}\n{}", decision.outcome, decision.diary),
    }
}

const ROTORS: &str = "\
parameter mu : real in (0, infinity)
quantity mean : real in [0, infinity)
quantity weight(cutoff : real in (0, infinity)) : real in [0, 1]
quantity norm(cutoff : real in [1, infinity)) : real in [0, infinity)
assume local: mean <= mu
assume growth for k in [1, infinity): norm(k) <= 3*k^2
assume markov for k in (0, infinity): weight(k) <= mean/k
";

#[test]
fn a_number_that_is_only_bounded_may_be_the_bound() {
    let how = fails(&format!("{ROTORS}claim half: mean <= mu/2 [local]\n"), "half.1");
    assert!(how.contains("mean"), "{how}");
    fails(&format!("{ROTORS}claim hair: mean <= mu - mu/10^9 [local]\n"), "hair.1");
}

#[test]
fn a_function_may_be_its_bound() {
    fails(&format!("{ROTORS}claim small: norm(2) <= 11 [growth(k = 2)]\n"), "small.1");
    fails(
        &format!("{ROTORS}claim low: norm(mu + 1) <= 3*(mu + 1)^2 - 1/10^6 [growth(k = mu + 1)]\n"),
        "low.1",
    );
}

#[test]
fn a_function_without_facts_may_be_constant() {
    fails(&format!("{ROTORS}claim rare: weight(3) <= 999/1000\n"), "rare.1");
    fails(&format!("{ROTORS}claim two: weight(3) + norm(1) <= 10^6\n"), "two.1");
}

#[test]
fn an_equation_gives_the_meaning() {
    let dossier = "quantity q(k : real in [0, infinity)) : real in [0, infinity)
quantity a : real in [0, infinity)
assume total: a = 3
assume exact for k in [0, infinity): q(k) = k^2 + a
claim c: q(2) <= 6 [exact(k = 2), total]
";
    fails(dossier, "c.1");
}

#[test]
fn a_side_may_be_undefined() {
    let how = fails(&format!("{ROTORS}claim ratio: mu/mean >= 1 [local]\n"), "ratio.1.d1");
    assert!(how.contains("mean = 0") || how.contains("mean() = 0"), "{how}");
}

#[test]
fn equal_arguments_have_equal_values() {
    // False if the two applications could differ; true in fact.
    let dossier =
        format!("{ROTORS}claim same for a in [1, 2], b in [1, 2] given a = b: norm(a) <= norm(b)\n");
    let (verdict, _, _) = judge(&dossier, "same.1");
    assert!(!matches!(verdict, Verdict::Fails(_)), "{verdict:?}");
}

#[test]
fn a_fact_about_all_arguments_excludes_values_in_sight() {
    // norm(1) >= 5 contradicts norm(k) <= 3*k^2 at k = 1, which the link does not see.
    let dossier = format!("{ROTORS}assume low: norm(1) >= 5\nclaim c: norm(2) <= 1/2 [growth(k = 2), low]\n");
    let (verdict, inhabitant, _) = judge(&dossier, "c.1");
    assert_eq!(verdict, Verdict::Undecided);
    assert_eq!(inhabitant, None);
}

#[test]
fn suppositions_with_quantities_are_inhabited() {
    let dossier = format!("{ROTORS}claim fine: mean <= 2*mu [local]\n");
    let (verdict, inhabitant, _) = judge(&dossier, "fine.1");
    assert_eq!(verdict, Verdict::Holds);
    assert!(inhabitant.is_some());
}

#[test]
fn contradictory_suppositions_are_vacuous() {
    let facts = "quantity q : real in [0, infinity)\nassume low: q >= 2\nassume high: q <= 1\n";
    assert_eq!(judge(&format!("{facts}claim c: q >= 5 [low, high]\n"), "c.1").0, Verdict::Vacuous);
    for given in ["x^2 + y^2 <= -1", "sin(x) >= 2", "x*y >= 10, x <= 3, y <= 3", "exp(x) < 1 + x"] {
        let dossier = format!("claim c for x in [0, 5], y in [0, 5] given {given}: x + y <= 1\n");
        let (verdict, _, decision) = judge(&dossier, "c.1");
        assert_eq!(verdict, Verdict::Vacuous, "{given}\n{}", decision.diary);
    }
}

#[test]
fn a_doubt_names_the_values() {
    let dossier = format!("{ROTORS}assume low: norm(1) >= 5\nclaim c: norm(2) <= 1/2 [growth(k = 2), low]\n");
    let Outcome::Undecided(told) = judge(&dossier, "c.1").2.outcome else { panic!("decided") };
    let hint = told.hint.expect("a hint");
    assert!(hint.contains("norm(2) ="), "{hint}");
}

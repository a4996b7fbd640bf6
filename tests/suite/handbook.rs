//! Published inequalities, their false neighbours, and traps: claims that hold
//! only if a condition of some rule is forgotten. Each entry names its source. The
//! whole file is measured by the example `handbook`; here runs the fast part.

use boundwright::search::Effort;

use crate::entry::{Entry, Judged, Verdict, judge, read};

/// Judges the chosen entries; a wrong verdict or a rejected certificate is a failure.
fn judged(file: &str, effort: u64, wanted: impl Fn(&Entry) -> bool) -> Vec<(Entry, Judged)> {
    let path = format!("{}/tests/cases/handbook/{file}", env!("CARGO_MANIFEST_DIR"));
    let text = std::fs::read_to_string(&path).unwrap_or_else(|e| panic!("{path}: {e}"));
    let entries = read(&text).unwrap_or_else(|e| panic!("{path}: {e}"));
    let mut all = Vec::new();
    for entry in entries.into_iter().filter(|e| wanted(e)) {
        let found = judge(&entry, Effort(effort));
        assert!(found.rejected.is_empty(), "{}: {:?}", entry.id, found.rejected);
        assert!(
            found.verdict == entry.expected || found.verdict == Verdict::Undecided,
            "{}: {} instead of {}",
            entry.id,
            found.verdict.name(),
            entry.expected.name()
        );
        all.push((entry, found));
    }
    assert!(!all.is_empty());
    all
}

fn undecided(all: &[(Entry, Judged)]) -> Vec<&str> {
    all.iter().filter(|(_, j)| j.verdict == Verdict::Undecided).map(|(e, _)| e.id.as_str()).collect()
}

#[test]
fn easy_entries_are_decided() {
    let all = judged("inequalities.json", 200_000, |e| e.tags.iter().any(|t| t == "easy"));
    assert_eq!(undecided(&all), Vec::<&str>::new());
}

#[test]
fn false_neighbours_fall_at_an_exact_point() {
    let all = judged("inequalities.json", 300_000, |e| e.expected == Verdict::Fails && e.id.as_str() < "e");
    // Infinite series have no enclosure yet.
    assert_eq!(undecided(&all), ["bessel-i0-gauss-mut"]);
}

#[test]
fn polynomial_inequalities_and_their_neighbours() {
    let all = judged("polynomials.json", 300_000, |_| true);
    let open = ["triangle-1983", "geometric-fractions", "cyclic-order"];
    let unexpected: Vec<&str> = undecided(&all).into_iter().filter(|id| !open.contains(id)).collect();
    assert_eq!(unexpected, Vec::<&str>::new());
}

#[test]
fn vacuous_entries_are_seen() {
    let all = judged("inequalities.json", 60_000, |e| e.expected == Verdict::Vacuous);
    assert_eq!(undecided(&all), Vec::<&str>::new());
}

#[test]
fn traps_are_not_fallen_into() {
    let all = judged("traps.json", 400_000, |_| true);
    let unexpected: Vec<&str> = undecided(&all).into_iter().filter(|id| !OPEN_TRAPS.contains(id)).collect();
    assert_eq!(unexpected, Vec::<&str>::new());
}

/// Cases of abs, min and max, ranges of functions, and the kernel's normal form of
/// logarithms and roots; each beside a variant that is false.
#[test]
fn one_variable_at_a_time() {
    let all = judged("lines.json", 1_000_000, |_| true);
    assert_eq!(undecided(&all), Vec::<&str>::new());
}

#[test]
fn integers_go_on_in_steps() {
    let all = judged("integers.json", 2_000_000, |e| e.expected == Verdict::Holds);
    assert_eq!(undecided(&all), Vec::<&str>::new());
}

#[test]
fn false_neighbours_do_not_go_on_in_steps() {
    judged("integers.json", 200_000, |e| e.expected == Verdict::Fails);
}

/// Traps that may stay undecided at little effort: an infinite series, and true
/// claims or far points that need more than sampling.
const OPEN_TRAPS: [&str; 3] = ["trap-divergent", "trap-descend", "trap-generalised"];

#[test]
fn touching_on_curves_in_several_variables() {
    let all = judged("several.json", Effort::default().0, |e| !OPEN_CURVES.contains(&e.id.as_str()));
    assert_eq!(undecided(&all), Vec::<&str>::new());
}

/// True claims that no method reaches yet: exponents that are quotients, an arch over a
/// mean, squares of transcendental terms.
const OPEN_CURVES: [&str; 4] = ["young", "tangent-convex", "kl-binary-pinsker", "hoeffding-mean-free"];

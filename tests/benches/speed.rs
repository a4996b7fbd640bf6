//! Speed: `cargo bench`, or `cargo bench -- NAME` for a part.
//!
//! Enclosures of every function, tapes over boxes, the search against the kernel on the
//! same statements, and a dossier of a hundred links from a cold start.

use std::process::Command;

use boundwright::enclosure::{BigInterval, Bits, Definedness, Enclosure, Function, Interval};
use boundwright::expression::tape::{Jets, Order, Tape};
use boundwright::expression::{Name, Term};
use boundwright::kernel::audit::{Docket, Verdict};
use boundwright::language::lower::{Lowered, lower};
use boundwright::search::{Effort, Outcome, Referee, Task, decide};
use boundwright::source::{Library, LibraryError, Sources};
use boundwright::statement::{Obligation, obligations, plain};
use divan::counter::ItemsCount;
use divan::{Bencher, black_box};

fn main() {
    divan::main();
}

const BOXES: usize = 256;

/// Boxes inside [1, 3/2], where every function of one argument is defined or,
/// after a shift, becomes so.
fn boxes(shift: f64) -> Vec<Interval> {
    let at = |i: usize| 1.0 + shift + 0.5 * i as f64 / BOXES as f64;
    (0..BOXES).filter_map(|i| Interval::new(at(i), at(i + 1))).collect()
}

/// The functions of one real argument.
fn functions() -> Vec<&'static str> {
    let several =
        [Function::Min, Function::Max, Function::Binomial, Function::Chebyshev, Function::Factorial];
    Function::ALL.iter().filter(|f| !several.contains(f)).map(|f| f.name()).collect()
}

fn argument(name: &str) -> Vec<Interval> {
    boxes(if ["asin", "acos", "atanh"].contains(&name) { -1.0 } else { 0.0 })
}

#[divan::bench(args = functions())]
fn enclosure_f64(bencher: Bencher, name: &str) {
    let f = Function::from_name(name).expect("a function");
    let ranges = argument(name);
    bencher.counter(ItemsCount::new(ranges.len())).bench_local(|| {
        let mut defined = Definedness::Continuous;
        for x in &ranges {
            black_box(Enclosure::apply(f, std::slice::from_ref(x), &mut defined));
        }
    });
}

#[divan::bench(args = functions())]
fn enclosure_128_bits(bencher: Bencher, name: &str) {
    let f = Function::from_name(name).expect("a function");
    let ranges: Vec<BigInterval> =
        argument(name).iter().map(|x| BigInterval::from_interval(x, Bits::new(128))).collect();
    bencher.counter(ItemsCount::new(ranges.len())).bench_local(|| {
        let mut defined = Definedness::Continuous;
        for x in &ranges {
            black_box(Enclosure::apply(f, std::slice::from_ref(x), &mut defined));
        }
    });
}

/// A polynomial (Motzkin), an exponential one, and roots with exponentials.
const TERMS: [&str; 3] = [
    "x^4*y^2 + x^2*y^4 - 3*x^2*y^2 + 1",
    "exp(x*y) - x*log(y) - sin(x)*cos(y)",
    "1/(1 + sqrt(x/y)) - exp(-sqrt(x/y))",
];

/// Values (or values and slopes) of a term, in boxes a second.
fn tape(bencher: Bencher, term: &str, order: Order) {
    let claim = format!("{term} >= 0");
    let dossier = Dossier::read(&[("x", "[1/2, 2]"), ("y", "[1/2, 2]")], &claim);
    let goal = &dossier.obligations[dossier.link()].sequent;
    let names: Vec<Name> = goal.variables.iter().map(|d| d.name.clone()).collect();
    let relation = goal.relation().expect("a link has a relation");
    let term: Term = relation.difference();
    let tape: Tape<f64> = Tape::new(&[term], &names, goal, ()).expect("the term has enclosures");
    let ranges: Vec<Vec<Interval>> =
        boxes(0.0).into_iter().zip(boxes(0.25)).map(|(x, y)| vec![x, y]).collect();
    let mut jets = Jets::default();
    bencher.counter(ItemsCount::new(ranges.len())).bench_local(|| {
        for at in &ranges {
            tape.run(at, order, &mut jets);
            black_box(tape.value(0, &jets));
        }
    });
}

#[divan::bench(args = TERMS)]
fn boxes_by_value(bencher: Bencher, term: &str) {
    tape(bencher, term, Order::Value);
}

#[divan::bench(args = TERMS)]
fn boxes_by_slope(bencher: Bencher, term: &str) {
    tape(bencher, term, Order::Slope);
}

/// Nothing but the one text.
struct Nowhere;

impl Library for Nowhere {
    fn fetch(&self, _: &str) -> Result<Vec<u8>, LibraryError> {
        Err(LibraryError::Missing)
    }
}

/// One claim, ready for search and kernel.
struct Dossier {
    lowered: Lowered,
    docket: Docket,
    obligations: Vec<Obligation>,
}

impl Dossier {
    fn read(variables: &[(&str, &str)], claim: &str) -> Dossier {
        let mut text = String::from("dossier \"Speed\"\n");
        for (name, range) in variables {
            text.push_str(&format!("parameter {name} : real in {range}\n"));
        }
        text.push_str(&format!("claim top: {claim}\n"));
        let mut sources = Sources::new();
        let file = sources.add("speed.obl", text.as_str());
        let lowered = lower(&mut sources, &Nowhere, file);
        assert!(!lowered.has_errors(), "{text}\n{:?}", lowered.diagnostics);
        let docket = Docket::open(&plain(&lowered.theory)).expect("the kernel reads it");
        let obligations = obligations(&lowered.theory);
        Dossier { lowered, docket, obligations }
    }

    fn link(&self) -> usize {
        self.obligations.iter().position(|one| one.id == "top.1").expect("the claim is an obligation")
    }

    fn certificate(&self) -> String {
        let position = self.link();
        let examine = |sequent: &str, step: &str| {
            self.docket.examine(position, sequent, step).map_err(|refusal| refusal.to_string())
        };
        let task = Task {
            obligation: &self.obligations[position],
            signatures: &[],
            facts: &self.lowered.theory.facts,
            uses: &[],
            cases: &[],
            caution: 0,
            referee: Referee(&examine),
        };
        match decide(&task, Effort::default()).outcome {
            Outcome::Holds { certificate, .. } => certificate,
            other => panic!("not decided: {other:?}"),
        }
    }
}

const CLAIMS: [&str; 5] = [
    "exp(x) <= 1 + x + x^2/2 + x^3/3",
    "x^4*y^2 + x^2*y^4 - 3*x^2*y^2 + 1.01 >= 0",
    "(4 - 2.1*x^2 + x^4/3)*x^2 + x*y + (4*y^2 - 4)*y^2 >= -1.04",
    "x^3/3 + 2*y^(3/2)/3 + 0.05 >= x*y",
    "exp(-x - y) <= 1/(1 + x + y)",
];

fn claimed(claim: &str) -> Dossier {
    Dossier::read(&[("x", "[0, 2]"), ("y", "[0, 2]")], claim)
}

#[divan::bench(args = CLAIMS, sample_count = 10)]
fn search(bencher: Bencher, claim: &str) {
    let dossier = claimed(claim);
    bencher.bench_local(|| dossier.certificate());
}

#[divan::bench(args = CLAIMS, sample_count = 10)]
fn kernel(bencher: Bencher, claim: &str) {
    let dossier = claimed(claim);
    let certificate = dossier.certificate();
    bencher.bench_local(|| {
        let decision = dossier.docket.decide(dossier.link(), &[certificate.as_str()]);
        assert_eq!(decision.verdict, Verdict::Holds, "{:?}", decision.rejected);
    });
}

/// A hundred links of the kinds that derivations are made of.
fn hundred_links() -> String {
    let mut text = String::from(
        "dossier \"A hundred links\"\n\
         parameter mu : real in (0, infinity)\n\
         parameter s : integer in [1, infinity)\n\
         parameter t : real in (0, 1]\n\
         quantity mean : real in [0, infinity)\n\
         quantity weight(cutoff : real in (0, infinity)) : real in [0, 1]\n\
         assume local_mean: mean <= mu\n\
         lemma markov source \"any text on probability\" for c in (0, infinity): weight(c) <= mean/c\n",
    );
    for k in 1..=20 {
        text.push_str(&format!(
            "chain tail{k}\n    weight({k}*mu*s^2)\n      <= mean/({k}*mu*s^2)  [markov]\n      \
             <= mu/({k}*mu*s^2)    [local_mean]\n      <= 1/({k}*s^2)\n\
             chain small{k}\n    t^{k}*exp(-t)\n      <= t*exp(-t)\n      <= t/(1 + t)\n"
        ));
    }
    text
}

#[divan::bench(sample_count = 5, sample_size = 1)]
fn hundred_links_cold(bencher: Bencher) {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("hundred.obl");
    std::fs::write(&path, hundred_links()).expect("the dossier is written");
    bencher.bench_local(|| {
        let run = Command::new(env!("CARGO_BIN_EXE_boundwright")).arg("check").arg(&path).output();
        let output = run.expect("the program runs");
        assert_eq!(output.status.code(), Some(0), "{}", String::from_utf8_lossy(&output.stdout));
    });
}

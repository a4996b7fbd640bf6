//! Makes false statements from a seed, and counts what search and kernel say.
//!
//! `cargo run --example false_variants -- HANDBOOK.json [--count N] [--seed N] [--effort N]`
//!
//! Prints one line for each kind of falsity with the verdicts, and the statements
//! that were found to hold. Exit code 1 if there was one.

#[path = "entry/mod.rs"]
mod entry;
#[path = "variants/mod.rs"]
mod variants;

use std::collections::BTreeMap;
use std::process::ExitCode;

use boundwright::search::Effort;
use entry::Verdict;
use rayon::prelude::*;
use variants::{examine, variants};

/// The column of a verdict in the table.
fn column(verdict: Verdict) -> usize {
    match verdict {
        Verdict::Holds => 0,
        Verdict::Fails => 1,
        Verdict::Vacuous => 2,
        Verdict::Undecided => 3,
    }
}

fn main() -> ExitCode {
    let mut words = std::env::args().skip(1);
    let (mut file, mut count, mut seed, mut effort) = (String::new(), 400, 1, 200_000);
    while let Some(word) = words.next() {
        let mut number = || words.next().and_then(|w| w.parse::<u64>().ok());
        let read = match word.as_str() {
            "--count" => number().map(|n| count = n),
            "--seed" => number().map(|n| seed = n),
            "--effort" => number().map(|n| effort = n),
            _ => {
                file = word;
                Some(())
            }
        };
        if read.is_none() {
            eprintln!("a number is missing");
            return ExitCode::from(3);
        }
    }
    let Ok(text) = std::fs::read_to_string(&file) else {
        eprintln!("{file}: cannot be read");
        return ExitCode::from(4);
    };
    let all = variants(&text, seed, usize::try_from(count).unwrap_or(usize::MAX));
    let found: Vec<_> = all.par_iter().map(|v| examine(v, Effort(effort))).collect();
    let mut counts: BTreeMap<&str, [usize; 4]> = BTreeMap::new();
    let (mut wrong, mut rejected) = (0, 0);
    for (variant, one) in all.iter().zip(&found) {
        counts.entry(variant.kind).or_default()[column(one.verdict)] += 1;
        rejected += one.rejected;
        if one.verdict == Verdict::Holds || one.proved {
            wrong += 1;
            println!("HOLDS {}: {}", variant.kind, variant.text);
        } else if one.verdict != variant.entry.expected {
            println!("{} {}: {}", one.verdict.name(), variant.kind, variant.text);
        }
    }
    println!("{:24}{:>8}{:>8}{:>8}{:>10}", "kind", "holds", "fails", "vacuous", "undecided");
    for (kind, [holds, fails, vacuous, undecided]) in &counts {
        println!("{kind:24}{holds:>8}{fails:>8}{vacuous:>8}{undecided:>10}");
    }
    println!("{} variants, {wrong} hold, {rejected} certificates rejected", all.len());
    if wrong == 0 { ExitCode::SUCCESS } else { ExitCode::FAILURE }
}

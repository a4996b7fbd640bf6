//! Runs the search and the kernel over a file of published inequalities and their
//! false neighbours, and compares each verdict with the truth.
//!
//! `cargo run --release --example handbook -- FILE.json [--effort N] [--only ID] [--tag TAG] [--diary]`
//!
//! Prints one line `id expected got seconds method` per entry, the same by tag,
//! and last `decided D of N, wrong W, kernel-rejected K`. Exit code 0 only if
//! nothing was wrong and no certificate was rejected.

#[path = "entry/mod.rs"]
mod entry;

use std::collections::BTreeMap;
use std::process::ExitCode;
use std::time::Instant;

use boundwright::search::Effort;
use entry::{Entry, Judged, Verdict, judge, read};

struct Options {
    file: String,
    effort: Effort,
    only: Option<String>,
    tag: Option<String>,
    truth: Option<String>,
    diary: bool,
}

fn options() -> Result<Options, String> {
    let mut options = Options {
        file: String::new(),
        effort: Effort::default(),
        only: None,
        tag: None,
        truth: None,
        diary: false,
    };
    let mut words = std::env::args().skip(1);
    while let Some(word) = words.next() {
        let mut value = || words.next().ok_or(format!("{word} needs a value"));
        match word.as_str() {
            "--effort" => options.effort = Effort(value()?.parse().map_err(|_| "--effort needs a number")?),
            "--only" => options.only = Some(value()?),
            "--tag" => options.tag = Some(value()?),
            "--truth" => options.truth = Some(value()?),
            "--diary" => options.diary = true,
            _ => options.file = word,
        }
    }
    if options.file.is_empty() { Err("which file?".into()) } else { Ok(options) }
}

/// What search and kernel say of each entry, on all cores but in the order of the
/// entries, with the seconds that each took.
fn in_order(entries: &[&Entry], effort: Effort) -> impl Iterator<Item = (Judged, f64)> {
    let (sender, receiver) = std::sync::mpsc::channel();
    let entries: Vec<Entry> = entries.iter().map(|e| (*e).clone()).collect();
    std::thread::spawn(move || {
        // One at a time and in order, so that what comes first is printed first.
        let next = std::sync::atomic::AtomicUsize::new(0);
        rayon::broadcast(|_| {
            loop {
                let i = next.fetch_add(1, std::sync::atomic::Ordering::Relaxed);
                let Some(entry) = entries.get(i) else { break };
                let start = Instant::now();
                let judged = judge(entry, effort);
                // The receiver hangs up only when printing ends early.
                let _ = sender.send((i, judged, start.elapsed().as_secs_f64()));
            }
        });
    });
    let mut early = BTreeMap::new();
    (0..).map_while(move |i| {
        loop {
            if let Some(done) = early.remove(&i) {
                return Some(done);
            }
            let (position, judged, seconds) = receiver.recv().ok()?;
            early.insert(position, (judged, seconds));
        }
    })
}

fn main() -> ExitCode {
    let options = match options() {
        Ok(options) => options,
        Err(why) => {
            eprintln!("{why}");
            return ExitCode::from(3);
        }
    };
    let text = std::fs::read_to_string(&options.file);
    let entries = match text.map_err(|e| e.to_string()).and_then(|t| read(&t)) {
        Ok(entries) => entries,
        Err(why) => {
            eprintln!("{}: {why}", options.file);
            return ExitCode::from(4);
        }
    };
    let wanted = |e: &&Entry| {
        options.only.as_ref().is_none_or(|id| *id == e.id)
            && options.tag.as_ref().is_none_or(|tag| e.tags.contains(tag))
            && options.truth.as_ref().is_none_or(|t| *t == e.expected.name())
    };
    let mut tags: BTreeMap<String, (u32, u32)> = BTreeMap::new();
    let (mut count, mut decided, mut wrong, mut rejected) = (0, 0, 0, 0);
    let entries: Vec<&Entry> = entries.iter().filter(wanted).collect();
    for (entry, (judged, seconds)) in entries.iter().zip(in_order(&entries, options.effort)) {
        let (got, expected) = (judged.verdict.name(), entry.expected.name());
        println!("{}\t{expected}\t{got}\t{seconds:.3}\t{}", entry.id, judged.method);
        for note in &judged.rejected {
            println!("\trejected: {note}");
        }
        if options.diary {
            for line in &judged.diary {
                println!("\t{}", line.trim_end().replace('\n', "\n\t"));
            }
        }
        let right = judged.verdict == entry.expected;
        let bad = !right && judged.verdict != Verdict::Undecided;
        count += 1;
        decided += u32::from(right);
        wrong += u32::from(bad);
        rejected += judged.rejected.len();
        for tag in &entry.tags {
            let (all, good) = tags.entry(tag.clone()).or_default();
            *all += 1;
            *good += u32::from(right);
        }
    }
    for (tag, (all, good)) in &tags {
        println!("{tag}\t{good} of {all}");
    }
    println!("decided {decided} of {count}, wrong {wrong}, kernel-rejected {rejected}");
    if wrong == 0 && rejected == 0 { ExitCode::SUCCESS } else { ExitCode::FAILURE }
}

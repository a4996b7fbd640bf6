//! The audit for people: one block for each chain, claim and proved lemma.

use std::collections::BTreeSet;

use super::layout::{Page, Style};
use super::model::{
    Audit, Count, Dossier, Item, Margin, Obligation, Point, RestsOn, Stuck, Value, Verdict, Witness,
};

/// Where the text beside a verdict starts.
const COLUMN: usize = 13;

/// Side conditions and definedness conditions that hold are only counted.
const QUIET: [&str; 2] = ["side", "definedness"];

/// The audit as text in the columns of `style`.
#[must_use]
pub fn to_terminal(audit: &Audit, style: Style) -> String {
    let mut page = Page::new(style);
    for dossier in &audit.dossiers {
        draw_dossier(&mut page, audit, dossier);
    }
    for values in &audit.values {
        page.paragraph(0, &format!("{} at {}", values.item, values.numbers));
        for term in &values.terms {
            let value = term.value.as_ref().map(shown).or_else(|| term.why_not.clone()).unwrap_or_default();
            page.row(2, &term.term, 40, &value);
        }
        page.blank();
    }
    page.row(0, "obligations", COLUMN, &counted(&audit.summary.obligations));
    page.row(0, "items", COLUMN, &counted(&audit.summary.items));
    page.finish()
}

/// The verdict in words: `holds`, or `holds, but rests on a.2 (fails)`.
#[must_use]
pub fn verdict_line(verdict: Verdict, established: bool, rests_on: &RestsOn) -> String {
    if verdict != Verdict::Holds || established {
        return verdict.word().to_string();
    }
    format!("holds, but rests on {}", rests_on.unsettled.join(", "))
}

/// How a verdict is headed: what holds without being established is conditional.
fn shown_verdict(verdict: Verdict, established: bool) -> (Verdict, &'static str) {
    match (verdict, established) {
        (Verdict::Holds, false) => (Verdict::Undecided, "conditional"),
        _ => (verdict, verdict.word()),
    }
}

fn draw_dossier(page: &mut Page, audit: &Audit, dossier: &Dossier) {
    page.ends(dossier.title.as_deref().unwrap_or(&dossier.stem), &dossier.file);
    page.blank();
    for item in audit.items.iter().filter(|item| item.dossier == dossier.file) {
        draw_item(page, audit, item);
    }
    // What belongs to no item: the domain's and the cited facts' definedness.
    let items = audit.items.iter().filter(|item| item.dossier == dossier.file);
    let listed: BTreeSet<&String> = items.flat_map(|item| &item.obligations).collect();
    let rest =
        audit.obligations.iter().filter(|one| one.dossier == dossier.file && !listed.contains(&one.id));
    let loose: Vec<&Obligation> = rest.filter(|one| one.verdict != Verdict::Holds).collect();
    for obligation in &loose {
        draw_obligation(page, obligation, 0);
    }
    if !loose.is_empty() {
        page.blank();
    }
}

fn draw_item(page: &mut Page, audit: &Audit, item: &Item) {
    let title = item.title.as_ref().map(|title| format!(" \"{title}\"")).unwrap_or_default();
    let label = item.label.as_ref().map(|label| format!(" ({label})")).unwrap_or_default();
    let head = format!("{} {}{title}{label}, {}:{}", item.kind, item.id, item.file, item.line);
    let (verdict, word) = shown_verdict(item.verdict, item.established);
    page.verdict_row(0, verdict, word, COLUMN, &head);
    page.paragraph(COLUMN, &item.statement);
    let own = |one: &&Obligation| one.dossier == item.dossier && one.item == item.id;
    let obligations: Vec<&Obligation> = audit.obligations.iter().filter(own).collect();
    let quiet = |one: &&&Obligation| QUIET.contains(&one.kind.as_str()) && one.verdict == Verdict::Holds;
    for obligation in obligations.iter().filter(|one| !quiet(one)) {
        draw_obligation(page, obligation, 2);
    }
    let silent = obligations.iter().filter(quiet).count();
    if silent > 0 {
        let noun = if silent == 1 { "condition" } else { "conditions" };
        let beside = format!("{silent} {noun} beside: definedness, and what the facts used require");
        page.verdict_row(2, Verdict::Holds, Verdict::Holds.word(), COLUMN + 2, &beside);
    }
    if item.verdict == Verdict::Holds && !item.established {
        page.paragraph(2, &verdict_line(item.verdict, item.established, &item.rests_on));
    }
    draw_basis(page, &item.rests_on);
    page.blank();
}

fn draw_obligation(page: &mut Page, obligation: &Obligation, indent: usize) {
    let column = COLUMN + 2;
    let kind = if obligation.kind == "side" { "side condition " } else { "" };
    let head = format!("{}: {kind}{}", obligation.id, obligation.statement);
    let (verdict, word) = shown_verdict(obligation.verdict, obligation.established);
    page.verdict_row(indent, verdict, word, column, &head);
    let place = format!("{}:{}", obligation.file, obligation.line);
    let by = match obligation.reasons.as_slice() {
        [] => String::new(),
        reasons => format!(", by {}", reasons.join(", ")),
    };
    let found = obligation.method.as_ref().map(|method| format!(", found by {method}")).unwrap_or_default();
    page.row(indent + 2, "at", column, &format!("{place}{by}{found}"));
    if !obligation.claim.is_empty() {
        page.row(indent + 2, "read as", column, &obligation.claim);
    }
    if let Some(margin) = &obligation.margin {
        page.row(indent + 2, "margin", column, &margin_words(margin));
    }
    if let Some(witness) = &obligation.witness {
        page.row(indent + 2, "false at", column, &witness_words(witness));
    }
    if let Some(stuck) = &obligation.stuck {
        draw_stuck(page, stuck, indent + 2, column);
    }
    for (number, line) in obligation.argument.iter().enumerate() {
        let deeper = line.len() - line.trim_start().len();
        let head = if number == 0 { "argument" } else { "" };
        page.row(indent + 2, head, column + deeper, line.trim_start());
    }
    match &obligation.inhabitant {
        Some(found) => page.row(indent + 2, "inhabitant", column, &points(&found.at, &found.with)),
        None if obligation.kind == "link" && obligation.verdict == Verdict::Holds => {
            page.row(indent + 2, "inhabitant", column, "none found");
        }
        None => {}
    }
}

fn draw_stuck(page: &mut Page, stuck: &Stuck, indent: usize, column: usize) {
    page.row(indent, "because", column, &stuck.reason);
    if !stuck.region.is_empty() {
        let sides: Vec<String> = stuck
            .region
            .iter()
            .map(|side| format!("{} in [{}, {}]", side.name, side.from, side.to))
            .collect();
        page.row(indent, "stuck on", column, &sides.join(", "));
    }
    if let Some(hint) = &stuck.hint {
        page.row(indent, "try", column, hint);
    }
}

fn draw_basis(page: &mut Page, basis: &RestsOn) {
    let kinds = [
        ("assumed", &basis.assumptions),
        ("cited", &basis.cited),
        ("argued", &basis.argued),
        ("properties", &basis.properties),
        ("shown here", &basis.results),
    ];
    let parts: Vec<String> = kinds
        .iter()
        .filter(|(_, names)| !names.is_empty())
        .map(|(kind, names)| format!("{kind}: {}", names.join(", ")))
        .collect();
    if !parts.is_empty() {
        page.row(2, "rests on", COLUMN, &parts.join("; "));
    }
}

fn margin_words(margin: &Margin) -> String {
    let mut words = margin.kind.clone();
    if let Some(bound) = &margin.at_least {
        words.push_str(&format!(" at least {bound}"));
    }
    if let Some(bound) = &margin.at_most {
        words.push_str(&format!(", at most {bound}"));
        if !margin.at.is_empty() {
            words.push_str(&format!(" at {}", points(&margin.at, &[])));
        }
    }
    words
}

fn witness_words(witness: &Witness) -> String {
    let mut words = points(&witness.at, &witness.with);
    if let Some(condition) = &witness.undefined {
        words.push_str(&format!("; undefined there: it needs {condition}"));
    }
    if let (Some(left), Some(right)) = (&witness.left, &witness.right) {
        words.push_str(&format!("; left side {}, right side {}", shown(left), shown(right)));
    }
    words
}

fn points(at: &[Point], with: &[Point]) -> String {
    let all: Vec<String> =
        at.iter().chain(with).map(|point| format!("{} = {}", point.name, point.value)).collect();
    if all.is_empty() { "every point".to_string() } else { all.join(", ") }
}

fn shown(value: &Value) -> String {
    if value.at_least == value.at_most {
        value.at_least.clone()
    } else {
        format!("in [{}, {}]", value.at_least, value.at_most)
    }
}

fn counted(count: &Count) -> String {
    let verb =
        |number: usize, one: &str, many: &str| format!("{number} {}", if number == 1 { one } else { many });
    let parts: Vec<String> = [
        (count.holds, verb(count.holds, "holds", "hold")),
        (count.conditional, format!("{} conditional", count.conditional)),
        (count.fails, verb(count.fails, "fails", "fail")),
        (count.vacuous, format!("{} vacuous", count.vacuous)),
        (count.undecided, format!("{} undecided", count.undecided)),
    ]
    .into_iter()
    .filter(|(number, _)| *number > 0)
    .map(|(_, words)| words)
    .collect();
    if parts.is_empty() { "none".to_string() } else { parts.join(", ") }
}

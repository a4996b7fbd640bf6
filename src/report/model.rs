//! The audit: everything a report says, in the order it is said.
//!
//! The field names are those of the JSON rendering (`grammar/audit.schema.json`).
//! Numbers that carry meaning are texts, since readers of JSON round numbers.

use serde::{Deserialize, Serialize};

/// Name and major version of the JSON form.
pub const SCHEMA: &str = "boundwright-audit/1";

/// What was found about one or several dossiers.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Audit {
    /// [`SCHEMA`].
    pub schema: String,
    /// What wrote it.
    pub tool: Tool,
    /// Work units that each obligation was allowed to cost.
    pub effort: u64,
    /// The dossiers, in the order given.
    pub dossiers: Vec<Dossier>,
    /// Their chains, claims and proved lemmas, in order.
    pub items: Vec<Item>,
    /// What had to be shown, in order.
    pub obligations: Vec<Obligation>,
    /// Values at named numbers, if asked for.
    pub values: Vec<Values>,
    /// How many of each verdict.
    pub summary: Summary,
}

/// The program.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Tool {
    /// Its name.
    pub name: String,
    /// Its version.
    pub version: String,
}

impl Tool {
    /// This program.
    #[must_use]
    pub fn this() -> Tool {
        Tool { name: env!("CARGO_PKG_NAME").to_string(), version: env!("CARGO_PKG_VERSION").to_string() }
    }
}

/// One dossier.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Dossier {
    /// The file, relative to the project root.
    pub file: String,
    /// First part of all its ids: the file's name without extension.
    pub stem: String,
    /// Its title.
    pub title: Option<String>,
    /// Its whole logic as the kernel read it.
    pub plain: String,
    /// Its constants.
    pub constants: Vec<Constant>,
    /// Its sets of numbers.
    pub numbers: Vec<Number>,
}

/// A constant with its value.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Constant {
    /// Its name.
    pub name: String,
    /// Its label in the manuscript.
    pub label: Option<String>,
    /// Its exact value as an expression, or the interval it is known to lie in.
    pub exact: String,
    /// A decimal that is at most the value.
    pub at_least: Option<String>,
    /// A decimal that is at least the value.
    pub at_most: Option<String>,
}

/// A named set of numbers.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Number {
    /// Its name.
    pub name: String,
    /// The values.
    pub values: Vec<Point>,
}

/// A verdict.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Verdict {
    /// True for all values of the domain; the kernel accepted the proof.
    Holds,
    /// False at a point; the kernel accepted the witness.
    Fails,
    /// The suppositions exclude each other; nothing is shown.
    Vacuous,
    /// Neither was found.
    Undecided,
}

impl Verdict {
    /// The word for it.
    #[must_use]
    pub const fn word(self) -> &'static str {
        match self {
            Verdict::Holds => "holds",
            Verdict::Fails => "fails",
            Verdict::Vacuous => "vacuous",
            Verdict::Undecided => "undecided",
        }
    }

    /// The verdict on a whole: vacuous, fails, undecided, holds, the first that a part
    /// has; a whole without parts has shown nothing.
    pub fn of_parts(parts: impl IntoIterator<Item = Verdict>) -> Verdict {
        let weight = |verdict: &Verdict| match verdict {
            Verdict::Vacuous => 3,
            Verdict::Fails => 2,
            Verdict::Undecided => 1,
            Verdict::Holds => 0,
        };
        parts.into_iter().max_by_key(weight).unwrap_or(Verdict::Undecided)
    }
}

/// A chain, a claim or a proved lemma.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Item {
    /// `stem.name`.
    pub id: String,
    /// The file of the dossier it belongs to.
    pub dossier: String,
    /// `chain`, `claim` or `lemma`.
    pub kind: String,
    /// The text for people.
    pub title: Option<String>,
    /// The label in the manuscript.
    pub label: Option<String>,
    /// The file in which it is written, relative to the project root.
    pub file: String,
    /// The line, from 1.
    pub line: u32,
    /// The statement as written.
    pub statement: String,
    /// The verdict on all its obligations together.
    pub verdict: Verdict,
    /// Whether it holds and everything it rests on does.
    pub established: bool,
    /// The ids of its obligations.
    pub obligations: Vec<String>,
    /// What it rests on, transitively.
    pub rests_on: RestsOn,
}

/// What a result rests on, transitively; each list sorted.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct RestsOn {
    /// Assumptions of the dossier.
    pub assumptions: Vec<String>,
    /// Lemmas taken from published sources, with the source.
    pub cited: Vec<String>,
    /// Lemmas argued outside the file, with the place.
    pub argued: Vec<String>,
    /// Properties supplied by assumptions.
    pub properties: Vec<String>,
    /// Chains, claims and lemmas proved in the dossier.
    pub results: Vec<String>,
    /// Those of the results that are not shown, with their verdict.
    pub unsettled: Vec<String>,
}

/// One closed statement that had to be shown.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Obligation {
    /// `stem.item.k`, with `.s1` for side conditions and `.d1` for definedness.
    pub id: String,
    /// The file of the dossier it belongs to.
    pub dossier: String,
    /// `link`, `side` or `definedness`.
    pub kind: String,
    /// The item it belongs to, `stem.name`.
    pub item: String,
    /// The link in its item, from 1; none for what belongs to the whole.
    pub link: Option<usize>,
    /// The file in which it is written, relative to the project root.
    pub file: String,
    /// The line, from 1.
    pub line: u32,
    /// The statement as written, with names folded out for side conditions.
    pub statement: String,
    /// The statement as the kernel read it.
    pub claim: String,
    /// The reasons as written.
    pub reasons: Vec<String>,
    /// The verdict.
    pub verdict: Verdict,
    /// Whether it holds and everything it rests on does.
    pub established: bool,
    /// Certified room.
    pub margin: Option<Margin>,
    /// For `fails`: where.
    pub witness: Option<Witness>,
    /// A certified point at which everything it supposes is true.
    pub inhabitant: Option<Inhabitant>,
    /// The method that found the proof.
    pub method: Option<String>,
    /// Work units spent.
    pub effort: u64,
    /// What it rests on, transitively.
    pub rests_on: RestsOn,
    /// For `undecided`, and for `fails` without a witness: why.
    pub stuck: Option<Stuck>,
    /// What the kernel re-checks.
    pub certificate: Option<String>,
    /// [`fingerprint`] of the certificate.
    pub fingerprint: Option<String>,
    /// The argument of the certificate in words, a line a step, if asked for.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub argument: Vec<String>,
}

/// The certified room of a relation.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Margin {
    /// `difference` or `ratio`.
    pub kind: String,
    /// At least this everywhere.
    pub at_least: Option<String>,
    /// At most this at `at`.
    pub at_most: Option<String>,
    /// A point where it is that small.
    pub at: Vec<Point>,
}

/// A coordinate.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Point {
    /// The variable, or a quantity with its arguments.
    pub name: String,
    /// A closed expression; for a quantity an expression in its arguments.
    pub value: String,
}

/// Where a statement fails.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Witness {
    /// The value of every variable.
    pub at: Vec<Point>,
    /// What the quantities are there.
    pub with: Vec<Point>,
    /// The condition of definedness that is violated, if that is the failure.
    pub undefined: Option<String>,
    /// Enclosures of both sides in decimals, where they could be computed.
    pub left: Option<Value>,
    /// The right side.
    pub right: Option<Value>,
}

/// An enclosure in decimals, rounded outward.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Value {
    /// At most the value.
    pub at_least: String,
    /// At least the value.
    pub at_most: String,
}

/// A certified point of what is supposed.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Inhabitant {
    /// The value of every variable.
    pub at: Vec<Point>,
    /// What the quantities are there.
    pub with: Vec<Point>,
    /// What the kernel re-checks.
    pub certificate: String,
    /// [`fingerprint`] of the certificate.
    pub fingerprint: String,
}

/// Why there is no proof.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Stuck {
    /// In a sentence.
    pub reason: String,
    /// The smallest region where the search got stuck.
    pub region: Vec<Region>,
    /// What might help.
    pub hint: Option<String>,
    /// What was tried, in order.
    pub tried: Vec<String>,
}

/// One side of a region.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Region {
    /// The variable.
    pub name: String,
    /// From here, a decimal.
    pub from: String,
    /// To here, a decimal.
    pub to: String,
}

/// Values of the terms along one item at named numbers.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Values {
    /// The item, `stem.name`.
    pub item: String,
    /// The file of the dossier it belongs to.
    pub dossier: String,
    /// The set of numbers.
    pub numbers: String,
    /// The terms in order, as written.
    pub terms: Vec<Term>,
}

/// A term with its value.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Term {
    /// As the relation that leads to it and the term, as written.
    pub term: String,
    /// The value; none if it depends on a quantity or is undefined.
    pub value: Option<Value>,
    /// Why there is no value.
    pub why_not: Option<String>,
}

/// Counts of verdicts.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Count {
    /// Hold and are established.
    pub holds: usize,
    /// Fail.
    pub fails: usize,
    /// Are undecided.
    pub undecided: usize,
    /// Are vacuous.
    pub vacuous: usize,
    /// Hold, but rest on something that is not shown.
    pub conditional: usize,
}

impl Count {
    /// Counts verdicts, each with whether it is established.
    pub fn of(verdicts: impl IntoIterator<Item = (Verdict, bool)>) -> Count {
        let mut count = Count::default();
        for (verdict, established) in verdicts {
            *match (verdict, established) {
                (Verdict::Holds, true) => &mut count.holds,
                (Verdict::Holds, false) => &mut count.conditional,
                (Verdict::Fails, _) => &mut count.fails,
                (Verdict::Vacuous, _) => &mut count.vacuous,
                (Verdict::Undecided, _) => &mut count.undecided,
            } += 1;
        }
        count
    }

    /// All together.
    #[must_use]
    pub const fn total(&self) -> usize {
        self.holds + self.fails + self.undecided + self.vacuous + self.conditional
    }
}

/// Counts over all dossiers: of obligations, and of items.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Summary {
    /// Obligations.
    #[serde(flatten)]
    pub obligations: Count,
    /// Items.
    pub items: Count,
}

impl Audit {
    /// The counts, from the verdicts.
    #[must_use]
    pub fn counted(&self) -> Summary {
        Summary {
            obligations: Count::of(self.obligations.iter().map(|one| (one.verdict, one.established))),
            items: Count::of(self.items.iter().map(|one| (one.verdict, one.established))),
        }
    }
}

/// A short mark of a text, by which an accidental change is noticed: the 64-bit
/// FNV-1a hash (Fowler, Noll and Vo; offset basis and prime as published in
/// the IETF draft draft-eastlake-fnv). It guards against slips, not forgers:
/// whether a certificate proves its claim is for the kernel to say.
#[must_use]
pub fn fingerprint(text: &str) -> String {
    let mut hash = 0xcbf2_9ce4_8422_2325_u64;
    for byte in text.bytes() {
        hash = (hash ^ u64::from(byte)).wrapping_mul(0x0000_0100_0000_01b3);
    }
    format!("fnv1a:{hash:016x}")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn fingerprints_are_those_of_the_published_test_vectors() {
        // draft-eastlake-fnv, appendix with test vectors: "", "a", "foobar" (from memory).
        assert_eq!(fingerprint(""), "fnv1a:cbf29ce484222325");
        assert_eq!(fingerprint("a"), "fnv1a:af63dc4c8601ec8c");
        assert_eq!(fingerprint("foobar"), "fnv1a:85944171f73967e8");
    }

    #[test]
    fn the_verdict_on_a_whole_is_the_worst_of_its_parts() {
        use Verdict::{Fails, Holds, Undecided, Vacuous};
        assert_eq!(Verdict::of_parts([Holds, Fails, Vacuous]), Vacuous);
        assert_eq!(Verdict::of_parts([Undecided, Fails, Holds]), Fails);
        assert_eq!(Verdict::of_parts([Holds, Undecided]), Undecided);
        assert_eq!(Verdict::of_parts([]), Undecided);
        let count = Count::of([(Holds, true), (Holds, false), (Fails, false), (Undecided, false)]);
        assert_eq!((count.holds, count.conditional, count.fails, count.total()), (1, 1, 1, 4));
    }
}

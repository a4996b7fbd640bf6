//! What the kernel alone says about a stored audit.

use serde::Serialize;

use super::layout::{Page, Style};
use super::model::{Summary, Tool, Verdict};

/// Name and major version of the JSON form.
pub const RECHECK_SCHEMA: &str = "boundwright-recheck/1";

/// The outcome of a re-check.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Recheck {
    /// [`RECHECK_SCHEMA`].
    pub schema: String,
    /// What wrote it.
    pub tool: Tool,
    /// Whether the kernel confirms everything that the audit says.
    pub accepted: bool,
    /// What it does not confirm, in a sentence each.
    pub rejected: Vec<String>,
    /// Every obligation as the kernel derives it from the plain form.
    pub obligations: Vec<Claim>,
    /// What is established, and on what it rests.
    pub results: Vec<Composition>,
    /// The audit's counts.
    pub summary: Summary,
}

/// An obligation as the kernel reads it.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Claim {
    /// `stem.item.k`.
    pub id: String,
    /// The kernel's verdict from the certificate.
    pub verdict: Verdict,
    /// The statement.
    pub claim: String,
}

/// How a proved fact or a goal is composed.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Composition {
    /// `stem.name`.
    pub id: String,
    /// Whether it and everything it rests on is shown.
    pub established: bool,
    /// What it rests on, transitively.
    pub rests_on: Vec<String>,
    /// What of it is not shown.
    pub unsettled: Vec<String>,
}

impl Recheck {
    /// As indented JSON with a final line break.
    #[must_use]
    pub fn to_json(&self) -> String {
        super::json::to_json(self)
    }

    /// For people, in the columns of `style`.
    #[must_use]
    pub fn to_terminal(&self, style: Style) -> String {
        let mut page = Page::new(style);
        page.paragraph(0, "What has to be shown, as the kernel reads it:");
        for claim in &self.obligations {
            page.verdict_row(
                2,
                claim.verdict,
                claim.verdict.word(),
                13,
                &format!("{}: {}", claim.id, claim.claim),
            );
        }
        page.blank();
        page.paragraph(0, "What that establishes:");
        for result in &self.results {
            let (verdict, word) = if result.established {
                (Verdict::Holds, "shown")
            } else {
                (Verdict::Undecided, "not shown")
            };
            let on = if result.rests_on.is_empty() {
                "resting on nothing else".to_string()
            } else {
                format!("resting on {}", result.rests_on.join(", "))
            };
            let but = match result.unsettled.as_slice() {
                [] => String::new(),
                open => format!("; open: {}", open.join(", ")),
            };
            page.verdict_row(2, verdict, word, 13, &format!("{} {on}{but}", result.id));
        }
        page.blank();
        for reason in &self.rejected {
            page.verdict_row(0, Verdict::Fails, "rejected", 13, reason);
        }
        let word = if self.accepted { "accepted" } else { "rejected" };
        let verdict = if self.accepted { Verdict::Holds } else { Verdict::Fails };
        let rest = if self.accepted {
            "the kernel confirms the audit"
        } else {
            "the kernel does not confirm the audit"
        };
        page.verdict_row(0, verdict, word, 13, rest);
        page.finish()
    }
}

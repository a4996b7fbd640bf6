//! What may be cited in a dossier.

use serde::Serialize;

use super::layout::{Page, Style};
use super::model::Tool;

/// Name and major version of the JSON form.
pub const FACTS_SCHEMA: &str = "boundwright-facts/1";

/// The facts of a dossier, in order.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct FactSheet {
    /// [`FACTS_SCHEMA`].
    pub schema: String,
    /// What wrote it.
    pub tool: Tool,
    /// The file, relative to the project root.
    pub file: String,
    /// The dossier's title.
    pub title: Option<String>,
    /// The facts.
    pub facts: Vec<Fact>,
}

/// Something that may stand among the reasons of a step.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Fact {
    /// The name to cite.
    pub name: String,
    /// `assumption`, `cited`, `argued` or `proved`.
    pub standing: String,
    /// The published source, or where it is argued.
    pub source: Option<String>,
    /// The text for people.
    pub title: Option<String>,
    /// The file, relative to the project root.
    pub file: String,
    /// The line, from 1.
    pub line: u32,
    /// Quantities it holds for whatever they are.
    pub schema: Vec<String>,
    /// Variables it holds for, each with its domain.
    pub variables: Vec<String>,
    /// Its hypotheses.
    pub given: Vec<String>,
    /// Properties it requires.
    pub requires: Vec<String>,
    /// What it says: relations, or one property.
    pub states: Vec<String>,
}

impl FactSheet {
    /// As indented JSON with a final line break.
    #[must_use]
    pub fn to_json(&self) -> String {
        super::json::to_json(self)
    }

    /// For people, in the columns of `style`.
    #[must_use]
    pub fn to_terminal(&self, style: Style) -> String {
        let mut page = Page::new(style);
        page.ends(self.title.as_deref().unwrap_or("facts"), &self.file);
        page.blank();
        for fact in &self.facts {
            let title = fact.title.as_ref().map(|title| format!(" \"{title}\"")).unwrap_or_default();
            let source = fact.source.as_ref().map(|source| format!(" ({source})")).unwrap_or_default();
            let place = format!("{}:{}", fact.file, fact.line);
            page.paragraph(0, &format!("{}{title}, {}{source}, {place}", fact.name, fact.standing));
            let clauses = [
                ("whatever", &fact.schema),
                ("for", &fact.variables),
                ("given", &fact.given),
                ("requires", &fact.requires),
                ("states", &fact.states),
            ];
            for (word, list) in clauses.iter().filter(|(_, list)| !list.is_empty()) {
                page.row(2, word, 12, &list.join(", "));
            }
        }
        if self.facts.is_empty() {
            page.paragraph(0, "nothing may be cited here yet");
        }
        page.finish()
    }
}

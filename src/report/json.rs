//! The audit as JSON, for programs and for `recheck`.

use super::model::{Audit, SCHEMA};

/// Why a text is not an audit.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Unreadable {
    /// It is not JSON of the right form; says where.
    Malformed(String),
    /// It is of another schema.
    Schema(String),
}

impl std::fmt::Display for Unreadable {
    fn fmt(&self, out: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Unreadable::Malformed(why) => write!(out, "this is not an audit: {why}"),
            Unreadable::Schema(found) => {
                write!(out, "the audit is of the form `{found}`; this program reads `{SCHEMA}`")
            }
        }
    }
}

impl std::error::Error for Unreadable {}

/// A model as indented JSON with a final line break; the same model always gives the same bytes.
#[must_use]
pub fn to_json(model: &impl serde::Serialize) -> String {
    // The models hold texts, numbers and lists only, which cannot fail.
    let mut text = serde_json::to_string_pretty(model).unwrap_or_default();
    text.push('\n');
    text
}

/// Reads an audit.
///
/// # Errors
/// If the text is not JSON, is of another schema, or lacks something.
pub fn from_json(text: &str) -> Result<Audit, Unreadable> {
    #[derive(serde::Deserialize)]
    struct Opening {
        schema: String,
    }
    let malformed = |error: serde_json::Error| Unreadable::Malformed(error.to_string());
    let opening: Opening = serde_json::from_str(text).map_err(malformed)?;
    if opening.schema != SCHEMA {
        return Err(Unreadable::Schema(crate::diagnostic::escape(&opening.schema).into_owned()));
    }
    serde_json::from_str(text).map_err(malformed)
}

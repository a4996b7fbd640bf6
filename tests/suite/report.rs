//! The report: what people see, and that the JSON form is what the schema says.

use std::fs;
use std::path::Path;

use boundwright::report::{Style, from_json, to_json, to_terminal};

use super::schema::violations;

fn file(path: &str) -> String {
    fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join(path)).unwrap()
}

/// Everything in an audit that its published schema forbids.
pub fn against_schema(audit: &str) -> Vec<String> {
    let schema = serde_json::from_str(&file("grammar/audit.schema.json")).unwrap();
    violations(&schema, &serde_json::from_str(audit).unwrap())
}

#[test]
fn every_verdict_for_people() {
    let audit = from_json(&file("tests/cases/report/rotor.json")).unwrap();
    assert_eq!(audit.counted(), audit.summary, "the case counts its own verdicts");
    insta::assert_snapshot!("every_verdict", to_terminal(&audit, Style { colour: false, width: 80 }));
    insta::assert_snapshot!("every_verdict_narrow", to_terminal(&audit, Style { colour: false, width: 46 }));
}

#[test]
fn colour_adds_nothing_but_colour() {
    let audit = from_json(&file("tests/cases/report/rotor.json")).unwrap();
    let plain = to_terminal(&audit, Style { colour: false, width: 80 });
    let mut coloured = to_terminal(&audit, Style { colour: true, width: 80 });
    assert_ne!(plain, coloured);
    for code in ["0", "1", "1;31", "1;32", "1;33"] {
        coloured = coloured.replace(&format!("\u{1b}[{code}m"), "");
    }
    assert_eq!(plain, coloured);
}

#[test]
fn json_is_read_as_it_was_written() {
    let text = file("tests/cases/report/rotor.json");
    assert_eq!(against_schema(&text), Vec::<String>::new());
    let audit = from_json(&text).unwrap();
    assert_eq!(from_json(&to_json(&audit)).unwrap(), audit);
    assert_eq!(against_schema(&to_json(&audit)), Vec::<String>::new());
}

#[test]
fn what_is_no_audit_is_told() {
    let told = |text: &str| from_json(text).unwrap_err().to_string();
    insta::assert_snapshot!(
        "no_audit",
        [
            told(""),
            told("{}"),
            told("{\"schema\": \"other/9\"}"),
            told("{\"schema\": \"boundwright-audit/1\"}")
        ]
        .join("\n")
    );
}

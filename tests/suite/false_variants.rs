//! False statements close to true ones: none may hold. The example of the same
//! name makes as many as one likes.

use boundwright::search::Effort;

use crate::entry::Verdict;
use crate::variants::{examine, variants};

#[test]
fn no_false_variant_holds() {
    let path = format!("{}/tests/cases/handbook/inequalities.json", env!("CARGO_MANIFEST_DIR"));
    let text = std::fs::read_to_string(&path).expect("the handbook");
    let all = variants(&text, 20, 40);
    assert_eq!(all.len(), 40);
    for variant in &all {
        let found = examine(variant, Effort(100_000));
        assert!(found.verdict != Verdict::Holds && !found.proved, "{}: {}", variant.kind, variant.text);
        assert_eq!(found.rejected, 0, "{}", variant.text);
    }
}

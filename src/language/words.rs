//! The words of the language, in one place.

/// Words that start a statement when they stand first in its column. They are
/// not reserved: elsewhere they are ordinary names. (`for` starts a block, but
/// is a clause word too.)
pub const STATEMENT_WORDS: &[&str] = &[
    "dossier",
    "use",
    "parameter",
    "where",
    "quantity",
    "property",
    "assume",
    "lemma",
    "define",
    "constant",
    "chain",
    "claim",
    "numbers",
    "for",
];

/// Words that start or join clauses. They are reserved everywhere, because they
/// follow terms and lists directly.
pub const CLAUSE_WORDS: &[&str] =
    &["for", "given", "requires", "cases", "at", "label", "source", "argued", "induction", "in", "as"];

/// Words that start a term with a bound variable; reserved everywhere.
pub const FOLD_WORDS: &[&str] = &["sum", "product", "integral"];

/// Whether `word` can never be a name.
pub fn is_reserved(word: &str) -> bool {
    CLAUSE_WORDS.contains(&word) || FOLD_WORDS.contains(&word)
}

/// Whether `word` starts a statement.
pub fn starts_statement(word: &str) -> bool {
    STATEMENT_WORDS.contains(&word)
}

/// Whether `word` starts a statement or was probably meant to.
pub fn seems_to_start_statement(word: &str) -> bool {
    starts_statement(word) || nearest(word, STATEMENT_WORDS).is_some()
}

/// The word of `list` that `word` was probably meant to be, if one is close.
pub fn nearest<'a>(word: &str, list: &[&'a str]) -> Option<&'a str> {
    let length = word.chars().count();
    if length > 24 {
        return None;
    }
    // Any letter is one change away from any other.
    let reach = match length {
        0 | 1 => 0,
        2..=4 => 1,
        _ => 2,
    };
    let lower = word.to_lowercase();
    list.iter()
        .filter(|candidate| candidate.len().abs_diff(length) <= reach)
        .map(|candidate| (distance(&lower, &candidate.to_lowercase()), *candidate))
        .filter(|(far, _)| *far <= reach)
        .min()
        .map(|(_, candidate)| candidate)
}

/// Number of single-letter changes, insertions, removals and swaps of
/// neighbours between two words (optimal string alignment distance).
fn distance(left: &str, right: &str) -> usize {
    let left: Vec<char> = left.chars().collect();
    let right: Vec<char> = right.chars().collect();
    let mut before = vec![0; right.len() + 1];
    let mut last: Vec<usize> = (0..=right.len()).collect();
    for i in 1..=left.len() {
        let mut row = vec![i; right.len() + 1];
        for j in 1..=right.len() {
            let change = usize::from(left[i - 1] != right[j - 1]);
            row[j] = (last[j] + 1).min(row[j - 1] + 1).min(last[j - 1] + change);
            let swapped = i > 1 && j > 1 && left[i - 1] == right[j - 2] && left[i - 2] == right[j - 1];
            if swapped {
                row[j] = row[j].min(before[j - 2] + 1);
            }
        }
        before = std::mem::replace(&mut last, row);
    }
    last[right.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn finds_the_word_meant() {
        assert_eq!(nearest("lema", STATEMENT_WORDS), Some("lemma"));
        assert_eq!(nearest("paramter", STATEMENT_WORDS), Some("parameter"));
        assert_eq!(nearest("clami", STATEMENT_WORDS), Some("claim"));
        assert_eq!(nearest("Claim", STATEMENT_WORDS), Some("claim"));
        assert_eq!(nearest("theorem", STATEMENT_WORDS), None);
        assert_eq!(nearest("c", &["x", "C"]), Some("C"));
        assert_eq!(nearest("y", &["x", "C"]), None);
        assert_eq!(nearest(&"x".repeat(1000), STATEMENT_WORDS), None);
    }

    #[test]
    fn distances() {
        for (left, right, far) in [("", "", 0), ("a", "", 1), ("ab", "ba", 1), ("kitten", "sitting", 3)] {
            assert_eq!(distance(left, right), far, "{left} {right}");
        }
    }
}

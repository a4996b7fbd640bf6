//! Names that look the same but are not.
//!
//! Two names are reported when they become equal after replacing letters by
//! the ones they cannot be told from in print: compatibility forms (by NFKC,
//! Unicode Standard Annex 15) and the Greek and Cyrillic letters whose usual
//! glyphs are those of Latin ones. Pairs that merely resemble each other, such
//! as `v` and `ν`, are left alone: mathematics uses both.

use std::collections::{BTreeMap, BTreeSet};

use unicode_normalization::UnicodeNormalization;

use super::problems::Problems;
use super::token::{Token, TokenKind, normalize};
use crate::diagnostic::Code;
use crate::source::Span;

/// Names with a fixed meaning that a look-alike must not imitate.
const KNOWN: &[&str] = &["e", "pi", "infinity", "abs", "exp", "log", "sqrt", "min", "max", "ceil", "cos"];

/// Reports every name that looks like an earlier, different one.
pub fn report(text: &str, tokens: &[Token], problems: &mut Problems) {
    let words = || tokens.iter().filter(|token| token.kind == TokenKind::Word);
    if words().all(|token| text[token.span.range()].is_ascii()) {
        return;
    }
    let mut seen: BTreeMap<String, (String, Option<Span>)> =
        KNOWN.iter().map(|name| (name.to_string(), (name.to_string(), None))).collect();
    let mut done = BTreeSet::new();
    for token in words() {
        let written = &text[token.span.range()];
        if !done.insert(written) {
            continue;
        }
        let name = normalize(written);
        let look = skeleton(&name);
        let Some((earlier, place)) = seen.get(&look) else {
            seen.insert(look, (name, Some(token.span)));
            continue;
        };
        if *earlier == name {
            continue;
        }
        let message = format!("`{name}` looks like `{earlier}` but is written with other characters");
        let mut error = problems.error(Code::LookAlike, token.span, message);
        error = error.caption(spelled(&name));
        match place {
            Some(span) => error = error.label(problems.place(*span), spelled(earlier)),
            None => error = error.hint(format!("`{earlier}` has a fixed meaning")),
        }
        problems.push(error.hint("write both with the same characters, or choose names that look different"));
    }
}

/// The characters of a name, by number, where they are not ASCII.
fn spelled(name: &str) -> String {
    let odd: Vec<String> =
        name.chars().filter(|c| !c.is_ascii()).take(4).map(|c| format!("U+{:04X}", c as u32)).collect();
    if odd.is_empty() { "written in ASCII".to_string() } else { format!("contains {}", odd.join(" ")) }
}

/// `name` with each letter replaced by the one it looks like.
fn skeleton(name: &str) -> String {
    name.nfkc().map(twin).collect()
}

fn twin(c: char) -> char {
    match c {
        // Greek.
        'Α' => 'A',
        'Β' => 'B',
        'Ε' => 'E',
        'Ζ' => 'Z',
        'Η' => 'H',
        'Ι' => 'I',
        'Κ' => 'K',
        'Μ' => 'M',
        'Ν' => 'N',
        'Ο' => 'O',
        'Ρ' => 'P',
        'Τ' => 'T',
        'Υ' => 'Y',
        'Χ' => 'X',
        'ο' => 'o',
        // Cyrillic.
        'А' => 'A',
        'В' => 'B',
        'Е' => 'E',
        'К' => 'K',
        'М' => 'M',
        'Н' => 'H',
        'О' => 'O',
        'Р' => 'P',
        'С' => 'C',
        'Т' => 'T',
        'Х' => 'X',
        'І' => 'I',
        'Ј' => 'J',
        'Ѕ' => 'S',
        'а' => 'a',
        'е' => 'e',
        'о' => 'o',
        'р' => 'p',
        'с' => 'c',
        'у' => 'y',
        'х' => 'x',
        'і' => 'i',
        'ј' => 'j',
        'ѕ' => 's',
        'ԁ' => 'd',
        'һ' => 'h',
        'ԛ' => 'q',
        'ԝ' => 'w',
        'Г' => 'Γ',
        'П' => 'Π',
        'Ф' => 'Φ',
        // Latin letters of other alphabets.
        'ı' => 'i',
        'ɑ' => 'a',
        'ɡ' => 'g',
        'ꞵ' => 'β',
        c => c,
    }
}

#[cfg(test)]
mod tests {
    use super::super::token::tokenize;
    use super::*;
    use crate::source::FileId;

    fn count(text: &str) -> usize {
        let mut problems = Problems::new(FileId(0));
        let tokens = tokenize(text, &mut problems);
        report(text, &tokens.list, &mut problems);
        problems.into_list().into_iter().filter(|one| one.code == Code::LookAlike).count()
    }

    #[test]
    fn same_looks_are_reported_once() {
        assert_eq!(count("a \u{430} \u{430} a"), 1);
        assert_eq!(count("\u{b5} \u{3bc}"), 1, "micro sign and mu");
        assert_eq!(count("\u{435}"), 1, "Cyrillic e alone imitates the number e");
        assert_eq!(count("x \u{1d465}"), 1, "mathematical italic x");
    }

    #[test]
    fn ordinary_alphabets_are_quiet() {
        assert_eq!(count("a b α β ν v ω w ρ p Λ Δx μ_max x̄"), 0);
    }
}

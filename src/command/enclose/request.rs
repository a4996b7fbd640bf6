//! Reading what is to be enclosed: an expression and the ranges of its variables.

use crate::diagnostic::{Diagnostic, render_all};
use crate::expression::{End, Name, Term};
use crate::language::{self, Parsed};
use crate::source::{FileId, Sources};
use crate::statement::Declaration;

/// An expression on a box.
#[derive(Debug, Clone)]
pub struct Question {
    /// The expression.
    pub term: Term,
    /// The range of every variable; ends are closed terms.
    pub ranges: Vec<(Name, End, End)>,
}

/// The name of a variable and the texts of its two ends.
pub type RangeText = (String, String, String);

/// Splits `x=[a, b]` or `x=a`.
///
/// # Errors
/// If the text is neither.
pub fn split_range(text: &str) -> Result<RangeText, String> {
    let shown = crate::diagnostic::escape(text);
    let Some((name, range)) = text.split_once('=') else {
        return Err(format!("`{shown}` gives no range; write for instance `x=[0, 1]` or `x=1/2`"));
    };
    let range = range.trim();
    let (lower, upper) = match range.strip_prefix('[').map(|rest| rest.strip_suffix(']')) {
        None if range.starts_with('(') && range.contains(',') => {
            return Err(format!("`{shown}`: ranges are closed; write `[a, b]`"));
        }
        None => (range, range),
        Some(inside) => inside.and_then(split_at_comma).ok_or_else(|| {
            format!("`{shown}`: a range is written `[a, b]`, with a comma between its ends")
        })?,
    };
    Ok((name.trim().to_string(), lower.trim().to_string(), upper.trim().to_string()))
}

/// Splits at the only comma outside parentheses.
fn split_at_comma(text: &str) -> Option<(&str, &str)> {
    let mut depth = 0_i32;
    let mut found = None;
    for (at, c) in text.char_indices() {
        match c {
            '(' | '[' => depth += 1,
            ')' | ']' => depth -= 1,
            ',' if depth == 0 && found.replace(at).is_some() => return None,
            _ => {}
        }
    }
    found.map(|at| (&text[..at], &text[at + 1..]))
}

/// Reads an expression and the ranges of its variables.
///
/// # Errors
/// A message for people, if something cannot be read, a name is unknown, or a
/// variable is given twice.
pub fn read(expression: &str, ranges: &[RangeText]) -> Result<Question, String> {
    let mut declarations: Vec<Declaration> = Vec::new();
    let mut box_ = Vec::new();
    for (name, lower, upper) in ranges {
        let declaration = variable(name)?;
        if declarations.iter().any(|known| known.name == declaration.name) {
            return Err(format!("the range of `{}` is given twice", declaration.name));
        }
        box_.push((declaration.name.clone(), end(lower)?, end(upper)?));
        declarations.push(declaration);
    }
    Ok(Question { term: term("expression", expression, &declarations)?, ranges: box_ })
}

fn variable(name: &str) -> Result<Declaration, String> {
    let text = format!("{name} in (-infinity, infinity)");
    let wrong = || format!("`{}` is not the name of a variable", crate::diagnostic::escape(name));
    let (file, sources) = alone("name", &text);
    let source = sources.get(file).ok_or_else(wrong)?;
    let variables = language::parse_variables(source).value.ok_or_else(wrong)?;
    let mut declared = language::lower::lower_variables(file, &variables).map_err(|_| wrong())?;
    match declared.pop() {
        Some(one) if declared.is_empty() => Ok(one),
        _ => Err(wrong()),
    }
}

fn end(text: &str) -> Result<End, String> {
    match text {
        "inf" | "+inf" | "infinity" | "+infinity" | "∞" => Ok(End::PlusInfinity),
        "-inf" | "-infinity" | "-∞" => Ok(End::MinusInfinity),
        _ => Ok(End::Finite(term("end of a range", text.strip_prefix('+').unwrap_or(text), &[])?)),
    }
}

fn term(what: &str, text: &str, variables: &[Declaration]) -> Result<Term, String> {
    let (file, sources) = alone(what, text);
    let told = |diagnostics: &[Diagnostic]| {
        format!("the {what} cannot be read\n{}", render_all(diagnostics, &sources).trim_end())
    };
    let Some(source) = sources.get(file) else { return Err(told(&[])) };
    let parsed: Parsed<_> = language::parse_term(source);
    match parsed.value {
        Some(tree) if !parsed.diagnostics.iter().any(|one| one.is_error()) => {
            language::lower::lower_term(file, &tree, variables).map_err(|diagnostics| told(&diagnostics))
        }
        _ => Err(told(&parsed.diagnostics)),
    }
}

fn alone(name: &str, text: &str) -> (FileId, Sources) {
    let mut sources = Sources::new();
    let file = sources.add(name, text);
    (file, sources)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ranges_are_split() {
        let split = |text: &str| split_range(text).ok();
        let range = |name: &str, lower: &str, upper: &str| Some((name.into(), lower.into(), upper.into()));
        assert_eq!(split("x=[0, 1]"), range("x", "0", "1"));
        assert_eq!(split(" x = [-inf,max(1, 2)] "), range("x", "-inf", "max(1, 2)"));
        assert_eq!(split("x=1/3"), range("x", "1/3", "1/3"));
        for wrong in ["x", "x=(0, 1]", "x=[0]", "x=[0, 1", "x=[0, 1, 2]"] {
            assert_eq!(split(wrong), None, "{wrong}");
        }
    }

    #[test]
    fn mistakes_are_told() {
        let range = |name: &str| vec![(name.to_string(), "0".to_string(), "1".to_string())];
        assert!(read("x + 1", &range("x")).is_ok());
        assert!(read("x + y", &range("x")).unwrap_err().contains('y'));
        assert!(read("2 x", &range("x")).is_err());
        assert!(read("x", &range("2")).is_err());
        assert!(read("x", &[range("x"), range("x")].concat()).unwrap_err().contains("twice"));
        assert!(read("x", &[("x".into(), "nan".into(), "1".into())]).is_err());
    }
}

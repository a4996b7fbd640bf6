//! Text to syntax tree, tree to canonical text, tree to statements.
//!
//! Contract: the only room that names nom. Reading never fails as a whole: it
//! gives a tree of what could be read and a list of diagnostics; it never
//! panics, and takes time linear in the text. `grammar/language.ebnf` states
//! the syntax; the functions of `grammar/` carry the names of its rules. It
//! must never decide anything about mathematics.
//! Start with `tree.rs`, then the EBNF file.

mod format;
mod grammar;
mod lookalike;
pub mod lower;
mod parser;
mod problems;
mod token;
pub mod tree;
pub mod words;

pub use format::{format, format_interval, format_term};

use crate::diagnostic::{Code, Diagnostic};
use crate::source::{Damage, MAX_BYTES, SourceFile};
use parser::{Parser, Read};
use problems::Problems;
use token::{Tokens, tokenize};
use tree::{Expression, Tree, Variable};

/// What was read: the sound part of a text, and what is wrong with the rest.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Parsed<T> {
    /// The result; parts that could not be read are missing.
    pub value: T,
    /// In the order of their places. Without errors, nothing is missing.
    pub diagnostics: Vec<Diagnostic>,
}

impl<T> Parsed<T> {
    /// Whether there is an error among the diagnostics.
    pub fn has_errors(&self) -> bool {
        self.diagnostics.iter().any(Diagnostic::is_error)
    }
}

/// Reads a whole file.
///
/// Any bytes are accepted; a damaged file gives an empty tree and a diagnostic.
pub fn parse(file: &SourceFile) -> Parsed<Tree> {
    if let Some(error) = damage(file) {
        return Parsed { value: Tree::default(), diagnostics: vec![error] };
    }
    let (tokens, problems) = scan(file);
    let mut parser = Parser::new(file.text(), &tokens.list, problems);
    let statements = parser.file();
    let mut problems = parser.problems;
    if tokens.list.len() == 1 && problems.is_empty() {
        let span = tokens.list[0].span;
        let error = problems.error(Code::EmptyFile, span, "the file contains no statement");
        problems.push(error.hint("begin with a title: `dossier \"…\"`"));
    }
    let value = Tree { statements, comments: tokens.comments };
    Parsed { value, diagnostics: problems.into_list() }
}

/// Reads a text that is one term, for instance from a command line.
pub fn parse_term(file: &SourceFile) -> Parsed<Option<Expression>> {
    parse_alone(file, |parser| parser.term())
}

/// Reads a text that is a list of variables: `x in [0, 1], n : integer in [1, 9]`.
pub fn parse_variables(file: &SourceFile) -> Parsed<Option<Vec<Variable>>> {
    parse_alone(file, |parser| parser.variables())
}

fn parse_alone<T>(file: &SourceFile, rule: impl FnOnce(&mut Parser<'_>) -> Read<T>) -> Parsed<Option<T>> {
    if let Some(error) = damage(file) {
        return Parsed { value: None, diagnostics: vec![error] };
    }
    let (mut tokens, problems) = scan(file);
    // Here lines end nothing; only the end of the text does.
    for token in &mut tokens.list {
        token.first = token.kind == token::TokenKind::End;
    }
    let mut parser = Parser::new(file.text(), &tokens.list, problems);
    let read = rule(&mut parser).and_then(|value| {
        if parser.at_end() { Ok(value) } else { Err(parser.expected("the end of the text")) }
    });
    let value = match read {
        Ok(value) => Some(value),
        Err(failure) => {
            parser.tell(failure);
            None
        }
    };
    Parsed { value, diagnostics: parser.problems.into_list() }
}

fn scan(file: &SourceFile) -> (Tokens, Problems) {
    let mut problems = Problems::new(file.id());
    let tokens = tokenize(file.text(), &mut problems);
    lookalike::report(file.text(), &tokens.list, &mut problems);
    (tokens, problems)
}

fn damage(file: &SourceFile) -> Option<Diagnostic> {
    let problems = Problems::new(file.id());
    match file.damage()? {
        Damage::TooLarge => {
            let message = format!("`{}` is larger than {} MB", file.name(), MAX_BYTES >> 20);
            Some(Diagnostic::placeless(Code::FileTooLarge, message))
        }
        Damage::NotText(span) => {
            let message = "the file is not UTF-8 text";
            let error = problems.error(Code::NotText, span, message);
            Some(error.caption("the first byte that is not").hint("save the file with the encoding UTF-8"))
        }
    }
}

#[cfg(test)]
mod tests {
    use super::tree::{ExpressionKind, RelationKind, SortKind, Standing, StatementKind};
    use super::*;
    use crate::diagnostic::render_all;
    use crate::source::Sources;

    /// Reads a text that must be sound.
    fn sound(text: &str) -> Tree {
        let mut sources = Sources::new();
        let file = sources.add("a.obl", text);
        let parsed = parse(sources.get(file).unwrap());
        let shown = render_all(&parsed.diagnostics, &sources);
        assert!(parsed.diagnostics.is_empty(), "{text}\n{shown}");
        parsed.value
    }

    /// The codes of what is wrong with a text.
    fn codes(text: &str) -> Vec<Code> {
        let parsed = parse(&SourceFile::alone("a.obl", text));
        parsed.diagnostics.into_iter().map(|one| one.code).collect()
    }

    #[test]
    fn reads_every_statement() {
        let text = include_str!("../../tests/cases/language/good/everything.obl");
        let tree = sound(text);
        let starts = text.lines().filter(|line| line.starts_with(|c: char| c.is_ascii_lowercase()));
        assert_eq!(tree.statements.len(), starts.count());
        assert_eq!(tree.comments.len(), text.matches('#').count());
    }

    /// A tree without its spans.
    fn bare(tree: &Tree) -> String {
        let shown = format!("{:?}", tree.statements);
        let mut parts = shown.split("Span { start: ");
        let mut out = parts.next().unwrap().to_string();
        for part in parts {
            out.push_str(&part[part.find('}').unwrap()..]);
        }
        out
    }

    #[test]
    fn printing_keeps_the_meaning_and_settles() {
        let text = include_str!("../../tests/cases/language/good/everything.obl");
        let tree = sound(text);
        let once = format(text, &tree);
        let again = sound(&once);
        assert_eq!(bare(&tree), bare(&again), "{once}");
        assert_eq!(format(&once, &again), once);
    }

    /// The kind of the only statement of a text.
    fn only(text: &str) -> StatementKind {
        let mut statements = sound(text).statements;
        assert_eq!(statements.len(), 1, "{text}");
        statements.remove(0).kind
    }

    #[test]
    fn clauses_come_in_any_order_and_keep_their_content() {
        let text = "lemma l requires P, q.Q(w, 2) given h: x > 0, x < 1 for x in (0, 1], n : even integer in [2, 8)\n  label \"L\" argued \"A\" \"doc\": x < n [a.b.2(x = 1; t = u.v)] induction on n from 2";
        let StatementKind::Lemma(lemma) = only(text) else { panic!() };
        assert_eq!(lemma.standing(), Standing::Argued);
        let clauses = &lemma.clauses;
        assert_eq!(clauses.text.as_ref().unwrap().text, "doc");
        assert_eq!(clauses.label.as_ref().unwrap().text, "L");
        let ends: Vec<(bool, bool)> = clauses
            .variables
            .iter()
            .map(|one| one.domain.as_ref().unwrap())
            .map(|domain| (domain.lower_open, domain.upper_open))
            .collect();
        assert_eq!(ends, [(true, false), (false, true)]);
        assert_eq!(clauses.variables[0].sort_kind(), SortKind::Real);
        assert_eq!(clauses.variables[1].sort_kind(), SortKind::EvenInteger);
        assert_eq!(clauses.given[0].name.as_ref().unwrap().text, "h");
        assert!(clauses.given[1].name.is_none());
        assert_eq!(clauses.requires[1].arguments.len(), 2);
        let reason = &lemma.reasons.as_ref().unwrap().list[0];
        let parts: Vec<&str> = reason.path.parts.iter().map(|part| part.text.as_str()).collect();
        assert_eq!(parts, ["a", "b", "2"]);
        assert_eq!((reason.values.len(), reason.replacements.len()), (1, 1));
        assert_eq!(lemma.induction.unwrap().variable.text, "n");
    }

    #[test]
    fn links_keep_relation_name_and_reasons() {
        let StatementKind::Chain(chain) = only("chain c\n  a\n  >= b [r, s]\n  as last: = c\n  > d []")
        else {
            panic!()
        };
        let kinds: Vec<RelationKind> = chain.links.iter().map(|link| link.relation.kind).collect();
        assert_eq!(kinds, [RelationKind::GreaterEqual, RelationKind::Equal, RelationKind::Greater]);
        assert_eq!(chain.links[1].name.as_ref().unwrap().text, "last");
        let reasons: Vec<Option<usize>> =
            chain.links.iter().map(|link| link.reasons.as_ref().map(|reasons| reasons.list.len())).collect();
        assert_eq!(reasons, [Some(2), None, Some(0)]);
    }

    #[test]
    fn spans_cover_what_they_name() {
        let text = "claim c: 2*f(x, γ') + 1 <= -y^2 [h]";
        let StatementKind::Claim(claim) = only(text) else { panic!() };
        let file = SourceFile::alone("a.obl", text);
        assert_eq!(file.slice(claim.relations.first.span), "2*f(x, γ') + 1");
        assert_eq!(file.slice(claim.relations.rest[0].1.span), "-y^2");
        assert_eq!(file.slice(claim.reasons.unwrap().span), "[h]");
        let ExpressionKind::Sum(first, _) = claim.relations.first.kind else { panic!() };
        assert_eq!(file.slice(first.span), "2*f(x, γ')");
    }

    #[test]
    fn terms_and_variables_stand_alone() {
        let term = parse_term(&SourceFile::alone("-", "x +\n1"));
        assert_eq!(format_term(&term.value.unwrap()), "x + 1");
        let term = parse_term(&SourceFile::alone("-", "x + 1 claim"));
        assert_eq!(term.diagnostics[0].code, Code::ImplicitProduct);
        assert!(parse_term(&SourceFile::alone("-", "")).value.is_none());
        let variables = parse_variables(&SourceFile::alone("-", "x in [0, 1],\nn : integer in [1, 9]"));
        assert_eq!(variables.value.unwrap().len(), 2);
    }

    #[test]
    fn tabs_and_blanks_must_not_decide() {
        assert_eq!(codes("for x in [0, 1]:\n\tclaim a: x\n\t  <= 1\n\tclaim b: x <= 1"), []);
        assert_eq!(
            codes("for x in [0, 1]:\n        claim a: x <= 1\n\tclaim b: x <= 1"),
            [Code::BadIndentation]
        );
        assert_eq!(codes("for x in [0, 1]:\n    claim a: x\n\t<= 1"), [Code::BadIndentation]);
    }

    #[test]
    fn reads_on_after_mistakes() {
        let text = "claim a: x <\nlema b: 1 < 2\nclaim c: 2 x < 3\nclaim d: 1 < 2\nclaim e: (1 < 2\n";
        assert_eq!(
            codes(text),
            [Code::Unexpected, Code::UnknownStatement, Code::ImplicitProduct, Code::Unexpected]
        );
    }
}

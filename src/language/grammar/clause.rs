//! The clauses between a statement's name and its body.

use crate::diagnostic::Code;
use crate::language::parser::{Failure, Parser, Read};
use crate::language::token::{Sign, TokenKind};
use crate::language::tree::{Case, Clauses, Remark};

/// Which clauses a kind of statement takes, besides those that all take.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Taking {
    /// Assumptions: nothing more.
    Assumption,
    /// Lemmas: `source`, `argued`, `cases`.
    Lemma,
    /// Claims and chains: `at`, `cases`.
    Claim,
}

impl Taking {
    fn takes(self, word: &str) -> bool {
        match word {
            "source" | "argued" => self == Taking::Lemma,
            "at" => self == Taking::Claim,
            "cases" => self != Taking::Assumption,
            _ => true,
        }
    }

    fn whose(self) -> &'static str {
        match self {
            Taking::Assumption => "an assumption",
            Taking::Lemma => "a lemma",
            Taking::Claim => "a claim or chain",
        }
    }
}

impl Parser<'_> {
    /// `assume_clause*`, `lemma_clause*` or `claim_clause*`, in any order.
    pub fn clauses(&mut self, taking: Taking) -> Read<Clauses> {
        let mut clauses = Clauses::default();
        let mut seen: Vec<&str> = Vec::new();
        loop {
            let word = match self.peek() {
                TokenKind::Text => "text",
                TokenKind::Word => match self.peek_word() {
                    Some(
                        word
                        @ ("label" | "source" | "argued" | "at" | "for" | "given" | "requires" | "cases"),
                    ) => word,
                    _ => break,
                },
                _ => break,
            };
            self.check_clause(word, taking, &seen)?;
            seen.push(word);
            self.clause(word, &mut clauses)?;
        }
        Ok(clauses)
    }

    fn check_clause(&self, word: &str, taking: Taking, seen: &[&str]) -> Read<()> {
        let span = self.token().span;
        if !taking.takes(word) {
            let message = format!("`{word}` does not belong to {}", taking.whose());
            return Err(self.problems.error(Code::Misplaced, span, message).into());
        }
        let both = |a: &str, b: &str| word == a && seen.contains(&b);
        if both("source", "argued") || both("argued", "source") {
            let message = "a lemma has either a `source` or is `argued`";
            return Err(self.problems.error(Code::RepeatedClause, span, message).into());
        }
        if seen.contains(&word) {
            let what =
                if word == "text" { "a second text".to_string() } else { format!("a second `{word}`") };
            let message = format!("{what} in one statement");
            let error = self.problems.error(Code::RepeatedClause, span, message);
            let error = match word {
                "for" | "given" | "requires" => {
                    error.hint("list the parts in one clause, separated by commas")
                }
                _ => error,
            };
            return Err(error.into());
        }
        Ok(())
    }

    fn clause(&mut self, word: &str, clauses: &mut Clauses) -> Read<()> {
        if word == "text" {
            clauses.text = Some(self.text("a text")?);
            return Ok(());
        }
        self.take();
        match word {
            "label" => clauses.label = Some(self.text("the label in quotes")?),
            "source" => clauses.source = Some(self.text("the source in quotes")?),
            "argued" => clauses.argued = Some(self.text("in quotes, where it is argued")?),
            "at" => clauses.at = Some(self.name("the name of a set of numbers")?),
            "for" => clauses.variables = self.variables()?,
            "given" => clauses.given = self.conditions()?,
            "requires" => {
                clauses.requires.push(self.application()?);
                while self.accept(Sign::Comma).is_some() {
                    clauses.requires.push(self.application()?);
                }
            }
            _ => {
                clauses.cases.push(self.case()?);
                while self.accept(Sign::Bar).is_some() {
                    clauses.cases.push(self.case()?);
                }
            }
        }
        Ok(())
    }

    /// `case`: `zero: x = 0`
    fn case(&mut self) -> Read<Case> {
        let start = self.here();
        let name = self.name("the name of a case")?;
        self.expect(Sign::Colon, "`:` and the condition of the case")?;
        let condition = self.relations()?;
        Ok(Case { name, condition, span: self.since(start) })
    }

    /// `remark`: a text and a label after a declaration.
    pub fn remark(&mut self) -> Read<Remark> {
        let mut remark = Remark::default();
        loop {
            let label = self.sees_word("label");
            if !label && self.peek() != TokenKind::Text {
                return Ok(remark);
            }
            let repeated = if label { remark.label.is_some() } else { remark.text.is_some() };
            if repeated {
                let what = if label { "label" } else { "text" };
                let message = format!("a second {what} in one statement");
                return Err(self.problems.error(Code::RepeatedClause, self.token().span, message).into());
            }
            if label {
                self.take();
                remark.label = Some(self.text("the label in quotes")?);
            } else {
                remark.text = Some(self.text("a text")?);
            }
        }
    }

    /// The colon before a body.
    pub fn body_colon(&mut self) -> Read<()> {
        if self.accept(Sign::Colon).is_some() {
            return Ok(());
        }
        match self.expected("`:`") {
            Failure::Tell(error) => {
                let hint = "what the statement says follows a colon, after its name and clauses";
                Err((*error).hint(hint).into())
            }
            told => Err(told),
        }
    }
}

//! Files, statements and blocks.

use crate::diagnostic::Code;
use crate::language::parser::{Failure, Parser, Read};
use crate::language::token::Sign;
use crate::language::token::TokenKind;
use crate::language::tree::{Block, Statement, StatementKind, Variable};
use crate::language::words;

impl Parser<'_> {
    /// `file`: all statements of a file.
    pub fn file(&mut self) -> Vec<Statement> {
        let list = self.statements(0, "", true);
        // `statements` stops at a shallower line; at the top there is none.
        while self.token().kind != TokenKind::End {
            self.take();
        }
        list
    }

    /// Statements that start at `indent`, after `blanks`, up to the first line that
    /// starts before it.
    fn statements(&mut self, indent: u32, blanks: &str, top: bool) -> Vec<Statement> {
        let mut list = Vec::new();
        let mut told = false;
        loop {
            let token = self.token();
            if token.kind == TokenKind::End || token.indent < indent {
                return list;
            }
            if token.indent > indent && !told {
                told = true;
                let message = "this statement does not start in the column of the others";
                let error = self.problems.error(Code::BadIndentation, token.span, message);
                let column = indent + 1;
                self.problems.push(error.hint(format!("statements start in column {column} here; a line that continues a statement is indented deeper")));
            }
            if token.indent == indent {
                told = false;
            }
            self.begin_statement();
            let start = self.here();
            if token.indent == indent && self.indentation(token) != blanks {
                let failure = self.mixed_tabs(token);
                self.tell(failure);
            }
            match self.statement(top) {
                Ok(Some(kind)) => list.push(Statement { kind, span: self.since(start) }),
                Ok(None) => {}
                Err(failure) => {
                    self.tell(failure);
                    self.skip_statement();
                }
            }
        }
    }

    /// `statement` or `item`; nothing if a block with a broken header was skipped.
    fn statement(&mut self, top: bool) -> Read<Option<StatementKind>> {
        let Some(word) = self.peek_word().filter(|word| words::starts_statement(word)) else {
            return Err(self.no_statement());
        };
        if word == "dossier" && self.here() > 0 {
            let message = "the title of a dossier comes before everything else";
            return Err(self.problems.error(Code::Misplaced, self.token().span, message).into());
        }
        if !top && word == "use" {
            let message = format!("`{word}` cannot stand in a block");
            return Err(self.problems.error(Code::Misplaced, self.token().span, message).into());
        }
        if word == "for" {
            return self.block();
        }
        let start = self.here();
        self.take();
        let kind = match word {
            "dossier" => StatementKind::Dossier(self.text("the title in quotes")?),
            "use" => StatementKind::Use(self.use_statement()?),
            "parameter" => StatementKind::Parameter(self.parameter()?),
            "where" => StatementKind::Where(self.conditions()?),
            "quantity" => StatementKind::Quantity(self.quantity()?),
            "property" => StatementKind::Property(self.property()?),
            "assume" => StatementKind::Assume(self.assume()?),
            "lemma" => StatementKind::Lemma(self.lemma()?),
            "define" => StatementKind::Define(self.define()?),
            "constant" => StatementKind::Constant(self.constant()?),
            "chain" => StatementKind::Chain(self.chain()?),
            "claim" => StatementKind::Claim(self.claim()?),
            _ => StatementKind::Numbers(self.numbers()?),
        };
        if !self.at_end() {
            return Err(self.expected("the end of the statement"));
        }
        self.check_tabs(start)?;
        Ok(Some(kind))
    }

    /// The line starts with no statement's word.
    fn no_statement(&self) -> Failure {
        let token = self.token();
        if token.kind == TokenKind::Wrong {
            return Failure::Told;
        }
        let written = self.slice(token.span);
        if token.kind != TokenKind::Word && self.here() > 0 {
            let message = "this line is not indented, so it does not continue the statement above";
            let error = self.problems.error(Code::NotIndented, token.span, message);
            return error.hint("indent the line deeper than the first word of the statement").into();
        }
        let message = "no statement starts like this";
        let error = self.problems.error(Code::UnknownStatement, token.span, message);
        let hint = match words::nearest(written, words::STATEMENT_WORDS) {
            Some(near) => format!("perhaps `{near}` was meant"),
            None => format!("a statement starts with one of: {}", words::STATEMENT_WORDS.join(", ")),
        };
        error.hint(hint).hint("a line that continues the statement above is indented").into()
    }

    /// `block`: `for eps in (0, 1/8]:` and the statements below it.
    fn block(&mut self) -> Read<Option<StatementKind>> {
        let column = self.token().indent;
        let header = self.token().span;
        let outer = self.indentation(self.token());
        let start = self.here();
        let header_read = self.block_header().and_then(|variables| {
            self.check_tabs(start)?;
            Ok(variables)
        });
        let variables = match header_read {
            Ok(variables) => Some(variables),
            Err(failure) => {
                self.tell(failure);
                self.skip_header();
                None
            }
        };
        let next = self.token();
        let inside = next.kind != TokenKind::End && next.indent > column;
        if !inside {
            if variables.is_none() {
                return Ok(None);
            }
            let error = self.problems.error(Code::EmptyBlock, header, "there is no statement in this block");
            return Err(error.hint("indent the statements that belong to it").into());
        }
        let blanks = self.indentation(next);
        if !blanks.starts_with(outer) {
            let failure = self.mixed_tabs(next);
            self.tell(failure);
        }
        let statements = self.nested(|parser| Ok(parser.statements(next.indent, blanks, false)))?;
        Ok(variables.map(|variables| StatementKind::Block(Block { variables, statements })))
    }

    fn block_header(&mut self) -> Read<Vec<Variable>> {
        self.take();
        let variables = self.variables()?;
        self.expect(Sign::Colon, "`:`")?;
        if !self.at_end() && !self.token().first {
            return Err(self.expected("a new line after the `:` of a block"));
        }
        Ok(variables)
    }
}

//! Reasons in brackets, and induction.

use crate::language::parser::{Failure, Parser, Read};
use crate::language::token::{Sign, TokenKind};
use crate::language::tree::{Induction, Name, Path, Reason, Reasons, Replacement};

impl Parser<'_> {
    /// `reasons`, if they follow: `[local_mean, growth(k = cutoff(s))]`
    pub fn reasons(&mut self) -> Read<Option<Reasons>> {
        let start = self.here();
        let Some(open) = self.accept(Sign::OpenBracket) else {
            return Ok(None);
        };
        let mut list = Vec::new();
        if !self.sees(Sign::CloseBracket) {
            list.push(self.reason()?);
            while self.accept(Sign::Comma).is_some() {
                list.push(self.reason()?);
            }
        }
        self.close(open, Sign::CloseBracket, "`,` or `]`")?;
        Ok(Some(Reasons { list, span: self.since(start) }))
    }

    /// `reason`: a fact, perhaps with the instance to use.
    fn reason(&mut self) -> Read<Reason> {
        let start = self.here();
        let path = self.reason_path()?;
        let mut values = Vec::new();
        let mut replacements = Vec::new();
        if let Some(open) = self.accept(Sign::Open) {
            if !self.sees(Sign::Semicolon) {
                values.push(self.instance()?);
                while self.accept(Sign::Comma).is_some() {
                    values.push(self.instance()?);
                }
            }
            if self.accept(Sign::Semicolon).is_some() {
                replacements.push(self.replacement()?);
                while self.accept(Sign::Comma).is_some() {
                    replacements.push(self.replacement()?);
                }
            }
            self.close(open, Sign::Close, "`,`, `;` or `)`")?;
        }
        Ok(Reason { path, values, replacements, span: self.since(start) })
    }

    /// A binding; a bare term gets a hint.
    fn instance(&mut self) -> Read<crate::language::tree::Binding> {
        let bound = self.peek() == TokenKind::Word && self.peek_second() == TokenKind::Sign(Sign::Equal);
        if bound {
            return self.binding();
        }
        match self.expected("a variable with its value") {
            Failure::Tell(error) => {
                Err((*error).hint("an instance is given by name, as in `[growth(k = cutoff(s))]`").into())
            }
            told => Err(told),
        }
    }

    /// `reason_path`: a path in which parts after the first may be whole numbers.
    fn reason_path(&mut self) -> Read<Path> {
        let start = self.here();
        let mut parts = vec![self.name("the name of a fact")?];
        while self.accept(Sign::Dot).is_some() {
            let whole = self.peek() == TokenKind::Number
                && self.slice(self.token().span).bytes().all(|byte| byte.is_ascii_digit());
            if whole {
                let span = self.take().span;
                parts.push(Name { text: self.slice(span).to_string(), span });
            } else {
                parts.push(self.name("a name or a link's number after the dot")?);
            }
        }
        Ok(Path { parts, span: self.since(start) })
    }

    /// `replacement`: `tail = weight`
    fn replacement(&mut self) -> Read<Replacement> {
        let start = self.here();
        let name = self.name("the name of a quantity or property")?;
        self.expect(Sign::Equal, "`=`")?;
        let by = self.path("the name of what replaces it")?;
        Ok(Replacement { name, by, span: self.since(start) })
    }

    /// `induction`, if it follows: `induction on m from a`
    pub fn induction(&mut self) -> Read<Option<Induction>> {
        let start = self.here();
        if self.accept_word("induction").is_none() {
            return Ok(None);
        }
        if self.accept_word("on").is_none() {
            return Err(self.expected("`on`, as in `induction on m from a`"));
        }
        let variable = self.name("a variable")?;
        if self.accept_word("from").is_none() {
            return Err(self.expected("`from`, as in `induction on m from a`"));
        }
        let from = self.term()?;
        Ok(Some(Induction { variable, from, span: self.since(start) }))
    }
}

//! Sorts, intervals and variables.

use crate::diagnostic::Code;
use crate::language::parser::{Failure, Parser, Read};
use crate::language::token::{Sign, TokenKind};
use crate::language::tree::{Interval, Sort, SortKind, Variable};

impl Parser<'_> {
    /// `interval`: `(0, infinity)`, `[a, b)`
    pub fn interval(&mut self) -> Read<Interval> {
        let start = self.here();
        let lower_open = match self.peek() {
            TokenKind::Sign(Sign::Open) => true,
            TokenKind::Sign(Sign::OpenBracket) => false,
            _ => return Err(self.no_interval()),
        };
        let open = self.take();
        let lower = self.term()?;
        self.expect(Sign::Comma, "`,` and the upper end of the interval")?;
        let upper = self.term()?;
        let upper_open = self.sees(Sign::Close);
        if !upper_open {
            self.close(open, Sign::CloseBracket, "`)` or `]`")?;
        } else {
            self.take();
        }
        Ok(Interval { lower_open, lower, upper, upper_open, span: self.since(start) })
    }

    fn no_interval(&self) -> Failure {
        let hint = if self.sees(Sign::CloseBracket) {
            "an end that is left out is written with a parenthesis: `(0, 1]`"
        } else {
            "an interval is written like `(0, 1]` or `[1, infinity)`"
        };
        match self.expected("an interval") {
            Failure::Tell(error) => (*error).hint(hint).into(),
            told => told,
        }
    }

    /// `sort`: `real`, `integer`, `even integer`
    pub fn sort(&mut self) -> Read<Sort> {
        let start = self.here();
        let kind = match self.peek_word() {
            Some("real") => SortKind::Real,
            Some("integer") => SortKind::Integer,
            Some("even") => SortKind::EvenInteger,
            _ => return Err(self.expected("`real`, `integer` or `even integer`")),
        };
        self.take();
        if kind == SortKind::EvenInteger && self.accept_word("integer").is_none() {
            return Err(self.expected("`integer` after `even`"));
        }
        Ok(Sort { kind, span: self.since(start) })
    }

    /// `variable`: `x : real in [0, 1]`; the domain is required.
    pub fn variable(&mut self) -> Read<Variable> {
        let variable = self.argument()?;
        if variable.domain.is_some() {
            return Ok(variable);
        }
        if self.peek() == TokenKind::Wrong {
            return Err(Failure::Told);
        }
        let name = &variable.name.text;
        let message = format!("`{name}` has no domain");
        let error = self.problems.error(Code::MissingDomain, variable.span, message);
        let hint = "write it after the sort, for instance `in [0, infinity)` or, for all numbers, `in (-infinity, infinity)`";
        Err(error.hint(hint).into())
    }

    /// `argument`: a variable whose domain may be left out.
    pub fn argument(&mut self) -> Read<Variable> {
        let start = self.here();
        let name = self.name("the name of a variable")?;
        let sort = match self.accept(Sign::Colon) {
            Some(_) => Some(self.sort()?),
            None => None,
        };
        let domain = match self.accept_word("in") {
            Some(_) => Some(self.interval()?),
            None => None,
        };
        Ok(Variable { name, sort, domain, span: self.since(start) })
    }

    /// `variables`: one or more, separated by commas.
    pub fn variables(&mut self) -> Read<Vec<Variable>> {
        let mut list = vec![self.variable()?];
        while self.accept(Sign::Comma).is_some() {
            list.push(self.variable()?);
        }
        Ok(list)
    }
}

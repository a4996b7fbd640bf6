//! Statements that say something: assumptions, lemmas, claims, chains.

use super::clause::Taking;
use crate::diagnostic::Code;
use crate::language::parser::{Failure, Parser, Read};
use crate::language::token::Sign;
use crate::language::tree::{Assume, Chain, Claim, Clauses, Fact, Lemma, Link, Relation};

impl Parser<'_> {
    /// `assume`
    pub fn assume(&mut self) -> Read<Assume> {
        let name = self.name("the name of an assumption")?;
        let clauses = self.clauses(Taking::Assumption)?;
        if self.at_end() {
            return Ok(Assume { name, clauses, fact: None });
        }
        self.body_colon()?;
        let fact = Some(self.fact()?);
        if self.sees(Sign::OpenBracket) {
            let message = "an assumption has no reasons";
            let error = self.problems.error(Code::Misplaced, self.token().span, message);
            return Err(error.hint("what follows from other facts is a `claim` or a `lemma`").into());
        }
        Ok(Assume { name, clauses, fact })
    }

    /// `lemma`
    pub fn lemma(&mut self) -> Read<Lemma> {
        let name = self.name("the name of a lemma")?;
        let clauses = self.clauses(Taking::Lemma)?;
        self.body_colon()?;
        let fact = self.fact()?;
        let reasons = self.reasons()?;
        let induction = match fact {
            Fact::Relations(_) => self.induction()?,
            Fact::Property(_) => None,
        };
        Ok(Lemma { name, clauses, fact, reasons, induction })
    }

    /// `claim`
    pub fn claim(&mut self) -> Read<Claim> {
        let name = self.name("the name of a claim")?;
        let clauses = self.clauses(Taking::Claim)?;
        self.body_colon()?;
        let relations = self.relations()?;
        let reasons = self.reasons()?;
        let induction = self.induction()?;
        Ok(Claim { name, clauses, relations, reasons, induction })
    }

    /// `chain`
    pub fn chain(&mut self) -> Read<Chain> {
        let name = self.name("the name of a chain")?;
        let clauses = self.chain_head()?;
        let first = self.term()?;
        let mut links = Vec::new();
        while let Some(link) = self.link()? {
            links.push(link);
        }
        if links.is_empty() {
            return Err(self.no_relation(&first));
        }
        let signs: Vec<Relation> = links.iter().map(|link| link.relation).collect();
        self.check_directions(&signs)?;
        let induction = self.induction()?;
        Ok(Chain { name, clauses, first, links, induction })
    }

    /// The clauses of a chain. A colon ends them; it may be left out if the last
    /// clauses cannot run into the first term.
    fn chain_head(&mut self) -> Read<Clauses> {
        let hint = "a chain's clauses end with `:` if `given`, `requires` or `cases` is among them";
        let explained = |failure| match failure {
            Failure::Tell(error) if error.code == Code::ImplicitProduct => (*error).hint(hint).into(),
            other => other,
        };
        let clauses = self.clauses(Taking::Claim).map_err(explained)?;
        if self.accept(Sign::Colon).is_some() {
            return Ok(clauses);
        }
        let runs_on = !(clauses.given.is_empty() && clauses.requires.is_empty() && clauses.cases.is_empty());
        if !runs_on {
            return Ok(clauses);
        }
        match self.expected("`:`") {
            Failure::Tell(error) => Err((*error).hint(hint).into()),
            told => Err(told),
        }
    }

    /// `link`, if one follows.
    fn link(&mut self) -> Read<Option<Link>> {
        let start = self.here();
        let mut name = None;
        if self.accept_word("as").is_some() {
            name = Some(self.name("the name of a link")?);
            self.expect(Sign::Colon, "`:` and a relation")?;
        }
        let Some(relation) = self.relation() else {
            if name.is_some() {
                return Err(self.expected("one of `<= < = > >=`"));
            }
            return Ok(None);
        };
        let term = self.term()?;
        let reasons = self.reasons()?;
        Ok(Some(Link { name, relation, term, reasons, span: self.since(start) }))
    }
}

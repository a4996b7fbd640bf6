//! Relations, conditions and properties: what statements say.

use crate::diagnostic::Code;
use crate::language::parser::{Failure, Parser, Read};
use crate::language::token::{Sign, TokenKind};
use crate::language::tree::{
    Application, Condition, Expression, ExpressionKind, Fact, Relation, RelationKind, Relations,
};

impl Parser<'_> {
    /// `relation`, if one follows.
    pub fn relation(&mut self) -> Option<Relation> {
        let kind = match self.peek() {
            TokenKind::Sign(Sign::Less) => RelationKind::Less,
            TokenKind::Sign(Sign::LessEqual) => RelationKind::LessEqual,
            TokenKind::Sign(Sign::Equal) => RelationKind::Equal,
            TokenKind::Sign(Sign::GreaterEqual) => RelationKind::GreaterEqual,
            TokenKind::Sign(Sign::Greater) => RelationKind::Greater,
            _ => return None,
        };
        Some(Relation { kind, span: self.take().span })
    }

    /// `relations`: `a <= b < c`
    pub fn relations(&mut self) -> Read<Relations> {
        let start = self.here();
        let first = self.term()?;
        self.relations_after(first, start)
    }

    fn relations_after(&mut self, first: Expression, start: usize) -> Read<Relations> {
        let mut rest = Vec::new();
        while let Some(relation) = self.relation() {
            rest.push((relation, self.term()?));
        }
        if rest.is_empty() {
            return Err(self.no_relation(&first));
        }
        let signs: Vec<Relation> = rest.iter().map(|(relation, _)| *relation).collect();
        self.check_directions(&signs)?;
        Ok(Relations { first, rest, span: self.since(start) })
    }

    /// A term stands where a relation was needed.
    pub fn no_relation(&self, term: &Expression) -> Failure {
        if !self.at_end() && !self.sees(Sign::Colon) && !self.sees(Sign::OpenBracket) {
            return self.expected("one of `<= < = > >=`");
        }
        if self.at_end()
            && let Failure::Tell(error) = self.expected("a relation")
            && error.code == Code::NotIndented
        {
            return Failure::Tell(error);
        }
        let error =
            self.problems.error(Code::MissingRelation, term.span, "this term is not related to another one");
        error.hint("a statement of fact uses one of `<= < = > >=`").into()
    }

    /// All relations of a chain point the same way.
    pub fn check_directions(&self, signs: &[Relation]) -> Read<()> {
        let upward = |sign: &&Relation| matches!(sign.kind, RelationKind::Less | RelationKind::LessEqual);
        let downward =
            |sign: &&Relation| matches!(sign.kind, RelationKind::Greater | RelationKind::GreaterEqual);
        let (Some(up), Some(down)) = (signs.iter().find(upward), signs.iter().find(downward)) else {
            return Ok(());
        };
        let (earlier, later) = if up.span < down.span { (up, down) } else { (down, up) };
        let message = format!("`{}` and `{}` stand in one chain", earlier.kind.sign(), later.kind.sign());
        let error = self.problems.error(Code::MixedDirections, later.span, message);
        Err(error
            .label(self.problems.place(earlier.span), "points the other way")
            .hint("split it into two statements, or turn one side around")
            .into())
    }

    /// `fact`: relations or a property.
    pub fn fact(&mut self) -> Read<Fact> {
        let start = self.here();
        // `√x` is a call of sqrt in the tree, but not the application of a property.
        let rooted = self.sees(Sign::Root);
        let first = self.term()?;
        let related = Self::is_relation(self.peek());
        if !related && (self.at_end() || self.sees(Sign::OpenBracket)) {
            let span = first.span;
            match first.kind {
                ExpressionKind::Name(property) => {
                    let arguments = Vec::new();
                    return Ok(Fact::Property(Application { property, arguments, span }));
                }
                ExpressionKind::Call(call) if call.named.is_empty() && !rooted => {
                    let (property, arguments) = (call.function, call.arguments);
                    return Ok(Fact::Property(Application { property, arguments, span }));
                }
                kind => return Err(self.no_relation(&Expression { kind, span })),
            }
        }
        Ok(Fact::Relations(self.relations_after(first, start)?))
    }

    fn is_relation(kind: TokenKind) -> bool {
        use Sign::{Equal, Greater, GreaterEqual, Less, LessEqual};
        matches!(kind, TokenKind::Sign(Less | LessEqual | Equal | GreaterEqual | Greater))
    }

    /// `application`: `tails.upper_tail(weight, mean)`
    pub fn application(&mut self) -> Read<Application> {
        let start = self.here();
        let property = self.path("the name of a property")?;
        let mut arguments = Vec::new();
        if let Some(open) = self.accept(Sign::Open) {
            arguments.push(self.nested(Self::term)?);
            while self.accept(Sign::Comma).is_some() {
                arguments.push(self.nested(Self::term)?);
            }
            self.close(open, Sign::Close, "`,` or `)`")?;
        }
        Ok(Application { property, arguments, span: self.since(start) })
    }

    /// `condition`: relations, perhaps with a name before them.
    pub fn condition(&mut self) -> Read<Condition> {
        let start = self.here();
        let named = self.peek() == TokenKind::Word && self.peek_second() == TokenKind::Sign(Sign::Colon);
        let mut name = None;
        if named {
            name = Some(self.name("the name of a condition")?);
            self.take();
        }
        let relations = self.relations()?;
        Ok(Condition { name, relations, span: self.since(start) })
    }

    /// `conditions`: one or more, separated by commas.
    pub fn conditions(&mut self) -> Read<Vec<Condition>> {
        let mut list = vec![self.condition()?];
        while self.accept(Sign::Comma).is_some() {
            list.push(self.condition()?);
        }
        Ok(list)
    }
}

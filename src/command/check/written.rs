//! The statements of a dossier as their author wrote them, link by link.

use std::collections::BTreeMap;

use crate::language::format_term;
use crate::language::tree::{Expression, Fact, Relation, Relations, Statement, StatementKind, Tree};

/// One relation as written: left side, sign, right side.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Written {
    /// The left side.
    pub left: String,
    /// The sign.
    pub sign: &'static str,
    /// The right side.
    pub right: String,
}

impl std::fmt::Display for Written {
    fn fmt(&self, out: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(out, "{} {} {}", self.left, self.sign, self.right)
    }
}

/// The relations of every chain, claim and lemma by its name, in order.
pub fn relations(tree: &Tree) -> BTreeMap<String, Vec<Written>> {
    let mut found = BTreeMap::new();
    collect(&tree.statements, &mut found);
    found
}

/// The relations joined to one chain where they are one: `a <= b < c`.
pub fn joined(relations: &[Written]) -> String {
    let mut text = String::new();
    let mut last: Option<&str> = None;
    for relation in relations {
        match last {
            Some(left) if left == relation.left => {}
            Some(_) => text.push_str(&format!(", {}", relation.left)),
            None => text.push_str(&relation.left),
        }
        text.push_str(&format!(" {} {}", relation.sign, relation.right));
        last = Some(&relation.right);
    }
    text
}

fn collect(statements: &[Statement], found: &mut BTreeMap<String, Vec<Written>>) {
    for statement in statements {
        match &statement.kind {
            StatementKind::Chain(chain) => {
                let links = chain.links.iter().map(|link| (&link.relation, &link.term));
                found.insert(chain.name.text.clone(), steps(&chain.first, links));
            }
            StatementKind::Claim(claim) => {
                found.insert(claim.name.text.clone(), of_relations(&claim.relations));
            }
            StatementKind::Lemma(lemma) => {
                if let Fact::Relations(relations) = &lemma.fact {
                    found.insert(lemma.name.text.clone(), of_relations(relations));
                }
            }
            StatementKind::Block(block) => collect(&block.statements, found),
            _ => {}
        }
    }
}

fn of_relations(relations: &Relations) -> Vec<Written> {
    steps(&relations.first, relations.rest.iter().map(|(relation, term)| (relation, term)))
}

fn steps<'a>(first: &Expression, rest: impl Iterator<Item = (&'a Relation, &'a Expression)>) -> Vec<Written> {
    let mut left = format_term(first);
    rest.map(|(relation, term)| {
        let right = format_term(term);
        let left = std::mem::replace(&mut left, right.clone());
        Written { left, sign: relation.kind.sign(), right }
    })
    .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::language::parse;
    use crate::source::SourceFile;

    #[test]
    fn chains_are_split_and_joined() {
        let text =
            "chain c\n    x\n      <= 2*y  [a]\n      < z\nfor t in (0, 1):\n    claim d: 1 < 2 <= 3\n";
        let found = relations(&parse(&SourceFile::alone("a.obl", text)).value);
        assert_eq!(found["c"][1].to_string(), "2*y < z");
        assert_eq!(joined(&found["c"]), "x <= 2*y < z");
        assert_eq!(joined(&found["d"]), "1 < 2 <= 3");
    }
}

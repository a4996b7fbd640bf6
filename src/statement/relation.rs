//! Relations between two terms.

use std::collections::BTreeSet;
use std::fmt;

use crate::expression::{Name, Substitution, Term, for_people};

/// An order relation.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Rel {
    /// `<=`
    LessEqual,
    /// `<`
    Less,
    /// `=`
    Equal,
    /// `>=`
    GreaterEqual,
    /// `>`
    Greater,
    /// `!=`
    NotEqual,
}

impl Rel {
    /// The sign of the plain form.
    #[must_use]
    pub const fn sign(self) -> &'static str {
        match self {
            Rel::LessEqual => "<=",
            Rel::Less => "<",
            Rel::Equal => "=",
            Rel::GreaterEqual => ">=",
            Rel::Greater => ">",
            Rel::NotEqual => "!=",
        }
    }

    /// The relation that holds exactly where this one does not.
    #[must_use]
    pub const fn negation(self) -> Rel {
        match self {
            Rel::LessEqual => Rel::Greater,
            Rel::Less => Rel::GreaterEqual,
            Rel::Equal => Rel::NotEqual,
            Rel::GreaterEqual => Rel::Less,
            Rel::Greater => Rel::LessEqual,
            Rel::NotEqual => Rel::Equal,
        }
    }

    /// What `a self b other c` gives for a and c, if anything.
    #[must_use]
    pub fn then(self, other: Rel) -> Option<Rel> {
        use Rel::{Equal, Greater, GreaterEqual, Less, LessEqual};
        match (self, other) {
            (Equal, r) | (r, Equal) => Some(r),
            (LessEqual, LessEqual) => Some(LessEqual),
            (LessEqual | Less, LessEqual | Less) => Some(Less),
            (GreaterEqual, GreaterEqual) => Some(GreaterEqual),
            (GreaterEqual | Greater, GreaterEqual | Greater) => Some(Greater),
            _ => None,
        }
    }
}

/// A relation between two terms, as written.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Relation {
    /// The left side.
    pub left: Term,
    /// The relation.
    pub rel: Rel,
    /// The right side.
    pub right: Term,
}

impl Relation {
    /// A relation.
    #[must_use]
    pub fn new(left: Term, rel: Rel, right: Term) -> Relation {
        Relation { left, rel, right }
    }

    /// The same with `>=` and `>` turned round.
    #[must_use]
    pub fn turned(&self) -> Relation {
        match self.rel {
            Rel::GreaterEqual => Relation::new(self.right.clone(), Rel::LessEqual, self.left.clone()),
            Rel::Greater => Relation::new(self.right.clone(), Rel::Less, self.left.clone()),
            _ => self.clone(),
        }
    }

    /// Its negation.
    #[must_use]
    pub fn negation(&self) -> Relation {
        Relation::new(self.left.clone(), self.rel.negation(), self.right.clone())
    }

    /// `right - left` of the turned relation: what is `>= 0`, `> 0`, `= 0` or `!= 0`.
    #[must_use]
    pub fn difference(&self) -> Term {
        let turned = self.turned();
        if turned.left.is_zero() { turned.right } else { turned.right.subtract(&turned.left) }
    }

    /// The relation as people type it.
    #[must_use]
    pub fn for_people(&self) -> String {
        format!("{} {} {}", for_people(&self.left), self.rel.sign(), for_people(&self.right))
    }

    /// Both sides rewritten.
    #[must_use]
    pub fn map(&self, mut f: impl FnMut(&Term) -> Term) -> Relation {
        Relation::new(f(&self.left), self.rel, f(&self.right))
    }

    /// Both sides under a substitution.
    #[must_use]
    pub fn under(&self, substitution: &Substitution) -> Relation {
        self.map(|t| substitution.apply(t))
    }

    /// The variables that occur free.
    #[must_use]
    pub fn free_variables(&self) -> BTreeSet<Name> {
        let mut free = self.left.free_variables();
        free.extend(self.right.free_variables());
        free
    }

    /// Whether the relation is decided by two literal numbers, and how.
    #[must_use]
    pub fn literal(&self) -> Option<bool> {
        let (a, b) = (self.left.as_number()?, self.right.as_number()?);
        Some(match self.rel {
            Rel::LessEqual => a <= b,
            Rel::Less => a < b,
            Rel::Equal => a == b,
            Rel::GreaterEqual => a >= b,
            Rel::Greater => a > b,
            Rel::NotEqual => a != b,
        })
    }
}

impl fmt::Display for Relation {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} {} {}", self.left, self.rel.sign(), self.right)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn composition_is_transitivity() {
        use Rel::{Equal, Greater, Less, LessEqual, NotEqual};
        assert_eq!(LessEqual.then(Less), Some(Less));
        assert_eq!(Equal.then(LessEqual), Some(LessEqual));
        assert_eq!(Equal.then(Equal), Some(Equal));
        assert_eq!(Less.then(Greater), None);
        assert_eq!(NotEqual.then(NotEqual), None);
    }

    #[test]
    fn turning_and_difference() {
        let r = Relation::new(Term::variable("x"), Rel::Greater, Term::integer(0));
        assert_eq!(r.turned().to_string(), "0 < x");
        assert_eq!(r.difference().to_string(), "x");
        assert_eq!(r.negation().to_string(), "x <= 0");
    }
}

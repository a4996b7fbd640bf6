//! Variables and quantities with their domains.

use std::collections::BTreeSet;
use std::fmt;

use crate::expression::{End, Name, Renaming, Sort, Substitution, Term};

use super::relation::{Rel, Relation};

/// A range of numbers of one sort.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Domain {
    /// The kind of numbers.
    pub sort: Sort,
    /// The lower end.
    pub lower: End,
    /// Whether a finite lower end is left out.
    pub lower_open: bool,
    /// The upper end.
    pub upper: End,
    /// Whether a finite upper end is left out.
    pub upper_open: bool,
}

impl Domain {
    /// All numbers of the sort.
    #[must_use]
    pub fn all(sort: Sort) -> Domain {
        Domain {
            sort,
            lower: End::MinusInfinity,
            lower_open: true,
            upper: End::PlusInfinity,
            upper_open: true,
        }
    }

    /// The relations that say `term` lies between the ends, lower first.
    #[must_use]
    pub fn membership(&self, term: &Term) -> Vec<Relation> {
        let mut relations = Vec::new();
        if let End::Finite(end) = &self.lower {
            let rel = if self.lower_open { Rel::Greater } else { Rel::GreaterEqual };
            relations.push(Relation::new(term.clone(), rel, end.clone()));
        }
        if let End::Finite(end) = &self.upper {
            let rel = if self.upper_open { Rel::Less } else { Rel::LessEqual };
            relations.push(Relation::new(term.clone(), rel, end.clone()));
        }
        relations
    }

    /// The finite ends, lower first.
    pub fn ends(&self) -> impl Iterator<Item = &Term> {
        [&self.lower, &self.upper].into_iter().filter_map(End::finite)
    }

    /// The variables of the ends.
    #[must_use]
    pub fn free_variables(&self) -> BTreeSet<Name> {
        self.ends().flat_map(Term::free_variables).collect()
    }

    /// The domain with its ends rewritten.
    #[must_use]
    pub fn map(&self, mut f: impl FnMut(&Term) -> Term) -> Domain {
        Domain { lower: self.lower.map(&mut f), upper: self.upper.map(&mut f), ..self.clone() }
    }

    /// The domain with its ends under a substitution.
    #[must_use]
    pub fn under(&self, substitution: &Substitution) -> Domain {
        self.map(|t| substitution.apply(t))
    }
}

impl fmt::Display for Domain {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let open = |end: &End, open: bool| open || end.finite().is_none();
        let left = if open(&self.lower, self.lower_open) { '(' } else { '[' };
        let right = if open(&self.upper, self.upper_open) { ')' } else { ']' };
        write!(f, "{} in {left}{}, {}{right}", self.sort.name(), self.lower, self.upper)
    }
}

/// A variable with its domain.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Declaration {
    /// The variable.
    pub name: Name,
    /// Where it ranges; ends use variables declared earlier.
    pub domain: Domain,
}

impl Declaration {
    /// The relations that the declared ends state, lower first.
    #[must_use]
    pub fn ends(&self) -> Vec<Relation> {
        self.domain.membership(&Term::variable(self.name.clone()))
    }
}

impl fmt::Display for Declaration {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} : {}", self.name, self.domain)
    }
}

/// A quantity: something known only by its range and by facts.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Signature {
    /// The quantity.
    pub name: Name,
    /// The domains of its arguments; ends use parameters only.
    pub arguments: Vec<Domain>,
    /// The range of its values.
    pub range: Domain,
}

impl Signature {
    /// The variables of all ends.
    #[must_use]
    pub fn free_variables(&self) -> BTreeSet<Name> {
        self.arguments.iter().chain([&self.range]).flat_map(Domain::free_variables).collect()
    }

    /// The signature with all ends rewritten.
    #[must_use]
    pub fn map(&self, mut f: impl FnMut(&Term) -> Term) -> Signature {
        Signature {
            name: self.name.clone(),
            arguments: self.arguments.iter().map(|d| d.map(&mut f)).collect(),
            range: self.range.map(&mut f),
        }
    }

    /// The signature with quantities renamed in its ends.
    #[must_use]
    pub fn rename_quantities(&self, names: &Renaming) -> Signature {
        self.map(|t| t.rename_quantities(names))
    }
}

impl fmt::Display for Signature {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}(", self.name)?;
        for (i, domain) in self.arguments.iter().enumerate() {
            write!(f, "{}{domain}", if i > 0 { ", " } else { "" })?;
        }
        write!(f, ") : {}", self.range)
    }
}

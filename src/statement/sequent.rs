//! Sequents: what is to be shown, and under which declarations and hypotheses.

use std::fmt;

use num_traits::Signed;

use crate::expression::{Name, Sort, Sorts};

use super::declaration::Declaration;
use super::relation::Relation;

/// What a sequent concludes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Conclusion {
    /// That the relation holds at every point.
    Relation(Relation),
    /// That there is no point.
    Absurd,
}

/// Declarations, hypotheses and a conclusion, for all values of the quantities.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Sequent {
    /// The variables; ends use earlier ones only.
    pub variables: Vec<Declaration>,
    /// The hypotheses; certificates call the first one `h1`.
    pub hypotheses: Vec<Relation>,
    /// What is to be shown.
    pub goal: Conclusion,
}

impl Sequent {
    /// The goal relation, unless the goal is absurdity.
    #[must_use]
    pub fn relation(&self) -> Option<&Relation> {
        match &self.goal {
            Conclusion::Relation(r) => Some(r),
            Conclusion::Absurd => None,
        }
    }

    /// The declaration of a variable.
    #[must_use]
    pub fn declaration(&self, name: &str) -> Option<&Declaration> {
        self.variables.iter().find(|d| &*d.name == name)
    }

    /// The same context with another goal.
    #[must_use]
    pub fn with_goal(&self, goal: Relation) -> Sequent {
        Sequent { goal: Conclusion::Relation(goal), ..self.clone() }
    }

    /// The same context with absurdity as its goal: the question whether it has no point.
    #[must_use]
    pub fn with_absurd(&self) -> Sequent {
        Sequent { goal: Conclusion::Absurd, ..self.clone() }
    }
}

impl Sorts for Sequent {
    fn of_variable(&self, name: &Name) -> Sort {
        // The innermost declaration counts, should a name occur twice.
        self.variables.iter().rev().find(|d| d.name == *name).map_or(Sort::Real, |d| d.domain.sort)
    }

    fn is_non_negative(&self, name: &Name) -> bool {
        let declaration = self.variables.iter().rev().find(|d| d.name == *name);
        let end = declaration.and_then(|d| d.domain.lower.finite()?.as_number());
        end.is_some_and(|a| !a.is_negative())
    }
}

impl fmt::Display for Sequent {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (i, d) in self.variables.iter().enumerate() {
            write!(f, "{}{d}", if i == 0 { "for all " } else { ", " })?;
        }
        for (i, h) in self.hypotheses.iter().enumerate() {
            write!(f, "{}{h}", if i == 0 { " with " } else { ", " })?;
        }
        let lead = if self.variables.is_empty() && self.hypotheses.is_empty() { "" } else { ": " };
        match &self.goal {
            Conclusion::Relation(r) => write!(f, "{lead}{r}"),
            Conclusion::Absurd => write!(f, "{lead}absurd"),
        }
    }
}

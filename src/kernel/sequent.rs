//! Sequents: what is to be shown, and under which declarations and hypotheses.
//!
//! A sequent is *well posed* when every end of a declaration, every hypothesis
//! (in order) and the goal are defined wherever what stands before them holds.
//! Every rule keeps this; see the head of `defined.rs`.

use std::collections::BTreeSet;
use std::fmt;

use super::term::{Name, Term};
use super::verdict::{Checked, Reason, refuse};

/// Which numbers a variable ranges over.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Sort {
    /// Real numbers.
    Real,
    /// Integers.
    Integer,
    /// Even integers.
    Even,
}

impl Sort {
    /// Its name in texts.
    pub fn name(self) -> &'static str {
        match self {
            Sort::Real => "real",
            Sort::Integer => "integer",
            Sort::Even => "even",
        }
    }
}

/// One finite end of a domain.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct End {
    /// Its value, in variables declared earlier.
    pub term: Term,
    /// Whether the value itself is excluded.
    pub open: bool,
}

/// A range of numbers; a missing end is infinite.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Domain {
    /// The sort.
    pub sort: Sort,
    /// The lower end.
    pub lower: Option<End>,
    /// The upper end.
    pub upper: Option<End>,
}

impl Domain {
    /// The names that its ends mention.
    pub fn names(&self) -> BTreeSet<Name> {
        [&self.lower, &self.upper].into_iter().flatten().flat_map(|e| e.term.free_variables()).collect()
    }
}

/// A variable and its domain.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Declaration {
    /// The variable.
    pub name: Name,
    /// Where it ranges.
    pub domain: Domain,
}

/// The order relations.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
#[allow(missing_docs)]
pub enum Rel {
    Le,
    Lt,
    Eq,
    Ge,
    Gt,
    Ne,
}

impl Rel {
    /// Its sign in texts.
    pub fn name(self) -> &'static str {
        match self {
            Rel::Le => "<=",
            Rel::Lt => "<",
            Rel::Eq => "=",
            Rel::Ge => ">=",
            Rel::Gt => ">",
            Rel::Ne => "!=",
        }
    }

    /// The relation that holds exactly where this one does not.
    pub fn negation(self) -> Rel {
        match self {
            Rel::Le => Rel::Gt,
            Rel::Lt => Rel::Ge,
            Rel::Eq => Rel::Ne,
            Rel::Ge => Rel::Lt,
            Rel::Gt => Rel::Le,
            Rel::Ne => Rel::Eq,
        }
    }
}

/// A relation between two terms.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Relation {
    /// Left side.
    pub left: Term,
    /// The relation.
    pub rel: Rel,
    /// Right side.
    pub right: Term,
}

impl Relation {
    /// A relation.
    pub fn new(left: Term, rel: Rel, right: Term) -> Relation {
        Relation { left, rel, right }
    }

    /// The same with `>=`, `>` turned round.
    pub fn turned(&self) -> Relation {
        match self.rel {
            Rel::Ge => Relation::new(self.right.clone(), Rel::Le, self.left.clone()),
            Rel::Gt => Relation::new(self.right.clone(), Rel::Lt, self.left.clone()),
            _ => self.clone(),
        }
    }

    /// Its negation.
    pub fn negation(&self) -> Relation {
        Relation::new(self.left.clone(), self.rel.negation(), self.right.clone())
    }

    /// Both sides rewritten.
    pub fn map(&self, mut f: impl FnMut(&Term) -> Term) -> Relation {
        Relation::new(f(&self.left), self.rel, f(&self.right))
    }

    /// `right - left` of the relation with `>=`, `>` turned round: the term that
    /// is `>= 0`, `> 0`, `= 0` or `!= 0`.
    pub fn difference(&self) -> Term {
        let r = self.turned();
        if r.left == Term::zero() { r.right } else { r.right.subtract(&r.left) }
    }

    /// Whether `name` occurs.
    pub fn mentions(&self, name: &str) -> bool {
        self.left.mentions(name) || self.right.mentions(name)
    }
}

/// What is to be shown.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Goal {
    /// That the relation holds at every point.
    Relation(Relation),
    /// That there is no point.
    Absurd,
}

/// Declarations, hypotheses, goal.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Sequent {
    /// The variables; ends use earlier ones only.
    pub variables: Vec<Declaration>,
    /// The hypotheses; `h1` is the first.
    pub hypotheses: Vec<Relation>,
    /// The goal.
    pub goal: Goal,
}

impl Sequent {
    /// The goal as a relation with `>=`, `>` turned round; refused if it is absurdity.
    pub fn relation(&self) -> Checked<Relation> {
        match &self.goal {
            Goal::Relation(r) => Ok(r.turned()),
            Goal::Absurd => refuse(Reason::Condition, "the goal is absurdity, not a relation"),
        }
    }

    /// The declaration of a variable.
    pub fn declaration(&self, name: &str) -> Option<&Declaration> {
        self.variables.iter().find(|d| &*d.name == name)
    }

    /// The same context with another goal.
    pub fn with_goal(&self, goal: Relation) -> Sequent {
        Sequent { goal: Goal::Relation(goal), ..self.clone() }
    }

    /// The same with one more hypothesis.
    pub fn with_hypothesis(&self, hypothesis: Relation) -> Sequent {
        let mut new = self.clone();
        new.hypotheses.push(hypothesis);
        new
    }

    /// The same with one more variable, declared last.
    pub fn with_variable(&self, declaration: Declaration) -> Checked<Sequent> {
        self.require_fresh(&declaration.name)?;
        let mut new = self.clone();
        new.variables.push(declaration);
        Ok(new)
    }

    /// The same with `new` for every occurrence of `old` in hypotheses and goal.
    pub fn replaced(&self, old: &Term, new: &Term) -> Sequent {
        let put = |t: &Term| t.replace(old, new);
        let mut s = self.clone();
        s.hypotheses = self.hypotheses.iter().map(|h| h.map(put)).collect();
        if let Goal::Relation(r) = &self.goal {
            s.goal = Goal::Relation(r.map(put));
        }
        s
    }

    /// The quantities that occur in ends, hypotheses and goal.
    pub fn quantities(&self) -> BTreeSet<Name> {
        let goal = match &self.goal {
            Goal::Relation(r) => Some(r),
            Goal::Absurd => None,
        };
        let ends = self.variables.iter().flat_map(|d| [&d.domain.lower, &d.domain.upper]).flatten();
        let sides = self.hypotheses.iter().chain(goal).flat_map(|r| [&r.left, &r.right]);
        sides.chain(ends.map(|e| &e.term)).flat_map(Term::quantities).collect()
    }

    /// Refuses a name that is already in use.
    pub fn require_fresh(&self, name: &str) -> Checked {
        if self.declaration(name).is_some() {
            return refuse(Reason::Name, format!("`{name}` is already declared"));
        }
        Ok(())
    }

    /// Refuses a term with a variable that is not declared.
    pub fn require_closed(&self, term: &Term) -> Checked {
        for name in term.free_variables() {
            if self.declaration(&name).is_none() {
                return refuse(Reason::Name, format!("`{name}` is not declared"));
            }
        }
        Ok(())
    }

    /// The relations that the declared ends of a variable state, lower first.
    pub fn ends(&self, name: &str) -> (Option<Relation>, Option<Relation>) {
        let Some(d) = self.declaration(name) else { return (None, None) };
        let x = Term::variable(name);
        let rel = |open| if open { Rel::Lt } else { Rel::Le };
        let lower = d.domain.lower.as_ref().map(|e| Relation::new(e.term.clone(), rel(e.open), x.clone()));
        let upper = d.domain.upper.as_ref().map(|e| Relation::new(x.clone(), rel(e.open), e.term.clone()));
        (lower, upper)
    }

    /// The fact a certificate calls `h3`, `lo.x` or `hi.x`, with `>=`, `>` turned round.
    pub fn reference(&self, word: &str) -> Checked<Relation> {
        let missing = || format!("there is no `{word}` here");
        let found = if let Some(x) = word.strip_prefix("lo.") {
            self.ends(x).0
        } else if let Some(x) = word.strip_prefix("hi.") {
            self.ends(x).1
        } else {
            word.strip_prefix('h')
                .and_then(|n| n.parse::<usize>().ok())
                .and_then(|n| self.hypotheses.get(n.wrapping_sub(1)))
                .map(Relation::turned)
        };
        found.map_or_else(|| refuse(Reason::Name, missing()), Ok)
    }
}

impl fmt::Display for Domain {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} in ", self.sort.name())?;
        match &self.lower {
            None => f.write_str("(-inf, ")?,
            Some(e) => write!(f, "{}{}, ", if e.open { '(' } else { '[' }, e.term)?,
        }
        match &self.upper {
            None => f.write_str("inf)"),
            Some(e) => write!(f, "{}{}", e.term, if e.open { ')' } else { ']' }),
        }
    }
}

impl fmt::Display for Declaration {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} : {}", self.name, self.domain)
    }
}

impl fmt::Display for Relation {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} {} {}", self.left, self.rel.name(), self.right)
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
            Goal::Relation(r) => write!(f, "{lead}{r}"),
            Goal::Absurd => write!(f, "{lead}absurd"),
        }
    }
}

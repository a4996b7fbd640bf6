//! One step of a certificate: a rule and its fields, not yet checked.

use num_rational::BigRational;
use num_traits::ToPrimitive;

use super::sequent::{Declaration, Relation};
use super::term::{Name, Term};
use super::verdict::{Checked, Reason, Reject, refuse};

/// A rule applied to fields.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Step {
    /// The rule's name.
    pub rule: Name,
    /// What it is applied to.
    pub fields: Vec<Field>,
}

/// One field of a step.
#[derive(Clone, Debug, PartialEq, Eq)]
#[allow(missing_docs)]
pub enum Field {
    Term(Term),
    Declaration(Declaration),
    Relation(Relation),
    Word(Name),
    Number(BigRational),
    Text(String),
    Step(Step),
}

/// Reads the fields of a step in order; what is missing or left over is a refusal.
pub struct Fields<'a> {
    rest: &'a [Field],
}

macro_rules! expect {
    ($name:ident, $variant:ident, $type:ty, $what:literal) => {
        #[doc = concat!("The next field, which must be ", $what, ".")]
        pub fn $name(&mut self) -> Checked<&'a $type> {
            match self.rest.split_first() {
                Some((Field::$variant(value), rest)) => {
                    self.rest = rest;
                    Ok(value)
                }
                _ => refuse(Reason::Fields, concat!("expected ", $what)),
            }
        }
    };
}

impl<'a> Fields<'a> {
    /// The fields of a step.
    pub fn of(step: &'a Step) -> Fields<'a> {
        Fields { rest: &step.fields }
    }

    expect!(term, Term, Term, "a term in parentheses");
    expect!(declaration, Declaration, Declaration, "a declaration in parentheses");
    expect!(relation, Relation, Relation, "a relation in brackets");
    expect!(word, Word, Name, "a name");
    expect!(number, Number, BigRational, "a number");
    expect!(text, Text, String, "a text in quotes");
    expect!(step, Step, Step, "a step in braces");

    /// The next field, which must be a whole number from 0 to `limit`.
    pub fn count(&mut self, limit: usize) -> Checked<usize> {
        let n = self.number()?;
        let fits = n.is_integer().then(|| n.to_integer().to_usize()).flatten();
        match fits {
            Some(n) if n <= limit => Ok(n),
            _ => refuse(Reason::Limit, format!("a whole number up to {limit} is needed, not {n}")),
        }
    }

    /// The next field if it is a relation.
    pub fn optional_relation(&mut self) -> Option<&'a Relation> {
        if matches!(self.rest.first(), Some(Field::Relation(_))) { self.relation().ok() } else { None }
    }

    /// The next field if it is a term.
    pub fn optional_term(&mut self) -> Option<&'a Term> {
        if matches!(self.rest.first(), Some(Field::Term(_))) { self.term().ok() } else { None }
    }

    /// The next field if it is a name.
    pub fn optional_word(&mut self) -> Option<&'a Name> {
        if matches!(self.rest.first(), Some(Field::Word(_))) { self.word().ok() } else { None }
    }

    /// The next field if it is a step.
    pub fn optional_step(&mut self) -> Option<&'a Step> {
        if matches!(self.rest.first(), Some(Field::Step(_))) { self.step().ok() } else { None }
    }

    /// The next field if it is a step of that rule.
    pub fn optional_step_named(&mut self, rule: &str) -> Option<&'a Step> {
        if matches!(self.rest.first(), Some(Field::Step(s)) if &*s.rule == rule) {
            self.step().ok()
        } else {
            None
        }
    }

    /// The next field if it is that word.
    pub fn optional_word_named(&mut self, word: &str) -> Option<&'a Name> {
        if matches!(self.rest.first(), Some(Field::Word(w)) if &**w == word) {
            self.word().ok()
        } else {
            None
        }
    }

    /// Whether the next field is a step of that rule.
    pub fn sees_step_named(&self, rule: &str) -> bool {
        matches!(self.rest.first(), Some(Field::Step(s)) if &*s.rule == rule)
    }

    /// The next field if it is a step of another rule than that.
    pub fn optional_step_but(&mut self, rule: &str) -> Option<&'a Step> {
        if matches!(self.rest.first(), Some(Field::Step(s)) if &*s.rule != rule) {
            self.step().ok()
        } else {
            None
        }
    }

    /// Whether nothing is left.
    pub fn is_empty(&self) -> bool {
        self.rest.is_empty()
    }

    /// Refuses if something is left.
    pub fn end(&self) -> Checked {
        if self.rest.is_empty() {
            Ok(())
        } else {
            Err(Reject::new(Reason::Fields, format!("{} field(s) too many", self.rest.len())))
        }
    }
}

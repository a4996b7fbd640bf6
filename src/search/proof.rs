//! Certificates under construction, and their text (`grammar/certificate.ebnf`).

use std::fmt;

use num_bigint::BigInt;

use crate::expression::{Name, Term};
use crate::statement::{Declaration, Relation};

/// A step of a certificate: a rule of the kernel and its fields in order.
#[derive(Clone, Debug, PartialEq)]
pub struct Proof {
    /// The rule.
    pub rule: &'static str,
    /// Its fields.
    pub fields: Vec<Field>,
}

/// One field of a step.
#[derive(Clone, Debug, PartialEq)]
pub enum Field {
    /// A term, written in parentheses.
    Term(Term),
    /// A declaration, written in parentheses.
    Declaration(Declaration),
    /// A relation, written in brackets.
    Relation(Relation),
    /// A name.
    Word(Name),
    /// A natural number.
    Number(BigInt),
    /// A text, written in quotes.
    Text(String),
    /// A step, written in braces.
    Proof(Proof),
}

impl Proof {
    /// The rule without fields so far.
    #[must_use]
    pub fn new(rule: &'static str) -> Proof {
        Proof { rule, fields: Vec::new() }
    }

    /// A step still to be found: no kernel knows it. A referee who objects to it alone
    /// has found everything before it in order.
    #[must_use]
    pub fn open() -> Proof {
        Proof::new("open")
    }

    /// With one more field.
    #[must_use]
    pub fn with(mut self, field: impl Into<Field>) -> Proof {
        self.fields.push(field.into());
        self
    }

    /// With more fields of one kind.
    #[must_use]
    pub fn with_all<F: Into<Field>>(mut self, fields: impl IntoIterator<Item = F>) -> Proof {
        self.fields.extend(fields.into_iter().map(Into::into));
        self
    }

    /// With one more field that is a name.
    #[must_use]
    pub fn word(self, word: &str) -> Proof {
        self.with(Field::Word(word.into()))
    }

    /// The method-independent measure of size: how many steps it has.
    #[must_use]
    pub fn steps(&self) -> usize {
        1 + self.fields.iter().map(|f| if let Field::Proof(p) = f { p.steps() } else { 0 }).sum::<usize>()
    }
}

impl From<Term> for Field {
    fn from(value: Term) -> Field {
        Field::Term(value)
    }
}

impl From<&Term> for Field {
    fn from(value: &Term) -> Field {
        Field::Term(value.clone())
    }
}

impl From<Declaration> for Field {
    fn from(value: Declaration) -> Field {
        Field::Declaration(value)
    }
}

impl From<Relation> for Field {
    fn from(value: Relation) -> Field {
        Field::Relation(value)
    }
}

impl From<Proof> for Field {
    fn from(value: Proof) -> Field {
        Field::Proof(value)
    }
}

impl From<u32> for Field {
    fn from(value: u32) -> Field {
        Field::Number(value.into())
    }
}

impl From<String> for Field {
    fn from(value: String) -> Field {
        Field::Text(value)
    }
}

impl fmt::Display for Field {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Field::Term(t) => write!(f, "({t})"),
            Field::Declaration(d) => write!(f, "({d})"),
            Field::Relation(r) => write!(f, "[{r}]"),
            Field::Word(w) => f.write_str(w),
            Field::Number(n) => write!(f, "{n}"),
            Field::Text(t) => write!(f, "\"{t}\""),
            Field::Proof(p) => write!(f, "{p}"),
        }
    }
}

impl fmt::Display for Proof {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{{{}", self.rule)?;
        for field in &self.fields {
            write!(f, " {field}")?;
        }
        f.write_str("}")
    }
}

//! What a sequent knows, as a list of facts that steps can refer to: hypotheses,
//! ends of domains, and what the definitions of `ceil`, `floor` and `abs` say about
//! their occurrences. And the signs of terms, as the referee sees them.

use std::cell::{Cell, RefCell};
use std::collections::BTreeMap;

use num_traits::Signed;

use crate::enclosure::Function;
use crate::expression::{Node, Term};
use crate::statement::{Rel, Relation, Sequent};

use super::super::engine::{Referee, Search, Stuck};
use super::super::laurent::{Exponent, Monomial};
use super::super::plain::{is_plainly_non_negative, is_plainly_positive};
use super::super::proof::{Field, Proof};

/// A relation `a <= b`, `a < b` or `a = b` that holds on the whole context.
#[derive(Clone, Debug)]
pub struct Fact {
    /// The relation.
    pub relation: Relation,
    /// How a step gets at it.
    pub source: Source,
}

/// How a step gets at a fact.
#[derive(Clone, Debug)]
pub enum Source {
    /// By this reference.
    Reference(String),
    /// As the last hypothesis, after a step that lacks only its last premise.
    Lemma(Proof),
}

/// Most occurrences of `ceil` and the like that are looked at.
const MOST_CALLS: usize = 8;

/// The hypotheses, the ends, and the definitions of rounding and absolute values.
#[must_use]
pub fn facts(s: &Sequent) -> Vec<Fact> {
    let mut found = Vec::new();
    let mut add = |relation: Relation, source: Source| {
        if relation.rel != Rel::NotEqual && relation.left != relation.right {
            found.push(Fact { relation, source });
        }
    };
    for (i, h) in s.hypotheses.iter().enumerate() {
        add(h.turned(), Source::Reference(format!("h{}", i + 1)));
    }
    for d in &s.variables {
        for relation in d.ends() {
            let upper = matches!(relation.rel, Rel::Less | Rel::LessEqual);
            let word = if upper { "hi" } else { "lo" };
            add(relation.turned(), Source::Reference(format!("{word}.{}", d.name)));
        }
    }
    for (function, argument) in calls(s) {
        let t = Term::apply1(function, &argument);
        let one = Term::integer(1);
        let known: &[(&str, Relation)] = &match function {
            Function::Ceil => [
                ("ceil-lower", Relation::new(argument.clone(), Rel::LessEqual, t.clone())),
                ("ceil-upper", Relation::new(t.clone(), Rel::Less, argument.add(&one))),
            ],
            Function::Floor => [
                ("floor-lower", Relation::new(argument.subtract(&one), Rel::Less, t.clone())),
                ("floor-upper", Relation::new(t.clone(), Rel::LessEqual, argument.clone())),
            ],
            _ => [
                ("abs-lower", Relation::new(argument.negate(), Rel::LessEqual, t.clone())),
                ("abs-upper", Relation::new(argument.clone(), Rel::LessEqual, t.clone())),
            ],
        };
        for (name, relation) in known {
            let step = Proof::new("known").with(Field::Text((*name).into())).with(&argument);
            add(relation.clone(), Source::Lemma(step));
        }
    }
    found
}

/// The applications of `ceil`, `floor` and `abs` in goal and hypotheses, goal first.
fn calls(s: &Sequent) -> Vec<(Function, Term)> {
    let mut found: Vec<(Function, Term)> = Vec::new();
    for r in s.relation().into_iter().chain(&s.hypotheses) {
        for side in [&r.left, &r.right] {
            side.walk(&mut |t| {
                if let Node::Apply(f @ (Function::Ceil | Function::Floor | Function::Abs), args) = t.node() {
                    let call = (*f, args[0].clone());
                    let closed = args[0].free_variables().iter().all(|v| s.declaration(v).is_some());
                    if closed && !found.contains(&call) && found.len() < MOST_CALLS {
                        found.push(call);
                    }
                }
                !matches!(t.node(), Node::Series { .. })
            });
        }
    }
    found
}

/// What is known about the sign of a term.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Sign {
    /// `> 0`
    Positive,
    /// `>= 0`
    NonNegative,
    /// `< 0`
    Negative,
    /// `<= 0`
    NonPositive,
    /// Nothing.
    Unknown,
}

impl Sign {
    /// Whether it says `>= 0`.
    #[must_use]
    pub fn is_non_negative(self) -> bool {
        matches!(self, Sign::Positive | Sign::NonNegative)
    }

    fn times(self, other: Sign) -> Sign {
        let strict = |s| matches!(s, Sign::Positive | Sign::Negative);
        if self == Sign::Unknown || other == Sign::Unknown {
            return Sign::Unknown;
        }
        match (self.is_non_negative() == other.is_non_negative(), strict(self) && strict(other)) {
            (true, true) => Sign::Positive,
            (true, false) => Sign::NonNegative,
            (false, true) => Sign::Negative,
            (false, false) => Sign::NonPositive,
        }
    }
}

/// Signs of terms on a sequent's context by its plain shape or by asking the referee,
/// remembered.
pub struct Signs<'a> {
    s: &'a Sequent,
    referee: Referee<'a>,
    known: RefCell<BTreeMap<Term, Sign>>,
    asked: Cell<u64>,
}

impl<'a> Signs<'a> {
    /// Nothing asked yet.
    #[must_use]
    pub fn new(s: &'a Sequent, referee: Referee<'a>) -> Signs<'a> {
        Signs { s, referee, known: RefCell::default(), asked: Cell::new(0) }
    }

    /// Pays for what was asked since the last payment.
    ///
    /// # Errors
    /// When the budget is used up.
    pub fn pay(&self, search: &mut Search) -> Result<(), Stuck> {
        search.spend(self.asked.replace(0))
    }

    /// The sign of a term.
    #[must_use]
    pub fn of(&self, term: &Term) -> Sign {
        if let Some(q) = term.as_number() {
            return if q.is_positive() {
                Sign::Positive
            } else if q.is_negative() {
                Sign::Negative
            } else {
                Sign::NonNegative
            };
        }
        if let Some(known) = self.known.borrow().get(term) {
            return *known;
        }
        let zero = Term::integer(0);
        let states = |l: &Term, rel, r: &Term| {
            self.asked.set(self.asked.get() + 20);
            let asked = self.s.with_goal(Relation::new(l.clone(), rel, r.clone()));
            (self.referee.0)(&asked.to_string(), "{sign}").is_ok()
        };
        let sign = if is_plainly_positive(self.s, term) || states(&zero, Rel::Less, term) {
            Sign::Positive
        } else if is_plainly_non_negative(self.s, term) || states(&zero, Rel::LessEqual, term) {
            Sign::NonNegative
        } else if states(term, Rel::Less, &zero) {
            Sign::Negative
        } else if states(term, Rel::LessEqual, &zero) {
            Sign::NonPositive
        } else {
            Sign::Unknown
        };
        self.known.borrow_mut().insert(term.clone(), sign);
        sign
    }

    /// The sign of a product of atoms where it is defined.
    #[must_use]
    pub fn of_monomial(&self, m: &Monomial) -> Sign {
        m.factors().iter().map(|(a, e)| self.of_power(a, e)).fold(Sign::Positive, Sign::times)
    }

    fn of_power(&self, atom: &Term, e: &Exponent) -> Sign {
        let sign = self.of(atom);
        let below = e.is_negative();
        let odd = e.is_integer() && num_integer::Integer::is_odd(&e.to_integer());
        match sign {
            Sign::Positive => Sign::Positive,
            // What stands under a root is not negative, a divisor not zero.
            Sign::NonNegative if below => Sign::Positive,
            Sign::NonNegative => Sign::NonNegative,
            _ if !odd && below => Sign::Positive,
            Sign::Negative if !odd => Sign::Positive,
            _ if !odd => Sign::NonNegative,
            Sign::NonPositive if below => Sign::Negative,
            other => other,
        }
    }
}

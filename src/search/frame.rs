//! The boxes of a sequent: ranges of its variables, how they are split, and the
//! sequent restricted to one of them. The kernel splits in exactly the same way
//! (see the head of its rule `boxes`).

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{Signed, ToPrimitive};

use crate::enclosure::Interval;
use crate::expression::tape::{Jets, Order, Tape};
use crate::expression::{End, Name, Sort, Term};
use crate::statement::{Declaration, Rel, Relation, Sequent};

/// The whole range of one variable.
#[derive(Clone, Debug)]
struct Line {
    lower: Option<Value>,
    upper: Option<Value>,
    dependent: bool,
    integer: bool,
}

#[derive(Clone, Debug)]
struct Value {
    enclosure: Interval,
    term: Term,
}

/// The ranges of all variables of a sequent.
#[derive(Clone, Debug)]
pub struct Frame {
    lines: Vec<Line>,
    /// The ends that depend on other variables, as relations.
    pub dependent_ends: Vec<Relation>,
    /// The variables.
    pub names: Vec<Name>,
}

/// A part of the range of one variable.
#[derive(Clone, Debug)]
pub struct Cell {
    part: Part,
    /// The numbers in it.
    pub range: Interval,
}

#[derive(Clone, Debug)]
enum Part {
    Real { index: u64, level: u32, low: Option<Interval>, high: Option<Interval> },
    Integer { first: i64, last: i64 },
}

/// More halvings of one coordinate than this are not resolved by `f64`.
pub const MAX_LEVEL: u32 = 48;

impl Frame {
    /// The ranges of a sequent; nothing if an end cannot be enclosed.
    #[must_use]
    pub fn new(s: &Sequent) -> Option<Frame> {
        let names: Vec<Name> = s.variables.iter().map(|d| d.name.clone()).collect();
        let mut frame = Frame { lines: Vec::new(), dependent_ends: Vec::new(), names };
        let mut ranges: Vec<Interval> = Vec::new();
        for (i, d) in s.variables.iter().enumerate() {
            let mut dependent = false;
            let mut value = |end: &End, lower: bool| -> Option<Option<Value>> {
                let End::Finite(term) = end else { return Some(None) };
                let tape: Tape<f64> = Tape::new(std::slice::from_ref(term), &frame.names[..i], s, ())?;
                let mut jets = Jets::default();
                tape.run(&ranges, Order::Value, &mut jets);
                if !jets.defined.is_everywhere() {
                    return None;
                }
                let all = *tape.value(0, &jets);
                if term.free_variables().is_empty() {
                    return Some(Some(Value { enclosure: all, term: term.clone() }));
                }
                dependent = true;
                let extreme = if lower { *all.lo() } else { *all.hi() };
                if extreme.is_infinite() {
                    return Some(None);
                }
                Some(Some(Value { enclosure: Interval::point(extreme), term: exact(extreme) }))
            };
            let lower = value(&d.domain.lower, true)?;
            let upper = value(&d.domain.upper, false)?;
            let integer = d.domain.sort != Sort::Real && lower.is_some() && upper.is_some();
            if dependent {
                frame
                    .dependent_ends
                    .extend(d.ends().into_iter().filter(|r| !r.right.free_variables().is_empty()));
            }
            let line = Line { lower, upper, dependent, integer };
            ranges.push(line.start(d)?.range);
            frame.lines.push(line);
        }
        Some(frame)
    }

    /// The whole domain.
    #[must_use]
    pub fn start(&self, s: &Sequent) -> Option<Vec<Cell>> {
        s.variables.iter().zip(&self.lines).map(|(d, l)| l.start(d)).collect()
    }

    /// The two halves of a cell, if it can be split further.
    #[must_use]
    pub fn halves(&self, v: usize, cell: &Cell) -> Option<(Cell, Cell)> {
        match &cell.part {
            Part::Real { index, level, low, high } => {
                if *level >= MAX_LEVEL {
                    return None;
                }
                let (index, level) = (index * 2, level + 1);
                let middle = Some(self.lines[v].point(index + 1, level)?);
                Some((Cell::real(index, level, *low, middle)?, Cell::real(index + 1, level, middle, *high)?))
            }
            Part::Integer { first, last } if first < last => {
                let middle = (first + last).div_euclid(2);
                Some((Cell::integer(*first, middle)?, Cell::integer(middle + 1, *last)?))
            }
            Part::Integer { .. } => None,
        }
    }

    /// The sequent restricted to a box, as the kernel will see it.
    #[must_use]
    pub fn restricted(&self, s: &Sequent, cells: &[Cell]) -> Sequent {
        let mut s = s.clone();
        for ((d, cell), line) in s.variables.iter_mut().zip(cells).zip(&self.lines) {
            let (lower, upper) = match &cell.part {
                Part::Real { index, level, .. } => (
                    (*index != 0).then(|| line.term(*index, *level)),
                    (*index + 1 != 1 << level).then(|| line.term(*index + 1, *level)),
                ),
                Part::Integer { first, last } => (Some(Term::integer(*first)), Some(Term::integer(*last))),
            };
            let x = Term::variable(d.name.clone());
            if let Some(term) = lower {
                if line.dependent {
                    s.hypotheses.push(Relation::new(term, Rel::LessEqual, x.clone()));
                } else {
                    (d.domain.lower, d.domain.lower_open) = (End::Finite(term), false);
                }
            }
            if let Some(term) = upper {
                if line.dependent {
                    s.hypotheses.push(Relation::new(term, Rel::GreaterEqual, x));
                } else {
                    (d.domain.upper, d.domain.upper_open) = (End::Finite(term), false);
                }
            }
        }
        s
    }
}

impl Line {
    fn start(&self, d: &Declaration) -> Option<Cell> {
        let (low, high) =
            (self.lower.as_ref().map(|v| v.enclosure), self.upper.as_ref().map(|v| v.enclosure));
        if !self.integer {
            return Cell::real(0, 0, low, high);
        }
        let whole = |v: &Value, open: bool, declared: &End, up: bool| -> Option<i64> {
            let literal = v.term.as_number();
            let shift = i64::from(
                open && declared.finite().is_some_and(|t| t.as_number().is_some())
                    && literal.is_some_and(BigRational::is_integer),
            );
            let n = match literal {
                Some(q) => if up { q.ceil() } else { q.floor() }.to_integer().to_i64()?,
                None if up => v.enclosure.lo().ceil() as i64,
                None => v.enclosure.hi().floor() as i64,
            };
            (n.abs() < 1 << 52).then_some(if up { n + shift } else { n - shift })
        };
        let dom = &d.domain;
        Cell::integer(
            whole(self.lower.as_ref()?, dom.lower_open, &dom.lower, true)?,
            whole(self.upper.as_ref()?, dom.upper_open, &dom.upper, false)?,
        )
    }

    fn point(&self, index: u64, level: u32) -> Option<Interval> {
        let (n, top) = (index as f64, (1u64 << level) as f64);
        let at = |x: f64| Interval::point(x);
        let ratio = |a: f64, b: f64| at(a).over(&at(b), &mut { crate::enclosure::Definedness::Continuous });
        Some(match (&self.lower, &self.upper) {
            (Some(a), Some(b)) => {
                let width = b.enclosure.minus(&a.enclosure);
                a.enclosure.plus(&width.times(&ratio(n, top)))
            }
            (Some(a), None) => a.enclosure.plus(&ratio(n, top - n)),
            (None, Some(b)) => b.enclosure.minus(&ratio(top - n, n)),
            (None, None) => {
                let s = 2.0 * n - top;
                ratio(s, top - s.abs())
            }
        })
    }

    fn term(&self, index: u64, level: u32) -> Term {
        let (n, top) = (BigInt::from(index), BigInt::from(1) << level);
        let ratio = |a: &BigInt, b: BigInt| BigRational::new(a.clone(), b);
        let sum = |v: &Value, away: BigRational| match v.term.as_number() {
            Some(q) => Term::number(q + away),
            None => v.term.add(&Term::number(away)),
        };
        match (&self.lower, &self.upper) {
            (Some(a), Some(b)) => {
                let t = ratio(&n, top);
                match (a.term.as_number(), b.term.as_number()) {
                    (Some(a), Some(b)) => Term::number(a + (b - a) * t),
                    _ => a.term.add(&b.term.subtract(&a.term).multiply(&Term::number(t))),
                }
            }
            (Some(a), None) => sum(a, ratio(&n, top - &n)),
            (None, Some(b)) => sum(b, ratio(&(&n - top), n)),
            (None, None) => {
                let s: BigInt = 2 * n - &top;
                Term::number(ratio(&s, top - s.abs()))
            }
        }
    }
}

impl Cell {
    fn real(index: u64, level: u32, low: Option<Interval>, high: Option<Interval>) -> Option<Cell> {
        let lo = low.map_or(f64::NEG_INFINITY, |x| *x.lo());
        let hi = high.map_or(f64::INFINITY, |x| *x.hi());
        Some(Cell { part: Part::Real { index, level, low, high }, range: Interval::new(lo, hi)? })
    }

    fn integer(first: i64, last: i64) -> Option<Cell> {
        Some(Cell { part: Part::Integer { first, last }, range: Interval::new(first as f64, last as f64)? })
    }

    /// How often the range was halved.
    #[must_use]
    pub fn level(&self) -> u32 {
        match &self.part {
            Part::Real { level, .. } => *level,
            Part::Integer { first, last } => 64 - (last - first).unsigned_abs().leading_zeros(),
        }
    }

    /// Whether it consists of integers only.
    #[must_use]
    pub fn is_integer(&self) -> bool {
        matches!(self.part, Part::Integer { .. })
    }

    /// A representative inside, an integer for integers; finite.
    #[must_use]
    pub fn middle(&self) -> f64 {
        match &self.part {
            Part::Integer { first, last } => (first + last).div_euclid(2) as f64,
            Part::Real { .. } => match (self.range.lo().is_infinite(), self.range.hi().is_infinite()) {
                (false, false) => self.range.midpoint().unwrap_or(0.0),
                (false, true) => self.range.lo() + 1.0 + self.range.lo().abs(),
                (true, false) => self.range.hi() - 1.0 - self.range.hi().abs(),
                (true, true) => 0.0,
            },
        }
    }
}

/// The number as an exact term.
fn exact(x: f64) -> Term {
    Term::number(BigRational::from_float(x).unwrap_or_default())
}

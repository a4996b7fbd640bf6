//! `{boxes BITS "CODE" {step}*}`
//!
//! Split the domain into boxes and prove the goal `l <= r` (`<`, `!=`, absurdity)
//! on each. CODE is the tree in preorder: a letter `a`, `b`, .. splits the range
//! of the variable declared first, second, .. (lower half first); `N`, `S`, `T`
//! end a branch where `F = r - l` has the wanted sign by its natural enclosure,
//! by the mean value form, by Taylor's formula of second order; `H` ends it where
//! a hypothesis, or a declared end that depends on other variables, is violated
//! on the whole box; `X` ends it with the next step, which proves the sequent
//! restricted to the box.
//!
//! A range is an interval of a coordinate `t` in [0, 1], split at its midpoint:
//! `x = lo + (hi - lo) t`, for an infinite end `lo + t/(1-t)`, `hi - (1-t)/t`,
//! `(2t-1)/(1-|2t-1|)`. Integers between finite ends [a, b] are split into
//! [a, m] and [m+1, b], m = floor((a+b)/2). Ends that are not exact are rounded
//! outward; ends in other variables are replaced by their extreme values.
//!
//! Sound: the halves cover each range (of integers, all integers of it), so the
//! leaves cover the domain, and each leaf holds at every point of Gamma in it.
//! Forgotten: halves that do not meet; a hypothesis that a box merely may
//! violate; splitting a real variable as if it were an integer.

use num_bigint::BigInt;
use num_integer::Integer;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use super::{Kernel, check as prove};
use crate::kernel::bound::{Form, from_below};
use crate::kernel::evaluate::{Order, Program, constant};
use crate::kernel::number::Interval;
use crate::kernel::sequent::{End, Goal, Rel, Relation, Sequent, Sort};
use crate::kernel::step::Fields;
use crate::kernel::term::{Name, Node, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

/// Most bits of an enclosure.
pub(super) const MAX_BITS: usize = 4096;
/// Deepest tree of boxes.
const MAX_DEPTH: usize = 400;

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let frame = Frame::new(s, fields.count(MAX_BITS)?)?;
    let code = fields.text()?;
    let mut cells = frame.start()?;
    let mut walk = Walk { frame: &frame, code: code.bytes(), fields, k };
    walk.node(&mut cells, 0)?;
    if walk.code.next().is_some() {
        return refuse(Reason::Fields, "the code goes on after its last leaf");
    }
    walk.fields.end()
}

/// What a leaf compares: the term whose sign matters, compiled.
struct Side {
    program: Program,
    rel: Rel,
}

impl Side {
    /// The relation as `F >= 0`, `F > 0`, `F = 0`, `F != 0`.
    fn of(s: &Sequent, r: &Relation, bits: u32) -> Checked<Side> {
        Ok(Side { program: Program::within(s, &[r.difference()], bits)?, rel: r.turned().rel })
    }
}

/// The sequent prepared for boxes at one precision.
pub(super) struct Frame<'a> {
    s: &'a Sequent,
    bits: u32,
    lines: Vec<Line>,
    goal: Option<Side>,
    /// The negations of hypotheses and of ends that depend on other variables.
    excluded: Vec<Side>,
}

/// The whole range of one variable.
struct Line {
    lower: Option<Value>,
    upper: Option<Value>,
    /// Whether the declared ends depend on other variables.
    dependent: bool,
    integer: bool,
}

struct Value {
    exact: Option<BigRational>,
    enclosure: Interval,
    term: Term,
}

/// A part of a range.
#[derive(Clone)]
pub(super) struct Cell {
    part: Part,
    range: Interval,
}

#[derive(Clone)]
enum Part {
    /// `t` from `index / 2^level` to `(index + 1) / 2^level`, with the enclosures of its ends.
    Real {
        index: BigInt,
        level: u32,
        low: Option<Interval>,
        high: Option<Interval>,
    },
    Integer {
        first: BigInt,
        last: BigInt,
    },
}

impl<'a> Frame<'a> {
    pub(super) fn new(s: &'a Sequent, bits: usize) -> Checked<Frame<'a>> {
        let bits = u32::try_from(bits).unwrap_or(u32::MAX);
        if bits < 16 {
            return refuse(Reason::Limit, "an enclosure has at least 16 bits");
        }
        let names: Vec<Name> = s.variables.iter().map(|d| d.name.clone()).collect();
        let mut lines: Vec<Line> = Vec::new();
        let mut ranges: Vec<Interval> = Vec::new();
        let mut excluded = Vec::new();
        for (i, d) in s.variables.iter().enumerate() {
            let mut dependent = false;
            let mut value = |end: &Option<End>, lower: bool| -> Checked<Option<Value>> {
                let Some(end) = end else { return Ok(None) };
                if end.term.free_variables().is_empty() {
                    let exact = end.term.as_number().cloned();
                    let enclosure = constant(&end.term, bits)?;
                    return Ok(Some(Value { exact, enclosure, term: end.term.clone() }));
                }
                dependent = true;
                let program = Program::new(std::slice::from_ref(&end.term), &names[..i], bits)?;
                let all = program.run(&ranges, Order::Value)?.swap_remove(0).value;
                let extreme = if lower { all.lower() } else { all.upper() };
                let Some(extreme) = extreme else { return Ok(None) };
                let Some(exact) = extreme.to_rational() else {
                    return refuse(Reason::Limit, "an end is too large to be written out");
                };
                let enclosure = Interval::point(extreme.clone());
                Ok(Some(Value { term: Term::number(exact.clone()), exact: Some(exact), enclosure }))
            };
            let lower = value(&d.domain.lower, true)?;
            let upper = value(&d.domain.upper, false)?;
            let integer = d.domain.sort != Sort::Real && lower.is_some() && upper.is_some();
            let line = Line { lower, upper, dependent, integer };
            if dependent {
                let (low, high) = s.ends(&d.name);
                for end in low.into_iter().chain(high) {
                    excluded.push(Side::of(s, &end.negation(), bits)?);
                }
            }
            ranges.push(line.start(d.domain.lower.as_ref(), d.domain.upper.as_ref())?.range);
            lines.push(line);
        }
        for h in &s.hypotheses {
            // Quantities may occur in hypotheses that no leaf appeals to.
            if let Ok(side) = Side::of(s, &h.negation(), bits) {
                excluded.push(side);
            }
        }
        let goal = match &s.goal {
            Goal::Relation(r) => Some(Side::of(s, r, bits)?),
            Goal::Absurd => None,
        };
        Ok(Frame { s, bits, lines, goal, excluded })
    }

    pub(super) fn has_goal(&self) -> bool {
        self.goal.is_some()
    }

    /// The whole domain.
    pub(super) fn start(&self) -> Checked<Vec<Cell>> {
        let ends =
            |d: &'a crate::kernel::sequent::Declaration| (d.domain.lower.as_ref(), d.domain.upper.as_ref());
        self.s.variables.iter().zip(&self.lines).map(|(d, l)| l.start(ends(d).0, ends(d).1)).collect()
    }
}

impl Line {
    fn start(&self, lower: Option<&End>, upper: Option<&End>) -> Checked<Cell> {
        let enclosure = |v: &Option<Value>| v.as_ref().map(|v| v.enclosure.clone());
        let (low, high) = (enclosure(&self.lower), enclosure(&self.upper));
        if !self.integer {
            return Cell::real(BigInt::zero(), 0, low, high);
        }
        // The least and the greatest integer that the ends allow; an end known
        // only by an enclosure allows as much as its far side does.
        let whole = |v: &Option<Value>, declared: Option<&End>, up: bool| -> Checked<BigInt> {
            let Some(v) = v else { return refuse(Reason::Condition, "an integer range without end") };
            let far = if up { v.enclosure.lower() } else { v.enclosure.upper() };
            let Some(q) = v.exact.clone().or_else(|| far.and_then(|x| x.to_rational())) else {
                return refuse(Reason::Condition, "an integer range with an unknown end");
            };
            let literal = declared.is_some_and(|e| e.open && e.term.as_number().is_some());
            let n = if up { q.ceil() } else { q.floor() }.to_integer();
            let shift = i32::from(literal && q.is_integer());
            Ok(if up { n + shift } else { n - shift })
        };
        Cell::integer(whole(&self.lower, lower, true)?, whole(&self.upper, upper, false)?)
    }

    /// The point with coordinate `t`, 0 < t < 1.
    fn point(&self, t: &BigRational, bits: u32) -> Checked<Interval> {
        let one = BigRational::one();
        let literal = |q: &BigRational| Interval::from_rational(q, bits);
        let exact = |v: &Value| v.exact.clone();
        Ok(match (&self.lower, &self.upper) {
            (Some(a), Some(b)) => match (exact(a), exact(b)) {
                (Some(a), Some(b)) => literal(&(&a + (b - &a) * t)),
                _ => {
                    let width = b.enclosure.sub(&a.enclosure, bits);
                    a.enclosure.add(&width.mul(&literal(t), bits), bits)
                }
            },
            (Some(a), None) => {
                let away = t / (one - t);
                exact(a).map_or_else(|| a.enclosure.add(&literal(&away), bits), |a| literal(&(a + &away)))
            }
            (None, Some(b)) => {
                let away = (one - t) / t;
                exact(b).map_or_else(|| b.enclosure.sub(&literal(&away), bits), |b| literal(&(b - &away)))
            }
            (None, None) => literal(&on_the_line(t)),
        })
    }

    /// The same as a term.
    fn term(&self, t: &BigRational) -> Term {
        let one = BigRational::one();
        let number = |q: BigRational| Term::number(q);
        let sum = |v: &Value, away: BigRational| match &v.exact {
            Some(q) => number(q + away),
            None => v.term.add(&number(away)),
        };
        match (&self.lower, &self.upper) {
            (Some(a), Some(b)) => match (&a.exact, &b.exact) {
                (Some(a), Some(b)) => number(a + (b - a) * t),
                _ => a.term.add(&b.term.subtract(&a.term).multiply(&number(t.clone()))),
            },
            (Some(a), None) => sum(a, t / (one - t)),
            (None, Some(b)) => sum(b, (t - one) / t),
            (None, None) => number(on_the_line(t)),
        }
    }
}

/// `(2t-1)/(1-|2t-1|)`
fn on_the_line(t: &BigRational) -> BigRational {
    let s = t * BigRational::from_integer(2.into()) - BigRational::one();
    let room = BigRational::one() - s.abs();
    s / room
}

fn coordinate(index: &BigInt, level: u32) -> BigRational {
    BigRational::new(index.clone(), BigInt::one() << level)
}

impl Cell {
    fn real(index: BigInt, level: u32, low: Option<Interval>, high: Option<Interval>) -> Checked<Cell> {
        let (a, b) = (low.as_ref().and_then(|x| x.lower()), high.as_ref().and_then(|x| x.upper()));
        match Interval::new(a.cloned(), b.cloned()) {
            Some(range) => Ok(Cell { part: Part::Real { index, level, low, high }, range }),
            None => refuse(Reason::Condition, "the ends of a range are out of order"),
        }
    }

    fn integer(first: BigInt, last: BigInt) -> Checked<Cell> {
        let end = |n: &BigInt| crate::kernel::number::Dyadic::new(n.clone(), 0);
        match (end(&first), end(&last), first <= last) {
            (Some(a), Some(b), true) => match Interval::new(Some(a), Some(b)) {
                Some(range) => Ok(Cell { part: Part::Integer { first, last }, range }),
                None => refuse(Reason::Condition, "an integer range without a point"),
            },
            _ => refuse(Reason::Condition, "an integer range without a point"),
        }
    }

    fn halves(&self, line: &Line, bits: u32) -> Checked<(Cell, Cell)> {
        match &self.part {
            Part::Real { index, level, low, high } => {
                let (index, level) = (index * 2i32, level + 1);
                let middle = Some(line.point(&coordinate(&(&index + 1i32), level), bits)?);
                let lower = Cell::real(index.clone(), level, low.clone(), middle.clone())?;
                Ok((lower, Cell::real(index + 1i32, level, middle, high.clone())?))
            }
            Part::Integer { first, last } if first < last => {
                let middle = (first + last).div_floor(&BigInt::from(2));
                let above = &middle + 1i32;
                Ok((Cell::integer(first.clone(), middle)?, Cell::integer(above, last.clone())?))
            }
            Part::Integer { .. } => refuse(Reason::Condition, "a single integer cannot be split"),
        }
    }
}

struct Walk<'a, 'f> {
    frame: &'a Frame<'a>,
    code: std::str::Bytes<'f>,
    fields: Fields<'f>,
    k: &'a Kernel,
}

impl Walk<'_, '_> {
    fn node(&mut self, cells: &mut Vec<Cell>, depth: usize) -> Checked {
        if depth > MAX_DEPTH {
            return refuse(Reason::Limit, format!("more than {MAX_DEPTH} boxes inside each other"));
        }
        let form = match self.code.next() {
            Some(letter @ b'a'..=b'z') => {
                let v = usize::from(letter - b'a');
                if v >= cells.len() {
                    return refuse(Reason::Fields, format!("there is no variable number {}", v + 1));
                }
                let whole = cells[v].clone();
                let (lower, upper) = whole.halves(&self.frame.lines[v], self.frame.bits)?;
                cells[v] = lower;
                self.node(cells, depth + 1)?;
                cells[v] = upper;
                self.node(cells, depth + 1)?;
                cells[v] = whole;
                return Ok(());
            }
            Some(b'X') => {
                let step = self.fields.step()?;
                return prove(&restricted(self.frame, cells), step, self.k);
            }
            Some(b'N') => Some(Form::Natural),
            Some(b'S') => Some(Form::Slope),
            Some(b'T') => Some(Form::Bend),
            Some(b'H') => None,
            Some(other) => return refuse(Reason::Fields, format!("`{}` is no leaf", char::from(other))),
            None => return refuse(Reason::Fields, "the code ends too early"),
        };
        leaf(self.frame, cells, form, self.k)
    }
}

/// Checks one box: the goal by a form, or, without one, that a hypothesis excludes it.
pub(super) fn leaf(frame: &Frame, cells: &[Cell], form: Option<Form>, k: &Kernel) -> Checked {
    let ranges: Vec<Interval> = cells.iter().map(|c| c.range.clone()).collect();
    let proved = match (form, &frame.goal) {
        (Some(form), Some(goal)) => holds(goal, &ranges, form, frame.bits, k)?,
        (Some(_), None) => return refuse(Reason::Condition, "absurdity has no enclosure"),
        (None, _) => frame.excluded.iter().any(|side| {
            [Form::Natural, Form::Slope]
                .into_iter()
                .any(|form| holds(side, &ranges, form, frame.bits, k).unwrap_or(false))
        }),
    };
    if proved {
        return Ok(());
    }
    let place: Vec<String> = ranges.iter().map(|r| format!("{r:?}")).collect();
    refuse(Reason::NotProved, format!("the box {} is open", place.join(" x ")))
}

/// Whether the relation certainly holds on the whole box.
fn holds(side: &Side, ranges: &[Interval], form: Form, bits: u32, k: &Kernel) -> Checked<bool> {
    let n = ranges.len() as u64 + 1;
    let cost = match form {
        Form::Natural => 1,
        Form::Slope => 2 * n,
        Form::Bend => 2 * n * n,
    };
    k.spend(cost * side.program.length() as u64 * u64::from(bits / 64 + 1))?;
    if side.rel == Rel::Eq {
        return Ok(false);
    }
    let found = from_below(&side.program, ranges, form, bits);
    k.spend(side.program.take_series_work() * u64::from(bits / 64 + 1))?;
    let found = found?;
    Ok(match side.rel {
        Rel::Le => found.is_certainly_nonnegative(),
        Rel::Lt => found.is_certainly_positive(),
        // Only the natural form bounds the term from above as well.
        _ => found.is_certainly_positive() || (form == Form::Natural && found.is_certainly_nonzero()),
    })
}

/// The sequent with its variables restricted to the box.
fn restricted(frame: &Frame, cells: &[Cell]) -> Sequent {
    let mut s = frame.s.clone();
    for ((d, cell), line) in s.variables.iter_mut().zip(cells).zip(&frame.lines) {
        let x = Term::from(Node::Variable(d.name.clone()));
        let (lower, upper) = match &cell.part {
            Part::Real { index, level, .. } => {
                let top = BigInt::one() << *level;
                let above = index + 1i32;
                let at = |i: &BigInt| line.term(&coordinate(i, *level));
                ((!index.is_zero()).then(|| at(index)), (above != top).then(|| at(&above)))
            }
            Part::Integer { first, last } => {
                let number = |n: &BigInt| Term::number(BigRational::from_integer(n.clone()));
                (Some(number(first)), Some(number(last)))
            }
        };
        for (end, term, rel) in [(&mut d.domain.lower, lower, Rel::Le), (&mut d.domain.upper, upper, Rel::Ge)]
        {
            match term {
                None => {}
                // The declared end says more than its extreme value does.
                Some(term) if line.dependent => s.hypotheses.push(Relation::new(term, rel, x.clone())),
                Some(term) => *end = Some(End { term, open: false }),
            }
        }
    }
    s
}

#[cfg(test)]
mod tests {
    use std::collections::BTreeMap;

    use super::*;
    use crate::kernel::read;

    /// Checks a step against `declarations | hypotheses | goal`; parts are separated by `;`.
    fn check(sequent: &str, step: &str) -> Checked {
        let [variables, hypotheses, goal] = sequent.splitn(3, '|').collect::<Vec<_>>()[..] else {
            panic!("three parts: {sequent}");
        };
        let each = |text: &str| -> Vec<String> {
            text.split(';').map(str::trim).filter(|t| !t.is_empty()).map(String::from).collect()
        };
        let s = Sequent {
            variables: each(variables).iter().map(|t| read::declaration(t).unwrap()).collect(),
            hypotheses: each(hypotheses).iter().map(|t| read::relation(t).unwrap()).collect(),
            goal: match goal.trim() {
                "absurd" => Goal::Absurd,
                goal => Goal::Relation(read::relation(goal).unwrap()),
            },
        };
        prove(&s, &read::step(step).unwrap(), &Kernel::new(BTreeMap::new()))
    }

    fn accepted(sequent: &str, step: &str) {
        if let Err(why) = check(sequent, step) {
            panic!("{sequent}\n{step}\n{why}");
        }
    }

    fn rejected(sequent: &str, step: &str, reason: Reason) {
        match check(sequent, step) {
            Ok(()) => panic!("accepted: {sequent}\n{step}"),
            Err(why) => assert_eq!(why.reason, reason, "{why}"),
        }
    }

    #[test]
    fn whole_domains_are_enclosed_with_infinite_ends() {
        accepted("x : real in [0, inf) | | exp(-x) <= 1", "{enclose 64}");
        accepted("x : real in [2, inf) | | 1/x < 0.6", "{enclose 64}");
        accepted("x : real in (-inf, inf) | | sin(x) <= 1", "{enclose 64}");
        accepted("x : real in [0, 1] | | x^2 + 1 != 0", "{enclose 64}");
        accepted("x : real in [0, 1] | x > 2 | absurd", "{enclose 64}");
        rejected("x : real in [0, 1] | x > 1/2 | absurd", "{enclose 64}", Reason::NotProved);
        rejected("x : real in [0, inf) | | exp(-x) < 1", "{enclose 64}", Reason::NotProved);
        rejected("x : real in [0, 1] | | x - 1/2 != 0", "{enclose 64}", Reason::NotProved);
    }

    #[test]
    fn functions_of_integers_are_enclosed_over_the_integers_of_a_box() {
        accepted("n : integer in [1, inf) | | factorial(n) >= 1", "{enclose 64}");
        accepted("n : integer in [3, 6] | | binomial(n, 2) > 2", "{boxes 64 \"N\"}");
        accepted("n : integer in [1, 3] | | sum(k = 0 .. 1, binomial(n, k)) <= 4", "{enclose 64}");
        // Increasing from 0 on only at integers: gamma(3/2) < 1.
        rejected("x : real in [0, 1] | | factorial(x) >= 1", "{enclose 64}", Reason::Condition);
        rejected("n : integer in [3, 6] | | binomial(n, 2) > 3", "{enclose 64}", Reason::NotProved);
        rejected("n : integer in [1, 5] | | factorial(n) >= 1", "{boxes 64 \"S\"}", Reason::Condition);
    }

    #[test]
    fn each_form_of_leaf() {
        accepted("x : real in [0, 1] | | x - x^2 <= 0.26", "{boxes 64 \"aSS\"}");
        accepted("x : real in [0, 1] | | x^3 + x <= 2", "{boxes 64 \"S\"}");
        accepted("x : real in [0, 1] | | x - x^2 <= 0.26", "{boxes 64 \"T\"}");
        accepted("x : real in [0, 1]; y : real in [0, 1] | x + y >= 1.6 | x > 0", "{boxes 64 \"aHN\"}");
        rejected("x : real in [0, 1] | | x - x^2 <= 0.26", "{boxes 64 \"N\"}", Reason::NotProved);
        rejected("x : real in [0, 1] | | x - x^2 <= 0.24", "{boxes 64 \"T\"}", Reason::NotProved);
        rejected("x : real in [0, 1] | | x^3 + x < 2", "{boxes 64 \"S\"}", Reason::NotProved);
    }

    #[test]
    fn the_tree_must_cover_the_domain_and_be_complete() {
        rejected("x : real in [0, 1] | | x <= 1", "{boxes 64 \"aN\"}", Reason::Fields);
        rejected("x : real in [0, 1] | | x <= 1", "{boxes 64 \"aNNN\"}", Reason::Fields);
        rejected("x : real in [0, 1] | | x <= 1", "{boxes 64 \"bNN\"}", Reason::Fields);
        rejected("x : real in [0, 1] | | x <= 1", "{boxes 64 \"Z\"}", Reason::Fields);
        rejected("x : real in [0, 1] | | x <= 1", "{boxes 64 \"X\"}", Reason::Fields);
        rejected("x : real in [0, 1] | | x <= 1", "{boxes 64 \"N\" {enclose 64}}", Reason::Fields);
        rejected("x : real in [0, 1] | | x <= 1", "{boxes 8 \"N\"}", Reason::Limit);
        let deep = format!("{{boxes 64 \"{}\"}}", "a".repeat(1000));
        rejected("x : real in [0, 1] | | x <= 1", &deep, Reason::Limit);
    }

    #[test]
    fn a_box_that_merely_may_violate_a_hypothesis_is_kept() {
        rejected("x : real in [0, 1] | x >= 1/2 | x > 1/3", "{boxes 64 \"aHN\"}", Reason::NotProved);
        accepted("x : real in [0, 1] | x > 1/2 | x > 1/3", "{boxes 64 \"aHN\"}");
    }

    #[test]
    fn integers_are_split_between_integers_and_reals_are_not() {
        // Trap 11 of the methods: true for integers, false for n = 1/2.
        let code = "{boxes 64 \"aNN\"}";
        accepted("n : integer in [0, 1] | | (2*n - 1)^2 >= 1", code);
        rejected("n : real in [0, 1] | | (2*n - 1)^2 >= 1", code, Reason::NotProved);
        accepted("n : integer in (0, 3) | | n*(3 - n) >= 2", code);
        rejected("n : integer in [0, 3) | | n*(3 - n) >= 2", "{boxes 64 \"aaNNN\"}", Reason::NotProved);
        rejected("n : integer in [0, 1] | | n <= 1", "{boxes 64 \"aaNNN\"}", Reason::Condition);
    }

    #[test]
    fn unbounded_ranges_are_split_at_finite_points() {
        // t = 1/2 is x = 1.
        accepted("x : real in [0, inf) | | x - log(1 + x) >= -1", "{boxes 64 \"S\"}");
        accepted("x : real in [0, inf) | | 1/(1 + x) + x/8 >= 1/3", "{boxes 64 \"aNaNN\"}");
        rejected("x : real in [0, inf) | | 1/(1 + x) + x/8 >= 1/2", "{boxes 64 \"aNN\"}", Reason::NotProved);
        accepted("x : real in (-inf, inf) | | exp(x) + exp(-x) > 1/3", "{boxes 64 \"aNN\"}");
        accepted("x : real in (-inf, 0] | | exp(x) <= 1 - x", "{boxes 64 \"S\"}");
    }

    #[test]
    fn ends_may_be_constants_or_depend_on_other_variables() {
        accepted("x : real in [0, pi/2] | | sin(x) <= 1", "{boxes 64 \"aNN\"}");
        accepted("x : real in [0, 1]; y : real in [0, x] | | y <= 1", "{boxes 64 \"N\"}");
        let s = "x : real in [0, 1]; y : real in [0, x] | x <= 0.4 | y <= 1/2";
        accepted(s, "{boxes 64 \"bNaaHaHaHHH\"}");
        rejected(s, "{boxes 64 \"bNaaHaHHH\"}", Reason::NotProved);
        accepted("x : real in [0, 0.4]; y : real in [x, 1] | y < x - 1 | absurd", "{boxes 64 \"H\"}");
    }

    #[test]
    fn a_box_can_be_handed_to_another_step() {
        accepted(
            "x : real in [0, 1] | | x - x^2 <= 0.26",
            "{boxes 64 \"aXX\" {boxes 64 \"T\"} {boxes 96 \"T\"}}",
        );
        // The step sees the box only, with closed ends.
        accepted("x : real in [0, 1] | | x*(x - 1/2) <= 0.5", "{boxes 64 \"aXS\" {enclose 64}}");
        rejected(
            "x : real in [0, 1] | | x <= 1/2",
            "{boxes 64 \"aXX\" {enclose 64} {enclose 64}}",
            Reason::NotProved,
        );
        accepted("n : integer in [0, 3] | | n^2 <= 9", "{boxes 64 \"aXX\" {enclose 64} {enclose 64}}");
        accepted("x : real in [0, inf) | | exp(-x) <= 1", "{boxes 64 \"aXX\" {enclose 64} {enclose 64}}");
    }

    #[test]
    fn nothing_is_clipped_and_kinks_have_no_slope() {
        // Traps 1, 15 and 16 of the methods.
        rejected("x : real in [0, 1] | | sqrt(x - 1/10^9) >= 0", "{boxes 64 \"N\"}", Reason::Condition);
        rejected("x : real in [-1, 1] | | abs(x) >= x + 1/2", "{boxes 64 \"S\"}", Reason::Condition);
        rejected("x : real in [0, 1] | | sqrt(x) <= x + 1/5", "{boxes 64 \"S\"}", Reason::Condition);
        rejected("x : real in [-1, 2] | x != 0 | 1/x <= 1", "{boxes 64 \"S\"}", Reason::Condition);
        rejected("x : real in [0, 2] | | tan(x) <= tan(1) + 1", "{boxes 64 \"S\"}", Reason::Condition);
        // Trap 17: a step of floor inside the box.
        rejected("x : real in [1/2, 5/2] | | floor(x) <= x - 1/10^6", "{boxes 64 \"S\"}", Reason::Condition);
        // Traps 2 and 3: no cancellation of infinities.
        rejected("x : real in (0, 1] | | x*exp(1/x) <= 3", "{boxes 64 \"N\"}", Reason::Condition);
        rejected(
            "x : real in [1, inf) | | sqrt(x^2 + x) - x <= 0.4999",
            "{boxes 64 \"N\"}",
            Reason::NotProved,
        );
    }

    #[test]
    fn no_equation_is_proved_by_an_enclosure() {
        // Trap 38.
        rejected("n : integer in [1, 9] | | n*(1/n) = 1", "{enclose 64}", Reason::NotProved);
        rejected("x : real in [1, 1] | | x = 1", "{boxes 64 \"N\"}", Reason::NotProved);
    }

    #[test]
    fn sums_with_literal_or_single_limits_are_evaluated() {
        accepted("x : real in [0, 1] | | sum(k = 1 .. 5, x^k/k) <= 2.3", "{boxes 64 \"S\"}");
        accepted(
            "n : integer in [1, 4] | | sum(k = 1 .. n, k) <= n*(n + 1)/2 + 1/10^9",
            "{boxes 64 \"aaNNaNN\"}",
        );
        // The empty sum is 0, trap 18.
        rejected(
            "n : integer in [0, 1] | | sum(k = 1 .. n, 1/k) >= 1",
            "{boxes 64 \"aNN\"}",
            Reason::NotProved,
        );
        rejected("n : integer in [1, 4] | | sum(k = 1 .. n, k) <= 10", "{boxes 64 \"N\"}", Reason::Condition);
        let nested = "n : integer in [1, 4] | | sum(k = 1 .. 5000, sum(j = 1 .. k, 1/j)) <= 10^9";
        rejected(nested, "{boxes 64 \"N\"}", Reason::Limit);
    }
}

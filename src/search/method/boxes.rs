//! Adaptive bisection: the domain is split into boxes until on each the relation
//! holds by one of the kernel's three enclosures, or a hypothesis excludes it.
//! Infinite ranges are split like finite ones, by a coordinate that reaches
//! infinity. Where a box stays undecided because both sides touch there, it may
//! be handed to the rest of the portfolio.
//!
//! Source: Moore, Kearfott, Cloud, Introduction to Interval Analysis, 2009.

use num_bigint::BigInt;
use num_traits::ToPrimitive;

use crate::enclosure::{Function, Interval};
use crate::expression::evaluate::{Form, from_below};
use crate::expression::tape::{Jets, Order, Tape};
use crate::expression::{Node, Term};
use crate::statement::{Rel, Relation, Sequent};

use super::super::engine::{Method, Search, Stuck};
use super::super::frame::{Cell, Frame};
use super::super::minima::touching;
use super::super::proof::{Field, Proof};

/// Bisection with or without handing undecided boxes on.
pub struct Boxes {
    /// Whether undecided boxes are handed to the portfolio.
    pub hand_on: bool,
    /// The part of the budget, in percent.
    pub share: u64,
}

impl Method for Boxes {
    fn name(&self) -> &'static str {
        if self.hand_on { "boxes with touching zones" } else { "boxes" }
    }

    fn share(&self) -> u64 {
        self.share
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let goal = match s.relation() {
            Some(r) if mentions_trigamma(r) => {
                return Err(Stuck::NotApplicable("a function the kernel does not enclose"));
            }
            Some(r) if r.rel == Rel::Equal => return Err(Stuck::NotApplicable("an equation")),
            Some(r) => Some(Side::new(s, r).ok_or(Stuck::NotApplicable("a term without enclosures"))?),
            None => None,
        };
        if self.hand_on && s.variables.is_empty() {
            return Err(Stuck::NotApplicable("no variables"));
        }
        let frame = Frame::new(s).ok_or(Stuck::NotApplicable("a domain without enclosures"))?;
        let cells = frame.start(s).ok_or(Stuck::NotApplicable("a domain without enclosures"))?;
        if s.variables.len() > 26 {
            return Err(Stuck::NotApplicable("more than 26 variables"));
        }
        let excluded = s
            .hypotheses
            .iter()
            .chain(&frame.dependent_ends)
            .filter_map(|h| Side::new(s, &h.negation()))
            .collect();
        let held = s.hypotheses.iter().chain(&frame.dependent_ends).map(|h| Side::new(s, h)).collect();
        let deepest = if self.hand_on { 10 } else { 40 };
        let mut work = Work {
            s,
            frame,
            goal,
            excluded,
            held,
            jets: Jets::default(),
            counted: 0,
            code: String::new(),
            steps: Vec::new(),
            deepest,
            hand_on: self.hand_on,
            handed: 0,
            minima: if self.hand_on && s.variables.len() <= 6 { touching(s, search) } else { Vec::new() },
            convex: 0,
        };
        work.prove(cells, search)?;
        Ok(work.proof(search.caution))
    }
}

/// A relation as a term to be compared with 0.
struct Side {
    tape: Tape<f64>,
    rel: Rel,
}

impl Side {
    fn new(s: &Sequent, r: &Relation) -> Option<Side> {
        let names: Vec<_> = s.variables.iter().map(|d| d.name.clone()).collect();
        Some(Side { tape: Tape::new(&[r.difference()], &names, s, ())?, rel: r.turned().rel })
    }

    /// Whether the enclosure proves the relation.
    fn is_shown_by(&self, value: &Interval, natural: bool, least: f64) -> bool {
        match self.rel {
            Rel::LessEqual => *value.lo() >= least && !value.is_empty(),
            Rel::Less => *value.lo() > least && !value.is_empty(),
            Rel::NotEqual => value.is_certainly_positive() || (natural && value.is_certainly_negative()),
            _ => false,
        }
    }

    /// Whether the enclosure at a point refutes the relation.
    fn is_refuted_by(&self, value: &Interval) -> bool {
        match self.rel {
            Rel::LessEqual => value.is_certainly_negative(),
            Rel::Less => value.is_certainly_non_positive(),
            Rel::Equal => !value.contains_zero() && !value.is_empty(),
            _ => value.is_point() && value.contains_zero(),
        }
    }
}

struct Work<'a> {
    s: &'a Sequent,
    frame: Frame,
    goal: Option<Side>,
    /// Negations of hypotheses: one of them proved on a box excludes it.
    excluded: Vec<Side>,
    /// The hypotheses: a counterexample must satisfy all.
    held: Vec<Option<Side>>,
    jets: Jets<f64>,
    counted: u64,
    code: String,
    steps: Vec<Proof>,
    deepest: u32,
    hand_on: bool,
    handed: u32,
    /// Points where both sides touch.
    minima: Vec<Vec<Term>>,
    /// How often the referee was asked whether the goal is convex about one.
    convex: u32,
}

/// Most questions about convexity in one tree.
const MOST_CONVEX: u32 = 100;

/// Most boxes handed to the portfolio in one tree.
const MOST_HANDED: u32 = 6;

impl Work<'_> {
    fn proof(self, caution: u32) -> Proof {
        // Two bits fewer than a machine word: midpoints then still fit.
        let bits: u32 = if caution == 0 { 62 } else { 60 << caution.min(4) };
        let bits = Field::Number(BigInt::from(bits));
        if self.code == "N" {
            return Proof::new("enclose").with(bits);
        }
        Proof::new("boxes").with(bits).with(Field::Text(self.code)).with_all(self.steps)
    }

    /// Counts the instructions carried out since the last call; a unit is 16 of them.
    fn count(&mut self, search: &mut Search) -> Result<(), Stuck> {
        let new = self.jets.work / 16;
        let units = new.saturating_sub(self.counted);
        self.counted = new;
        search.spend(units)
    }

    fn prove(&mut self, cells: Vec<Cell>, search: &mut Search) -> Result<(), Stuck> {
        search.spend(1)?;
        self.count(search)?;
        let ranges: Vec<Interval> = cells.iter().map(|c| c.range).collect();
        for side in &self.excluded {
            if let Some(value) = from_below(&side.tape, 0, &ranges, Form::Natural, &mut self.jets)
                && side.is_shown_by(&value, true, 0.0)
            {
                self.code.push('H');
                return Ok(());
            }
        }
        let mut weights: Option<Vec<f64>> = None;
        if let Some(goal) = &self.goal {
            let least = if search.caution > 0 { 1e-13 } else { 0.0 };
            if let Some(value) = from_below(&goal.tape, 0, &ranges, Form::Natural, &mut self.jets)
                && goal.is_shown_by(&value, true, least)
            {
                self.code.push('N');
                return Ok(());
            }
            let by_slope = from_below(&goal.tape, 0, &ranges, Form::Slope, &mut self.jets);
            if let Some(value) = &by_slope
                && goal.is_shown_by(value, false, least)
            {
                self.code.push('S');
                return Ok(());
            }
            if let Some(stuck) = self.counterexample(&cells) {
                return Err(stuck);
            }
            let goal = self.goal.as_ref().filter(|_| by_slope.is_some());
            if let Some(goal) = goal {
                goal.tape.run(&ranges, Order::Slope, &mut self.jets);
                weights = Some(
                    (0..cells.len())
                        .map(|i| match goal.tape.slope(0, i, &self.jets) {
                            Some(d) => d.magnitude() * ranges[i].width_upper(),
                            None => 0.0,
                        })
                        .collect(),
                );
                if cells.len() <= 6
                    && let Some(value) = from_below(&goal.tape, 0, &ranges, Form::Bend, &mut self.jets)
                    && goal.is_shown_by(&value, false, least)
                {
                    self.code.push('T');
                    return Ok(());
                }
            }
        }
        if self.is_convex(&cells, search)? {
            self.code.push('X');
            return Ok(());
        }
        self.split(cells, weights, search)
    }

    /// Whether the goal is convex on a box about a point where both sides touch; the
    /// step that says so is then kept.
    fn is_convex(&mut self, cells: &[Cell], search: &mut Search) -> Result<bool, Stuck> {
        let inside = |point: &&Vec<Term>| {
            let value = |t: &Term| t.as_number().and_then(ToPrimitive::to_f64);
            cells
                .iter()
                .zip(*point)
                .all(|(c, t)| value(t).is_some_and(|x| *c.range.lo() <= x && x <= *c.range.hi()))
        };
        let Some(point) = self.minima.iter().find(inside).cloned() else { return Ok(false) };
        if self.convex >= MOST_CONVEX || cells.iter().any(|c| c.range.hi() - c.range.lo() > 4.0) {
            return Ok(false);
        }
        let bent = self.goal.as_ref().is_some_and(|goal| {
            let ranges: Vec<Interval> = cells.iter().map(|c| c.range).collect();
            goal.tape.run(&ranges, Order::Bend, &mut self.jets);
            let entry = |i, j| goal.tape.bend(0, i, j, &self.jets).copied().unwrap_or(Interval::point(0.0));
            let used: Vec<usize> =
                (0..cells.len()).filter(|i| goal.tape.dependence(0) >> i & 1 == 1).collect();
            is_definite(
                &used.iter().map(|&i| used.iter().map(|&j| entry(i, j)).collect()).collect::<Vec<_>>(),
            )
        });
        if !bent {
            return Ok(false);
        }
        self.convex += 1;
        let restricted = self.frame.restricted(self.s, cells);
        let step = Proof::new("touch").with(64).with_all(point);
        match search.accepted(&restricted, step) {
            Ok(step) => {
                self.steps.push(step);
                Ok(true)
            }
            Err(Stuck::Exhausted) => Err(Stuck::Exhausted),
            Err(_) => Ok(false),
        }
    }

    fn split(
        &mut self,
        mut cells: Vec<Cell>,
        weights: Option<Vec<f64>>,
        search: &mut Search,
    ) -> Result<(), Stuck> {
        let Some((v, (lower, upper))) = self.choice(&cells, weights) else {
            return self.hand_over(&cells, search);
        };
        let mark = (self.code.len(), self.steps.len());
        self.code.push(char::from(b'a' + v as u8));
        let whole = std::mem::replace(&mut cells[v], lower);
        let mut result = self.prove(cells.clone(), search);
        if result.is_ok() {
            cells[v] = upper;
            result = self.prove(cells.clone(), search);
        }
        if result.is_err() {
            self.code.truncate(mark.0);
            self.steps.truncate(mark.1);
            cells[v] = whole;
        }
        result
    }

    /// The variable to split, by the expected effect on the enclosure if that is
    /// known, otherwise the one split least.
    fn choice(&self, cells: &[Cell], weights: Option<Vec<f64>>) -> Option<(usize, (Cell, Cell))> {
        let mut order: Vec<usize> =
            (0..cells.len()).filter(|&v| cells[v].level() <= self.deepest || cells[v].is_integer()).collect();
        let level = |v: usize| {
            if cells[v].is_integer() { 24u32.saturating_sub(cells[v].level()) } else { cells[v].level() }
        };
        order.sort_by_key(|&v| level(v));
        if let Some(w) = weights {
            // An infinite weight says nothing but that the range is infinite; among
            // comparable weights the less split one goes first.
            let rank = |v: usize| if w[v].is_nan() { f64::INFINITY } else { w[v] };
            order.sort_by(|&a, &b| rank(b).total_cmp(&rank(a)));
        }
        order.into_iter().find_map(|v| Some((v, self.frame.halves(v, &cells[v])?)))
    }

    /// A point in the middle of the box where the sequent is seen to be false.
    fn counterexample(&mut self, cells: &[Cell]) -> Option<Stuck> {
        let goal = self.goal.as_ref()?;
        let point: Vec<f64> = cells.iter().map(Cell::middle).collect();
        let at: Vec<Interval> = point.iter().map(|&x| Interval::point(x)).collect();
        goal.tape.run(&at, Order::Value, &mut self.jets);
        if !self.jets.defined.is_everywhere() || !goal.is_refuted_by(goal.tape.value(0, &self.jets)) {
            return None;
        }
        for side in &self.held {
            let side = side.as_ref()?;
            side.tape.run(&at, Order::Value, &mut self.jets);
            if !self.jets.defined.is_everywhere()
                || !side.is_shown_by(side.tape.value(0, &self.jets), true, 0.0)
            {
                return None;
            }
        }
        Some(Stuck::Counterexample(point))
    }

    fn hand_over(&mut self, cells: &[Cell], search: &mut Search) -> Result<(), Stuck> {
        let region: Vec<(f64, f64)> = cells.iter().map(|c| (*c.range.lo(), *c.range.hi())).collect();
        let stuck = Stuck::Failed { reason: "undecided however small the box".into(), region };
        if !self.hand_on || self.handed >= MOST_HANDED {
            return Err(stuck);
        }
        self.handed += 1;
        let restricted = self.frame.restricted(self.s, cells);
        let share = search.left() / 4;
        match search.within(share, |search| search.prove(&restricted)) {
            Ok(proof) => {
                self.code.push('X');
                self.steps.push(proof);
                Ok(())
            }
            Err(found @ Stuck::Counterexample(_)) => Err(found),
            Err(_) => Err(stuck),
        }
    }
}

/// Whether the trigamma function occurs, of which the kernel knows only the sign.
fn mentions_trigamma(r: &Relation) -> bool {
    let mut found = false;
    for side in [&r.left, &r.right] {
        side.walk(&mut |t| {
            found |= matches!(t.node(), Node::Apply(Function::Trigamma, _));
            !found
        });
    }
    found
}

/// Whether elimination finds positive pivots, as the kernel's rule `touch` does.
fn is_definite(matrix: &[Vec<Interval>]) -> bool {
    let Some((first, others)) = matrix.split_first() else { return true };
    if !first[0].is_certainly_positive() {
        return false;
    }
    let eliminated = |row: &Vec<Interval>| -> Vec<Interval> {
        let ratio = row[0].over(&first[0], &mut { crate::enclosure::Definedness::Continuous });
        row.iter().zip(first).skip(1).map(|(x, y)| x.minus(&ratio.times(y))).collect()
    };
    is_definite(&others.iter().map(eliminated).collect::<Vec<_>>())
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::Boxes;

    #[test]
    fn a_box_about_a_touching_point_ends_by_convexity() {
        let boxes = Boxes { hand_on: true, share: 60 };
        let domain = "for x in [-2, 2], y in [-2, 2]";
        proves(&boxes, &format!("{domain}: exp(x + y) + x^2 + y^2 >= 1 + x + y"), "touch");
        leaves(
            &boxes,
            &[
                &format!("{domain}: exp(x + y) + x^2 + y^2 >= 1.0000001 + x + y"),
                &format!("{domain}: exp(x + y) + x^2 + y^2 > 1 + x + y"),
            ],
        );
    }
}

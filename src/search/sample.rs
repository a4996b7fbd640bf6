//! Points of a sequent's domain at which it is evaluated: ends, points just
//! inside them, simple numbers, powers of ten, integers; then descent from the
//! best. All deterministic. Nothing found here is a verdict.

use std::cmp::Ordering;

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{Signed, ToPrimitive, Zero};

use crate::enclosure::{BigFloat, Enclosure, End as Number, Toward};
use crate::expression::tape::{Jets, Order, Tape};
use crate::expression::{End, Name, Sort, Substitution, Term};
use crate::statement::{Rel, Relation, Sequent};

use super::engine::{Search, Stuck};
use super::exact::enclose;

/// Ends that can be seen as ordinary numbers.
pub trait Seen: Number {
    /// The nearest double.
    fn seen(&self) -> f64;
}

impl Seen for f64 {
    fn seen(&self) -> f64 {
        *self
    }
}

impl Seen for BigFloat {
    fn seen(&self) -> f64 {
        self.to_f64(Toward::Down)
    }
}

/// How the sequent looks at one point.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Look {
    /// The point is not in the context, as far as can be seen.
    Outside,
    /// In the context, but a side is not seen to be defined.
    Undefined,
    /// How far the goal is from being false; and whether it surely is.
    Margin(Margin, bool),
}

/// How far a goal `l <= r` is from being false. Ordered by the relative room, and
/// where that does not change, because one side is 0 or tiny, by the difference.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Margin {
    /// `(r - l)/(|l| + |r|)`.
    pub relative: f64,
    /// `r - l`.
    pub gap: f64,
}

impl Margin {
    /// Larger than every other.
    pub const WORST: Margin = Margin { relative: f64::INFINITY, gap: f64::INFINITY };

    /// Whether both parts are numbers.
    #[must_use]
    pub fn is_known(&self) -> bool {
        !self.relative.is_nan() && !self.gap.is_nan()
    }

    /// The order of margins.
    #[must_use]
    pub fn compare(&self, other: &Margin) -> Ordering {
        let step = |m: &Margin| (m.relative * 1e9).round();
        step(self).total_cmp(&step(other)).then(self.gap.total_cmp(&other.gap))
    }
}

/// A sequent compiled for evaluation at points.
pub struct Probe<E: Number> {
    sides: Tape<E>,
    rel: Rel,
    context: Tape<E>,
    rels: Vec<Rel>,
    precision: E::Precision,
    jets: Jets<E>,
}

impl<E: Seen> Probe<E> {
    /// Compiles a sequent; nothing if a term cannot be evaluated. Absurdity is
    /// looked at as `1 <= 0`, so that every point of the context refutes it.
    #[must_use]
    pub fn new(s: &Sequent, precision: E::Precision) -> Option<Probe<E>> {
        let names: Vec<Name> = s.variables.iter().map(|d| d.name.clone()).collect();
        let goal = s.relation().map_or_else(
            || Relation::new(Term::integer(1), Rel::LessEqual, Term::integer(0)),
            Relation::turned,
        );
        let sides = Tape::new(&[goal.left, goal.right], &names, s, precision)?;
        let ends = s.variables.iter().flat_map(|d| d.ends());
        let context: Vec<Relation> = ends.chain(s.hypotheses.iter().cloned()).map(|r| r.turned()).collect();
        let terms: Vec<Term> = context.iter().flat_map(|r| [r.left.clone(), r.right.clone()]).collect();
        Some(Probe {
            sides,
            rel: goal.rel,
            context: Tape::new(&terms, &names, s, precision)?,
            rels: context.iter().map(|r| r.rel).collect(),
            precision,
            jets: Jets::default(),
        })
    }

    /// Counts the instructions carried out since the last call, at `price` units
    /// for sixteen of them; says whether there is budget left.
    pub fn pay(&mut self, price: u64, search: &mut Search) -> bool {
        let units = 1 + std::mem::take(&mut self.jets.work) * price / 16;
        search.spend(units).is_ok()
    }

    /// Looks at a point.
    pub fn look(&mut self, point: &[Enclosure<E>]) -> Look {
        self.context.run_with(point, self.precision, Order::Value, &mut self.jets);
        if !self.rels.is_empty() && !self.jets.defined.is_everywhere() {
            return Look::Outside;
        }
        for (i, rel) in self.rels.iter().enumerate() {
            let (l, r) = (self.context.value(2 * i, &self.jets), self.context.value(2 * i + 1, &self.jets));
            let gap = r.minus(l);
            let holds = match rel {
                Rel::LessEqual => gap.is_certainly_non_negative(),
                Rel::Less => gap.is_certainly_positive(),
                Rel::Equal => gap.is_point() && gap.contains_zero(),
                _ => !gap.contains_zero(),
            };
            if !holds {
                return Look::Outside;
            }
        }
        self.sides.run_with(point, self.precision, Order::Value, &mut self.jets);
        if !self.jets.defined.is_everywhere() {
            return Look::Undefined;
        }
        let (l, r) = (self.sides.value(0, &self.jets), self.sides.value(1, &self.jets));
        let gap = r.minus(l);
        let refuted = match self.rel {
            Rel::LessEqual => gap.is_certainly_negative(),
            Rel::Less => gap.is_certainly_non_positive(),
            Rel::Equal => !gap.contains_zero() && !gap.is_empty(),
            _ => gap.is_point() && gap.contains_zero(),
        };
        let size = Enclosure::point(l.magnitude()).plus(&Enclosure::point(r.magnitude()));
        let relative = gap.over(&size, &mut { crate::enclosure::Definedness::Continuous });
        let margin = match relative.midpoint() {
            _ if size.contains_zero() => 0.0,
            Some(m) => m.seen(),
            None => f64::NAN,
        };
        // An equation is refuted by a large gap, its negation by none.
        let signed = |m: f64| match self.rel {
            Rel::Equal => -m.abs(),
            Rel::NotEqual => m.abs(),
            _ => m,
        };
        let gap = gap.midpoint().map_or(f64::NAN, |m| m.seen());
        Look::Margin(Margin { relative: signed(margin), gap: signed(gap) }, refuted)
    }
}

/// A place in a domain, before the ends are known.
#[derive(Clone, Debug)]
enum Spot {
    Lower,
    Upper,
    AboveLower(BigRational),
    BelowUpper(BigRational),
    Fraction(BigRational),
    Value(BigRational),
}

fn ten(power: i32) -> BigRational {
    num_traits::Pow::pow(BigRational::from_integer(10.into()), power)
}

fn ratio(n: i64, d: i64) -> BigRational {
    BigRational::new(n.into(), d.into())
}

/// Places worth a look, most telling first.
fn spots(lower: &End, upper: &End, sort: Sort) -> Vec<Spot> {
    use Spot::{AboveLower, BelowUpper, Fraction, Lower, Upper, Value};
    let whole = |n: i64| BigRational::from_integer(n.into());
    let mut all = Vec::new();
    if sort != Sort::Real {
        match (lower.finite(), upper.finite()) {
            (Some(_), _) => {
                all.extend([Lower, Upper]);
                all.extend((1..=30).map(|n| AboveLower(whole(n))));
                all.extend(
                    [40, 50, 64, 75, 99, 100, 128, 150, 200, 300, 365, 500, 700, 999]
                        .map(|n| AboveLower(whole(n))),
                );
                all.extend((3..=15).flat_map(|k| [AboveLower(ten(k)), AboveLower(ten(k) * whole(3))]));
                all.extend((1..=5).map(|n| BelowUpper(whole(n))));
                all.extend((1..8).map(|k| Fraction(ratio(k, 8))));
            }
            (None, Some(_)) => {
                all.push(Upper);
                all.extend((1..=30).map(|n| BelowUpper(whole(n))));
                all.extend((2..=12).map(|k| BelowUpper(ten(k))));
            }
            (None, None) => {
                all.extend((0..=20).flat_map(|n| [Value(whole(n)), Value(whole(-n))]));
                all.extend((2..=12).flat_map(|k| [Value(ten(k)), Value(-ten(k))]));
            }
        }
        return all;
    }
    match (lower.finite(), upper.finite()) {
        (Some(a), Some(b)) => {
            all.extend([Lower, Upper, Fraction(ratio(1, 2))]);
            all.extend((1..4).map(|k| Fraction(ratio(k, 4))));
            all.extend((1..10).map(|k| Fraction(ratio(k, 10))));
            all.extend([
                Value(whole(0)),
                Value(whole(1)),
                Value(whole(-1)),
                Value(ratio(1, 2)),
                Value(whole(2)),
            ]);
            all.extend((1..24).map(|k| Fraction(ratio(k, 24))));
            for k in (1..=12).chain([15, 20, 30]) {
                all.extend([AboveLower(ten(-k)), BelowUpper(ten(-k))]);
                all.extend([AboveLower(ten(-k) * whole(3)), BelowUpper(ten(-k) * whole(3))]);
            }
            // A long domain has all its sizes, not only those of its fractions.
            let long = |t: &Term| t.rational_value().is_none_or(|q| q.abs() > whole(1000));
            if long(a) || long(b) {
                for k in (1..=12).chain([14, 16, 20, 25, 32, 43, 50, 75, 100, 150, 200, 300, 400]) {
                    all.extend([Value(ten(k)), Value(-ten(k)), AboveLower(ten(k)), BelowUpper(ten(k))]);
                }
            }
        }
        (lo, hi) => {
            let side = |q: BigRational| -> Vec<Spot> {
                match (lo, hi) {
                    (Some(_), _) => vec![AboveLower(q)],
                    (_, Some(_)) => vec![BelowUpper(q)],
                    _ => vec![Value(q.clone()), Value(-q)],
                }
            };
            all.extend([Lower, Upper]);
            all.extend([1, 2, 3, 4, 5, 7, 10, 20, 50].into_iter().flat_map(|n| side(whole(n))));
            all.extend(
                [(1, 2), (1, 3), (1, 4), (3, 4), (3, 2), (5, 2), (1, 10), (2, 3)]
                    .into_iter()
                    .flat_map(|(n, d)| side(ratio(n, d))),
            );
            all.extend([whole(0), whole(1), whole(-1), whole(2), ratio(1, 2)].map(Value));
            for k in (1..=12).chain([15, 20, 30, 50, 100, 200, 400]) {
                all.extend(side(ten(k)));
                all.extend(side(ten(-k)));
            }
            for k in 1..=9 {
                all.extend(side(ten(k) * whole(3)));
                all.extend(side(ten(-k) * whole(3)));
                all.extend(side(whole(1 << k) + ratio(1, 3)));
            }
        }
    }
    all
}

/// The place as a closed term, if it lies in the domain as far as can be seen.
fn resolve(
    spot: &Spot,
    lower: &End,
    upper: &End,
    lower_open: bool,
    upper_open: bool,
    sort: Sort,
) -> Option<Term> {
    let (lo, hi) = (lower.finite(), upper.finite());
    let number = |q: &BigRational| Term::number(q.clone());
    let term = match spot {
        Spot::Lower if sort == Sort::Real && lower_open => return None,
        Spot::Upper if sort == Sort::Real && upper_open => return None,
        Spot::Lower => lo?.clone(),
        Spot::Upper => hi?.clone(),
        Spot::AboveLower(q) => lo?.add(&number(q)),
        Spot::BelowUpper(q) => hi?.subtract(&number(q)),
        Spot::Fraction(q) => lo?.add(&hi?.subtract(lo?).multiply(&number(q))),
        Spot::Value(q) => number(q),
    };
    if sort == Sort::Real {
        return Some(term);
    }
    // Integers: towards the inside, past an open end.
    let value = match term.rational_value() {
        Some(q) => q,
        None => BigRational::from_float(enclose(&term, 64)?.midpoint()?.seen())?,
    };
    let up = matches!(spot, Spot::Lower | Spot::AboveLower(_));
    let mut n = if up { value.ceil() } else { value.floor() }.to_integer();
    let past_open = value.is_integer()
        && ((lower_open && matches!(spot, Spot::Lower)) || (upper_open && matches!(spot, Spot::Upper)));
    if past_open {
        n += if up { 1 } else { -1 };
    }
    if sort == Sort::Even && num_integer::Integer::is_odd(&n) {
        n += if up { 1 } else { -1 };
    }
    Some(Term::integer(n))
}

/// Points of the domain of a sequent, at most `most`, deterministic.
#[must_use]
pub fn points(s: &Sequent, most: usize) -> Vec<Vec<Term>> {
    let lists: Vec<Vec<Spot>> =
        s.variables.iter().map(|d| spots(&d.domain.lower, &d.domain.upper, d.domain.sort)).collect();
    let mut found: Vec<Vec<Term>> = Vec::new();
    let mut seen = std::collections::BTreeSet::new();
    let mut add = |choice: &[usize]| {
        let mut put = Substitution::new();
        let mut point = Vec::with_capacity(choice.len());
        for ((d, list), &i) in s.variables.iter().zip(&lists).zip(choice) {
            let (lower, upper) = (put.apply_end(&d.domain.lower), put.apply_end(&d.domain.upper));
            let dom = &d.domain;
            let spot = list.get(i)?;
            let term = resolve(spot, &lower, &upper, dom.lower_open, dom.upper_open, dom.sort)?;
            let term = term.rational_value().map_or(term, Term::number);
            put.insert(d.name.clone(), term.clone());
            point.push(term);
        }
        if seen.insert(point.clone()) {
            found.push(point);
        }
        Some(())
    };
    let n = lists.len();
    if n == 0 {
        add(&[]);
        return found;
    }
    // A grid of the first few places of each variable, then scattered choices.
    let side = match n {
        1 => lists[0].len(),
        2 => 22,
        3 => 9,
        4 => 5,
        _ => 3,
    };
    let mut choice = vec![0; n];
    let mut grid = 0;
    loop {
        add(&choice);
        grid += 1;
        let mut i = 0;
        while i < n {
            choice[i] += 1;
            if choice[i] < side.min(lists[i].len()) {
                break;
            }
            choice[i] = 0;
            i += 1;
        }
        if i == n || grid >= most {
            break;
        }
    }
    if n > 1 {
        let mut state = 0x9e37_79b9_7f4a_7c15_u64;
        for _ in 0..most / 2 {
            for (c, list) in choice.iter_mut().zip(&lists) {
                state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
                *c = (state >> 33) as usize % list.len().max(1);
            }
            add(&choice);
        }
    }
    found
}

/// The values of a point at the precision of a probe.
pub fn values<E: Number>(point: &[Term], precision: E::Precision) -> Option<Vec<Enclosure<E>>> {
    struct None_;
    impl crate::expression::Sorts for None_ {
        fn of_variable(&self, _: &Name) -> Sort {
            Sort::Real
        }
        fn is_non_negative(&self, _: &Name) -> bool {
            false
        }
    }
    point
        .iter()
        .map(|t| {
            if let Some(q) = t.as_number() {
                return Some(Enclosure::from_rational(q, precision));
            }
            let tape: Tape<E> = Tape::new(std::slice::from_ref(t), &[], &None_, precision)?;
            let mut jets = Jets::default();
            tape.run_with(&[], precision, Order::Value, &mut jets);
            jets.defined.is_everywhere().then(|| tape.value(0, &jets).clone())
        })
        .collect()
}

/// A quick look for a point where the sequent is false, in `f64`: cheap enough to
/// be done for every subgoal.
#[must_use]
pub fn quick(s: &Sequent, most: usize, search: &mut Search) -> Option<Vec<Term>> {
    let mut probe: Probe<f64> = Probe::new(s, ())?;
    search.spend(price_of_points(s, most)).ok()?;
    for point in points(s, most) {
        let Some(at) = values::<f64>(&point, ()) else { continue };
        if let Look::Margin(_, true) = probe.look(&at) {
            return Some(point);
        }
        if !probe.pay(1, search) {
            return None;
        }
    }
    None
}

/// What making the points costs: each coordinate is an exact term that is put into
/// the ends of later ones.
pub fn price_of_points(s: &Sequent, most: usize) -> u64 {
    (most * s.variables.len()) as u64 * 2
}

/// For [`Stuck::Counterexample`].
#[must_use]
pub fn approximate(point: &[Term]) -> Stuck {
    let seen = |t: &Term| {
        values::<f64>(std::slice::from_ref(t), ()).and_then(|v| v[0].midpoint()).unwrap_or(f64::NAN)
    };
    Stuck::Counterexample(point.iter().map(seen).collect())
}

/// The precision at which the thorough search looks.
pub const BITS: u32 = 192;
/// What an instruction at that precision costs, in instructions on `f64`.
pub const BIG_PRICE: u64 = 20;

/// One coordinate of a descent.
#[derive(Clone, Copy)]
struct Room {
    integer: bool,
    lower: f64,
    upper: f64,
}

/// Goes downhill in the relative margin from a point; stops at the first point
/// surely false, or at a local minimum.
pub fn descend<E: Seen>(
    s: &Sequent,
    probe: &mut Probe<E>,
    start: &[Term],
    (steps, price): (usize, u64),
    search: &mut Search,
) -> (Vec<Term>, Margin, bool) {
    let precision = probe.precision;
    let seen = |t: &Term| enclose(t, 64).and_then(|v| v.midpoint()).map_or(f64::NAN, |m| m.seen());
    let mut x: Vec<f64> = start.iter().map(seen).collect();
    let rooms: Vec<Room> = s
        .variables
        .iter()
        .map(|d| {
            let end = |e: &End, other: f64| match e {
                End::Finite(t) if t.free_variables().is_empty() => seen(t),
                _ => other,
            };
            Room {
                integer: d.domain.sort != Sort::Real,
                lower: end(&d.domain.lower, f64::NEG_INFINITY),
                upper: end(&d.domain.upper, f64::INFINITY),
            }
        })
        .collect();
    let big = |x: &[f64]| -> Vec<Enclosure<E>> {
        let end = |v: f64, toward| E::from_f64(v, precision, toward);
        x.iter()
            .map(|v| {
                let pair = Enclosure::new(end(*v, Toward::Down), end(*v, Toward::Up));
                pair.unwrap_or_else(|| Enclosure::whole(precision))
            })
            .collect()
    };
    let terms = |x: &[f64]| -> Vec<Term> {
        x.iter()
            .map(|v| Term::number(BigRational::from_float(*v).unwrap_or_else(BigRational::zero)))
            .collect()
    };
    if x.iter().any(|v| !v.is_finite()) {
        return (start.to_vec(), Margin::WORST, false);
    }
    let pairs: Vec<(usize, usize)> = match x.len() {
        2..=4 => (0..x.len()).flat_map(|j| (0..j).map(move |i| (i, j))).collect(),
        _ => Vec::new(),
    };
    let mut best = match probe.look(&big(&x)) {
        Look::Margin(m, true) => return (terms(&x), m, true),
        Look::Margin(m, false) => m,
        _ => return (start.to_vec(), Margin::WORST, false),
    };
    // Steps relative to the distance from an end, or to the size of the number.
    let mut step = 0.25;
    for _ in 0..steps {
        let mut better = false;
        for i in 0..x.len() {
            let room = rooms[i];
            let from_end = |end: f64| if end.is_finite() { (x[i] - end).abs() } else { f64::INFINITY };
            let near = from_end(room.lower).min(from_end(room.upper));
            let size = x[i].abs().max(1e-3);
            let scale = if near > 0.0 { near.min(size) } else { size };
            let mut tries =
                vec![x[i] + step * scale, x[i] - step * scale, x[i] + step * size, x[i] - step * size];
            if step > 0.05 {
                tries.extend([x[i] * 4.0, x[i] / 4.0]);
            }
            if room.integer {
                tries = tries.into_iter().map(f64::round).collect();
                tries.extend([x[i] + 1.0, x[i] - 1.0]);
            }
            for t in tries {
                let t = t.clamp(room.lower, room.upper);
                if t == x[i] || !t.is_finite() {
                    continue;
                }
                if !probe.pay(price, search) {
                    return (terms(&x), best, false);
                }
                let before = x[i];
                x[i] = t;
                match probe.look(&big(&x)) {
                    Look::Margin(m, true) => return (terms(&x), m, true),
                    Look::Margin(m, false) if m.compare(&best) == Ordering::Less => {
                        best = m;
                        better = true;
                        break;
                    }
                    _ => x[i] = before,
                }
            }
        }
        // Along a ridge two variables must move together.
        for &(i, j) in &pairs {
            if better {
                break;
            }
            let (f, before) = (1.0 + 4.0 * step, (x[i], x[j]));
            for (a, b) in [(f, f), (f, 1.0 / f), (1.0 / f, f), (1.0 / f, 1.0 / f)] {
                let moved = |k: usize, by: f64| {
                    let t = if rooms[k].integer { (x[k] * by).round() } else { x[k] * by };
                    t.clamp(rooms[k].lower, rooms[k].upper)
                };
                (x[i], x[j]) = (moved(i, a), moved(j, b));
                if !probe.pay(price, search) {
                    (x[i], x[j]) = before;
                    return (terms(&x), best, false);
                }
                match probe.look(&big(&x)) {
                    Look::Margin(m, true) => return (terms(&x), m, true),
                    Look::Margin(m, false) if m.compare(&best) == Ordering::Less => {
                        best = m;
                        better = true;
                        break;
                    }
                    _ => (x[i], x[j]) = before,
                }
            }
        }
        if !better {
            step /= 4.0;
            if step < 1e-17 {
                break;
            }
        }
    }
    (terms(&x), best, false)
}

/// The fraction of least denominator in `[low, high]`, for `low <= high`
/// (continued fractions, Stern 1858).
#[must_use]
pub fn simplest(low: &BigRational, high: &BigRational) -> BigRational {
    if low.is_negative() && high.is_positive() || low.is_zero() || high.is_zero() {
        return BigRational::zero();
    }
    if high.is_negative() {
        return -simplest(&-high, &-low);
    }
    let mut terms: Vec<BigInt> = Vec::new();
    let (mut a, mut b) = (low.clone(), high.clone());
    // Euclid's algorithm on both ends as long as their continued fractions agree.
    loop {
        let up = a.ceil();
        if up <= b {
            let mut value = up;
            while let Some(n) = terms.pop() {
                value = BigRational::from_integer(n) + value.recip();
            }
            return value;
        }
        let n = a.floor().to_integer();
        let whole = BigRational::from_integer(n.clone());
        (a, b) = ((b - &whole).recip(), (a - &whole).recip());
        terms.push(n);
        if terms.len() > 400 {
            return low.clone();
        }
    }
}

/// Approximate value, for orders and scales only.
#[must_use]
pub fn size_of(q: &BigRational) -> f64 {
    q.to_f64().unwrap_or(f64::INFINITY)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_simplest_fraction_of_an_interval() {
        let simple = |a: (i64, i64), b: (i64, i64)| simplest(&ratio(a.0, a.1), &ratio(b.0, b.1)).to_string();
        assert_eq!(simple((314, 100), (315, 100)), "22/7");
        assert_eq!(simple((-1, 3), (1, 5)), "0");
        assert_eq!(simple((-5, 2), (-9, 4)), "-5/2");
        assert_eq!(simple((1, 3), (1, 3)), "1/3");
        assert_eq!(simple((7, 2), (9, 2)), "4");
    }
}

//! One variable seen along sample points: signs of terms between the ends of its
//! domain, for a few values of the other variables. Samples steer the search;
//! nothing rests on them.

use std::cell::{Cell, RefCell};
use std::cmp::Ordering;
use std::collections::BTreeMap;

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use crate::enclosure::{BigFloat, BigInterval, Bits, Interval};
use crate::expression::tape::{Jets, Order, Tape};
use crate::expression::{End, Name, Sort, Term};
use crate::search::laurent::Algebra;
use crate::search::plain::is_plainly_positive;
use crate::statement::{Conclusion, Declaration, Rel, Relation, Sequent};

/// Working precision of the samples that `f64` does not settle.
const BITS: u32 = 200;
/// Settings of the other variables.
const SETTINGS: usize = 10;

/// A real variable whose sections are intervals, with sample points.
pub struct Line {
    /// The context with the variable's ends open.
    pub inside: Sequent,
    /// The variable.
    pub x: Name,
    /// Its declaration as it stood.
    pub declared: Declaration,
    /// The context without the variable, for sections with an inner point.
    pub base: Sequent,
    names: Vec<Name>,
    settings: Vec<Vec<Vec<BigInterval>>>,
    known: RefCell<BTreeMap<Term, Option<Ordering>>>,
    /// Work so far, in units of the search's budget.
    pub work: Cell<u64>,
    /// Work after which terms are no longer looked at.
    pub most_work: u64,
}

/// The signs along the line, once for each setting of the other variables.
pub type Signs = Vec<Vec<bool>>;

impl Line {
    /// Counts work; nothing once there was too much.
    pub fn spend(&self, units: u64) -> Option<()> {
        self.work.set(self.work.get().saturating_add(units));
        (self.work.get() <= self.most_work).then_some(())
    }

    /// Whether there was too much work.
    #[must_use]
    pub fn is_worn_out(&self) -> bool {
        self.work.get() > self.most_work
    }

    /// The sections in `x`, unless a hypothesis or another end moves with it.
    #[must_use]
    pub fn new(s: &Sequent, x: &Name, most_work: u64) -> Option<Line> {
        let place = s.variables.iter().position(|d| d.name == *x)?;
        let declared = s.variables[place].clone();
        if declared.domain.sort != Sort::Real {
            return None;
        }
        if s.variables.iter().any(|d| d.domain.ends().any(|e| e.mentions(x)))
            || s.hypotheses.iter().any(|h| h.left.mentions(x) || h.right.mentions(x))
        {
            return None;
        }
        let mut inside = s.clone();
        inside.variables[place].domain.lower_open = true;
        inside.variables[place].domain.upper_open = true;
        let base = base(s, &declared, true);
        let names: Vec<Name> = s.variables.iter().map(|d| d.name.clone()).collect();
        let mut line = Line {
            inside,
            x: x.clone(),
            declared,
            base,
            names,
            settings: Vec::new(),
            known: RefCell::default(),
            work: Cell::new(0),
            most_work,
        };
        line.settings = line.sample(s, place)?;
        Some(line)
    }

    /// Points in order of x, for several values of the others that satisfy the hypotheses.
    fn sample(&self, s: &Sequent, place: usize) -> Option<Vec<Vec<Vec<BigInterval>>>> {
        let wanted = if s.variables.len() == 1 { 1 } else { SETTINGS };
        let grid = grid();
        let mut found = Vec::new();
        for attempt in 0..20 * wanted {
            let mut point: Vec<BigInterval> = Vec::new();
            let mut fits = true;
            for (i, d) in s.variables.iter().enumerate() {
                // The variable itself comes last; it is no end of the others.
                let value = if i == place {
                    Some(BigInterval::from_integer(0, Bits::new(BITS)))
                } else {
                    let t = spread(attempt, if i < place { i } else { i - 1 });
                    self.between(d, &point, &t)
                };
                match value {
                    Some(v) => point.push(v),
                    None => {
                        fits = false;
                        break;
                    }
                }
            }
            if !fits || !s.hypotheses.iter().all(|h| self.satisfies(h, &point)) {
                continue;
            }
            let at: Option<Vec<Vec<BigInterval>>> = grid
                .iter()
                .map(|t| {
                    let mut p = point.clone();
                    p[place] = self.between(&s.variables[place], &point, t)?;
                    Some(p)
                })
                .collect();
            if let Some(at) = at {
                found.push(at);
            }
            if found.len() >= wanted {
                break;
            }
        }
        if found.is_empty() { None } else { Some(found) }
    }

    /// The point of a domain at `t` of the way from end to end.
    fn between(&self, d: &Declaration, point: &[BigInterval], t: &BigRational) -> Option<BigInterval> {
        let bits = Bits::new(BITS);
        let end = |e: &End| match e {
            End::Finite(term) => self.evaluate(term, point).map(Some),
            _ => Some(None),
        };
        let (a, b) = (end(&d.domain.lower)?, end(&d.domain.upper)?);
        let number = |q: &BigRational| BigInterval::from_rational(q, bits);
        let rest = BigRational::one() - t;
        let value = match (&a, &b) {
            (Some(a), Some(b)) => {
                if !a.is_certainly_less_than(b) {
                    return None;
                }
                a.plus(&b.minus(a).times(&number(t)))
            }
            (Some(a), None) => a.plus(&number(&(t / &rest))),
            (None, Some(b)) => b.minus(&number(&(&rest / t))),
            (None, None) => {
                let s = t + t - BigRational::one();
                number(&(&s / (BigRational::one() - s.abs())))
            }
        };
        if d.domain.sort == Sort::Real {
            return Some(value);
        }
        let near = *value.to_interval().lo();
        let whole = if d.domain.sort == Sort::Even { 2.0 * (near / 2.0).round() } else { near.round() };
        let whole = BigInterval::from_interval(&Interval::point(whole), bits);
        let inside = a.is_none_or(|a| a.is_certainly_at_most(&whole))
            && b.is_none_or(|b| whole.is_certainly_at_most(&b));
        inside.then_some(whole)
    }

    /// The value of a term in the first variables at a point.
    fn evaluate(&self, term: &Term, point: &[BigInterval]) -> Option<BigInterval> {
        let bits = Bits::new(BITS);
        let names = &self.names[..point.len()];
        let tape: Tape<BigFloat> = Tape::new(std::slice::from_ref(term), names, &self.inside, bits)?;
        let mut jets = Jets::default();
        tape.run_with(point, bits, Order::Value, &mut jets);
        jets.defined.is_everywhere().then(|| tape.value(0, &jets).clone())
    }

    fn satisfies(&self, h: &Relation, point: &[BigInterval]) -> bool {
        let Some(v) = self.evaluate(&h.difference(), point) else { return false };
        match h.turned().rel {
            Rel::LessEqual => v.is_certainly_non_negative(),
            Rel::Less => v.is_certainly_positive(),
            Rel::NotEqual => !v.contains_zero(),
            _ => v.contains_zero(),
        }
    }

    /// The signs of a term along the line; nothing if it is undefined somewhere.
    /// Values too close to 0 to tell are passed over.
    #[must_use]
    pub fn signs(&self, term: &Term) -> Option<Signs> {
        let fast: Tape<f64> = Tape::new(std::slice::from_ref(term), &self.names, &self.inside, ())?;
        let bits = Bits::new(BITS);
        let mut slow: Option<Tape<BigFloat>> = None;
        let (mut jets, mut wide) = (Jets::default(), Jets::default());
        let mut all = Vec::with_capacity(self.settings.len());
        for setting in &self.settings {
            let mut pattern: Vec<bool> = Vec::new();
            for point in setting {
                self.spend(1 + fast.length() as u64 / 8)?;
                let ranges: Vec<Interval> = point.iter().map(BigInterval::to_interval).collect();
                fast.run(&ranges, Order::Value, &mut jets);
                let near = *fast.value(0, &jets);
                let mut sign = match () {
                    () if !jets.defined.is_everywhere() => None,
                    () if near.is_certainly_positive() => Some(true),
                    () if near.is_certainly_negative() => Some(false),
                    () => None,
                };
                if sign.is_none() {
                    self.spend(8 * fast.length() as u64)?;
                    if slow.is_none() {
                        slow = Some(Tape::new(std::slice::from_ref(term), &self.names, &self.inside, bits)?);
                    }
                    let tape = slow.as_ref()?;
                    tape.run_with(point, bits, Order::Value, &mut wide);
                    if !wide.defined.is_everywhere() {
                        return None;
                    }
                    let value = tape.value(0, &wide);
                    sign = match () {
                        () if value.is_certainly_positive() => Some(true),
                        () if value.is_certainly_negative() => Some(false),
                        () => None,
                    };
                }
                if let Some(sign) = sign
                    && pattern.last() != Some(&sign)
                {
                    pattern.push(sign);
                }
            }
            all.push(pattern);
        }
        Some(all)
    }

    /// The one strict sign that a term shows wherever it was looked at; `Equal` if
    /// it never differed from 0.
    #[must_use]
    pub fn sign(&self, term: &Term) -> Option<Ordering> {
        if let Some(q) = term.as_number() {
            return Some(q.cmp(&BigRational::zero()));
        }
        if let Some(known) = self.known.borrow().get(term) {
            return *known;
        }
        let mut seen = [false, false];
        let found = self.signs(term).and_then(|all| {
            for sign in all.iter().flatten() {
                seen[usize::from(*sign)] = true;
            }
            match seen {
                [true, true] => None,
                [true, false] => Some(Ordering::Less),
                [false, true] => Some(Ordering::Greater),
                [false, false] => Some(Ordering::Equal),
            }
        });
        self.known.borrow_mut().insert(term.clone(), found);
        found
    }

    /// The strict sign of a term without the variable, if it is plain for the kernel: by
    /// its shape or that of its normal form, or as a number.
    #[must_use]
    pub fn settled(&self, term: &Term) -> Option<Ordering> {
        if term.free_variables().is_empty() {
            return self.sign(term).filter(|o| o.is_ne());
        }
        let plain = |t: &Term| {
            let positive = |t: &Term| is_plainly_positive(&self.base, t);
            if positive(t) {
                return Some(Ordering::Greater);
            }
            positive(&t.negate()).then_some(Ordering::Less)
        };
        plain(term).or_else(|| {
            let positive = |a: &Term| is_plainly_positive(&self.base, a);
            plain(&Algebra { positive: &positive }.poly(term)?.to_term())
        })
    }

    /// Values of x and of a term along the first setting.
    #[must_use]
    pub fn values(&self, term: &Term) -> Option<Vec<(BigInterval, BigInterval)>> {
        let place = self.names.iter().position(|n| *n == self.x)?;
        self.settings.first()?.iter().map(|p| Some((p[place].clone(), self.evaluate(term, p)?))).collect()
    }
}

/// The context without a variable; `inner` for sections with an inner point.
#[must_use]
pub fn base(s: &Sequent, d: &Declaration, inner: bool) -> Sequent {
    let mut base = Sequent { goal: Conclusion::Absurd, ..s.clone() };
    base.variables.retain(|v| v.name != d.name);
    if let (End::Finite(a), End::Finite(b)) = (&d.domain.lower, &d.domain.upper)
        && (a.as_number().is_none() || b.as_number().is_none())
    {
        let strict = inner || d.domain.lower_open || d.domain.upper_open;
        let rel = if strict { Rel::Less } else { Rel::LessEqual };
        base.hypotheses.push(Relation::new(a.clone(), rel, b.clone()));
    }
    base
}

/// Fractions of the way, dense towards both ends.
fn grid() -> Vec<BigRational> {
    let ratio = |n: i64, d: i64| BigRational::new(n.into(), d.into());
    let mut all: Vec<BigRational> = (1..24).map(|i| ratio(i, 24)).collect();
    for k in [5, 6, 7, 9, 11, 14, 18, 23, 30, 40] {
        let small = BigRational::new(BigInt::one(), BigInt::from(3) << (k - 2));
        all.push(BigRational::one() - &small);
        all.push(small);
    }
    all.sort();
    all.dedup();
    all
}

/// A sequence that fills (0, 1): multiples of irrational-looking fractions, with the
/// neighbourhoods of the ends now and then.
fn spread(attempt: usize, axis: usize) -> BigRational {
    const STEPS: [i64; 6] = [618_034, 414_214, 732_051, 236_068, 645_751, 316_625];
    let n = (500_000 + (attempt as i64 + 1) * STEPS[axis % 6] + axis as i64 * 137_911) % 1_000_000;
    let t = BigRational::new((n.max(1)).into(), 1_000_000.into());
    match attempt % 5 {
        3 => &t * &t * &t,
        4 => BigRational::one() - &t * &t * &t,
        _ => t,
    }
}

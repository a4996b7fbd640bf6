//! Quick signs: what the shape of a term says about its values (R10).
//!
//! Statement: at every point of the context where the term is defined, its value
//! lies in the range found. Ranges go from the parts to the whole by the order
//! axioms and by the ranges and monotonicity of the functions; a sum of terms
//! `>= 0` is `> 0` only if one of them is, a product only if all are.
//! What enters from the context: declared ends, and hypotheses in which the term
//! itself is compared with something whose own range follows, in chains of three.
//! From a term's being defined only its own head is used: a divisor is not
//! zero, what stands under a logarithm is positive, under a root not negative.
//! So a range is no evidence that the term is defined; that is shown elsewhere,
//! condition by condition from the inside out. Source: Hardy, Littlewood, Polya, Inequalities, chapter I.

use std::cell::{Cell, RefCell};
use std::collections::HashMap;

use num_bigint::BigInt;
use num_integer::Integer;
use num_rational::BigRational;
use num_traits::{One, Signed, ToPrimitive, Zero};

use super::integer::is_even;
use super::normal;
use super::number::{Function, Interval, apply};
use super::range::Range;
use super::sequent::{Rel, Relation, Sequent, Sort};
use super::term::{Constant, Limit, Name, Node, SeriesKind, Term};

/// Most terms one analysis looks at.
const MAX_VISITS: u64 = 20_000;
/// Precision of the enclosures of values, in bits.
const PRECISION: u32 = 64;
/// Longest chain of hypotheses, each bounding a term of the one before.
const MAX_CHAIN: u32 = 3;

/// The sign of a term.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[allow(missing_docs)]
pub enum Sign {
    Positive,
    NonNegative,
    Zero,
    NonPositive,
    Negative,
    NonZero,
    Unknown,
}

impl Sign {
    fn of(r: &Range) -> Sign {
        match (r.is_positive(), r.is_negative(), r.is_non_negative(), r.is_non_positive()) {
            (true, ..) => Sign::Positive,
            (_, true, ..) => Sign::Negative,
            (_, _, true, true) => Sign::Zero,
            (_, _, true, _) => Sign::NonNegative,
            (_, _, _, true) => Sign::NonPositive,
            _ if r.nonzero => Sign::NonZero,
            _ => Sign::Unknown,
        }
    }

    /// Whether it says `> 0`.
    pub fn is_positive(self) -> bool {
        self == Sign::Positive
    }

    /// Whether it says `>= 0`.
    pub fn is_non_negative(self) -> bool {
        matches!(self, Sign::Positive | Sign::NonNegative | Sign::Zero)
    }

    /// Whether it says `<= 0`.
    pub fn is_non_positive(self) -> bool {
        matches!(self, Sign::Negative | Sign::NonPositive | Sign::Zero)
    }

    /// Whether it says `!= 0`.
    pub fn is_nonzero(self) -> bool {
        matches!(self, Sign::Positive | Sign::Negative | Sign::NonZero)
    }
}

/// The sign of a term at the points of a sequent, from its shape alone.
pub fn sign_of(s: &Sequent, term: &Term) -> Sign {
    sign_in(Some(s), term)
}

/// The same, or without any context.
pub fn sign_in(context: Option<&Sequent>, term: &Term) -> Sign {
    Sign::of(&Signs::new(context).range(term))
}

/// A range of the term's values at the points of a sequent.
pub fn range_of(s: &Sequent, term: &Term) -> Range {
    Signs::new(Some(s)).range(term)
}

/// Whether the relation holds, by quick analysis, at every point of the sequent
/// where both sides are defined.
pub fn settles(s: &Sequent, relation: &Relation) -> bool {
    settles_by_shape(s, relation) || settles_by_normal_form(s, relation)
}

/// The part of [`settles`] that computes no normal form.
pub fn settles_by_shape(s: &Sequent, relation: &Relation) -> bool {
    let r = relation.turned();
    if r.left == r.right {
        return matches!(r.rel, Rel::Le | Rel::Eq);
    }
    let signs = Signs::new(Some(s));
    if signs.states(&r) {
        return true;
    }
    let (left, right) = (signs.range(&r.left), signs.range(&r.right));
    let below = |strictly: bool| match (&left.upper, &right.lower) {
        (Some(a), Some(b)) => a.value < b.value || (a.value == b.value && (!strictly || a.open || b.open)),
        _ => false,
    };
    let above = || match (&left.lower, &right.upper) {
        (Some(a), Some(b)) => a.value > b.value || (a.value == b.value && (a.open || b.open)),
        _ => false,
    };
    let by_ranges = match r.rel {
        Rel::Le => below(false),
        Rel::Lt => below(true),
        Rel::Eq => left.single().is_some() && left.single() == right.single(),
        _ => below(true) || above(),
    };
    by_ranges || allows(r.rel, Sign::of(&signs.range(&r.difference())))
}

fn settles_by_normal_form(s: &Sequent, relation: &Relation) -> bool {
    let difference = relation.difference();
    if difference.size_up_to(2000) >= 2000 {
        return false;
    }
    let Ok(q) = normal::normal_in(s, &difference) else { return false };
    if q.is_zero() {
        return allows(relation.turned().rel, Sign::Zero);
    }
    allows(relation.turned().rel, sign_of(s, &q.to_term()))
}

/// Whether `r - l` of that sign is what the relation `l rel r` asks for.
fn allows(rel: Rel, sign: Sign) -> bool {
    match rel {
        Rel::Le => sign.is_non_negative(),
        Rel::Lt => sign.is_positive(),
        Rel::Eq => sign == Sign::Zero,
        Rel::Ne => sign.is_nonzero(),
        Rel::Ge => sign.is_non_positive(),
        Rel::Gt => sign == Sign::Negative,
    }
}

/// Computes ranges, remembering what it has met.
struct Signs<'a> {
    context: Option<&'a Sequent>,
    facts: Vec<Relation>,
    /// How many hypotheses lie between the term in hand and the one asked about.
    chained: Cell<u32>,
    bound: RefCell<Vec<(Name, Range)>>,
    // By address of terms that outlive the memory; no order leaks from it.
    known: RefCell<HashMap<*const Node, Range>>,
    kept: RefCell<Vec<Term>>,
    visits: Cell<u64>,
}

impl<'a> Signs<'a> {
    fn new(context: Option<&'a Sequent>) -> Signs<'a> {
        let facts = context.map(|s| s.hypotheses.iter().map(Relation::turned).collect()).unwrap_or_default();
        Signs {
            context,
            facts,
            chained: Cell::new(0),
            bound: RefCell::default(),
            known: RefCell::default(),
            kept: RefCell::default(),
            visits: Cell::new(0),
        }
    }

    /// Whether a declared end or a hypothesis states the relation as it stands.
    fn states(&self, r: &Relation) -> bool {
        let Some(s) = self.context else { return false };
        let enough = |f: &Relation| {
            let same = f.left == r.left && f.right == r.right;
            let mirrored = f.left == r.right && f.right == r.left;
            match f.rel {
                Rel::Le => same && r.rel == Rel::Le,
                Rel::Lt => (same && r.rel != Rel::Eq) || (mirrored && r.rel == Rel::Ne),
                Rel::Eq => (same || mirrored) && matches!(r.rel, Rel::Le | Rel::Eq),
                _ => (same || mirrored) && r.rel == Rel::Ne,
            }
        };
        let of_variable = |t: &Term| match &**t {
            Node::Variable(x) => {
                let (lower, upper) = s.ends(x);
                lower.as_ref().is_some_and(enough) || upper.as_ref().is_some_and(enough)
            }
            _ => false,
        };
        self.facts.iter().any(enough) || of_variable(&r.left) || of_variable(&r.right)
    }

    fn range(&self, term: &Term) -> Range {
        self.visits.set(self.visits.get() + 1);
        if self.visits.get() > MAX_VISITS {
            return Range::default();
        }
        if let Some(q) = term.as_number() {
            return Range::exactly(q.clone());
        }
        // What is found at the end of a chain knows fewer hypotheses.
        let free = self.bound.borrow().is_empty();
        let memorable = free && self.chained.get() == 0;
        let key: *const Node = &**term;
        if memorable && let Some(known) = self.known.borrow().get(&key) {
            return known.clone();
        }
        let mut range = self.by_shape(term);
        if free && self.chained.get() < MAX_CHAIN {
            range = range.meet(self.by_facts(term));
        }
        if memorable {
            self.kept.borrow_mut().push(term.clone());
            self.known.borrow_mut().insert(key, range.clone());
        }
        range
    }

    /// What the hypotheses say about this very term.
    fn by_facts(&self, term: &Term) -> Range {
        let mut range = Range::default();
        if matches!(**term, Node::Number(_)) {
            return range;
        }
        for f in &self.facts {
            let (on_left, on_right) = (f.left == *term, f.right == *term);
            if !on_left && !on_right {
                continue;
            }
            let other = if on_left { &f.right } else { &f.left };
            self.chained.set(self.chained.get() + 1);
            let of_other = self.range(other);
            self.chained.set(self.chained.get() - 1);
            let strict = f.rel == Rel::Lt;
            let end = |b: &Option<super::range::Bound>| {
                b.clone().map(|b| super::range::Bound { open: b.open || strict, ..b })
            };
            range = range.meet(match f.rel {
                Rel::Eq => of_other,
                Rel::Le | Rel::Lt if on_left => Range { upper: end(&of_other.upper), ..Range::default() },
                Rel::Le | Rel::Lt => Range { lower: end(&of_other.lower), ..Range::default() },
                Rel::Ne => {
                    Range { nonzero: of_other.single().is_some_and(Zero::is_zero), ..Range::default() }
                }
                _ => Range::default(),
            });
        }
        range
    }

    fn variable(&self, name: &Name) -> Range {
        if let Some((_, range)) = self.bound.borrow().iter().rev().find(|(n, _)| n == name) {
            return range.clone();
        }
        let Some(d) = self.context.and_then(|s| s.declaration(name)) else { return Range::default() };
        // Its ends mean declared variables, though an index around may hide the name.
        let hidden = self.bound.take();
        let end = |e: &super::sequent::End, lower: bool| {
            let r = self.range(&e.term);
            let b = if lower { r.lower } else { r.upper };
            b.map(|b| super::range::Bound { open: b.open || e.open, ..b })
        };
        let lower = d.domain.lower.as_ref().and_then(|e| end(e, true));
        let upper = d.domain.upper.as_ref().and_then(|e| end(e, false));
        self.bound.replace(hidden);
        let range = Range { lower, upper, nonzero: false }.meet(Range::default());
        if d.domain.sort == Sort::Real { range } else { range.of_integers() }
    }

    fn by_shape(&self, term: &Term) -> Range {
        match &**term {
            Node::Number(q) => Range::exactly(q.clone()),
            Node::Constant(c) => {
                // From the tables of Abramowitz and Stegun, chapter 1, rounded outwards.
                let (low, high) = match c {
                    Constant::Pi => (3_141_592_653_589_793i64, 3_141_592_653_589_794),
                    Constant::E => (2_718_281_828_459_045, 2_718_281_828_459_046),
                    Constant::Euler => (577_215_664_901_532, 577_215_664_901_533),
                };
                let scaled = |n: i64| BigRational::new(n.into(), 1_000_000_000_000_000i64.into());
                Range::between(scaled(low), scaled(high))
            }
            Node::Variable(name) => self.variable(name),
            Node::Negate(a) => self.range(a).negated(),
            Node::Add(a, b) => self.range(a).plus(&self.range(b)),
            Node::Subtract(a, b) => self.difference(a, b),
            Node::Multiply(a, b) if a == b => self.range(a).natural_power(2),
            Node::Multiply(a, b) => self.range(a).times(&self.range(b)),
            Node::Divide(a, b) if a == b => Range::exactly(BigRational::one()),
            Node::Divide(a, b) => self.range(a).times(&self.range(b).reciprocal()),
            Node::Power(a, b) => self.power(a, b),
            Node::Apply(f, args) => self.function(*f, args),
            Node::Quantity(..) => Range::default(),
            Node::Series { kind, index, lower, upper, body } => self.series(*kind, index, lower, upper, body),
        }
    }

    /// `a - b`, also when a stated order of `a` and `b` says more than their ranges.
    fn difference(&self, a: &Term, b: &Term) -> Range {
        if a == b {
            return Range::exactly(BigRational::zero());
        }
        let mut range = self.range(a).plus(&self.range(b).negated());
        if !self.bound.borrow().is_empty() {
            return range;
        }
        let states = |l: &Term, rel, r: &Term| self.states(&Relation::new(l.clone(), rel, r.clone()));
        for (low, high, up) in [(b, a, true), (a, b, false)] {
            let found = if states(low, Rel::Lt, high) {
                Range::above(0, true)
            } else if states(low, Rel::Le, high) {
                Range::above(0, false)
            } else {
                continue;
            };
            range = range.meet(if up { found } else { found.negated() });
        }
        if states(a, Rel::Ne, b) {
            range = range.meet(Range { nonzero: true, ..Range::default() });
        }
        range
    }

    fn power(&self, base: &Term, exponent: &Term) -> Range {
        let b = self.range(base);
        if let Some(q) = exponent.as_number() {
            let n = q.is_integer().then(|| q.numer().to_i64()).flatten();
            match n {
                Some(0) => return Range::exactly(BigRational::one()),
                Some(n) if n.unsigned_abs() <= 1_000_000 => {
                    let power = b.natural_power(n.unsigned_abs() as u32);
                    return if n > 0 { power } else { power.reciprocal() };
                }
                _ if !q.is_integer() => return fractional_power(&b, q),
                _ => {}
            }
        }
        let p = self.range(exponent);
        let one = BigRational::one();
        let mut range = if b.is_positive() {
            Range::above(0, true)
        } else if b.is_non_negative() {
            Range { nonzero: b.nonzero, ..Range::above(0, false) }
        } else if self.context.is_some_and(|s| is_even(s, exponent)) && self.bound.borrow().is_empty() {
            Range { nonzero: b.nonzero, ..Range::above(0, false) }.meet(Range::default())
        } else {
            return Range { nonzero: b.nonzero, ..Range::default() };
        };
        // Against 1: for a base on one side of 1 and an exponent of one sign.
        for (b_sign, p_sign, above) in
            [(true, true, true), (true, false, false), (false, true, false), (false, false, true)]
        {
            let strictly = |s| {
                let base = if b_sign {
                    b.is_at_least(&one, s)
                } else {
                    b.is_at_most(&one, s) && b.is_non_negative()
                };
                let exponent = match (p_sign, s) {
                    (true, true) => p.is_positive(),
                    (true, false) => p.is_non_negative(),
                    (false, true) => p.is_negative(),
                    (false, false) => p.is_non_positive(),
                };
                base && exponent
            };
            if strictly(false) {
                let open = strictly(true);
                range = range.meet(if above { Range::above(1, open) } else { Range::below(1, open) });
            }
        }
        range
    }

    /// The sign of `sin a` (`shift` 0) or `cos a = sin(a + pi/2)` (`shift` 1) where
    /// the argument stays within one arch of the curve, ends included or not.
    fn arch(&self, a: &Term, shift: i64) -> Range {
        let turns = self.half_turns(a);
        let (Some(low), Some(high)) = (&turns.lower, &turns.upper) else { return Range::default() };
        let half = BigRational::new(shift.into(), 2.into());
        let (from, to) = (&low.value + &half, &high.value + &half);
        let strict = (low.open || !from.is_integer()) && (high.open || !to.is_integer());
        let floor = from.floor();
        if to > &floor + BigRational::one() {
            return Range::default();
        }
        if floor.to_integer().is_even() { Range::above(0, strict) } else { Range::below(0, strict) }
    }

    /// The range of `a/pi`: exact where pi cancels in `a` or in the ends of a
    /// variable, else from 3.1415 < pi < 3.1416.
    fn half_turns(&self, a: &Term) -> Range {
        let pi: Term = Node::Constant(Constant::Pi).into();
        let mentions_pi = |t: &Term| t.contains(&pi);
        let free = |t: &Term| {
            let q = normal::Normalizer::new(self.context).quotient(&t.divide(&pi)).ok()?.to_term();
            (!mentions_pi(&q)).then_some(q)
        };
        if mentions_pi(a) && self.bound.borrow().is_empty() {
            return free(a).map_or_else(Range::default, |q| self.range(&q));
        }
        // Under a series the name may be an index, and its range is another.
        if let Node::Variable(x) = &**a
            && self.bound.borrow().is_empty()
            && let Some(d) = self.context.and_then(|s| s.declaration(x))
        {
            let end = |e: &Option<super::sequent::End>| {
                let e = e.as_ref()?;
                let value = if e.term == Term::zero() {
                    BigRational::zero()
                } else {
                    free(&e.term)?.as_number()?.clone()
                };
                Some(super::range::Bound { value, open: e.open })
            };
            let exact = Range { lower: end(&d.domain.lower), upper: end(&d.domain.upper), nonzero: false };
            if exact.lower.is_some() && exact.upper.is_some() {
                return exact;
            }
        }
        let over = |b: &Option<super::range::Bound>, down: bool| {
            let b = b.as_ref()?;
            // Dividing by more makes a positive number smaller, a negative one larger.
            let divisor = if b.value.is_negative() == down { 31415 } else { 31416 };
            let value = &b.value * BigRational::new(10_000.into(), divisor.into());
            Some(super::range::Bound { value, open: b.open })
        };
        let r = self.range(a);
        Range { lower: over(&r.lower, true), upper: over(&r.upper, false), nonzero: r.nonzero }
    }

    fn function(&self, f: Function, args: &[Term]) -> Range {
        let a = self.range(&args[0]);
        let monotone = |a: &Range| a.increasing(|q| enclose(f, q));
        let unit = || Range::between(-BigRational::one(), BigRational::one());
        let open_unit = || Range::above(-1, true).meet(Range::below(1, true));
        let odd = |a: &Range| Range { nonzero: a.nonzero, ..monotone(a) }.meet(sign_only(a));
        match f {
            Function::Exp => monotone(&a).meet(Range::above(0, true)),
            Function::Log | Function::Log2 => monotone(&a.meet(Range::above(0, true))),
            Function::Sqrt => fractional_power(&a, &BigRational::new(1.into(), 2.into())),
            Function::Abs => {
                let positive = a.is_non_negative();
                if positive {
                    return a;
                }
                if a.is_non_positive() {
                    return a.negated();
                }
                Range { nonzero: a.nonzero, ..a.negated().hull(a.clone()) }.meet(Range::above(0, a.nonzero))
            }
            Function::Min | Function::Max => {
                let mut all = args.iter().map(|t| self.range(t));
                let Some(first) = all.next() else { return Range::default() };
                all.fold(first, |x, y| extreme(&x, &y, f == Function::Max))
            }
            Function::Floor | Function::Ceil => {
                let round = |b: Option<super::range::Bound>| {
                    b.map(|b| if f == Function::Floor { b.value.floor() } else { b.value.ceil() })
                        .map(|value| super::range::Bound { value, open: false })
                };
                let mut range =
                    Range { lower: round(a.lower.clone()), upper: round(a.upper.clone()), nonzero: false };
                // Just above an integer the ceiling is already the next one.
                if let (Function::Ceil, Some(b)) = (f, &a.lower)
                    && b.open
                    && b.value.is_integer()
                {
                    range = range.meet(Range {
                        lower: Some(super::range::Bound {
                            value: &b.value + BigRational::one(),
                            open: false,
                        }),
                        ..Range::default()
                    });
                }
                if let (Function::Floor, Some(b)) = (f, &a.upper)
                    && b.open
                    && b.value.is_integer()
                {
                    range = range.meet(Range {
                        upper: Some(super::range::Bound {
                            value: &b.value - BigRational::one(),
                            open: false,
                        }),
                        ..Range::default()
                    });
                }
                range.meet(Range::default())
            }
            Function::Sin => unit().meet(self.arch(&args[0], 0)),
            Function::Cos => unit().meet(self.arch(&args[0], 1)),
            Function::Tanh | Function::Erf => odd(&a).meet(open_unit()),
            Function::Atan => odd(&a).meet(Range::between(
                BigRational::new((-8).into(), 5.into()),
                BigRational::new(8.into(), 5.into()),
            )),
            Function::Asin | Function::Sinh | Function::Asinh | Function::Atanh => odd(&a),
            Function::Acos | Function::Acosh => Range::above(0, false),
            Function::Erfc => {
                let range = Range::above(0, true).meet(Range::below(2, true));
                if a.is_non_negative() { range.meet(Range::below(1, a.nonzero)) } else { range }
            }
            Function::Cosh => Range::above(1, a.nonzero),
            Function::Gamma | Function::Trigamma if a.is_positive() => Range::above(0, true),
            Function::Factorial => Range::above(1, false),
            Function::Binomial => Range::above(0, false),
            _ => Range::default(),
        }
    }

    /// A sum of terms >= 0 is >= 0, empty or not; > 0 if it has a term and all
    /// are > 0. A product likewise, where the empty one is 1. An integral of
    /// something >= 0 is >= 0 if its limits are in order.
    fn series(&self, kind: SeriesKind, index: &Name, lower: &Limit, upper: &Limit, body: &Term) -> Range {
        let range_of = |l: &Limit| match l {
            Limit::Finite(t) => self.range(t),
            _ => Range::default(),
        };
        let (low, high) = (range_of(lower), range_of(upper));
        let ordered = |strictly: bool| match (&low.upper, &high.lower, upper) {
            (Some(_), _, Limit::Above) => true,
            (Some(a), Some(b), _) => a.value < b.value || (a.value == b.value && !strictly),
            _ => false,
        };
        let of_index = Range { lower: low.lower.clone(), upper: high.upper.clone(), nonzero: false };
        self.bound.borrow_mut().push((index.clone(), of_index.meet(Range::default())));
        let of_body = self.range(body);
        self.bound.borrow_mut().pop();
        match kind {
            SeriesKind::Sum if of_body.is_non_negative() => {
                Range::above(0, of_body.is_positive() && ordered(false))
            }
            SeriesKind::Sum if of_body.is_non_positive() => {
                Range::below(0, of_body.is_negative() && ordered(false))
            }
            // An infinite product of positive factors may be 0.
            SeriesKind::Product if of_body.is_non_negative() => {
                Range::above(0, of_body.is_positive() && matches!(upper, Limit::Finite(_)))
            }
            SeriesKind::Integral if of_body.is_non_negative() && ordered(false) => Range::above(0, false),
            _ => Range::default(),
        }
    }
}

/// The same sign around zero.
fn sign_only(a: &Range) -> Range {
    if a.is_non_negative() {
        Range::above(0, a.is_positive())
    } else if a.is_non_positive() {
        Range::below(0, a.is_negative())
    } else {
        Range::default()
    }
}

/// The larger (or smaller) of two values.
fn extreme(x: &Range, y: &Range, larger: bool) -> Range {
    if !larger {
        return extreme(&x.negated(), &y.negated(), true).negated();
    }
    // At least each of them, at most the larger upper end.
    let lower_ends = Range { lower: x.lower.clone(), ..Range::default() }
        .meet(Range { lower: y.lower.clone(), ..Range::default() });
    Range { nonzero: x.nonzero && y.nonzero, ..x.clone().hull(y.clone()) }.meet(lower_ends)
}

/// `b^q` for a literal q that is no integer; it is defined for b >= 0 only.
fn fractional_power(b: &Range, q: &BigRational) -> Range {
    let base = b.clone().meet(Range::above(0, false));
    let sign = Range::above(0, base.is_positive() || q.is_negative());
    let (Some(m), Some(n)) = (q.numer().abs().to_u32(), q.denom().to_u32()) else { return sign };
    if m > 64 || n > 64 {
        return sign;
    }
    let root = base.natural_power(m).increasing(|x| root_bounds(x, n));
    if q.is_negative() { root.reciprocal().meet(sign) } else { root.meet(sign) }
}

/// Bounds of the n-th root of a number >= 0, exact if it is one.
fn root_bounds(q: &BigRational, n: u32) -> Option<(BigRational, BigRational)> {
    if q.is_negative() || q.numer().bits().max(q.denom().bits()) > 4096 {
        return None;
    }
    let exact = |i: &BigInt| {
        let root = i.nth_root(n);
        (num_traits::pow(root.clone(), n as usize) == *i).then_some(root)
    };
    if let (Some(a), Some(b)) = (exact(q.numer()), exact(q.denom())) {
        let root = BigRational::new(a, b);
        return Some((root.clone(), root));
    }
    // At least 80 bits of the root.
    let shift = 80 + q.denom().bits().saturating_sub(q.numer().bits()) / u64::from(n) + 1;
    let scale = BigInt::one() << shift;
    let scaled = q * BigRational::from_integer(num_traits::pow(scale.clone(), n as usize));
    let floor = scaled.floor().to_integer().nth_root(n);
    Some((BigRational::new(floor.clone(), scale.clone()), BigRational::new(floor + 1, scale)))
}

/// Bounds of a function's value at a number, by the kernel's own enclosures.
fn enclose(f: Function, q: &BigRational) -> Option<(BigRational, BigRational)> {
    let zero = BigRational::zero();
    match f {
        _ if q.is_zero() && matches!(f, Function::Exp) => {
            return Some((BigRational::one(), BigRational::one()));
        }
        Function::Log | Function::Log2 if q.is_one() => return Some((zero.clone(), zero)),
        Function::Log | Function::Log2 if !q.is_positive() => return None,
        Function::Exp | Function::Log | Function::Log2 => {}
        _ if q.is_zero() => return Some((zero.clone(), zero)),
        _ => {}
    }
    // What is far out is known well enough by its sign.
    if q.abs() > BigRational::from_integer(1_000_000.into()) && f == Function::Exp {
        return None;
    }
    let value = apply(f, &[Interval::from_rational(q, PRECISION)], PRECISION).ok()?;
    Some((value.lower()?.to_rational()?, value.upper()?.to_rational()?))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::kernel::read;
    use crate::kernel::sequent::Goal;

    fn context(declarations: &[&str], hypotheses: &[&str]) -> Sequent {
        Sequent {
            variables: declarations.iter().map(|d| read::declaration(d).unwrap()).collect(),
            hypotheses: hypotheses.iter().map(|h| read::relation(h).unwrap()).collect(),
            goal: Goal::Absurd,
        }
    }

    fn one(declaration: &str, term: &str) -> Sign {
        sign_of(&context(&[declaration, "z : real in (-inf, inf)"], &[]), &read::term(term).unwrap())
    }

    #[test]
    fn signs_by_shape() {
        for (d, t, sign) in [
            ("x : real in [0, inf)", "x + 1", Sign::Positive),
            ("x : real in [0, inf)", "x*exp(z)", Sign::NonNegative),
            ("x : real in (0, 1)", "1 - x", Sign::Positive),
            ("x : real in [0, 1]", "x*(1 - x)", Sign::NonNegative),
            ("x : real in (0, 1)", "log(x)", Sign::Negative),
            ("x : real in [1, inf)", "log(x)", Sign::NonNegative),
            ("x : real in (-inf, 0)", "x^3", Sign::Negative),
            ("x : real in (-inf, inf)", "x^2", Sign::NonNegative),
            ("x : real in (-inf, inf)", "x*x + 1/2", Sign::Positive),
            ("x : real in (0, inf)", "x^z", Sign::Positive),
            ("x : real in [1, inf)", "x^2 - 1", Sign::NonNegative),
            ("x : real in (1, inf)", "1 - 1/x", Sign::Positive),
            ("x : real in (-inf, inf)", "1 - tanh(z)", Sign::Positive),
            ("x : real in (-inf, inf)", "2 + sin(z)", Sign::Positive),
            ("x : real in (-inf, inf)", "exp(-z)", Sign::Positive),
            ("x : integer in (0, inf)", "x - 1", Sign::NonNegative),
            ("x : even in (-inf, inf)", "z^x", Sign::NonNegative),
            ("x : real in [0, 1]", "pi - 3 - x/10", Sign::Positive),
            ("x : real in [4, 9]", "sqrt(x) - 2", Sign::NonNegative),
            ("x : integer in [1, inf)", "sum(k = 1 .. x, 1/k)", Sign::Positive),
        ] {
            assert_eq!(one(d, t), sign, "{t} for {d}");
        }
    }

    #[test]
    fn arches_of_sine_and_cosine() {
        for (d, t, sign) in [
            ("x : real in (0, pi)", "sin(x)", Sign::Positive),
            ("x : real in [0, pi]", "sin(x)", Sign::NonNegative),
            ("x : real in (0, pi/2)", "cos(x)", Sign::Positive),
            ("x : real in [-pi/2, pi/2]", "cos(x)", Sign::NonNegative),
            ("x : real in (0, 1)", "sin(pi*x)", Sign::Positive),
            ("x : real in (pi, 2*pi)", "sin(x)", Sign::Negative),
            ("x : real in [0, 3/2]", "cos(x)", Sign::Positive),
            ("x : real in (-3, 0)", "sin(x)", Sign::Negative),
            ("x : real in [0, 3.2]", "sin(x)", Sign::Unknown),
            ("x : real in [0, 1.5709]", "cos(x)", Sign::Unknown),
            ("x : real in (-1, 1)", "sin(pi*x)", Sign::Unknown),
        ] {
            assert_eq!(one(d, t), sign, "{t} for {d}");
        }
    }

    #[test]
    fn what_shape_does_not_say() {
        for (d, t) in [
            // Weak plus weak is weak; a zero base has no positive power.
            ("x : real in (-inf, inf)", "x^2 - x"),
            ("x : real in (-inf, inf)", "x"),
            ("x : real in [0, 2]", "1 - x"),
            ("x : real in (-inf, inf)", "x*z"),
            ("x : integer in (-inf, inf)", "(-2)^x"),
            ("x : real in (-inf, inf)", "log(x)"),
            ("x : real in [0, inf)", "gamma(x - 1)"),
            ("x : real in [0, inf)", "1/(1 - x)"),
        ] {
            assert!(!one(d, t).is_non_negative() && !one(d, t).is_non_positive(), "{t} for {d}");
        }
        assert_eq!(one("x : real in [0, inf)", "x + x^2"), Sign::NonNegative);
        assert_eq!(one("x : real in [0, inf)", "x^(1/2)"), Sign::NonNegative);
        assert_eq!(one("x : integer in [0, 5]", "sum(k = 1 .. x, 1/k)"), Sign::NonNegative);
        assert_eq!(one("x : real in [1, 2]", "floor(x) - x"), Sign::Unknown);
    }

    #[test]
    fn hypotheses_help() {
        let s = context(
            &["x : real in (-inf, inf)", "y : real in [x, inf)", "z : real in (-inf, inf)"],
            &["0 < x", "z >= x*y", "z != 3", "x < 5"],
        );
        let settled = |t: &str| settles(&s, &read::relation(t).unwrap());
        for t in [
            "x > 0",
            "y >= x",
            "y > 0",
            "y - x >= 0",
            "z > 0",
            "z != 3",
            "5 - x > 0",
            "x*y <= z",
            "(x + 1)*y - x*y - y >= 0",
        ] {
            assert!(settled(t), "{t}");
        }
        for t in ["y > x", "z > x*y", "x >= 1", "z = x*y", "y != x", "x*y < 5"] {
            assert!(!settled(t), "{t}");
        }
    }

    #[test]
    fn an_index_is_not_the_variable_of_its_name() {
        let s = context(&["k : real in [5, 9]", "n : integer in [1, inf)"], &["k > 6"]);
        let t = read::term("sum(k = -3 .. n, k)").unwrap();
        assert_eq!(sign_of(&s, &t), Sign::Unknown);
    }
}

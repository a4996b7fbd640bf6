//! Terms compiled to a flat list of instructions, evaluated over boxes with first
//! and second derivatives by forward differentiation (Rall, Automatic
//! Differentiation, 1981).
//!
//! The forms are exactly those of the kernel, operation by operation, so that
//! what is seen here is what the kernel will see, up to rounding. Nothing is
//! believed for that: the kernel evaluates for itself.

use std::collections::BTreeMap;

use num_traits::ToPrimitive;

use crate::enclosure::{Definedness, Enclosure, End as Number, Function};

use super::integer::{Sorts, is_integer};
use super::term::{Constant, End, Name, Node, SeriesKind, Term};

/// Most instructions of one tape.
const MAX_OPERATIONS: usize = 20_000;
/// Most terms of one sum or product.
const MAX_SERIES: i64 = 20_000;
/// Most variables with second derivatives.
const MAX_BENT: usize = 15;

/// What is computed.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Order {
    /// Values.
    Value,
    /// Values and first derivatives.
    Slope,
    /// Second derivatives as well.
    Bend,
}

/// The place of the second derivative by variables `i` and `j`.
#[must_use]
pub fn pair(i: usize, j: usize) -> usize {
    let (low, high) = (i.min(j), i.max(j));
    high * (high + 1) / 2 + low
}

#[derive(Clone, Debug)]
enum Op<E> {
    Constant(Enclosure<E>),
    Variable(usize),
    Negate(usize),
    Add(usize, usize),
    Subtract(usize, usize),
    Multiply(usize, usize),
    Divide(usize, usize),
    PowerInteger(usize, i64),
    Power { base: usize, exponent: usize, integer: bool },
    Apply(Function, Vec<usize>),
    Series { kind: SeriesKind, lower: usize, upper: usize, body: Box<Tape<E>> },
}

/// Compiled terms.
#[derive(Clone, Debug)]
pub struct Tape<E> {
    ops: Vec<Op<E>>,
    roots: Vec<usize>,
    variables: usize,
    /// Which variables an instruction depends on, a bit each; no bits for indices of series.
    depends: Vec<u64>,
    /// Which second derivatives of it are not the constant 0.
    bent: Vec<u128>,
}

/// Room for the results of a run, reused from run to run.
#[derive(Clone, Debug)]
pub struct Jets<E> {
    value: Vec<Enclosure<E>>,
    slope: Vec<Enclosure<E>>,
    bend: Vec<Enclosure<E>>,
    inner: Vec<Jets<E>>,
    /// Where the values are defined.
    pub defined: Definedness,
    /// Whether the derivatives asked for exist and are continuous on the whole box.
    pub smooth: bool,
    /// Instructions carried out so far, over all runs.
    pub work: u64,
}

impl<E> Default for Jets<E> {
    fn default() -> Jets<E> {
        Jets {
            value: Vec::new(),
            slope: Vec::new(),
            bend: Vec::new(),
            inner: Vec::new(),
            defined: Definedness::Continuous,
            smooth: true,
            work: 0,
        }
    }
}

struct Compiler<'a, E: Number> {
    known: BTreeMap<Term, usize>,
    tape: Tape<E>,
    names: &'a [Name],
    sorts: &'a dyn Sorts,
    precision: E::Precision,
}

impl<E: Number> Compiler<'_, E> {
    fn push(&mut self, op: Op<E>) -> Option<usize> {
        if self.tape.ops.len() >= MAX_OPERATIONS {
            return None;
        }
        let (depends, bent) = self.tape.pattern(&op);
        self.tape.ops.push(op);
        self.tape.depends.push(depends);
        self.tape.bent.push(bent);
        Some(self.tape.ops.len() - 1)
    }

    fn compile(&mut self, term: &Term) -> Option<usize> {
        if let Some(&at) = self.known.get(term) {
            return Some(at);
        }
        let p = self.precision;
        let op = match term.node() {
            Node::Number(q) => Op::Constant(Enclosure::from_rational(q, p)),
            Node::Constant(c) => Op::Constant(match c {
                Constant::Pi => Enclosure::pi(p),
                Constant::E => Enclosure::e(p),
                Constant::Euler => Enclosure::euler(p),
            }),
            Node::Variable(name) => Op::Variable(self.names.iter().rposition(|n| n == name)?),
            Node::Negate(a) => Op::Negate(self.compile(a)?),
            Node::Add(a, b) => Op::Add(self.compile(a)?, self.compile(b)?),
            Node::Subtract(a, b) => Op::Subtract(self.compile(a)?, self.compile(b)?),
            Node::Multiply(a, b) => {
                let (a, b) = (self.compile(a)?, self.compile(b)?);
                if a == b { Op::PowerInteger(a, 2) } else { Op::Multiply(a, b) }
            }
            Node::Divide(a, b) => Op::Divide(self.compile(a)?, self.compile(b)?),
            Node::Power(a, b) => match (b.as_integer().and_then(ToPrimitive::to_i64), a.node()) {
                (Some(n), _) => Op::PowerInteger(self.compile(a)?, n),
                (None, Node::Constant(Constant::E)) => Op::Apply(Function::Exp, vec![self.compile(b)?]),
                _ => {
                    let integer = is_integer(b, self.sorts);
                    Op::Power { base: self.compile(a)?, exponent: self.compile(b)?, integer }
                }
            },
            Node::Apply(f, args) => {
                Op::Apply(*f, args.iter().map(|a| self.compile(a)).collect::<Option<_>>()?)
            }
            Node::Quantity(..) => return None,
            Node::Series { kind, index, lower, upper, body } => {
                let (End::Finite(lower), End::Finite(upper)) = (lower, upper) else { return None };
                if *kind == SeriesKind::Integral {
                    return None;
                }
                let (lower, upper) = (self.compile(lower)?, self.compile(upper)?);
                let inner: Vec<Name> = self.names.iter().chain([index]).cloned().collect();
                let body =
                    Tape::compile(std::slice::from_ref(body), &inner, self.tape.variables, self.sorts, p)?;
                Op::Series { kind: *kind, lower, upper, body: Box::new(body) }
            }
        };
        let at = self.push(op)?;
        self.known.insert(term.clone(), at);
        Some(at)
    }
}

impl<E: Number> Tape<E> {
    /// Compiles terms in these variables; nothing if a term has a quantity, an
    /// integral, an infinite series or too many parts.
    #[must_use]
    pub fn new(
        terms: &[Term],
        names: &[Name],
        sorts: &dyn Sorts,
        precision: E::Precision,
    ) -> Option<Tape<E>> {
        if names.len() > 64 {
            return None;
        }
        Tape::compile(terms, names, names.len(), sorts, precision)
    }

    /// The names from `count` on are indices of series.
    fn compile(
        terms: &[Term],
        names: &[Name],
        count: usize,
        sorts: &dyn Sorts,
        precision: E::Precision,
    ) -> Option<Tape<E>> {
        let tape = Tape { ops: vec![], roots: vec![], variables: count, depends: vec![], bent: vec![] };
        let mut c = Compiler { known: BTreeMap::new(), tape, names, sorts, precision };
        let roots = terms.iter().map(|t| c.compile(t)).collect::<Option<_>>()?;
        c.tape.roots = roots;
        Some(c.tape)
    }

    /// How many instructions a run takes, not counting repeated terms of series.
    #[must_use]
    pub fn length(&self) -> usize {
        self.ops.len()
    }

    /// Which variables a root depends on.
    #[must_use]
    pub fn dependence(&self, root: usize) -> u64 {
        self.depends[self.roots[root]]
    }

    /// Which first and second derivatives of an instruction can differ from 0.
    fn pattern(&self, op: &Op<E>) -> (u64, u128) {
        let n = self.variables;
        // All pairs of variables of the two sets.
        let pairs = |x: u64, y: u64| {
            let mut bits = 0u128;
            if n <= MAX_BENT {
                for i in (0..n).filter(|i| x >> i & 1 == 1) {
                    for j in (0..n).filter(|j| y >> j & 1 == 1) {
                        bits |= 1 << pair(i, j);
                    }
                }
            }
            bits
        };
        let (d, b) = (|a: &usize| self.depends[*a], |a: &usize| self.bent[*a]);
        match op {
            Op::Constant(_) => (0, 0),
            Op::Variable(i) => (if *i < n { 1 << i } else { 0 }, 0),
            Op::Negate(a) => (d(a), b(a)),
            Op::Add(x, y) | Op::Subtract(x, y) => (d(x) | d(y), b(x) | b(y)),
            Op::Multiply(x, y) => (d(x) | d(y), b(x) | b(y) | pairs(d(x), d(y))),
            Op::Divide(x, y) if d(y) == 0 => (d(x), b(x)),
            Op::PowerInteger(_, 0) => (0, 0),
            Op::PowerInteger(a, 1) => (d(a), b(a)),
            Op::PowerInteger(a, _) => (d(a), pairs(d(a), d(a))),
            Op::Divide(x, y) | Op::Power { base: x, exponent: y, .. } => {
                let all = d(x) | d(y);
                (all, pairs(all, all))
            }
            Op::Apply(_, args) => {
                let all = args.iter().fold(0, |m, a| m | d(a));
                (all, pairs(all, all))
            }
            Op::Series { body, .. } => {
                let all = body.dependence(0);
                (all, pairs(all, all))
            }
        }
    }

    /// Evaluates over a box, one range a variable, at the precision of the first range.
    pub fn run(&self, ranges: &[Enclosure<E>], order: Order, jets: &mut Jets<E>) {
        let precision = ranges.first().map_or_else(E::Precision::default, Enclosure::precision);
        self.run_with(ranges, precision, order, jets);
    }

    /// Evaluates at a given precision.
    pub fn run_with(&self, ranges: &[Enclosure<E>], p: E::Precision, order: Order, jets: &mut Jets<E>) {
        let n = self.variables;
        let order = if n > MAX_BENT { order.min(Order::Slope) } else { order };
        jets.defined = Definedness::Continuous;
        jets.smooth = true;
        let zero = || Enclosure::from_integer(0, p);
        jets.value.resize_with(self.ops.len(), zero);
        if order >= Order::Slope {
            jets.slope.resize_with(self.ops.len() * n, zero);
        }
        if order >= Order::Bend {
            jets.bend.resize_with(self.ops.len() * pair(0, n), zero);
        }
        for (at, op) in self.ops.iter().enumerate() {
            jets.work += 1;
            let mut m = Machine { tape: self, jets, at, order, p };
            m.operation(op, ranges);
        }
    }

    /// The value of a root.
    #[must_use]
    pub fn value<'j>(&self, root: usize, jets: &'j Jets<E>) -> &'j Enclosure<E> {
        &jets.value[self.roots[root]]
    }

    /// A first derivative of a root, unless it is the constant 0.
    #[must_use]
    pub fn slope<'j>(&self, root: usize, i: usize, jets: &'j Jets<E>) -> Option<&'j Enclosure<E>> {
        let at = self.roots[root];
        (self.depends[at] >> i & 1 == 1).then(|| &jets.slope[at * self.variables + i])
    }

    /// A second derivative of a root, unless it is the constant 0.
    #[must_use]
    pub fn bend<'j>(&self, root: usize, i: usize, j: usize, jets: &'j Jets<E>) -> Option<&'j Enclosure<E>> {
        let at = self.roots[root];
        (self.bent[at] >> pair(i, j) & 1 == 1).then(|| &jets.bend[at * pair(0, self.variables) + pair(i, j)])
    }
}

/// One instruction at work.
struct Machine<'a, E: Number> {
    tape: &'a Tape<E>,
    jets: &'a mut Jets<E>,
    at: usize,
    order: Order,
    p: E::Precision,
}

impl<E: Number> Machine<'_, E> {
    fn v(&self, a: usize) -> &Enclosure<E> {
        &self.jets.value[a]
    }

    fn d(&self, a: usize, i: usize) -> Option<&Enclosure<E>> {
        (self.tape.depends[a] >> i & 1 == 1).then(|| &self.jets.slope[a * self.tape.variables + i])
    }

    fn dd(&self, a: usize, i: usize, j: usize) -> Option<&Enclosure<E>> {
        let width = pair(0, self.tape.variables);
        (self.tape.bent[a] >> pair(i, j) & 1 == 1).then(|| &self.jets.bend[a * width + pair(i, j)])
    }

    /// Sets the value, and the derivatives that can differ from 0.
    fn set(
        &mut self,
        value: Enclosure<E>,
        slope: impl Fn(&Self, usize) -> Option<Enclosure<E>>,
        bend: impl Fn(&Self, usize, usize) -> Option<Enclosure<E>>,
    ) {
        let n = self.tape.variables;
        self.jets.value[self.at] = value;
        if self.order >= Order::Slope {
            for i in (0..n).filter(|i| self.tape.depends[self.at] >> i & 1 == 1) {
                let d = slope(self, i);
                let zero = || Enclosure::from_integer(0, self.p);
                self.jets.slope[self.at * n + i] = d.unwrap_or_else(zero);
            }
        }
        if self.order >= Order::Bend {
            for j in 0..n {
                for i in (0..=j).filter(|i| self.tape.bent[self.at] >> pair(*i, j) & 1 == 1) {
                    let d = bend(self, i, j);
                    let zero = || Enclosure::from_integer(0, self.p);
                    self.jets.bend[self.at * pair(0, n) + pair(i, j)] = d.unwrap_or_else(zero);
                }
            }
        }
    }

    fn operation(&mut self, op: &Op<E>, ranges: &[Enclosure<E>]) {
        match op {
            Op::Constant(c) => self.set(c.clone(), |_, _| None, |_, _, _| None),
            Op::Variable(i) => {
                let one = |m: &Self| Enclosure::from_integer(1, m.p);
                self.set(ranges[*i].clone(), |m, _| Some(one(m)), |_, _, _| None);
            }
            Op::Negate(a) => {
                let minus = |x: Option<&Enclosure<E>>| x.map(Enclosure::negated);
                self.set(self.v(*a).negated(), |m, i| minus(m.d(*a, i)), |m, i, j| minus(m.dd(*a, i, j)));
            }
            Op::Add(a, b) => {
                let (a, b) = (*a, *b);
                self.set(
                    self.v(a).plus(self.v(b)),
                    |m, i| plus(m.d(a, i), m.d(b, i)),
                    |m, i, j| plus(m.dd(a, i, j), m.dd(b, i, j)),
                );
            }
            Op::Subtract(a, b) => {
                let (a, b) = (*a, *b);
                self.set(
                    self.v(a).minus(self.v(b)),
                    |m, i| minus(m.d(a, i), m.d(b, i)),
                    |m, i, j| minus(m.dd(a, i, j), m.dd(b, i, j)),
                );
            }
            Op::Multiply(a, b) => {
                let (a, b) = (*a, *b);
                self.set(
                    self.v(a).times(self.v(b)),
                    |m, i| sum([times(m.d(a, i), Some(m.v(b))), times(Some(m.v(a)), m.d(b, i))]),
                    |m, i, j| {
                        sum([
                            times(m.dd(a, i, j), Some(m.v(b))),
                            times(m.d(a, i), m.d(b, j)),
                            times(m.d(a, j), m.d(b, i)),
                            times(Some(m.v(a)), m.dd(b, i, j)),
                        ])
                    },
                );
            }
            Op::Divide(a, b) => self.divide(*a, *b),
            Op::PowerInteger(a, n) => self.power_integer(*a, *n),
            Op::Power { base, exponent, integer } => self.power(*base, *exponent, *integer),
            Op::Apply(f, args) => self.apply(*f, args),
            Op::Series { kind, lower, upper, body } => self.series(*kind, *lower, *upper, body, ranges),
        }
    }

    fn divide(&mut self, a: usize, b: usize) {
        let mut here = Definedness::Continuous;
        let value = self.v(a).over(self.v(b), &mut here);
        self.jets.defined.lower_to(here);
        // Where the divisor may be 0 the derivatives are meaningless, and so recorded.
        self.jets.smooth &= here.is_everywhere();
        let over =
            |m: &Self, x: Option<Enclosure<E>>| x.map(|x| x.over(m.v(b), &mut { Definedness::Continuous }));
        let at = self.at;
        let q = value.clone();
        let less = |x: &Enclosure<E>, y: Option<&Enclosure<E>>| y.map(|y| x.times(y).negated());
        self.set(
            value,
            |m, i| over(m, sum([m.d(a, i).cloned(), less(&q, m.d(b, i))])),
            |m, i, j| {
                let mixed = |i, j| m.d(at, i).and_then(|x| less(x, m.d(b, j)));
                over(m, sum([m.dd(a, i, j).cloned(), mixed(i, j), mixed(j, i), less(&q, m.dd(b, i, j))]))
            },
        );
    }

    /// The composition of a function with the instruction `a`.
    fn chain(&mut self, a: usize, value: Enclosure<E>, first: &Enclosure<E>, second: Option<&Enclosure<E>>) {
        self.set(
            value,
            |m, i| m.d(a, i).map(|d| first.times(d)),
            |m, i, j| {
                let square = || {
                    let (x, y) = (m.d(a, i)?, m.d(a, j)?);
                    let product = if i == j { x.square() } else { x.times(y) };
                    Some(product.times(second?))
                };
                sum([square(), m.dd(a, i, j).map(|d| first.times(d))])
            },
        );
    }

    /// Only a value: the instruction is constant, or no derivative is wanted.
    fn flat(&mut self, value: Enclosure<E>) {
        self.set(value, |_, _| None, |_, _, _| None);
    }

    fn wants_slope(&self) -> bool {
        self.order >= Order::Slope && self.tape.depends[self.at] != 0
    }

    fn power_integer(&mut self, a: usize, n: i64) {
        let mut defined = self.jets.defined;
        let value = self.v(a).to_integer_power(n, &mut defined);
        self.jets.defined = defined;
        if !self.wants_slope() || n == 0 {
            return self.flat(value);
        }
        let mut smooth = Definedness::Continuous;
        let x = self.v(a).clone();
        let mut lower = |down: i64, factor: i64| {
            let factor = Enclosure::from_integer(factor, self.p);
            if n == down {
                factor
            } else {
                factor.times(&x.to_integer_power(n.saturating_sub(down), &mut smooth))
            }
        };
        let first = lower(1, n);
        let second =
            if self.order >= Order::Bend && n != 1 { Some(lower(2, n.saturating_mul(n - 1))) } else { None };
        self.jets.smooth &= smooth.is_everywhere();
        self.chain(a, value, &first, second.as_ref());
    }

    fn power(&mut self, a: usize, b: usize, integer: bool) {
        let y = self.v(b);
        let whole = if y.is_point() { y.lo().as_integer() } else { None };
        if let (0, Some(n)) = (self.tape.depends[b], whole) {
            return self.power_integer(a, n);
        }
        let mut defined = self.jets.defined;
        let raise = |x: &Enclosure<E>, y: &Enclosure<E>, defined: &mut Definedness| {
            if integer { x.to_power_at_integers(y, defined) } else { x.to_power(y, defined) }
        };
        let value = raise(self.v(a), self.v(b), &mut defined);
        self.jets.defined = defined;
        if !self.wants_slope() {
            return self.flat(value);
        }
        let mut smooth = Definedness::Continuous;
        let (x, y) = (self.v(a).clone(), self.v(b).clone());
        if self.tape.depends[b] == 0 {
            let one = Enclosure::from_integer(1, self.p);
            let below = y.minus(&one);
            let first = y.times(&raise(&x, &below, &mut smooth));
            let second = (self.order >= Order::Bend).then(|| {
                let lower = raise(&x, &below.minus(&one), &mut smooth);
                y.times(&below).times(&lower)
            });
            self.jets.smooth &= smooth.is_everywhere();
            return self.chain(a, value, &first, second.as_ref());
        }
        // a^b = exp(b log a) with derivatives of the exponent g = b log a.
        let one = Enclosure::from_integer(1, self.p);
        let log = Enclosure::apply(Function::Log, std::slice::from_ref(&x), &mut smooth);
        let inverse = one.over(&x, &mut smooth);
        let square = inverse.square().negated();
        self.jets.smooth &= smooth.is_everywhere();
        let log_d = |m: &Self, i| m.d(a, i).map(|d| inverse.times(d));
        let log_dd = |m: &Self, i, j| {
            let both = || {
                let (x, y) = (m.d(a, i)?, m.d(a, j)?);
                Some(if i == j { x.square() } else { x.times(y) }.times(&square))
            };
            sum([both(), m.dd(a, i, j).map(|d| inverse.times(d))])
        };
        let g = |m: &Self, i| sum([times(m.d(b, i), Some(&log)), times(Some(&y), log_d(m, i).as_ref())]);
        let gg = |m: &Self, i, j| {
            sum([
                times(m.dd(b, i, j), Some(&log)),
                times(m.d(b, i), log_d(m, j).as_ref()),
                times(m.d(b, j), log_d(m, i).as_ref()),
                times(Some(&y), log_dd(m, i, j).as_ref()),
            ])
        };
        let f = value.clone();
        self.set(
            value,
            |m, i| g(m, i).map(|d| f.times(&d)),
            |m, i, j| {
                let both = || {
                    let (x, y) = (g(m, i)?, g(m, j)?);
                    Some(if i == j { x.square() } else { x.times(&y) }.times(&f))
                };
                sum([both(), gg(m, i, j).map(|d| f.times(&d))])
            },
        );
    }

    fn apply(&mut self, f: Function, args: &[usize]) {
        let mut defined = self.jets.defined;
        let value = if let [a] = args {
            Enclosure::apply(f, std::slice::from_ref(self.v(*a)), &mut defined)
        } else {
            let values: Vec<Enclosure<E>> = args.iter().map(|a| self.v(*a).clone()).collect();
            Enclosure::apply(f, &values, &mut defined)
        };
        self.jets.defined = defined;
        if !self.wants_slope() {
            return self.flat(value);
        }
        if let [a] = args {
            return match self.derivatives(f, *a, &value) {
                Some((first, second)) => self.chain(*a, value, &first, second.as_ref()),
                None => {
                    self.jets.smooth = false;
                    self.flat(value);
                }
            };
        }
        let best = args.iter().copied().find(|&x| {
            args.iter().all(|&y| {
                x == y
                    || match f {
                        Function::Min => self.v(y).minus(self.v(x)),
                        _ => self.v(x).minus(self.v(y)),
                    }
                    .is_certainly_non_negative()
            })
        });
        match (f, best) {
            (Function::Min | Function::Max, Some(a)) => {
                self.set(value, |m, i| m.d(a, i).cloned(), |m, i, j| m.dd(a, i, j).cloned());
            }
            _ => {
                self.jets.smooth = false;
                self.flat(value);
            }
        }
    }

    /// First and, if wanted and known, second derivative of a function of one
    /// argument; the formulas are those of the kernel.
    fn derivatives(
        &mut self,
        f: Function,
        a: usize,
        v: &Enclosure<E>,
    ) -> Option<(Enclosure<E>, Option<Enclosure<E>>)> {
        use Function::{
            Abs, Acos, Acosh, Asin, Asinh, Atan, Atanh, Ceil, Cos, Cosh, Digamma, Erf, Erfc, Exp, Floor,
            Gamma, Lgamma, Log, Log2, Sin, Sinh, Sqrt, Tan, Tanh,
        };
        let p = self.p;
        let x = self.v(a).clone();
        let mut smooth = Definedness::Continuous;
        let int = |n: i64| Enclosure::from_integer(n, p);
        let square = x.square();
        let (plus_one, one_less) = (square.plus(&int(1)), int(1).minus(&square));
        let call = |g: Function, y: &Enclosure<E>, s: &mut Definedness| {
            Enclosure::apply(g, std::slice::from_ref(y), s)
        };
        let s = &mut smooth;
        let (first, second) = match f {
            Exp => (v.clone(), Some(v.clone())),
            Log => {
                let first = int(1).over(&x, s);
                let second = first.square().negated();
                (first, Some(second))
            }
            Log2 => {
                let scale = call(Log, &int(2), s);
                let first = int(1).over(&x, s).over(&scale, s);
                let second = first.over(&x, s).negated();
                (first, Some(second))
            }
            Sqrt => {
                let first = int(1).over(&v.times(&int(2)), s);
                let second = first.over(&x.times(&int(-2)), s);
                (first, Some(second))
            }
            Sin => (call(Cos, &x, s), Some(v.negated())),
            Cos => (call(Sin, &x, s).negated(), Some(v.negated())),
            Tan => {
                let first = v.square().plus(&int(1));
                let second = v.times(&int(2)).times(&first);
                (first, Some(second))
            }
            Asin | Acos => {
                let first = int(1).over(&call(Sqrt, &one_less, s), s);
                let second = x.times(&first).over(&one_less, s);
                if f == Asin { (first, Some(second)) } else { (first.negated(), Some(second.negated())) }
            }
            Atan => {
                let first = int(1).over(&plus_one, s);
                let second = x.times(&int(-2)).times(&first.square());
                (first, Some(second))
            }
            Sinh => (call(Cosh, &x, s), Some(v.clone())),
            Cosh => (call(Sinh, &x, s), Some(v.clone())),
            Tanh => {
                let first = int(1).minus(&v.square());
                let second = v.times(&int(-2)).times(&first);
                (first, Some(second))
            }
            Asinh => {
                let first = int(1).over(&call(Sqrt, &plus_one, s), s);
                let second = x.times(&first).over(&plus_one, s).negated();
                (first, Some(second))
            }
            Acosh => {
                let w = one_less.negated();
                let first = int(1).over(&call(Sqrt, &w, s), s);
                let second = x.times(&first).over(&w, s).negated();
                (first, Some(second))
            }
            Atanh => {
                let first = int(1).over(&one_less, s);
                let second = x.times(&int(2)).times(&first.square());
                (first, Some(second))
            }
            Gamma => (v.times(&call(Digamma, &x, s)), None),
            Lgamma => (call(Digamma, &x, s), None),
            Erf | Erfc => {
                let root = call(Sqrt, &Enclosure::pi(p), s);
                let bell = call(Exp, &square.negated(), s).times(&int(2)).over(&root, s);
                let first = if f == Erf { bell } else { bell.negated() };
                let second = x.times(&int(-2)).times(&first);
                (first, Some(second))
            }
            Abs if x.is_certainly_non_negative() => (int(1), Some(int(0))),
            Abs if x.is_certainly_non_positive() => (int(-1), Some(int(0))),
            Floor | Ceil if v.is_point() => (int(0), Some(int(0))),
            _ => return None,
        };
        let enough = smooth.is_everywhere() && (second.is_some() || self.order < Order::Bend);
        enough.then_some((first, second))
    }

    fn series(
        &mut self,
        kind: SeriesKind,
        lower: usize,
        upper: usize,
        body: &Tape<E>,
        ranges: &[Enclosure<E>],
    ) {
        let whole = |x: &Enclosure<E>| if x.is_point() { x.lo().as_integer() } else { None };
        let (Some(from), Some(to)) = (whole(self.v(lower)), whole(self.v(upper))) else {
            self.jets.defined.lower_to(Definedness::Partly);
            self.jets.smooth = false;
            return self.flat(Enclosure::whole(self.p));
        };
        if to.saturating_sub(from) >= MAX_SERIES {
            self.jets.defined.lower_to(Definedness::Partly);
            self.jets.smooth = false;
            return self.flat(Enclosure::whole(self.p));
        }
        let product = kind == SeriesKind::Product;
        let n = self.tape.variables;
        let mut total = Enclosure::from_integer(i64::from(product), self.p);
        let (mut slopes, mut bends) = (
            vec![None::<Enclosure<E>>; n],
            vec![None::<Enclosure<E>>; if n > MAX_BENT { 0 } else { pair(0, n) }],
        );
        let mut inner_ranges = ranges.to_vec();
        inner_ranges.push(total.clone());
        let mut jets = self.jets.inner.pop().unwrap_or_default();
        for k in from..=to {
            let last = inner_ranges.len() - 1;
            inner_ranges[last] = Enclosure::from_integer(k, self.p);
            body.run_with(&inner_ranges, self.p, self.order, &mut jets);
            self.jets.defined.lower_to(jets.defined);
            self.jets.smooth &= jets.smooth;
            let value = body.value(0, &jets);
            if self.order >= Order::Bend {
                for j in 0..n {
                    for i in 0..=j {
                        let d = body.bend(0, i, j, &jets);
                        let new = if product {
                            sum([
                                times(bends[pair(i, j)].as_ref(), Some(value)),
                                times(slopes[i].as_ref(), body.slope(0, j, &jets)),
                                times(slopes[j].as_ref(), body.slope(0, i, &jets)),
                                times(Some(&total), d),
                            ])
                        } else {
                            plus(bends[pair(i, j)].as_ref(), d)
                        };
                        bends[pair(i, j)] = new;
                    }
                }
            }
            if self.order >= Order::Slope {
                for (i, slope) in slopes.iter_mut().enumerate() {
                    let d = body.slope(0, i, &jets);
                    *slope = if product {
                        sum([times(slope.as_ref(), Some(value)), times(Some(&total), d)])
                    } else {
                        plus(slope.as_ref(), d)
                    };
                }
            }
            total = if product { total.times(value) } else { total.plus(value) };
        }
        self.jets.work += jets.work;
        jets.work = 0;
        self.jets.inner.push(jets);
        self.set(total, |_, i| slopes[i].clone(), |_, i, j| bends[pair(i, j)].clone());
    }
}

fn plus<E: Number>(x: Option<&Enclosure<E>>, y: Option<&Enclosure<E>>) -> Option<Enclosure<E>> {
    match (x, y) {
        (Some(x), Some(y)) => Some(x.plus(y)),
        (x, y) => x.or(y).cloned(),
    }
}

fn minus<E: Number>(x: Option<&Enclosure<E>>, y: Option<&Enclosure<E>>) -> Option<Enclosure<E>> {
    match (x, y) {
        (Some(x), Some(y)) => Some(x.minus(y)),
        (x, None) => x.cloned(),
        (None, Some(y)) => Some(y.negated()),
    }
}

fn times<E: Number>(x: Option<&Enclosure<E>>, y: Option<&Enclosure<E>>) -> Option<Enclosure<E>> {
    Some(x?.times(y?))
}

fn sum<E: Number, const N: usize>(parts: [Option<Enclosure<E>>; N]) -> Option<Enclosure<E>> {
    parts.into_iter().flatten().reduce(|x, y| x.plus(&y))
}

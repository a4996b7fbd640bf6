//! Enclosures of terms over boxes: values, first and second derivatives.
//!
//! A [`Program`] is a list of operations without repetitions, compiled once from
//! terms and run on many boxes. An operation whose arguments are not inside its
//! domain for the whole box is refused; nothing is clipped. Derivatives are
//! computed forward, operation by operation, by the rules of the calculus for
//! sums, products, quotients and compositions (Rall, Automatic Differentiation,
//! 1981), and are refused where an operation is not continuously differentiable
//! on its whole argument: at kinks of abs, min and max, at steps of floor and
//! ceil, at the root of 0.

use std::cell::Cell;
use std::collections::BTreeMap;

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, ToPrimitive};

use super::integer::{is_integer, with_index};
use super::number::{self, Function, Interval};
use super::sequent::Sequent;
use super::term::{Constant, Limit, Name, Node, SeriesKind, Term};
use super::verdict::{Checked, Reason, Reject, refuse};

/// Most operations of one program.
const MAX_OPERATIONS: usize = 20_000;
/// Most terms of sums and products that are evaluated in one run, nested ones included.
const MAX_SERIES: u64 = 100_000;

/// What has to be computed of a term.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Order {
    /// The value only.
    Value,
    /// The value and the first derivatives.
    Slope,
    /// Second derivatives as well.
    Bend,
}

/// An enclosure of a term and its derivatives over a box. A derivative that is
/// `None` is the constant 0; those not asked for are missing at the end.
#[derive(Clone, Debug)]
pub struct Jet {
    /// The value.
    pub value: Interval,
    /// The first derivatives, one a variable.
    pub slope: Vec<Option<Interval>>,
    /// The second derivatives, by [`pair`].
    pub bend: Vec<Option<Interval>>,
}

/// The place of the second derivative by variables `i` and `j`.
#[must_use]
pub fn pair(i: usize, j: usize) -> usize {
    let (low, high) = (i.min(j), i.max(j));
    high * (high + 1) / 2 + low
}

enum Op {
    Constant(Interval),
    Variable(usize),
    Negate(usize),
    Add(usize, usize),
    Subtract(usize, usize),
    Multiply(usize, usize),
    Divide(usize, usize),
    PowerInteger(usize, i64),
    Power(usize, usize),
    /// The flag says that the arguments are integers wherever the term matters.
    Apply(Function, Vec<usize>, bool),
    Series {
        kind: SeriesKind,
        lower: usize,
        upper: usize,
        body: Program,
    },
}

/// Terms compiled for evaluation at one precision.
pub struct Program {
    ops: Vec<Op>,
    roots: Vec<usize>,
    variables: usize,
    bits: u32,
    /// Operations on the terms of series in all runs so far.
    series_work: Cell<u64>,
}

/// A refusal of the arithmetic as one of the kernel.
pub(super) fn refused(refusal: number::Refusal) -> Reject {
    Reject::new(Reason::Condition, format!("no enclosure: {refusal}"))
}

/// An enclosure of a term without variables.
pub fn constant(term: &Term, bits: u32) -> Checked<Interval> {
    let program = Program::new(std::slice::from_ref(term), &[], bits)?;
    Ok(program.run(&[], Order::Value)?.swap_remove(0).value)
}

struct Compiler<'a> {
    /// Where the terms matter, if only there.
    context: Option<&'a Sequent>,
    known: BTreeMap<Term, usize>,
    ops: Vec<Op>,
    variables: &'a [Name],
    count: usize,
    bits: u32,
}

impl Compiler<'_> {
    fn push(&mut self, op: Op) -> Checked<usize> {
        if self.ops.len() >= MAX_OPERATIONS {
            return refuse(Reason::Limit, format!("more than {MAX_OPERATIONS} operations"));
        }
        self.ops.push(op);
        Ok(self.ops.len() - 1)
    }

    fn compile(&mut self, term: &Term) -> Checked<usize> {
        if let Some(&at) = self.known.get(term) {
            return Ok(at);
        }
        let op = match &**term {
            Node::Number(q) => Op::Constant(Interval::from_rational(q, self.bits)),
            Node::Constant(c) => Op::Constant(
                match c {
                    Constant::Pi => number::Constant::Pi,
                    Constant::E => number::Constant::E,
                    Constant::Euler => number::Constant::Euler,
                }
                .enclose(self.bits),
            ),
            Node::Variable(name) => match self.variables.iter().rposition(|v| v == name) {
                Some(i) => Op::Variable(i),
                None => return refuse(Reason::Name, format!("`{name}` has no range here")),
            },
            Node::Negate(a) => Op::Negate(self.compile(a)?),
            Node::Add(a, b) => Op::Add(self.compile(a)?, self.compile(b)?),
            Node::Subtract(a, b) => Op::Subtract(self.compile(a)?, self.compile(b)?),
            Node::Multiply(a, b) => {
                let (a, b) = (self.compile(a)?, self.compile(b)?);
                if a == b { Op::PowerInteger(a, 2) } else { Op::Multiply(a, b) }
            }
            Node::Divide(a, b) => Op::Divide(self.compile(a)?, self.compile(b)?),
            Node::Power(a, b) => match b.as_number().filter(|q| q.is_integer()).map(|q| q.numer().to_i64()) {
                Some(Some(n)) => Op::PowerInteger(self.compile(a)?, n),
                _ => match &**a {
                    Node::Constant(Constant::E) => Op::Apply(Function::Exp, vec![self.compile(b)?], false),
                    _ => Op::Power(self.compile(a)?, self.compile(b)?),
                },
            },
            Node::Apply(f, args) => {
                let integers = matches!(f, Function::Factorial | Function::Binomial)
                    && self.context.is_some_and(|s| args.iter().all(|a| is_integer(s, a)));
                Op::Apply(*f, args.iter().map(|a| self.compile(a)).collect::<Checked<_>>()?, integers)
            }
            Node::Quantity(name, _) => {
                return refuse(Reason::Condition, format!("`{name}` has no enclosure"));
            }
            Node::Series { kind, index, lower, upper, body } => {
                let (Limit::Finite(lower), Limit::Finite(upper)) = (lower, upper) else {
                    return refuse(Reason::Condition, "an infinite series has no enclosure here");
                };
                if *kind == SeriesKind::Integral {
                    return refuse(Reason::Condition, "an integral has no enclosure here");
                }
                let (lower, upper) = (self.compile(lower)?, self.compile(upper)?);
                let inner: Vec<Name> = self.variables.iter().chain([index]).cloned().collect();
                let context = self.context.map(|s| with_index(s, index));
                let body = std::slice::from_ref(body);
                let body = Program::compile(context.as_ref(), body, &inner, self.count, self.bits)?;
                Op::Series { kind: *kind, lower, upper, body }
            }
        };
        let at = self.push(op)?;
        self.known.insert(term.clone(), at);
        Ok(at)
    }
}

impl Program {
    /// Compiles terms in these variables; a later variable hides an earlier one of its name.
    pub fn new(terms: &[Term], variables: &[Name], bits: u32) -> Checked<Program> {
        Program::compile(None, terms, variables, variables.len(), bits)
    }

    /// The same for terms that are defined throughout a context and matter only there:
    /// factorials and binomials of what is an integer by its shape are enclosed over the
    /// integers of a box.
    pub fn within(s: &Sequent, terms: &[Term], bits: u32) -> Checked<Program> {
        let names: Vec<Name> = s.variables.iter().map(|d| d.name.clone()).collect();
        Program::compile(Some(s), terms, &names, names.len(), bits)
    }

    /// The names from `count` on are indices of series.
    fn compile(
        context: Option<&Sequent>,
        terms: &[Term],
        names: &[Name],
        count: usize,
        bits: u32,
    ) -> Checked<Program> {
        let mut c =
            Compiler { context, known: BTreeMap::new(), ops: Vec::new(), variables: names, count, bits };
        let roots = terms.iter().map(|t| c.compile(t)).collect::<Checked<_>>()?;
        Ok(Program { ops: c.ops, roots, variables: count, bits, series_work: Cell::new(0) })
    }

    /// How many operations one run takes.
    #[must_use]
    pub fn length(&self) -> usize {
        self.ops.len()
    }

    /// How many operations on terms of series all runs took, forgotten once asked for.
    #[must_use]
    pub fn take_series_work(&self) -> u64 {
        self.series_work.take()
    }

    /// Enclosures of the terms over a box, one range a variable.
    pub fn run(&self, ranges: &[Interval], order: Order) -> Checked<Vec<Jet>> {
        self.run_within(ranges, order, &Cell::new(MAX_SERIES))
    }

    /// The same; `terms` counts down the terms of series that may still be evaluated.
    fn run_within(&self, ranges: &[Interval], order: Order, terms: &Cell<u64>) -> Checked<Vec<Jet>> {
        let mut all: Vec<Jet> = Vec::with_capacity(self.ops.len());
        for op in &self.ops {
            let next = self.operation(op, &all, ranges, order, terms)?;
            all.push(next);
        }
        Ok(self.roots.iter().map(|&r| all[r].clone()).collect())
    }

    fn operation(
        &self,
        op: &Op,
        all: &[Jet],
        ranges: &[Interval],
        order: Order,
        terms: &Cell<u64>,
    ) -> Checked<Jet> {
        let p = self.bits;
        Ok(match op {
            Op::Constant(value) => self.flat(value.clone(), order),
            Op::Variable(i) => {
                let mut jet = self.flat(ranges[*i].clone(), order);
                // Indices of sums come after the variables and are constants in each term.
                if order >= Order::Slope && *i < self.variables {
                    jet.slope[*i] = Some(Interval::from(1));
                }
                jet
            }
            Op::Negate(a) => all[*a].map(Interval::neg),
            Op::Add(a, b) => all[*a].zip(&all[*b], |x, y| x.add(y, p), Interval::clone),
            Op::Subtract(a, b) => all[*a].zip(&all[*b], |x, y| x.sub(y, p), Interval::neg),
            Op::Multiply(a, b) => self.product(&all[*a], &all[*b]),
            Op::Divide(a, b) => self.quotient(&all[*a], &all[*b])?,
            Op::PowerInteger(a, n) => self.power_integer(&all[*a], *n)?,
            Op::Power(a, b) => self.power(&all[*a], &all[*b], order)?,
            Op::Apply(f, args, integers) => self.apply(*f, args, *integers, all, order)?,
            Op::Series { kind, lower, upper, body } => {
                let (Some(from), Some(to)) = (whole(&all[*lower].value), whole(&all[*upper].value)) else {
                    return refuse(
                        Reason::Condition,
                        "the limits of a sum are not single integers on the box",
                    );
                };
                let count = u64::try_from(to.saturating_sub(from).saturating_add(1)).unwrap_or(0);
                let Some(left) = terms.get().checked_sub(count) else {
                    return refuse(Reason::Limit, format!("sums of more than {MAX_SERIES} terms"));
                };
                terms.set(left);
                self.series_work.set(self.series_work.get().saturating_add(count * body.length() as u64));
                let mut inner = ranges.to_vec();
                let mut total = self.flat(Interval::from(i64::from(*kind == SeriesKind::Product)), order);
                for k in from..=to {
                    inner.truncate(ranges.len());
                    inner.push(Interval::from(k));
                    let next = body.run_within(&inner, order, terms)?.swap_remove(0);
                    total = match kind {
                        SeriesKind::Product => self.product(&total, &next),
                        _ => total.zip(&next, |x, y| x.add(y, p), Interval::clone),
                    };
                    let inside = body.take_series_work();
                    self.series_work.set(self.series_work.get().saturating_add(inside));
                }
                total
            }
        })
    }

    /// A value whose derivatives are all 0.
    fn flat(&self, value: Interval, order: Order) -> Jet {
        let n = self.variables;
        let slope = if order >= Order::Slope { vec![None; n] } else { Vec::new() };
        let bend = if order >= Order::Bend { vec![None; pair(0, n)] } else { Vec::new() };
        Jet { value, slope, bend }
    }

    /// `(ab)' = a'b + ab'` and `(ab)'' = a''b + a'b' + b'a' + ab''`.
    fn product(&self, a: &Jet, b: &Jet) -> Jet {
        let mul = |x: Option<&Interval>, y: Option<&Interval>| Some(x?.mul(y?, self.bits));
        let slope = (0..a.slope.len())
            .map(|i| self.sum([mul(a.d(i), Some(&b.value)), mul(Some(&a.value), b.d(i))]))
            .collect();
        let bend = self.second(a.bend.len(), |i, j| {
            self.sum([
                mul(a.dd(i, j), Some(&b.value)),
                mul(a.d(i), b.d(j)),
                mul(a.d(j), b.d(i)),
                mul(Some(&a.value), b.dd(i, j)),
            ])
        });
        Jet { value: a.value.mul(&b.value, self.bits), slope, bend }
    }

    /// With `q = a/b`: `q' = (a' - q b')/b`, `q'' = (a'' - q'b' - b'q' - q b'')/b`.
    fn quotient(&self, a: &Jet, b: &Jet) -> Checked<Jet> {
        let p = self.bits;
        let value = a.value.div(&b.value, p).map_err(refused)?;
        let less = |x: &Interval, y: Option<&Interval>| Some(x.mul(y?, p).neg());
        // The divisor was just found to be free of 0.
        let over = |x: Option<Interval>| x.and_then(|x| x.div(&b.value, p).ok());
        let slope: Vec<Option<Interval>> =
            (0..a.slope.len()).map(|i| over(self.sum([a.d(i).cloned(), less(&value, b.d(i))]))).collect();
        let bend = self.second(a.bend.len(), |i, j| {
            let mixed = |i: usize, j: usize| less(slope[i].as_ref()?, b.d(j));
            over(self.sum([a.dd(i, j).cloned(), mixed(i, j), mixed(j, i), less(&value, b.dd(i, j))]))
        });
        Ok(Jet { value, slope, bend })
    }

    /// The composition of a function with value, first and second derivative as given.
    fn chain(&self, a: &Jet, value: Interval, first: &Interval, second: Option<&Interval>) -> Jet {
        let p = self.bits;
        let slope = a.slope.iter().map(|s| Some(first.mul(s.as_ref()?, p))).collect();
        let bend = self.second(a.bend.len(), |i, j| {
            let square = || {
                let (x, y) = (a.d(i)?, a.d(j)?);
                let product = if i == j { x.powi(2, p).ok()? } else { x.mul(y, p) };
                Some(product.mul(second?, p))
            };
            self.sum([square(), a.dd(i, j).map(|d| first.mul(d, p))])
        });
        Jet { value, slope, bend }
    }

    fn power_integer(&self, a: &Jet, n: i64) -> Checked<Jet> {
        let p = self.bits;
        let value = a.value.powi(n, p).map_err(refused)?;
        if a.is_flat() || n == 0 {
            return Ok(Jet { value, slope: vec![None; a.slope.len()], bend: vec![None; a.bend.len()] });
        }
        let lower = |down: i64, factor: BigInt| -> Checked<Interval> {
            let factor = Interval::from_rational(&BigRational::from_integer(factor), p);
            // The constant 1 needs no power, which could be 0^0.
            if n == down {
                Ok(factor)
            } else {
                Ok(factor.mul(&a.value.powi(n - down, p).map_err(refused)?, p))
            }
        };
        let first = lower(1, n.into())?;
        let wanted = !a.bend.is_empty() && n != 1;
        let second = if wanted { Some(lower(2, BigInt::from(n) * (n - 1))?) } else { None };
        Ok(self.chain(a, value, &first, second.as_ref()))
    }

    fn power(&self, a: &Jet, b: &Jet, order: Order) -> Checked<Jet> {
        let p = self.bits;
        if b.is_flat()
            && let Some(n) = whole(&b.value)
        {
            return self.power_integer(a, n);
        }
        let value = number::pow(&a.value, &b.value, p).map_err(refused)?;
        if a.is_flat() && b.is_flat() {
            return Ok(self.flat(value, order));
        }
        if b.is_flat() {
            // c a^(c-1) and c (c-1) a^(c-2)
            let one = Interval::from(1);
            let below = b.value.sub(&one, p);
            let first = b.value.mul(&number::pow(&a.value, &below, p).map_err(refused)?, p);
            let second = if a.bend.is_empty() {
                None
            } else {
                let lower = number::pow(&a.value, &below.sub(&one, p), p).map_err(refused)?;
                Some(b.value.mul(&below, p).mul(&lower, p))
            };
            return Ok(self.chain(a, value, &first, second.as_ref()));
        }
        // a^b = exp(b log a) for a > 0, which is demanded by the logarithm.
        let exponent = self.product(b, &self.function(Function::Log, a)?);
        let same = value.clone();
        Ok(self.chain(&exponent, value, &same, Some(&same)))
    }

    fn apply(&self, f: Function, args: &[usize], integers: bool, all: &[Jet], order: Order) -> Checked<Jet> {
        let jets: Vec<&Jet> = args.iter().map(|&a| &all[a]).collect();
        if let [a] = jets.as_slice()
            && order >= Order::Slope
            && !a.is_flat()
        {
            return self.function(f, a);
        }
        let values: Vec<Interval> = jets.iter().map(|j| j.value.clone()).collect();
        let value = match (f, values.as_slice()) {
            (Function::Factorial, [n]) if integers => number::factorial_over_integers(n, self.bits),
            (Function::Binomial, [n, k]) if integers => number::binomial_over_integers(n, k, self.bits),
            _ => number::apply(f, &values, self.bits),
        }
        .map_err(refused)?;
        if jets.iter().all(|j| j.is_flat()) {
            return Ok(self.flat(value, order));
        }
        // Where one argument of min or max is the extreme one on the whole box, it is the function.
        let best = jets.iter().find(|x| {
            jets.iter().all(|y| {
                let gap = if f == Function::Min { &y.value } else { &x.value }
                    .sub(if f == Function::Min { &x.value } else { &y.value }, self.bits);
                std::ptr::eq(**x, *y) || gap.is_certainly_nonnegative()
            })
        });
        match (f, best) {
            (Function::Min | Function::Max, Some(best)) => Ok((*best).clone()),
            _ => refuse(Reason::Condition, format!("`{}` has no derivative on the whole box", f.name())),
        }
    }

    /// Value and derivatives of a function of one argument (NIST DLMF 4.7, 4.20,
    /// 4.24, 4.34, 4.38, 5.2, 7.2).
    fn function(&self, f: Function, a: &Jet) -> Checked<Jet> {
        use Function::{
            Abs, Acos, Acosh, Asin, Asinh, Atan, Atanh, Ceil, Cos, Cosh, Digamma, Erf, Erfc, Exp, Floor,
            Gamma, Lgamma, Log, Log2, Sin, Sinh, Sqrt, Tan, Tanh,
        };
        let p = self.bits;
        let x = &a.value;
        let call = |g: Function, y: &Interval| number::apply(g, std::slice::from_ref(y), p).map_err(refused);
        let div = |y: &Interval, z: &Interval| y.div(z, p).map_err(refused);
        let int = |n: i64| Interval::from(n);
        let v = call(f, x)?;
        let square = x.powi(2, p).map_err(refused)?;
        let plus_one = square.add(&int(1), p);
        let one_less = int(1).sub(&square, p);
        // Value r of 1/sqrt(w), with r' = -w'/2 r/w.
        let inverse_root = |w: &Interval| div(&int(1), &w.sqrt(p).map_err(refused)?);
        let (first, second) = match f {
            Exp => (v.clone(), Some(v.clone())),
            Log => {
                let first = div(&int(1), x)?;
                let second = first.powi(2, p).map_err(refused)?.neg();
                (first, Some(second))
            }
            Log2 => {
                let scale = call(Log, &int(2))?;
                let first = div(&div(&int(1), x)?, &scale)?;
                let second = div(&first, x)?.neg();
                (first, Some(second))
            }
            Sqrt => {
                let first = div(&int(1), &v.mul(&int(2), p))?;
                let second = div(&first, &x.mul(&int(-2), p))?;
                (first, Some(second))
            }
            Sin => (call(Cos, x)?, Some(v.neg())),
            Cos => (call(Sin, x)?.neg(), Some(v.neg())),
            Tan => {
                let first = v.powi(2, p).map_err(refused)?.add(&int(1), p);
                let second = v.mul(&int(2), p).mul(&first, p);
                (first, Some(second))
            }
            Asin | Acos => {
                let first = inverse_root(&one_less)?;
                let second = div(&x.mul(&first, p), &one_less)?;
                if f == Asin { (first, Some(second)) } else { (first.neg(), Some(second.neg())) }
            }
            Atan => {
                let first = div(&int(1), &plus_one)?;
                let second = x.mul(&int(-2), p).mul(&first.powi(2, p).map_err(refused)?, p);
                (first, Some(second))
            }
            Sinh => (call(Cosh, x)?, Some(v.clone())),
            Cosh => (call(Sinh, x)?, Some(v.clone())),
            Tanh => {
                let first = int(1).sub(&v.powi(2, p).map_err(refused)?, p);
                let second = v.mul(&int(-2), p).mul(&first, p);
                (first, Some(second))
            }
            Asinh => {
                let first = inverse_root(&plus_one)?;
                let second = div(&x.mul(&first, p), &plus_one)?.neg();
                (first, Some(second))
            }
            Acosh => {
                let w = one_less.neg();
                let first = inverse_root(&w)?;
                let second = div(&x.mul(&first, p), &w)?.neg();
                (first, Some(second))
            }
            Atanh => {
                let first = div(&int(1), &one_less)?;
                let second = x.mul(&int(2), p).mul(&first.powi(2, p).map_err(refused)?, p);
                (first, Some(second))
            }
            Gamma => (v.mul(&call(Digamma, x)?, p), None),
            Lgamma => (call(Digamma, x)?, None),
            Erf | Erfc => {
                let root = number::Constant::Pi.enclose(p).sqrt(p).map_err(refused)?;
                let bell = div(&call(Exp, &square.neg())?.mul(&int(2), p), &root)?;
                let first = if f == Erf { bell } else { bell.neg() };
                let second = x.mul(&int(-2), p).mul(&first, p);
                (first, Some(second))
            }
            Abs if x.is_certainly_nonnegative() => (int(1), Some(int(0))),
            Abs if x.is_certainly_nonpositive() => (int(-1), Some(int(0))),
            // Constant on the box, and nowhere a step inside or at its ends but from the flat side.
            Floor | Ceil if v.as_point().is_some() => (int(0), Some(int(0))),
            _ => {
                return refuse(
                    Reason::Condition,
                    format!("`{}` has no derivative on the whole box", f.name()),
                );
            }
        };
        if second.is_none() && !a.bend.is_empty() {
            return refuse(Reason::Condition, format!("no second derivative of `{}`", f.name()));
        }
        Ok(self.chain(a, v, &first, second.as_ref()))
    }

    fn sum<const N: usize>(&self, parts: [Option<Interval>; N]) -> Option<Interval> {
        parts.into_iter().flatten().reduce(|x, y| x.add(&y, self.bits))
    }

    /// All second derivatives, if they are wanted.
    fn second(&self, length: usize, f: impl Fn(usize, usize) -> Option<Interval>) -> Vec<Option<Interval>> {
        if length == 0 {
            return Vec::new();
        }
        (0..self.variables).flat_map(|j| (0..=j).map(move |i| (i, j))).map(|(i, j)| f(i, j)).collect()
    }
}

impl Jet {
    /// The first derivative by a variable, if it is not the constant 0.
    pub fn d(&self, i: usize) -> Option<&Interval> {
        self.slope[i].as_ref()
    }

    /// A second derivative, if it is not the constant 0.
    pub fn dd(&self, i: usize, j: usize) -> Option<&Interval> {
        self.bend[pair(i, j)].as_ref()
    }

    fn is_flat(&self) -> bool {
        self.slope.iter().all(Option::is_none)
    }

    fn map(&self, f: impl Fn(&Interval) -> Interval) -> Jet {
        let each = |parts: &[Option<Interval>]| parts.iter().map(|x| x.as_ref().map(&f)).collect();
        Jet { value: f(&self.value), slope: each(&self.slope), bend: each(&self.bend) }
    }

    /// `both` where both parts are there, `right` where only the second is.
    fn zip(
        &self,
        other: &Jet,
        both: impl Fn(&Interval, &Interval) -> Interval,
        right: impl Fn(&Interval) -> Interval,
    ) -> Jet {
        let part = |x: &Option<Interval>, y: &Option<Interval>| match (x, y) {
            (Some(x), Some(y)) => Some(both(x, y)),
            (Some(x), None) => Some(x.clone()),
            (None, Some(y)) => Some(right(y)),
            (None, None) => None,
        };
        let each = |x: &[Option<Interval>], y: &[Option<Interval>]| {
            x.iter().zip(y).map(|(x, y)| part(x, y)).collect()
        };
        Jet {
            value: both(&self.value, &other.value),
            slope: each(&self.slope, &other.slope),
            bend: each(&self.bend, &other.bend),
        }
    }
}

/// The integer an interval consists of.
fn whole(x: &Interval) -> Option<i64> {
    let point = x.as_point()?;
    let q = point.to_rational()?;
    if q.denom().is_one() { q.numer().to_i64() } else { None }
}

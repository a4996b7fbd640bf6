//! The values of a term on a box, in any set-valued arithmetic.
//!
//! Every operation is carried out on enclosures, so the result contains each
//! value the term takes on the box; one record of definedness is kept for the
//! whole term. Closed rational parts are computed exactly first.

use std::fmt;

use num_rational::BigRational;
use num_traits::{One, Zero};

use crate::enclosure::{Definedness, Enclose, Function};

use super::integer::{Sort, Sorts, is_integer};
use super::term::{Constant, End, Name, Node, SeriesKind, Term};

/// Most terms of a sum or product that are added up one by one.
pub const MAX_TERMS: u64 = 100_000;

/// Why a term has no enclosure.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum NoValue {
    /// It depends on a quantity, which is known by facts only.
    Quantity(Name),
    /// It depends on a variable without a range.
    Variable(Name),
    /// It has a series with infinite or too distant limits, or an integral.
    Series(SeriesKind),
}

impl fmt::Display for NoValue {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            NoValue::Quantity(name) => write!(out, "it depends on the quantity `{name}`"),
            NoValue::Variable(name) => write!(out, "it depends on `{name}`, which has no range here"),
            NoValue::Series(kind) => write!(
                out,
                "a {} is evaluated only between literal integers at most {MAX_TERMS} apart",
                kind.name()
            ),
        }
    }
}

impl std::error::Error for NoValue {}

/// A box: the range of every variable, and which of them take integer values only.
#[derive(Clone, Debug)]
pub struct Ranges<S> {
    variables: Vec<(Name, S, Sort)>,
}

impl<S> Default for Ranges<S> {
    fn default() -> Self {
        Ranges { variables: Vec::new() }
    }
}

impl<S> Ranges<S> {
    /// Adds a variable; it hides an earlier one of the same name.
    pub fn push(&mut self, name: Name, range: S, sort: Sort) {
        self.variables.push((name, range, sort));
    }

    fn find(&self, name: &Name) -> Option<&(Name, S, Sort)> {
        self.variables.iter().rev().find(|(known, ..)| known == name)
    }
}

impl<S> Sorts for Ranges<S> {
    fn of_variable(&self, name: &Name) -> Sort {
        self.find(name).map_or(Sort::Real, |(_, _, sort)| *sort)
    }

    // Only a literal end would count, and ranges are enclosures.
    fn is_non_negative(&self, _: &Name) -> bool {
        false
    }
}

/// A set that contains every value of `term` on the box `ranges`; `defined` is
/// lowered to what is known of its definedness there.
///
/// # Errors
/// If the term has no value that can be enclosed, see [`NoValue`].
pub fn enclose<S: Enclose>(
    term: &Term,
    ranges: &Ranges<S>,
    precision: S::Precision,
    defined: &mut Definedness,
) -> Result<S, NoValue> {
    let mut walk = Walk { ranges, precision, defined };
    let value = walk.value(term)?;
    Ok(walk.set(value))
}

/// A value on the way: exact as long as all of it is rational and short.
enum Value<S> {
    Exact(BigRational),
    Set(S),
}

/// Longest exact intermediate value, in bits.
const MAX_BITS: u64 = 4096;

struct Walk<'a, S: Enclose> {
    ranges: &'a Ranges<S>,
    precision: S::Precision,
    defined: &'a mut Definedness,
}

impl<S: Enclose> Walk<'_, S> {
    fn set(&self, value: Value<S>) -> S {
        match value {
            Value::Exact(value) => S::rational(&value, self.precision),
            Value::Set(set) => set,
        }
    }

    fn exact(&self, value: BigRational) -> Value<S> {
        if value.numer().bits().max(value.denom().bits()) <= MAX_BITS {
            Value::Exact(value)
        } else {
            Value::Set(S::rational(&value, self.precision))
        }
    }

    fn value(&mut self, term: &Term) -> Result<Value<S>, NoValue> {
        Ok(match term.node() {
            Node::Number(value) => Value::Exact(value.clone()),
            Node::Constant(Constant::Pi) => Value::Set(S::pi(self.precision)),
            Node::Constant(Constant::E) => Value::Set(S::e(self.precision)),
            Node::Constant(Constant::Euler) => Value::Set(S::euler(self.precision)),
            Node::Variable(name) => match self.ranges.find(name) {
                Some((_, range, _)) => Value::Set(range.clone()),
                None => return Err(NoValue::Variable(name.clone())),
            },
            Node::Negate(a) => match self.value(a)? {
                Value::Exact(a) => Value::Exact(-a),
                Value::Set(a) => Value::Set(a.neg()),
            },
            Node::Add(a, b) => self.both(a, b, |a, b| a + b, S::add)?,
            Node::Subtract(a, b) => self.both(a, b, |a, b| a - b, S::sub)?,
            Node::Multiply(a, b) => self.both(a, b, |a, b| a * b, S::mul)?,
            Node::Divide(a, b) => self.quotient(a, b)?,
            Node::Power(base, exponent) => self.power(base, exponent)?,
            Node::Apply(function, arguments) => Value::Set(self.call(*function, arguments)?),
            Node::Quantity(name, _) => return Err(NoValue::Quantity(name.clone())),
            Node::Series { kind, index, lower, upper, body } => {
                let (from, to) = limits(*kind, lower, upper)?;
                let is_sum = *kind == SeriesKind::Sum;
                let start = if is_sum { BigRational::zero() } else { BigRational::one() };
                let mut total = S::rational(&start, self.precision);
                for k in from..=to {
                    let value = self.value(&body.with(index, &Term::integer(k)))?;
                    let value = self.set(value);
                    total = if is_sum { total.add(&value) } else { total.mul(&value) };
                }
                Value::Set(total)
            }
        })
    }

    fn both(
        &mut self,
        a: &Term,
        b: &Term,
        exact: impl Fn(BigRational, BigRational) -> BigRational,
        set: impl Fn(&S, &S) -> S,
    ) -> Result<Value<S>, NoValue> {
        Ok(match (self.value(a)?, self.value(b)?) {
            (Value::Exact(a), Value::Exact(b)) => self.exact(exact(a, b)),
            (a, b) => Value::Set(set(&self.set(a), &self.set(b))),
        })
    }

    fn quotient(&mut self, a: &Term, b: &Term) -> Result<Value<S>, NoValue> {
        Ok(match (self.value(a)?, self.value(b)?) {
            (Value::Exact(a), Value::Exact(b)) if !b.is_zero() => self.exact(a / b),
            (a, b) => {
                let (a, b) = (self.set(a), self.set(b));
                Value::Set(a.div(&b, self.defined))
            }
        })
    }

    fn power(&mut self, base: &Term, exponent: &Term) -> Result<Value<S>, NoValue> {
        let known_integer = is_integer(exponent, self.ranges);
        let base = self.value(base)?;
        let power = self.value(exponent)?;
        if let Value::Exact(n) = &power
            && n.is_integer()
            && let Ok(n) = i64::try_from(n.numer())
        {
            if let Value::Exact(base) = &base
                && (!base.is_zero() || n > 0)
                && base.numer().bits().max(base.denom().bits()).saturating_mul(n.unsigned_abs()) <= MAX_BITS
                && let Ok(n) = i32::try_from(n)
            {
                return Ok(Value::Exact(base.pow(n)));
            }
            return Ok(Value::Set(self.set(base).powi(n, self.defined)));
        }
        let (base, power) = (self.set(base), self.set(power));
        Ok(Value::Set(if known_integer {
            base.pow_at_integers(&power, self.defined)
        } else {
            base.pow(&power, self.defined)
        }))
    }

    fn call(&mut self, function: Function, arguments: &[Term]) -> Result<S, NoValue> {
        let mut values = Vec::with_capacity(arguments.len());
        for (place, argument) in arguments.iter().enumerate() {
            let value = self.value(argument)?;
            let counts = match function {
                Function::Factorial | Function::Binomial => true,
                Function::Chebyshev => place == 0,
                _ => false,
            };
            let integer = match &value {
                Value::Exact(value) => value.is_integer(),
                Value::Set(_) => is_integer(argument, self.ranges),
            };
            // The arithmetic takes such arguments to be integers; here that may be
            // unknown, or known to be wrong.
            if counts && !integer {
                let wrong = matches!(value, Value::Exact(_));
                self.defined.lower_to(if wrong { Definedness::Nowhere } else { Definedness::Partly });
            }
            values.push(self.set(value));
        }
        Ok(S::apply(function, &values, self.defined))
    }
}

fn limits(kind: SeriesKind, lower: &End, upper: &End) -> Result<(i64, i64), NoValue> {
    let refuse = || NoValue::Series(kind);
    let whole = |end: &End| {
        let value = end.finite()?.rational_value().filter(BigRational::is_integer)?;
        i64::try_from(value.numer()).ok()
    };
    if kind == SeriesKind::Integral {
        return Err(refuse());
    }
    let (from, to) = (whole(lower).ok_or_else(refuse)?, whole(upper).ok_or_else(refuse)?);
    if to >= from && to.abs_diff(from) >= MAX_TERMS {
        return Err(refuse());
    }
    Ok((from, to))
}

#[cfg(all(test, feature = "mpfr"))]
mod tests {
    use super::super::sample::term;
    use super::*;
    use crate::enclosure::{BigInterval, Bits};

    fn at(text: &str, x: &str) -> (String, Definedness) {
        let bits = Bits::new(160);
        let mut ranges = Ranges::default();
        ranges.push("x".into(), BigInterval::from_decimal(x, bits).unwrap(), Sort::Real);
        let mut defined = Definedness::Continuous;
        let value = enclose(&term(text), &ranges, bits, &mut defined).unwrap();
        (value.to_decimals(12).map_or("empty".into(), |(lo, hi)| format!("{lo} {hi}")), defined)
    }

    #[test]
    fn values_at_points() {
        assert_eq!(at("x^2 - 2*x + 1/3", "3").0, "3.33333333333 3.33333333334");
        assert_eq!(at("exp(x)", "0").0, "1 1");
        assert_eq!(at("sum(k = 1 .. 4, 1/k)", "0").0, "2.08333333333 2.08333333334");
        assert_eq!(at("product(k = 1 .. 5, k) + sum(k = 3 .. 2, x)", "0").0, "120 120");
        assert_eq!(
            at("factorial(20)", "0"),
            ("2.43290200817e18 2.43290200818e18".into(), Definedness::Continuous)
        );
    }

    #[test]
    fn definedness_is_never_taken_for_granted() {
        assert_eq!(at("log(x)", "-1").1, Definedness::Nowhere);
        assert_eq!(at("1/x", "0").1, Definedness::Nowhere);
        assert_eq!(at("sum(k = 0 .. 1, 1/k)", "0").1, Definedness::Nowhere);
        // Real variables are not integers by their shape, so nothing is promised.
        assert_eq!(at("factorial(x)", "3").1, Definedness::Partly);
    }

    #[test]
    fn what_cannot_be_evaluated_says_why() {
        let mut defined = Definedness::Continuous;
        let mut evaluate_bare = |text: &str| {
            enclose::<BigInterval>(&term(text), &Ranges::default(), Bits::new(100), &mut defined).unwrap_err()
        };
        assert_eq!(evaluate_bare("q(1)"), NoValue::Quantity("q".into()));
        assert_eq!(evaluate_bare("y + 1"), NoValue::Variable("y".into()));
        assert_eq!(evaluate_bare("sum(k = 1 .. inf, 1/k^2)"), NoValue::Series(SeriesKind::Sum));
        assert_eq!(evaluate_bare("sum(k = 1 .. 10^9, k)"), NoValue::Series(SeriesKind::Sum));
    }
}

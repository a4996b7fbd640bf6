//! A shorter term with the same value wherever the given one is defined.
//!
//! Numbers are folded, like summands and like factors are collected, neutral
//! elements dropped. The result may be defined on a larger set (`x/x` becomes 1),
//! so it serves to guess and to print, and never to show that something is defined.

use std::collections::BTreeMap;

use num_integer::Integer;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use crate::enclosure::Function;

use super::term::{Constant, Node, Term};

/// The simplified term.
#[must_use]
pub fn simplify(term: &Term) -> Term {
    let inner = term.map_children(&mut simplify);
    match inner.node() {
        Node::Negate(_) | Node::Add(..) | Node::Subtract(..) => Sum::of(&inner).term(),
        Node::Multiply(..) | Node::Divide(..) | Node::Power(..) => Product::of(&inner).term(),
        Node::Apply(function, args) => call(*function, args).unwrap_or(inner),
        _ => inner,
    }
}

/// A linear combination: power products with their coefficients.
#[derive(Default)]
struct Sum {
    constant: BigRational,
    parts: BTreeMap<Term, BigRational>,
    order: Vec<Term>,
}

impl Sum {
    fn of(term: &Term) -> Sum {
        let mut sum = Sum::default();
        sum.gather(term, &BigRational::one());
        sum
    }

    fn gather(&mut self, term: &Term, factor: &BigRational) {
        match term.node() {
            Node::Negate(a) => self.gather(a, &-factor),
            Node::Add(a, b) => {
                self.gather(a, factor);
                self.gather(b, factor);
            }
            Node::Subtract(a, b) => {
                self.gather(a, factor);
                self.gather(b, &-factor);
            }
            Node::Number(a) => self.constant += a * factor,
            _ => {
                let mut product = Product::of(term);
                let coefficient = std::mem::replace(&mut product.coefficient, BigRational::one()) * factor;
                let key = product.term();
                if let Some(known) = self.parts.get_mut(&key) {
                    *known += coefficient;
                } else {
                    self.order.push(key.clone());
                    self.parts.insert(key, coefficient);
                }
            }
        }
    }

    /// Summands in the order in which they were met, a positive one first if there is one.
    fn term(&self) -> Term {
        let mut summands: Vec<(BigRational, Term)> = self
            .order
            .iter()
            .map(|key| (self.parts[key].clone(), key.clone()))
            .filter(|(coefficient, _)| !coefficient.is_zero())
            .collect();
        if !self.constant.is_zero() || summands.is_empty() {
            summands.push((self.constant.clone(), Term::integer(1)));
        }
        if let Some(first) = summands.iter().position(|(coefficient, _)| coefficient.is_positive()) {
            summands[..=first].rotate_right(1);
        }
        let mut result: Option<Term> = None;
        for (coefficient, key) in summands {
            let size = scaled(&coefficient.abs(), &key);
            result = Some(match (result, coefficient.is_negative()) {
                (None, false) => size,
                (None, true) => size.negate(),
                (Some(sum), false) => sum.add(&size),
                (Some(sum), true) => sum.subtract(&size),
            });
        }
        result.unwrap_or_else(|| Term::integer(0))
    }
}

fn scaled(coefficient: &BigRational, key: &Term) -> Term {
    let mut product = Product::of(key);
    product.coefficient *= coefficient;
    product.term()
}

/// A coefficient times powers with literal integer exponents.
struct Product {
    coefficient: BigRational,
    factors: BTreeMap<Term, i64>,
    order: Vec<Term>,
}

/// Powers of numbers beyond this size stay as they are.
const LARGEST_FOLDED_EXPONENT: i64 = 64;

impl Product {
    fn of(term: &Term) -> Product {
        let mut product =
            Product { coefficient: BigRational::one(), factors: BTreeMap::new(), order: Vec::new() };
        product.gather(term, 1);
        product
    }

    fn gather(&mut self, term: &Term, exponent: i64) {
        match term.node() {
            Node::Number(a)
                if exponent.abs() <= LARGEST_FOLDED_EXPONENT && !(a.is_zero() && exponent < 0) =>
            {
                // The cast is exact: the exponent is at most 64 in size.
                self.coefficient *= a.pow(exponent as i32);
            }
            Node::Negate(a) => {
                if exponent % 2 != 0 {
                    self.coefficient = -&self.coefficient;
                }
                self.gather(a, exponent);
            }
            Node::Multiply(a, b) => {
                self.gather(a, exponent);
                self.gather(b, exponent);
            }
            Node::Divide(a, b) => {
                self.gather(a, exponent);
                self.gather(b, -exponent);
            }
            Node::Power(a, n) => match n.as_integer().and_then(|n| i64::try_from(n).ok()) {
                // 0^0 is undefined, so collapsing b^0 to 1 only enlarges the domain.
                Some(n) if n.checked_mul(exponent).is_some() => self.gather(a, n * exponent),
                _ => self.push(term, exponent),
            },
            _ => self.push(term, exponent),
        }
    }

    fn push(&mut self, factor: &Term, exponent: i64) {
        if exponent == 0 {
            return;
        }
        if let Some(known) = self.factors.get_mut(factor) {
            *known = known.saturating_add(exponent);
        } else {
            self.order.push(factor.clone());
            self.factors.insert(factor.clone(), exponent);
        }
    }

    fn term(&self) -> Term {
        if self.coefficient.is_zero() {
            return Term::integer(0);
        }
        let (mut above, mut below): (Option<Term>, Option<Term>) = (None, None);
        for factor in &self.order {
            let exponent = self.factors[factor];
            let size = exponent.unsigned_abs();
            let power = if size == 1 { factor.clone() } else { factor.power(&Term::integer(size)) };
            let side = match exponent {
                0 => continue,
                1.. => &mut above,
                _ => &mut below,
            };
            *side = Some(side.take().map_or(power.clone(), |p| p.multiply(&power)));
        }
        let numerator = match above {
            Some(a) if self.coefficient.is_one() => a,
            Some(a) if (-&self.coefficient).is_one() => a.negate(),
            Some(a) => Term::number(self.coefficient.clone()).multiply(&a),
            None => Term::number(self.coefficient.clone()),
        };
        match below {
            None => numerator,
            Some(b) => match numerator.node() {
                Node::Negate(a) => a.divide(&b).negate(),
                _ => numerator.divide(&b),
            },
        }
    }
}

/// Values at arguments where the function is exactly known.
fn call(function: Function, args: &[Term]) -> Option<Term> {
    let [a] = args else { return None };
    match function {
        Function::Exp | Function::Cos | Function::Cosh if a.is_zero() => Some(Term::integer(1)),
        Function::Exp if a.is_one() => Some(Term::constant(Constant::E)),
        Function::Log if a.is_one() => Some(Term::integer(0)),
        Function::Log if matches!(a.node(), Node::Constant(Constant::E)) => Some(Term::integer(1)),
        Function::Sin
        | Function::Tan
        | Function::Sinh
        | Function::Tanh
        | Function::Atan
        | Function::Asin
        | Function::Asinh
        | Function::Atanh
        | Function::Erf
            if a.is_zero() =>
        {
            Some(Term::integer(0))
        }
        Function::Sin => half_turns(a).and_then(|q| sine(&q)),
        Function::Cos => half_turns(a).and_then(|q| sine(&(q + BigRational::new(1.into(), 2.into())))),
        Function::Abs => a.as_number().map(|n| Term::number(n.abs())),
        Function::Floor => a.as_number().map(|n| Term::number(n.floor())),
        Function::Ceil => a.as_number().map(|n| Term::number(n.ceil())),
        Function::Sqrt => {
            let n = a.as_number().filter(|n| !n.is_negative())?;
            let (p, q) = (n.numer().sqrt(), n.denom().sqrt());
            (&p * &p == *n.numer() && &q * &q == *n.denom()).then(|| Term::number(BigRational::new(p, q)))
        }
        _ => None,
    }
}

/// The number `q` for which a term is `q*pi`.
fn half_turns(term: &Term) -> Option<BigRational> {
    let product = Product::of(term);
    let pi = Term::constant(Constant::Pi);
    (product.factors.len() == 1 && product.factors.get(&pi) == Some(&1)).then_some(product.coefficient)
}

/// `sin(q*pi)` where it is rational: 0, 1/2 or 1 in size, at multiples of a sixth
/// (Niven, Irrational Numbers, 1956).
fn sine(q: &BigRational) -> Option<Term> {
    let sixths = q * BigRational::from_integer(6.into());
    let place = sixths.is_integer().then(|| sixths.to_integer().mod_floor(&12.into()))?;
    let halves = match u8::try_from(&place).ok()? {
        0 | 6 => 0,
        1 | 5 => 1,
        3 => 2,
        7 | 11 => -1,
        9 => -2,
        _ => return None,
    };
    Some(Term::ratio(halves, 2))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::sample::term;

    #[test]
    fn collects() {
        let check =
            |text: &str, expected: &str| assert_eq!(simplify(&term(text)).to_string(), expected, "{text}");
        check("x - x", "0");
        check("x + 0*y + 2*x", "3*x");
        check("x*x^2/x", "x^2");
        check("-(-x)", "x");
        check("1*x^1 + 0", "x");
        check("2*(3*x) - 1/2 + 1/2", "6*x");
        check("-a + b", "b - a");
        check("x^y*x^y", "(x^y)^2");
        check("exp(0)*log(1) + sqrt(9/4)", "3/2");
        check("a/b/c", "a/(b*c)");
        check("(-x)^3", "-x^3");
        check("1/0", "1/0");
        check("exp(x + 0)^2", "exp(x)^2");
        check("2^3*x", "8*x");
        check("abs(-3)", "3");
        check("cos(pi/2) + sin(13*pi/6) + cos(-(2*pi/3))", "0");
        check("sin(pi/4)", "sin(1/4*pi)");
    }

    /// The second road: values on exact rationals before and after.
    #[test]
    fn values_do_not_change() {
        for text in ["(x - 2*x)*(3 - x)^2/(x*x)", "x^3/x^5 - (-x)^-2", "(1/2 - x)*2 + x*(4/3) - (-(x - 1))"] {
            let (f, g) = (term(text), simplify(&term(text)));
            for x in [Term::ratio(-7, 3), Term::integer(5), Term::ratio(1, 9)] {
                assert_eq!(f.with("x", &x).rational_value(), g.with("x", &x).rational_value(), "{text}");
                assert!(f.with("x", &x).rational_value().is_some());
            }
        }
    }
}

//! Symbolic derivatives.

use std::fmt;

use num_rational::BigRational;
use num_traits::{One, ToPrimitive};

use crate::enclosure::Function;

use super::term::{End, Name, Node, SeriesKind, Term};

/// Why a term has no derivative here: the part that stood in the way.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NotDifferentiable {
    /// The part that is not differentiable, or for which no rule is known.
    pub part: Term,
}

impl fmt::Display for NotDifferentiable {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "no derivative is known for {}", self.part)
    }
}

impl std::error::Error for NotDifferentiable {}

/// The derivative of `term` with respect to a variable.
///
/// It is the derivative wherever `term` is defined and its roots and powers have
/// a positive base; it may be defined on a larger set than `term`.
///
/// # Errors
/// Refuses parts that depend on the variable through `abs`, `min`, `max`, `floor`,
/// `ceil`, `factorial`, `binomial`, `trigamma`, a degree, a quantity, the limits of a
/// sum, an infinite range or a product.
pub fn differentiate(term: &Term, variable: &Name) -> Result<Term, NotDifferentiable> {
    let refuse = || Err(NotDifferentiable { part: term.clone() });
    if !term.mentions(variable) {
        return Ok(Term::integer(0));
    }
    Ok(match term.node() {
        Node::Number(_) | Node::Constant(_) => Term::integer(0),
        Node::Variable(_) => Term::integer(1),
        Node::Negate(a) => minus(&differentiate(a, variable)?),
        Node::Add(a, b) => plus(&differentiate(a, variable)?, &differentiate(b, variable)?),
        Node::Subtract(a, b) => {
            let (da, db) = (differentiate(a, variable)?, differentiate(b, variable)?);
            if db.is_zero() {
                da
            } else if da.is_zero() {
                minus(&db)
            } else {
                da.subtract(&db)
            }
        }
        Node::Multiply(a, b) => {
            let (da, db) = (differentiate(a, variable)?, differentiate(b, variable)?);
            plus(&times(&da, b), &times(a, &db))
        }
        Node::Divide(a, b) => {
            let (da, db) = (differentiate(a, variable)?, differentiate(b, variable)?);
            if db.is_zero() {
                over(&da, b)
            } else if da.is_zero() {
                minus(&over(&times(a, &db), &square(b)))
            } else {
                over(&times(&da, b).subtract(&times(a, &db)), &square(b))
            }
        }
        Node::Power(a, n) => power_rule(term, a, n, variable)?,
        Node::Apply(function, args) => match args.as_slice() {
            [a] => match outer(*function, a) {
                Some(outer) => times(&outer, &differentiate(a, variable)?),
                None => return refuse(),
            },
            [n, x] if *function == Function::Chebyshev && !n.mentions(variable) => {
                match chebyshev_slope(n, x) {
                    Some(outer) => times(&outer, &differentiate(x, variable)?),
                    None => return refuse(),
                }
            }
            _ => return refuse(),
        },
        Node::Quantity(..) => return refuse(),
        Node::Series { kind, index, lower, upper, body } => {
            let (End::Finite(a), End::Finite(b)) = (lower, upper) else {
                return refuse();
            };
            // The index is chosen apart from the variable, which is bound in the body otherwise.
            let inner = if index == variable || !body.mentions(variable) {
                Term::integer(0)
            } else {
                Term::series(
                    *kind,
                    index.clone(),
                    lower.clone(),
                    upper.clone(),
                    differentiate(body, variable)?,
                )
            };
            match kind {
                SeriesKind::Integral => {
                    let (da, db) = (differentiate(a, variable)?, differentiate(b, variable)?);
                    let at = |t: &Term, dt: &Term| {
                        if dt.is_zero() { dt.clone() } else { times(&body.with(index, t), dt) }
                    };
                    let ends = plus(&at(b, &db), &minus(&at(a, &da)));
                    let inner = match inner.node() {
                        Node::Series { body, .. } if body.is_zero() => Term::integer(0),
                        _ => inner,
                    };
                    plus(&ends, &inner)
                }
                SeriesKind::Sum if !a.mentions(variable) && !b.mentions(variable) => inner,
                _ => return refuse(),
            }
        }
    })
}

fn power_rule(term: &Term, a: &Term, n: &Term, variable: &Name) -> Result<Term, NotDifferentiable> {
    let (da, dn) = (differentiate(a, variable)?, differentiate(n, variable)?);
    if dn.is_zero() {
        let one_less = match n.as_number() {
            Some(n) => Term::number(n - BigRational::one()),
            None => n.subtract(&Term::integer(1)),
        };
        let lower = if one_less.is_one() {
            a.clone()
        } else if one_less.is_zero() {
            Term::integer(1)
        } else {
            a.power(&one_less)
        };
        return Ok(times(&times(n, &lower), &da));
    }
    let log = match a.node() {
        Node::Constant(super::term::Constant::E) => Term::integer(1),
        _ => Term::apply1(Function::Log, a),
    };
    let growth = times(&dn, &log);
    if da.is_zero() {
        return Ok(times(term, &growth));
    }
    Ok(times(term, &plus(&growth, &over(&times(n, &da), a))))
}

/// The derivative of a function of one argument at `a`, where there is a formula.
fn outer(function: Function, a: &Term) -> Option<Term> {
    let one = Term::integer(1);
    let two = Term::integer(2);
    let f = |g: Function| Term::apply1(g, a);
    let sqrt = |t: Term| Term::apply1(Function::Sqrt, &t);
    Some(match function {
        Function::Exp => f(Function::Exp),
        Function::Log => over(&one, a),
        Function::Log2 => over(&one, &times(a, &Term::apply1(Function::Log, &two))),
        Function::Sqrt => over(&one, &times(&two, &f(Function::Sqrt))),
        Function::Sin => f(Function::Cos),
        Function::Cos => f(Function::Sin).negate(),
        Function::Tan => one.add(&square(&f(Function::Tan))),
        Function::Asin => over(&one, &sqrt(one.subtract(&square(a)))),
        Function::Acos => over(&Term::integer(-1), &sqrt(one.subtract(&square(a)))),
        Function::Atan => over(&one, &one.add(&square(a))),
        Function::Sinh => f(Function::Cosh),
        Function::Cosh => f(Function::Sinh),
        Function::Tanh => one.subtract(&square(&f(Function::Tanh))),
        Function::Asinh => over(&one, &sqrt(one.add(&square(a)))),
        Function::Acosh => over(&one, &sqrt(square(a).subtract(&one))),
        Function::Atanh => over(&one, &one.subtract(&square(a))),
        Function::Gamma => times(&f(Function::Gamma), &f(Function::Digamma)),
        Function::Lgamma => f(Function::Digamma),
        Function::Digamma => f(Function::Trigamma),
        Function::Erf | Function::Erfc => {
            let scale = over(&two, &sqrt(Term::constant(super::term::Constant::Pi)));
            let bell = times(&scale, &Term::apply1(Function::Exp, &square(a).negate()));
            if function == Function::Erf { bell } else { bell.negate() }
        }
        _ => return None,
    })
}

/// `T_n' = n U_{n-1}`, with `U_{n-1}` as twice the sum of the `T_j` of the other
/// parity below n (the term `T_0` counted once). Literal degrees up to 64 only.
fn chebyshev_slope(n: &Term, x: &Term) -> Option<Term> {
    const LARGEST: u32 = 64;
    let n = n.as_integer()?.to_u32().filter(|n| *n <= LARGEST)?;
    let mut sum = Term::integer(0);
    let mut j = n.checked_sub(1);
    while let Some(k) = j {
        let part = match k {
            0 => Term::integer(1),
            1 => times(&Term::integer(2), x),
            _ => {
                times(&Term::integer(2), &Term::apply(Function::Chebyshev, vec![Term::integer(k), x.clone()]))
            }
        };
        sum = plus(&sum, &part);
        j = k.checked_sub(2);
    }
    Some(times(&Term::integer(n), &sum))
}

fn plus(a: &Term, b: &Term) -> Term {
    if a.is_zero() {
        b.clone()
    } else if b.is_zero() {
        a.clone()
    } else {
        match b.node() {
            Node::Negate(b) => a.subtract(b),
            _ => a.add(b),
        }
    }
}

fn minus(a: &Term) -> Term {
    match a.node() {
        Node::Negate(a) => a.clone(),
        _ => a.negate(),
    }
}

fn times(a: &Term, b: &Term) -> Term {
    if a.is_zero() || b.is_one() {
        return a.clone();
    }
    if b.is_zero() || a.is_one() {
        return b.clone();
    }
    if a.as_number().is_some_and(|n| (-n).is_one()) {
        return minus(b);
    }
    if b.as_number().is_some_and(|n| (-n).is_one()) {
        return minus(a);
    }
    match (a.node(), b.node()) {
        (Node::Negate(a), Node::Negate(b)) => times(a, b),
        (Node::Negate(a), _) => minus(&times(a, b)),
        (_, Node::Negate(b)) => minus(&times(a, b)),
        (Node::Divide(one, d), _) if one.is_one() => over(b, d),
        (_, Node::Divide(one, d)) if one.is_one() => over(a, d),
        (_, Node::Number(_)) => b.multiply(a),
        _ => a.multiply(b),
    }
}

fn over(a: &Term, b: &Term) -> Term {
    if a.is_zero() || b.is_one() { a.clone() } else { a.divide(b) }
}

fn square(a: &Term) -> Term {
    a.power(&Term::integer(2))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::sample::term;

    fn check(text: &str, expected: &str) {
        let derivative = differentiate(&term(text), &"x".into()).expect(text);
        assert_eq!(derivative.to_string(), expected, "{text}");
    }

    #[test]
    fn rules() {
        check("3*x^2 - y", "3*(2*x)");
        check("exp(-x^2)", "-exp(-x^2)*(2*x)");
        check("log(x)/x", "(x/x - log(x))/x^2");
        check("a/x", "-a/x^2");
        check("x^r", "r*x^(r - 1)");
        check("2^x", "2^x*log(2)");
        check("e^x", "e^x");
        check("x^x", "x^x*(log(x) + x/x)");
        check("sqrt(x)", "1/(2*sqrt(x))");
        check("chebyshev(3, x)", "3*(2*chebyshev(2, x) + 1)");
        check("chebyshev(0, x)", "0");
        check("sum(k = 0 .. n, x^k)", "sum(k = 0 .. n, k*x^(k - 1))");
        check("integral(t = 0 .. x, exp(t)) + integral(t = 0 .. 1, t*x)", "exp(x) + integral(t = 0 .. 1, t)");
        check("lgamma(x) + q(y)", "digamma(x)");
    }

    #[test]
    fn refusals_name_the_part() {
        for text in [
            "abs(x)",
            "min(x, 1)",
            "floor(x)",
            "factorial(x)",
            "q(x)",
            "chebyshev(n, x)",
            "sum(k = 0 .. x, k)",
            "sum(k = 0 .. inf, x^k)",
            "product(k = 1 .. n, x + k)",
        ] {
            let refusal = differentiate(&term(&format!("1 + {text}")), &"x".into()).expect_err(text);
            assert_eq!(refusal.part.to_string(), text);
        }
        check("abs(y)*x", "abs(y)");
    }

    /// Against difference quotients of an independent evaluation on exact rationals.
    #[test]
    fn polynomials_agree_with_exact_difference_quotients() {
        for text in
            ["x^5 - 3*x^2 + x/7", "(x + 1)^3*(x - 2)", "(x^2 + 1)/(x + 5)", "1/(1 + x)^2", "x^-3 + 2^3*x"]
        {
            let f = term(text);
            let slope = differentiate(&f, &"x".into()).expect(text);
            let at = |t: &Term, x: &BigRational| {
                t.with("x", &Term::number(x.clone())).rational_value().expect(text)
            };
            let x = BigRational::new(3.into(), 2.into());
            let h = BigRational::new(1.into(), 1_000_000.into());
            let quotient = (at(&f, &(&x + &h)) - at(&f, &(&x - &h))) / (&h + &h);
            let difference = quotient - at(&slope, &x);
            assert!(
                num_traits::Signed::abs(&difference) < BigRational::new(1.into(), 100_000_000.into()),
                "{text}"
            );
        }
    }
}

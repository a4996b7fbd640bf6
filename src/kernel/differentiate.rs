//! Derivatives in one variable, and where they exist.
//!
//! Statement: let `t` be defined at every point of a set whose sections in `x`
//! are open intervals, and let the conditions that [`differentiate`] returns
//! hold there. Then on every section `t` is real analytic in `x` (all other
//! variables fixed), and its derivative is the returned term, which is defined.
//!
//! Sound by induction on the term: each function is analytic in the interior of
//! its domain, the conditions say that arguments stay in the interior (`sqrt`
//! and powers without a literal integer exponent away from 0, `asin` away from
//! the ends, `abs` away from its kink), and composition keeps analyticity
//! (chain rule; any text on real analysis). Parts free of `x` are constant.
//! What is not in the list is refused: minima and maxima, floors, factorials,
//! quantities, series, the derivative of `trigamma`.
//!
//! Statement of [`continuous`]: where it says yes, `t` is continuous in `x` on every
//! interval of sections on which it is defined, closed ends included.

use num_rational::BigRational;
use num_traits::{One, Zero};

use super::number::Function;
use super::sequent::{Rel, Relation};
use super::term::{Constant, Limit, Node, SeriesKind, Term};
use super::verdict::{Checked, Reason, refuse};

/// A derivative and what must hold for it to be one.
pub struct Derivative {
    /// The derivative.
    pub term: Term,
    /// Conditions beyond the definedness of the differentiated term.
    pub conditions: Vec<Relation>,
}

/// The derivative of `term` in the variable `x`; see the head of the file.
pub fn differentiate(term: &Term, x: &str) -> Checked<Derivative> {
    let mut conditions = Vec::new();
    let term = derive(term, x, &mut conditions)?;
    Ok(Derivative { term, conditions })
}

fn derive(t: &Term, x: &str, conditions: &mut Vec<Relation>) -> Checked<Term> {
    if !t.mentions(x) {
        return Ok(Term::zero());
    }
    let mut demand = |left: &Term, rel: Rel, right: i64| {
        let c = Relation::new(left.clone(), rel, Term::integer(right));
        if !conditions.contains(&c) {
            conditions.push(c);
        }
    };
    Ok(match &**t {
        Node::Variable(_) => Term::integer(1),
        Node::Negate(a) => minus(&derive(a, x, conditions)?),
        Node::Add(a, b) => plus(&derive(a, x, conditions)?, &derive(b, x, conditions)?),
        Node::Subtract(a, b) => plus(&derive(a, x, conditions)?, &minus(&derive(b, x, conditions)?)),
        Node::Multiply(a, b) => {
            let (da, db) = (derive(a, x, conditions)?, derive(b, x, conditions)?);
            plus(&times(&da, b), &times(a, &db))
        }
        Node::Divide(a, b) => {
            let (da, db) = (derive(a, x, conditions)?, derive(b, x, conditions)?);
            if db == Term::zero() {
                return Ok(da.divide(b));
            }
            plus(&times(&da, b), &minus(&times(a, &db))).divide(&square(b))
        }
        Node::Power(b, p) => {
            let literal_integer = p.as_number().is_some_and(BigRational::is_integer);
            let e_base = matches!(&**b, Node::Constant(Constant::E));
            if !literal_integer && !e_base {
                demand(b, Rel::Gt, 0);
            }
            let (db, dp) = (derive(b, x, conditions)?, derive(p, x, conditions)?);
            let log = if e_base { Term::integer(1) } else { Term::apply(Function::Log, b) };
            plus(&times(&times(p, &lowered(b, p)), &db), &times(&times(t, &log), &dp))
        }
        Node::Apply(f, args) if args.len() == 1 => {
            let a = &args[0];
            match f {
                Function::Sqrt | Function::Gamma | Function::Lgamma | Function::Digamma => {
                    demand(a, Rel::Gt, 0);
                }
                Function::Asin | Function::Acos => {
                    demand(a, Rel::Gt, -1);
                    demand(a, Rel::Lt, 1);
                }
                Function::Acosh => demand(a, Rel::Gt, 1),
                Function::Abs => demand(a, Rel::Ne, 0),
                _ => {}
            }
            let Some(outer) = outer(*f, a) else {
                return refuse(Reason::Condition, format!("no derivative of {} is known", f.name()));
            };
            times(&outer, &derive(a, x, conditions)?)
        }
        _ => return refuse(Reason::Condition, format!("no derivative of {t} is known")),
    })
}

/// `b^(p - 1)`, written so that it is defined wherever `b^p` is and the
/// conditions of the power rule hold.
fn lowered(b: &Term, p: &Term) -> Term {
    match p.as_number() {
        Some(q) if q.is_one() => Term::integer(1),
        Some(q) => {
            let q = q - BigRational::one();
            if q.is_one() { b.clone() } else { b.power(&Term::number(q)) }
        }
        None => b.power(&p.subtract(&Term::integer(1))),
    }
}

/// The derivative of a function of one argument at `a`.
fn outer(f: Function, a: &Term) -> Option<Term> {
    let one = Term::integer(1);
    let apply = |g: Function| Term::apply(g, a);
    let sqrt = |t: &Term| Term::apply(Function::Sqrt, t);
    let gauss = || {
        let pi: Term = Node::Constant(Constant::Pi).into();
        let bell = Term::apply(Function::Exp, &square(a).negate());
        Term::integer(2).divide(&sqrt(&pi)).multiply(&bell)
    };
    Some(match f {
        Function::Exp => apply(Function::Exp),
        Function::Log => one.divide(a),
        Function::Log2 => one.divide(&a.multiply(&Term::apply(Function::Log, &Term::integer(2)))),
        Function::Sqrt => one.divide(&Term::integer(2).multiply(&apply(Function::Sqrt))),
        Function::Abs => a.divide(&apply(Function::Abs)),
        Function::Sin => apply(Function::Cos),
        Function::Cos => apply(Function::Sin).negate(),
        Function::Tan => one.add(&square(&apply(Function::Tan))),
        Function::Asin => one.divide(&sqrt(&one.subtract(&square(a)))),
        Function::Acos => one.divide(&sqrt(&one.subtract(&square(a)))).negate(),
        Function::Atan => one.divide(&one.add(&square(a))),
        Function::Sinh => apply(Function::Cosh),
        Function::Cosh => apply(Function::Sinh),
        Function::Tanh => one.subtract(&square(&apply(Function::Tanh))),
        Function::Asinh => one.divide(&sqrt(&one.add(&square(a)))),
        Function::Acosh => one.divide(&sqrt(&square(a).subtract(&one))),
        Function::Atanh => one.divide(&one.subtract(&square(a))),
        Function::Gamma => apply(Function::Gamma).multiply(&apply(Function::Digamma)),
        Function::Lgamma => apply(Function::Digamma),
        Function::Digamma => apply(Function::Trigamma),
        Function::Erf => gauss(),
        Function::Erfc => gauss().negate(),
        _ => return None,
    })
}

/// Refuses unless the shape of `term` makes it continuous in `x` wherever it is
/// defined. `b^p` with a varying exponent is: where it is defined on an interval
/// with `b < 0`, `p` is an integer there and so constant; towards `b = 0`, `p > 0`
/// and the power tends to 0. Integer-valued functions are refused.
pub fn continuous(term: &Term, x: &str) -> Checked {
    if !term.mentions(x) {
        return Ok(());
    }
    match &**term {
        Node::Apply(
            Function::Floor | Function::Ceil | Function::Factorial | Function::Binomial | Function::Chebyshev,
            _,
        )
        | Node::Quantity(..) => refuse(Reason::Condition, format!("{term} is not continuous by its shape")),
        Node::Series { kind: SeriesKind::Sum | SeriesKind::Product, lower, upper, body, .. } => {
            let fixed = |l: &Limit| matches!(l, Limit::Finite(t) if !t.mentions(x));
            if !fixed(lower) || !fixed(upper) {
                return refuse(Reason::Condition, "a series whose range depends on the variable");
            }
            continuous(body, x)
        }
        Node::Series { .. } => refuse(Reason::Condition, "an integral that depends on the variable"),
        _ => term.children().into_iter().try_for_each(|c| continuous(c, x)),
    }
}

fn plus(a: &Term, b: &Term) -> Term {
    if *a == Term::zero() {
        return b.clone();
    }
    if *b == Term::zero() {
        return a.clone();
    }
    match &**b {
        Node::Negate(b) => a.subtract(b),
        _ => a.add(b),
    }
}

fn minus(a: &Term) -> Term {
    match &**a {
        Node::Negate(a) => a.clone(),
        _ => a.negate(),
    }
}

fn times(a: &Term, b: &Term) -> Term {
    match (a.as_number(), b.as_number()) {
        (Some(p), Some(q)) => Term::number(p * q),
        (Some(p), _) if p.is_zero() => a.clone(),
        (_, Some(q)) if q.is_zero() => b.clone(),
        (Some(p), _) if p.is_one() => b.clone(),
        (_, Some(q)) if q.is_one() => a.clone(),
        (Some(p), _) if (-p).is_one() => minus(b),
        (_, Some(q)) if (-q).is_one() => minus(a),
        _ => a.multiply(b),
    }
}

fn square(a: &Term) -> Term {
    a.power(&Term::integer(2))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::kernel::read;

    fn derivative(text: &str) -> (String, String) {
        let d = differentiate(&read::term(text).unwrap(), "x").unwrap();
        let conditions: Vec<String> = d.conditions.iter().map(ToString::to_string).collect();
        (d.term.to_string(), conditions.join(", "))
    }

    #[test]
    fn rules_and_conditions() {
        for (text, expected, conditions) in [
            ("3*x^2 - y", "3*(2*x)", ""),
            ("exp(-x^2)", "exp(-x^2)*(-2*x)", ""),
            ("x^r", "r*x^(r - 1)", "x > 0"),
            ("x^(1/2)", "1/2*x^(-1/2)", "x > 0"),
            ("x^-2", "(-2)*x^(-3)", ""),
            ("e^x", "e^x", ""),
            ("x^x", "x*x^(x - 1) + x^x*log(x)", "x > 0"),
            ("sqrt(1 - x)", "-1/(2*sqrt(1 - x))", "1 - x > 0"),
            ("asin(x)", "1/sqrt(1 - x^2)", "x > -1, x < 1"),
            ("abs(x)", "x/abs(x)", "x != 0"),
            ("abs(y) + floor(y)*x", "floor(y)", ""),
            ("lgamma(x)", "digamma(x)", "x > 0"),
            ("erf(y)", "0", ""),
        ] {
            let (d, c) = derivative(text);
            let shown = |t: &str| read::term(t).unwrap().to_string();
            assert_eq!((d.as_str(), c.as_str()), (shown(expected).as_str(), conditions), "{text}");
        }
    }

    #[test]
    fn what_has_no_derivative_is_refused() {
        for text in ["min(x, 1)", "floor(x)", "factorial(x)", "q(x)", "sum(k = 0 .. 3, x^k)", "trigamma(x)"] {
            assert!(differentiate(&read::term(text).unwrap(), "x").is_err(), "{text}");
        }
    }

    #[test]
    fn continuity_by_shape() {
        let says = |text: &str| continuous(&read::term(text).unwrap(), "x").is_ok();
        assert!(says("abs(x) + max(x, y)^x/sqrt(x) + floor(y)"));
        assert!(says("sum(k = 0 .. n, x^k)"));
        for text in ["floor(x)", "exp(ceil(x))", "q(x)", "sum(k = 0 .. x, k)", "sum(k = 0 .. inf, x^k)"] {
            assert!(!says(text), "{text}");
        }
    }
}

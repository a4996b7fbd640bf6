//! Functions inside normal forms: exact values, symmetries and recurrences, each
//! right wherever the function on its left is defined.
//!
//! Sources: Abramowitz and Stegun, Handbook of Mathematical Functions, 4.3 and
//! 4.4 (circular), 4.5 (hyperbolic), 6.1 and 6.3 (gamma and digamma), 7.1 (erf),
//! 22.7 (Chebyshev), 24.1 (binomial coefficients).

use num_bigint::BigInt;
use num_integer::Integer;
use num_rational::BigRational;
use num_traits::{One, Signed, ToPrimitive, Zero};

use super::normal::{Normalizer, small};
use super::number::Function;
use super::polynomial::{Atom, Exponent, Kind, MAX_DEGREE, Poly};
use super::term::Constant;
use super::verdict::{Checked, Reason, refuse};

/// Most steps by which an argument of gamma is shifted.
const MAX_SHIFT: i64 = 64;
/// Largest argument at which a factorial is a number.
const MAX_FACTORIAL: i64 = 3000;

fn ratio(a: i64, b: i64) -> BigRational {
    BigRational::new(a.into(), b.into())
}

fn one() -> Poly {
    Poly::constant(BigRational::one())
}

fn pi() -> Poly {
    Poly::atom(Atom::new(Kind::Constant(Constant::Pi)))
}

fn plain(f: Function, args: Vec<Poly>) -> Poly {
    Poly::atom(Atom::new(Kind::Apply(f, args)))
}

fn minus(p: &Poly) -> Poly {
    p.scaled(&-BigRational::one())
}

fn leads_negative(p: &Poly) -> bool {
    p.terms().next_back().is_some_and(|(_, q)| q.is_negative())
}

/// The absolute value of an atom as an atom.
pub fn absolute(n: &Normalizer, atom: &Atom) -> Atom {
    match atom.kind() {
        Kind::Apply(Function::Abs, _) => atom.clone(),
        _ if n.sign(atom).is_some() => atom.clone(),
        Kind::Group(p) if leads_negative(p) => Atom::new(Kind::Apply(Function::Abs, vec![minus(p)])),
        Kind::Group(p) => Atom::new(Kind::Apply(Function::Abs, vec![p.clone()])),
        _ => Atom::new(Kind::Apply(Function::Abs, vec![Poly::atom(atom.clone())])),
    }
}

/// The normal form of a function at settled arguments.
pub fn apply(n: &Normalizer, f: Function, args: Vec<Poly>) -> Checked<Poly> {
    let a = &args[0];
    let half = Exponent::of(Poly::constant(ratio(1, 2)));
    Ok(match f {
        Function::Exp => n.exponential(a)?,
        Function::Log => n.logarithm(a)?,
        Function::Log2 => {
            let over = n.power(&n.logarithm(&Poly::constant(ratio(2, 1)))?, &Exponent::Whole(-1))?;
            n.logarithm(a)?.times(&over, &n.work)?
        }
        Function::Sqrt => n.power(a, &half)?,
        Function::Abs => absolute_value(n, a)?,
        Function::Min | Function::Max => {
            let mut args = args;
            args.sort();
            args.dedup();
            if args.len() == 1 { args.remove(0) } else { plain(f, args) }
        }
        Function::Floor => floor(n, a),
        Function::Ceil => minus(&floor(n, &minus(a))),
        Function::Sin => circular(n, a, 0)?,
        Function::Cos => circular(n, a, 1)?,
        Function::Tan => {
            let over = n.power(&circular(n, a, 1)?, &Exponent::Whole(-1))?;
            circular(n, a, 0)?.times(&over, &n.work)?
        }
        Function::Acos => pi().scaled(&ratio(1, 2)).plus(&minus(&odd(n, Function::Asin, a)?)),
        Function::Asin | Function::Atan | Function::Asinh | Function::Atanh | Function::Erf => odd(n, f, a)?,
        Function::Erfc => one().plus(&minus(&odd(n, Function::Erf, a)?)),
        Function::Sinh => hyperbolic(n, a, -1)?,
        Function::Cosh => hyperbolic(n, a, 1)?,
        Function::Tanh => {
            let over = n.power(&hyperbolic(n, a, 1)?, &Exponent::Whole(-1))?;
            hyperbolic(n, a, -1)?.times(&over, &n.work)?
        }
        Function::Acosh if *a == one() => Poly::default(),
        Function::Gamma | Function::Lgamma | Function::Digamma | Function::Trigamma => shifted(n, f, a)?,
        Function::Factorial => shifted(n, Function::Gamma, &a.plus(&one()))?,
        Function::Binomial => binomial(n, a, &args[1])?,
        Function::Chebyshev => match a.as_constant().and_then(|q| small(&q)) {
            Some(degree) if (0..=MAX_DEGREE).contains(&degree) => chebyshev(n, degree, &args[1])?,
            _ => plain(f, args),
        },
        Function::Acosh => plain(f, args),
    })
}

/// `abs(f^p g^q ..) = abs(f)^p abs(g)^q ..`, for whatever exponents are defined.
fn absolute_value(n: &Normalizer, a: &Poly) -> Checked<Poly> {
    if a.is_empty() {
        return Ok(Poly::default());
    }
    let (literal, factors) = a.product_form(&n.work)?;
    let mut product = Poly::constant(literal.abs());
    for (atom, exponent) in factors {
        let even = exponent.literal().is_some_and(|q| !q.is_integer() || q.to_integer().is_even());
        let base = if even { atom } else { absolute(n, &atom) };
        product = product.times(&Poly::single(BigRational::one(), vec![(base, exponent)]), &n.work)?;
    }
    Ok(product)
}

/// `floor(t + m) = floor(t) + m` for integers m.
fn floor(n: &Normalizer, a: &Poly) -> Poly {
    if n.is_integer(a) {
        return a.clone();
    }
    let whole = Poly::constant(a.coefficient(&[]).floor());
    let rest = a.plus(&minus(&whole));
    if rest.as_constant().is_some() { whole } else { whole.plus(&plain(Function::Floor, vec![rest])) }
}

fn hyperbolic(n: &Normalizer, a: &Poly, sign: i64) -> Checked<Poly> {
    let (up, down) = (n.exponential(a)?, n.exponential(&minus(a))?);
    Ok(up.plus(&down.scaled(&ratio(sign, 1))).scaled(&ratio(1, 2)))
}

/// Odd functions, with their values at the arguments of the table.
fn odd(n: &Normalizer, f: Function, a: &Poly) -> Checked<Poly> {
    if a.is_empty() {
        return Ok(Poly::default());
    }
    if leads_negative(a) {
        return Ok(minus(&odd(n, f, &minus(a))?));
    }
    let root = |of: i64, times: BigRational| -> Checked<Poly> {
        let half = Exponent::of(Poly::constant(ratio(1, 2)));
        Ok(n.power(&Poly::constant(ratio(of, 1)), &half)?.scaled(&times))
    };
    let table: &[(Poly, BigRational)] = &match f {
        Function::Asin => vec![
            (Poly::constant(ratio(1, 2)), ratio(1, 6)),
            (one(), ratio(1, 2)),
            (root(2, ratio(1, 2))?, ratio(1, 4)),
            (root(3, ratio(1, 2))?, ratio(1, 3)),
        ],
        Function::Atan => {
            vec![
                (one(), ratio(1, 4)),
                (root(3, ratio(1, 1))?, ratio(1, 3)),
                (root(3, ratio(1, 3))?, ratio(1, 6)),
            ]
        }
        _ => vec![],
    };
    let found = table.iter().find(|(at, _)| at == a);
    Ok(found.map_or_else(|| plain(f, vec![a.clone()]), |(_, turns)| pi().scaled(turns)))
}

/// `sin(a + quarter*pi/2)`; whole quarter turns in `a` are carried out.
fn circular(n: &Normalizer, a: &Poly, quarter: i64) -> Checked<Poly> {
    let Some((pi_monomial, _)) = pi().as_single().map(|(m, q)| (m.clone(), q.clone())) else {
        return refuse(Reason::Condition, "no angle");
    };
    let mut turns = a.coefficient(&pi_monomial);
    let mut rest = a.plus(&minus(&pi().scaled(&turns)));
    let (mut quarter, mut sign) = (quarter, 1);
    if leads_negative(&rest) || (rest.is_empty() && turns.is_negative()) {
        // The sine is odd and the cosine even.
        (rest, turns) = (minus(&rest), -turns);
        sign = if quarter == 0 { -1 } else { 1 };
    }
    let whole = (&turns * ratio(2, 1)).floor();
    turns -= &whole / ratio(2, 1);
    quarter += whole.to_integer().mod_floor(&BigInt::from(4)).to_i64().unwrap_or(0);
    if quarter % 4 >= 2 {
        sign = -sign;
    }
    let cosine = quarter % 2 == 1;
    let sign = ratio(sign, 1);
    if rest.is_empty()
        && let Some(value) = table_angle(n, &turns, cosine)?
    {
        return Ok(value.scaled(&sign));
    }
    let f = if cosine { Function::Cos } else { Function::Sin };
    Ok(plain(f, vec![rest.plus(&pi().scaled(&turns))]).scaled(&sign))
}

/// The sine or cosine of `turns*pi`, 0 <= turns < 1/2, at multiples of pi/12.
fn table_angle(n: &Normalizer, turns: &BigRational, cosine: bool) -> Checked<Option<Poly>> {
    let twelfths = turns * ratio(12, 1);
    let Some(k) = small(&twelfths) else { return Ok(None) };
    let k = if cosine { 6 - k } else { k };
    let half = Exponent::of(Poly::constant(ratio(1, 2)));
    let root = |of: i64| n.power(&Poly::constant(ratio(of, 1)), &half);
    Ok(Some(match k {
        0 => Poly::default(),
        1 => root(6)?.plus(&minus(&root(2)?)).scaled(&ratio(1, 4)),
        2 => Poly::constant(ratio(1, 2)),
        3 => root(2)?.scaled(&ratio(1, 2)),
        4 => root(3)?.scaled(&ratio(1, 2)),
        5 => root(6)?.plus(&root(2)?).scaled(&ratio(1, 4)),
        _ => one(),
    }))
}

/// gamma(x+1) = x gamma(x), lgamma(x+1) = log x + lgamma(x), psi(x+1) = 1/x + psi(x),
/// psi'(x+1) = psi'(x) - 1/x^2,
/// each used for x > 0 only, to bring the literal part of the argument into [0, 1).
fn shifted(n: &Normalizer, f: Function, a: &Poly) -> Checked<Poly> {
    if let Some(value) = at_integer(n, f, a)? {
        return Ok(value);
    }
    let combine = |result: &Poly, x: &Poly, up: bool| -> Checked<Poly> {
        let sign = Exponent::Whole(if up { -1 } else { 1 });
        let signed = |p: Poly| if up { minus(&p) } else { p };
        match f {
            Function::Gamma => result.times(&n.power(x, &sign)?, &n.work),
            Function::Lgamma => Ok(result.plus(&signed(n.logarithm(x)?))),
            Function::Trigamma => Ok(result.plus(&minus(&signed(n.power(x, &Exponent::Whole(-2))?)))),
            _ => Ok(result.plus(&signed(n.power(x, &Exponent::Whole(-1))?))),
        }
    };
    let mut result = if f == Function::Gamma { one() } else { Poly::default() };
    let mut argument = a.clone();
    for _ in 0..MAX_SHIFT {
        let literal = argument.coefficient(&[]);
        let below = argument.plus(&minus(&one()));
        if literal >= BigRational::one() && n.is_positive(&below) {
            result = combine(&result, &below, false)?;
            argument = below;
        } else if literal.is_negative() && n.is_positive(&argument) {
            result = combine(&result, &argument, true)?;
            argument = argument.plus(&one());
        } else {
            break;
        }
    }
    if argument != *a
        && let Some(value) = at_integer(n, f, &argument)?
    {
        return if f == Function::Gamma { result.times(&value, &n.work) } else { Ok(result.plus(&value)) };
    }
    let argument = argument.settled(&n.work)?;
    if f == Function::Gamma && argument.as_constant() == Some(ratio(1, 2)) {
        // gamma(1/2)^2 = pi.
        let root = n.power(&pi(), &Exponent::of(Poly::constant(ratio(1, 2))))?;
        return result.times(&root, &n.work);
    }
    let atom = plain(f, vec![argument]);
    if f == Function::Gamma { result.times(&atom, &n.work) } else { Ok(result.plus(&atom)) }
}

fn at_integer(n: &Normalizer, f: Function, a: &Poly) -> Checked<Option<Poly>> {
    let Some(m) = a.as_constant().and_then(|q| small(&q)).filter(|m| (1..=MAX_FACTORIAL).contains(m)) else {
        return Ok(None);
    };
    let factorial = |m: i64| (1..=m).fold(BigInt::one(), |product, k| product * k);
    Ok(Some(match f {
        Function::Gamma => Poly::constant(factorial(m - 1).into()),
        Function::Lgamma => n.logarithm(&Poly::constant(factorial(m - 1).into()))?,
        // psi'(1) = zeta(2) = pi^2/6; larger ones by the recurrence.
        Function::Trigamma if m == 1 => pi().times(&pi(), &n.work)?.scaled(&ratio(1, 6)),
        Function::Trigamma => return Ok(None),
        _ => {
            let harmonic = (1..m.min(MAX_SHIFT)).fold(BigRational::zero(), |sum, k| sum + ratio(1, k));
            let euler = Poly::atom(Atom::new(Kind::Constant(Constant::Euler)));
            if m > MAX_SHIFT { return Ok(None) } else { Poly::constant(harmonic).plus(&minus(&euler)) }
        }
    }))
}

/// `binomial(n, k)` with a literal k (or n-k) is a polynomial in n; with
/// 0 <= k <= n it is a quotient of factorials.
fn binomial(n: &Normalizer, above: &Poly, below: &Poly) -> Checked<Poly> {
    let other = above.plus(&minus(below)).settled(&n.work)?;
    let small_number =
        |p: &Poly| p.as_constant().and_then(|q| small(&q)).filter(|k| (0..=MAX_SHIFT).contains(k));
    if let Some(k) = small_number(below).or_else(|| small_number(&other)) {
        let mut product = one();
        for j in 0..k {
            let factor = above.plus(&Poly::constant(ratio(-j, 1))).scaled(&ratio(1, j + 1));
            product = product.times(&factor, &n.work)?;
        }
        return Ok(product);
    }
    if n.is_non_negative(&other) {
        let gamma = |p: &Poly| shifted(n, Function::Gamma, &p.plus(&one()));
        let over = gamma(below)?.times(&gamma(&other)?, &n.work)?;
        return gamma(above)?.times(&n.power(&over, &Exponent::Whole(-1))?, &n.work);
    }
    Ok(plain(Function::Binomial, vec![above.clone(), below.clone()]))
}

/// T_0 = 1, T_1 = x, T_{n+1} = 2 x T_n - T_{n-1}.
fn chebyshev(n: &Normalizer, degree: i64, x: &Poly) -> Checked<Poly> {
    let (mut previous, mut current) = (one(), x.clone());
    if degree == 0 {
        return Ok(previous);
    }
    for _ in 1..degree {
        let next = current.times(x, &n.work)?.scaled(&ratio(2, 1)).plus(&minus(&previous));
        previous = std::mem::replace(&mut current, next);
    }
    Ok(current)
}

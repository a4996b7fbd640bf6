//! Deciding relations between closed terms, and values of closed terms.
//!
//! Rational parts are computed exactly; the rest is enclosed with rising
//! precision up to a stated number of bits. Enclosures are refused outside the domain of
//! a function, so a decided relation has both sides defined. Two sides that are
//! equal without being rational are recognised by their normal form.

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, ToPrimitive, Zero};

use super::evaluate::constant;
use super::normal::normal;
use super::number::Function;
use super::sequent::{Rel, Relation};
use super::term::{Limit, Name, Node, SeriesKind, Term};
use super::verdict::{Checked, Reason, refuse};

/// Most bits of a rational number computed exactly.
const MAX_BITS: u64 = 100_000;
/// Most terms of a sum or product computed exactly.
const MAX_TERMS: i64 = 1000;
/// Largest precision for closed terms.
pub const MAX_PRECISION: u32 = 8192;

/// The term with its rational parts computed: outermost literals where possible.
pub fn fold(term: &Term) -> Term {
    let term = term.rebuild(&mut |part| {
        if std::ptr::eq(&**part, &**term) {
            return None;
        }
        match &**part {
            Node::Series { .. } => value(part).map(Term::number),
            _ => Some(fold(part)),
        }
    });
    value(&term).map_or(term, Term::number)
}

/// The exact value of one operation on literals, if it is rational and not too large.
fn value(term: &Term) -> Option<BigRational> {
    let two = |a: &Term, b: &Term| Some((a.as_number()?.clone(), b.as_number()?.clone()));
    let found = match &**term {
        Node::Number(q) => q.clone(),
        Node::Negate(a) => -a.as_number()?,
        Node::Add(a, b) => two(a, b).map(|(a, b)| a + b)?,
        Node::Subtract(a, b) => two(a, b).map(|(a, b)| a - b)?,
        Node::Multiply(a, b) => two(a, b).map(|(a, b)| a * b)?,
        Node::Divide(a, b) => {
            let (a, b) = two(a, b)?;
            if b.is_zero() {
                return None;
            }
            a / b
        }
        Node::Power(b, p) => power(b.as_number()?, p.as_number()?)?,
        Node::Apply(f, args) => {
            let values: Vec<&BigRational> = args.iter().map(|a| a.as_number()).collect::<Option<_>>()?;
            match f {
                Function::Abs => values[0].abs(),
                Function::Floor => values[0].floor(),
                Function::Ceil => values[0].ceil(),
                Function::Min => values.into_iter().min()?.clone(),
                Function::Max => values.into_iter().max()?.clone(),
                Function::Sqrt => square_root(values[0])?,
                _ => return None,
            }
        }
        Node::Series { kind, index, lower: Limit::Finite(a), upper: Limit::Finite(b), body } => {
            series(*kind, index, [a, b], body)?
        }
        _ => return None,
    };
    (found.numer().bits() + found.denom().bits() <= MAX_BITS).then_some(found)
}

/// A sum or product with rational terms; nothing if it is too long, or another
/// one stands inside it.
fn series(kind: SeriesKind, index: &Name, limits: [&Term; 2], body: &Term) -> Option<BigRational> {
    let whole = |t: &Term| fold(t).as_number().filter(|q| q.is_integer())?.to_integer().to_i64();
    let (from, to) = (whole(limits[0])?, whole(limits[1])?);
    if kind == SeriesKind::Integral || to.checked_sub(from)? >= MAX_TERMS || has_series(body) {
        return None;
    }
    let mut total = BigRational::from_integer(i64::from(kind == SeriesKind::Product).into());
    for k in from..=to {
        let next = fold(&body.substitute(index, &Term::integer(k)));
        match kind {
            SeriesKind::Product => total *= next.as_number()?,
            _ => total += next.as_number()?,
        }
        if total.numer().bits() + total.denom().bits() > MAX_BITS {
            return None;
        }
    }
    Some(total)
}

fn has_series(term: &Term) -> bool {
    matches!(&**term, Node::Series { .. }) || term.children().into_iter().any(has_series)
}

fn power(b: &BigRational, p: &BigRational) -> Option<BigRational> {
    if !p.is_integer() {
        return None;
    }
    let n = p.to_integer().to_i64()?;
    if b.is_zero() && n <= 0 {
        return None;
    }
    let trivial = b.is_zero() || b.abs().is_one();
    if !trivial && (b.numer().bits() + b.denom().bits()).checked_mul(n.unsigned_abs())? > MAX_BITS {
        return None;
    }
    let n = if trivial { (n % 2) + 2 * i64::from(n % 2 == 0) } else { n };
    Some(num_traits::Pow::pow(b, &BigInt::from(n)))
}

fn square_root(q: &BigRational) -> Option<BigRational> {
    if q.is_negative() {
        return None;
    }
    let root = BigRational::new(q.numer().sqrt(), q.denom().sqrt());
    (&root * &root == *q).then_some(root)
}

/// Decides a closed relation; `None` if the precision does not suffice.
pub fn decide(relation: &Relation, bits: u32) -> Checked<Option<bool>> {
    if bits > MAX_PRECISION {
        return refuse(Reason::Limit, format!("more than {MAX_PRECISION} bits"));
    }
    let r = relation.turned();
    let (left, right) = (fold(&r.left), fold(&r.right));
    if let (Some(a), Some(b)) = (left.as_number(), right.as_number()) {
        return Ok(Some(match r.rel {
            Rel::Le => a <= b,
            Rel::Lt => a < b,
            Rel::Eq => a == b,
            _ => a != b,
        }));
    }
    let mut precision = 64;
    loop {
        let difference = constant(&right, precision)?.sub(&constant(&left, precision)?, precision);
        let (positive, negative) = (difference.is_certainly_positive(), difference.is_certainly_negative());
        match r.rel {
            Rel::Le | Rel::Lt if positive || negative => return Ok(Some(positive)),
            Rel::Eq if positive || negative => return Ok(Some(false)),
            Rel::Ne if positive || negative => return Ok(Some(true)),
            _ => {}
        }
        if precision >= bits {
            break;
        }
        precision = (precision * 2).min(bits);
    }
    // Both sides are defined, or their enclosures would have been refused.
    if normal(&right.subtract(&left))?.is_zero() {
        return Ok(Some(matches!(r.rel, Rel::Le | Rel::Eq)));
    }
    Ok(None)
}

#[cfg(test)]
mod tests {
    use super::decide;
    use crate::kernel::read;

    fn says(relation: &str, expected: Option<bool>) {
        let relation = read::relation(relation).expect("a relation");
        assert_eq!(decide(&relation, 256).expect("no refusal"), expected, "{relation}");
    }

    #[test]
    fn sums_and_products_with_rational_terms_are_exact() {
        says("4*sum(k = 1 .. 2 - 1, 1/(k^2*(2 - k)^2)) < 4", Some(false));
        says("sum(k = 1 .. 10, 1/k) = 7381/2520", Some(true));
        says("product(k = 2 .. 4, 1 - 1/k) = 1/4", Some(true));
        says("sum(k = 2 .. 1, 1/k) = 0", Some(true));
        says("sum(k = 1 .. 3, sum(j = 1 .. 2, 1/3)) = 2", Some(true));
        says("sum(k = 1 .. 2, sqrt(k)) = 1 + sqrt(2)", None);
        says("sum(k = 0 .. 2, 1/3^k) > 13/9", Some(false));
    }

    #[test]
    fn values_at_table_angles_are_exact() {
        says("cos(pi/2) != 0", Some(false));
        says("sin(pi/6) = 1/2", Some(true));
        says("sin(pi/7) = 1/2", Some(false));
    }
}

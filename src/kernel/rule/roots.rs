//! `{roots x}`
//!
//! Goal `l <= r`, `l < r` or `l != r` where `r - l` is by normal form a product of
//! factors without a sign change and of a polynomial in the variable `x` alone,
//! with rational coefficients. Its sign changes and zeros between the ends of `x`
//! are counted by Sturm chains after the factors of even multiplicity are split
//! off, so touching at irrational points is no obstacle. Ends that are no
//! numbers are rounded outward; ends in other variables count as infinite.
//!
//! Sound: by Sturm's theorem; the polynomial has one sign between two
//! neighbouring zeros, and that of the first gap is that of its first
//! derivative there which is not zero (R31; Basu, Pollack, Roy, Algorithms in
//! Real Algebraic Geometry, 2.2.2). At a closed end the value is computed for a
//! strict goal and follows by continuity for a weak one.
//! Forgotten: a chain of a polynomial with multiple roots; a root at an end; a
//! factor whose sign is not known; a strict goal at a zero.

use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use super::Kernel;
use crate::kernel::evaluate::constant;
use crate::kernel::normal::{Normalizer, polynomial_in, product_term};
use crate::kernel::polynomial::{Exponent, Kind, Poly};
use crate::kernel::sequent::{End, Rel, Sequent};
use crate::kernel::sign::sign_of;
use crate::kernel::step::Fields;
use crate::kernel::sturm::{Signs, signs, value};
use crate::kernel::term::{Name, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let x = fields.word()?;
    fields.end()?;
    let goal = s.relation()?;
    let line = Line::of(s, x, &goal.difference(), k)?;
    if line.coefficients.is_empty() {
        return if goal.rel == Rel::Le { Ok(()) } else { refuse(Reason::NotProved, "both sides are equal") };
    }
    let is_positive = |end: &Option<(BigRational, bool)>| match end {
        Some((x, false)) => {
            let here = value(&line.coefficients, x);
            if goal.rel == Rel::Ne { !here.is_zero() } else { here.is_positive() }
        }
        _ => true,
    };
    let strict = line.outside_is_positive && is_positive(&line.low) && is_positive(&line.high);
    let found = if line.is_point() {
        let here = line.low.as_ref().map_or_else(BigRational::zero, |(x, _)| value(&line.coefficients, x));
        Signs { starts_positive: !here.is_negative(), changes: 0, has_zero: here.is_zero() }
    } else {
        line.signs()?
    };
    let holds = match goal.rel {
        Rel::Le => found.starts_positive && found.changes == 0,
        Rel::Lt => found.starts_positive && !found.has_zero && strict,
        Rel::Ne => !found.has_zero && strict,
        _ => return refuse(Reason::Condition, "roots do not prove equations"),
    };
    if holds { Ok(()) } else { refuse(Reason::NotProved, format!("{found:?} is not what {goal} needs")) }
}

/// A polynomial on the range of its variable.
pub(super) struct Line {
    /// The coefficients of 1, x, x^2, ..
    coefficients: Vec<BigRational>,
    /// Whether the factors left out are positive, not only not negative.
    pub(super) outside_is_positive: bool,
    low: Option<(BigRational, bool)>,
    high: Option<(BigRational, bool)>,
}

impl Line {
    /// The polynomial that has the sign of the term.
    pub(super) fn of(s: &Sequent, x: &Name, term: &Term, k: &Kernel) -> Checked<Line> {
        let Some(d) = s.declaration(x) else {
            return refuse(Reason::Name, format!("`{x}` is not declared"));
        };
        let n = Normalizer::new(Some(s));
        let (outside, sum) = n.poly(term)?.reduced(&n.work)?;
        k.spend(n.work.spent())?;
        // Whole powers of x belong to the polynomial.
        let is_power = |e: &Exponent| matches!(e, Exponent::Whole(n) if *n > 0);
        let (powers, others): (Vec<_>, Vec<_>) = outside
            .into_iter()
            .partition(|(a, e)| matches!(a.kind(), Kind::Variable(v) if v == x) && is_power(e));
        let sign = sign_of(s, &product_term(&BigRational::one(), &others));
        if !sign.is_non_negative() {
            return refuse(Reason::Condition, format!("a factor of {term} has no plain sign"));
        }
        let whole = sum.times(&Poly::single(BigRational::one(), powers), &n.work)?;
        let list = polynomial_in(&whole, x);
        let constants: Option<Vec<BigRational>> =
            list.and_then(|list| list.iter().map(Poly::as_constant).collect());
        let Some(coefficients) = constants else {
            return refuse(Reason::Condition, format!("{term} is no polynomial in `{x}` alone"));
        };
        let bits: u64 = coefficients.iter().map(|c| c.numer().bits() + c.denom().bits()).sum();
        k.spend((coefficients.len() as u64).pow(3).saturating_mul(1 + bits / 64))?;
        let (low, high) = (end(&d.domain.lower, false)?, end(&d.domain.upper, true)?);
        if let (Some((a, left)), Some((b, right))) = (&low, &high)
            && (a > b || a == b && (*left || *right))
        {
            return refuse(Reason::Condition, format!("the range of `{x}` is empty"));
        }
        Ok(Line { coefficients, outside_is_positive: sign.is_positive(), low, high })
    }

    fn is_point(&self) -> bool {
        matches!((&self.low, &self.high), (Some((a, _)), Some((b, _))) if a == b)
    }

    /// The signs inside the range.
    pub(super) fn signs(&self) -> Checked<Signs> {
        if self.coefficients.is_empty() || self.is_point() {
            return refuse(Reason::Condition, "no signs to be counted");
        }
        let place = |end: &Option<(BigRational, bool)>| end.as_ref().map(|(x, _)| x.clone());
        Ok(signs(&self.coefficients, place(&self.low).as_ref(), place(&self.high).as_ref()))
    }
}

/// A number at or outside an end, and whether it is excluded.
fn end(end: &Option<End>, up: bool) -> Checked<Option<(BigRational, bool)>> {
    let Some(end) = end.as_ref().filter(|e| e.term.free_variables().is_empty()) else { return Ok(None) };
    if let Some(q) = end.term.as_number() {
        return Ok(Some((q.clone(), end.open)));
    }
    let around = constant(&end.term, 64)?;
    let outward = if up { around.upper() } else { around.lower() };
    Ok(outward.and_then(|x| x.to_rational()).map(|q| (q, false)))
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn roots() {
        accepted("for all x : real in [-4, 4]: x^6 - 15*x^4 + 27*x^2 + 250 >= 7", "{roots x}");
        accepted("for all x : real in (-inf, inf): (x^2 - 2)^2*(x^2 + 1) >= 0", "{roots x}");
        accepted("for all x : real in (-inf, inf): x^4 + x + 1 > 0", "{roots x}");
        accepted("for all x : real in [0, inf): x^3 - 3*x + 2 >= 0", "{roots x}");
        accepted("for all x : real in (1, inf): x^3 - 3*x + 2 > 0", "{roots x}");
        accepted("for all x : real in (0, 1]: (x - 2)^2/x > 0", "{roots x}");
        accepted("for all x : real in [2, 2]: x^2 - 3*x >= -2", "{roots x}");
        accepted("for all x : real in [2, 3]: x^2 - 3 != 0", "{roots x}");
        accepted("for all x : real in (-inf, inf): x - x >= 0", "{roots x}");
        // Ends rounded outward, ends in other variables, factors with a sign.
        accepted("for all x : real in [0, pi/2]: (x - 2)^2 > 0", "{roots x}");
        accepted("for all y : real in [0, 1], x : real in [y, 2]: (x - 2)^2*exp(y) >= 0", "{roots x}");
        accepted("for all x : real in [0, 3]: x*(x - 2)^2/(1 + x) >= 0", "{roots x}");
    }

    #[test]
    fn refused() {
        rejected("for all x : real in [-4, 4]: x^6 - 15*x^4 + 27*x^2 + 250 >= 7.0001", "{roots x}");
        // A zero and a strict goal, inside and at a closed end.
        rejected("for all x : real in (-inf, inf): (x^2 - 2)^2 > 0", "{roots x}");
        rejected("for all x : real in [1, inf): x^3 - 3*x + 2 > 0", "{roots x}");
        rejected("for all x : real in [2, 3]: x^2 - 4 != 0", "{roots x}");
        rejected("for all x : real in [2, 2]: x^2 - 3*x > -2", "{roots x}");
        rejected("for all x : real in [2, 2]: x^2 - 3*x > -1", "{roots x}");
        // Odd multiplicity, and a root just outside the wrong end.
        rejected("for all x : real in [-1, 1]: (x - 1/3)^3 >= 0", "{roots x}");
        rejected("for all x : real in [-3, inf): x^3 - 3*x + 2 >= 0", "{roots x}");
        rejected("for all x : real in (-inf, inf): -x^2 >= 1", "{roots x}");
        // A factor without a sign, a coefficient that is no number.
        rejected("for all x : real in [-1, 1]: x^2/x >= 0", "{roots x}");
        rejected("for all x : real in [0, 1], y : real in [-1, 1]: y*x^2 >= 0", "{roots x}");
        rejected("for all x : real in [0, 1]: pi*x^2 - 3*x + 1 >= 0", "{roots x}");
        rejected("for all x : real in [0, 1], y : real in [0, 1]: y*(x + 1) > 0", "{roots x}");
        rejected("for all x : real in [0, 1]: x = x", "{roots x}");
        rejected("for all x : real in [2, 1]: x >= 5", "{roots x}");
        rejected("for all x : real in [0, 1]: x >= 0", "{roots y}");
    }
}

//! gamma, its logarithm, and the first two derivatives of that, for `x > 0`.
//!
//! All three rest on one fact. For `t > 0` the function `(t/2) coth(t/2)`, which is
//! `1 + sum over n of 2t^2/(t^2 + 4 pi^2 n^2)`, lies between any two consecutive partial
//! sums of its power series `sum of B_2k t^2k/(2k)!`, because each summand does (geometric
//! series in `-t^2`). lgamma, digamma and trigamma are Laplace integrals of it against
//! positive weights, so for `x > 0` each lies between any two consecutive partial sums of
//! its Stirling series (NIST DLMF 5.9.10, 5.11.1, 5.11.2, section 5.11(ii); Whittaker and
//! Watson, Modern Analysis, 12.31-12.33). Small arguments are shifted up first by
//! `gamma(x+1) = x gamma(x)`.

use super::super::Refusal;
use super::super::dyadic::Dyadic;
use super::super::interval::Interval;
use super::constants::{Constant, bernoulli};
use super::exponential::exp_thin;
use super::logarithm::log_thin;
use super::{decreasing, guarded, increasing, refined};

/// Adds `B_2k / divisor(k) * x^-power(k)` for `k = 1, 2, ..` to `head`, until the terms no
/// longer matter or no longer fall, and then the hull of 0 and the next term.
fn envelope(
    head: Interval,
    x: &Interval,
    first_power: i64,
    divisor: impl Fn(u64) -> u64,
    p: u32,
) -> Result<Interval, Refusal> {
    let square = x.mul(x, p);
    let mut power = x.powi(first_power, p)?;
    let mut sum = head;
    let mut last = i64::MAX;
    for k in 1.. {
        let numerator = Interval::from_rational(&bernoulli(k as usize), p).mul(&power, p);
        let term = numerator.div(&Interval::from(divisor(k) as i64), p)?;
        let top = term.abs().upper().map_or(i64::MAX, Dyadic::top);
        let reference = sum.abs().upper().map_or(0, Dyadic::top);
        if top >= last || top + i64::from(p) < reference {
            return Ok(sum.add(&term.hull(&Interval::zero()), p));
        }
        last = top;
        sum = sum.add(&term, p);
        power = power.div(&square, p)?;
    }
    Err(Refusal::TooLarge("terms of a Stirling series"))
}

/// How many steps bring a narrow interval to where the Stirling series has `p` bits.
fn steps(x: &Interval, p: u32) -> u64 {
    let least = u64::from(p / 4 + 2);
    match x.lower() {
        Some(a) if a.top() <= 32 => {
            let whole = a.floor_scaled(0).try_into().unwrap_or(0u64);
            least.saturating_sub(whole)
        }
        _ => 0,
    }
}

/// `x`, `x + 1`, .., `x + n - 1`.
fn run(x: &Interval, n: u64, p: u32) -> impl Iterator<Item = Interval> {
    (0..n as i64).map(move |i| x.add(&Interval::from(i), p))
}

/// lgamma of a narrow interval beyond [`steps`]:
/// `(x - 1/2) log x - x + log(2 pi)/2 + sum of B_2k / (2k (2k-1) x^(2k-1))`.
fn stirling(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let half = Interval::from(1).scale(-1);
    let head = x.sub(&half, p).mul(&log_thin(x, p), p).sub(x, p);
    let head = head.add(&log_thin(&Constant::Pi.enclose(p).scale(1), p).scale(-1), p);
    envelope(head, x, -1, |k| 2 * k * (2 * k - 1), p)
}

fn product(x: &Interval, n: u64, p: u32) -> Interval {
    run(x, n, p).fold(Interval::from(1), |product, y| product.mul(&y, p))
}

fn lgamma_thin(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let n = steps(x, p);
    let value = stirling(&x.add(&Interval::from(n as i64), p), p)?;
    Ok(if n == 0 { value } else { value.sub(&log_thin(&product(x, n, p), p), p) })
}

fn gamma_thin(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    // The exponent is about y log y for the shifted y, which is x or about p/4; its bits
    // before the point are lost to the result.
    let more = x.upper().map_or(0, |b| b.top().clamp(0, 40) as u32).max(p.ilog2()) + 8;
    let work = p + more;
    let n = steps(x, work);
    let shifted = stirling(&x.add(&Interval::from(n as i64), work), work)?;
    let value = increasing(&shifted, None, None, |x| Ok(exp_thin(x, p)))?;
    if n == 0 { Ok(value) } else { value.div(&product(x, n, work), p) }
}

/// `log x - 1/(2x) - sum of B_2k / (2k x^2k)`, shifted by `psi(x+1) = psi(x) + 1/x`.
fn digamma_thin(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let n = steps(x, p);
    let y = x.add(&Interval::from(n as i64), p);
    let one = Interval::from(1);
    let head = one.div(&y.scale(1), p)?.sub(&log_thin(&y, p), p);
    let mut value = envelope(head, &y, -2, |k| 2 * k, p)?.neg();
    for z in run(x, n, p) {
        value = value.sub(&one.div(&z, p)?, p);
    }
    Ok(value)
}

/// `1/x + 1/(2x^2) + sum of B_2k / x^(2k+1)`, shifted by `psi'(x+1) = psi'(x) - 1/x^2`.
fn trigamma_thin(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let n = steps(x, p);
    let y = x.add(&Interval::from(n as i64), p);
    let one = Interval::from(1);
    let square = y.mul(&y, p).scale(1);
    let head = one.div(&y, p)?.add(&one.div(&square, p)?, p);
    let mut value = envelope(head, &y, -3, |_| 1, p)?;
    for z in run(x, n, p) {
        value = value.add(&one.div(&z.mul(&z, p), p)?, p);
    }
    Ok(value)
}

/// Euler's constant, `-digamma(1)`.
pub(super) fn euler(p: u32) -> Interval {
    digamma_thin(&Interval::from(1), p).map_or_else(|_| Interval::whole(), |y| y.neg())
}

fn positive(x: &Interval, name: &'static str) -> Result<(), Refusal> {
    if x.is_certainly_positive() { Ok(()) } else { Err(Refusal::OutsideDomain(name)) }
}

/// Where gamma and lgamma have their minimum: at some `x0` with
/// `1.461632144968 < x0 < 1.461632144969` (NIST DLMF 5.4.19), as integers over 10^12.
const MINIMUM_AT: (i64, i64) = (1_461_632_144_968, 1_461_632_144_969);

/// `gamma(x0) > 0.885603194410888700`, over 10^18 (NIST DLMF 5.4.20).
const MINIMUM: i64 = 885_603_194_410_888_700;

/// The range of a function that falls up to `x0` and rises from there.
fn around_minimum(
    x: &Interval,
    least: impl Fn() -> Result<Interval, Refusal>,
    f: impl Fn(&Interval) -> Result<Interval, Refusal>,
) -> Result<Interval, Refusal> {
    let trillion = Interval::from(1_000_000_000_000);
    let before = Interval::from(MINIMUM_AT.0).div(&trillion, 64)?;
    let after = Interval::from(MINIMUM_AT.1).div(&trillion, 64)?;
    if x.as_point().is_some() {
        f(x)
    } else if before.sub(x, 64).is_certainly_nonnegative() {
        decreasing(x, None, None, f)
    } else if x.sub(&after, 64).is_certainly_nonnegative() {
        increasing(x, None, None, f)
    } else {
        // The minimum may be inside: it bounds below, the larger of the ends above.
        let end = |end: Option<&Dyadic>| match end {
            Some(e) => f(&Interval::point(e.clone())),
            None => Ok(Interval::whole()),
        };
        let upper = end(x.lower())?.max(&end(x.upper())?).upper().cloned();
        let lower = least()?.lower().cloned();
        Interval::new(lower, upper).ok_or(Refusal::TooLarge("precision"))
    }
}

fn minimum(p: u32) -> Result<Interval, Refusal> {
    Interval::from(MINIMUM).div(&Interval::from(1_000_000_000_000_000_000), p)
}

/// gamma: here on `x > 0`.
pub(super) fn gamma(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    positive(x, "gamma")?;
    guarded(p, |p| around_minimum(x, || minimum(p), |x| gamma_thin(x, p)))
}

/// lgamma: here on `x > 0`; it is 0 at 1 and 2.
pub(super) fn lgamma(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    positive(x, "lgamma")?;
    let at_point = |x: &Interval| {
        if *x == Interval::from(1) || *x == Interval::from(2) {
            return Ok(Interval::zero());
        }
        refined(p, |p| lgamma_thin(x, p))
    };
    Ok(around_minimum(x, || Ok(log_thin(&minimum(p + 8)?, p + 8)), at_point)?.round(p))
}

/// digamma: here on `x > 0`; increasing.
pub(super) fn digamma(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    positive(x, "digamma")?;
    let at_point = |x: &Interval| refined(p, |p| digamma_thin(x, p));
    Ok(increasing(x, None, None, at_point)?.round(p))
}

/// trigamma, the derivative of digamma: here on `x > 0`; decreasing to 0.
pub(super) fn trigamma(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    positive(x, "trigamma")?;
    guarded(p, |p| decreasing(x, None, Some(Interval::zero()), |x| trigamma_thin(x, p)))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_stirling_series_envelopes_where_it_is_poor() {
        // lgamma(1) = lgamma(2) = 0; at these arguments the least term is not small.
        for (x, width) in [(1, -6), (2, -13)] {
            let value = stirling(&Interval::from(x), 64).expect("positive");
            assert!(value.contains(&Interval::zero()), "{value:?}");
            assert!(value.abs().upper().is_some_and(|a| a.top() <= width), "{value:?}");
        }
    }
}

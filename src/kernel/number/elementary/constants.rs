//! Constants and Bernoulli numbers, remembered per thread.
//!
//! What is remembered is the floor of `c * 2^scale`, which depends on nothing but the
//! constant and the scale; so results do not depend on what was computed before.

use super::super::fixed::Fixed;
use super::super::interval::Interval;
use super::{exponential, gamma};
use num_bigint::BigInt;
use num_integer::Integer;
use num_rational::BigRational;
use num_traits::{One, Zero};
use std::cell::RefCell;

/// A named constant.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Constant {
    /// The circle constant.
    Pi,
    /// The base of the natural logarithm.
    E,
    /// Euler's constant, the limit of `1 + 1/2 + .. + 1/n - log n`.
    Euler,
    /// The natural logarithm of 2.
    Log2,
}

/// Scale and floor of each constant at the finest scale asked for so far.
type Known = [(u32, BigInt); 4];

thread_local! {
    static KNOWN: RefCell<Known> = const { RefCell::new([const { (0, BigInt::ZERO) }; 4]) };
    static BERNOULLI: RefCell<Vec<BigRational>> = const { RefCell::new(Vec::new()) };
}

impl Constant {
    /// The constant with ends of at most `p` bits.
    pub fn enclose(self, p: u32) -> Interval {
        self.fixed(p.saturating_add(4)).to_interval(p)
    }

    /// The constant on a grid, with an error of one unit.
    pub(super) fn fixed(self, scale: u32) -> Fixed {
        let slot = self as usize;
        let found = KNOWN.with_borrow(|known| {
            let (finest, floor) = &known[slot];
            (*finest >= scale).then(|| floor >> (finest - scale))
        });
        let floor = found.unwrap_or_else(|| {
            let fine = scale.next_multiple_of(64);
            let floor = self.floor(fine);
            let result = &floor >> (fine - scale);
            KNOWN.with_borrow_mut(|known| known[slot] = (fine, floor));
            result
        });
        Fixed::new(floor, 1, scale)
    }

    /// The floor of `c * 2^scale`: more bits are taken until both ends agree on it.
    fn floor(self, scale: u32) -> BigInt {
        let mut work = scale + 32;
        loop {
            let enclosure = self.compute(work);
            if let (Some(a), Some(b)) = (enclosure.lower(), enclosure.upper()) {
                let floor = a.floor_scaled(scale.into());
                if b.floor_scaled(scale.into()) == floor {
                    return floor;
                }
            }
            work += 64;
        }
    }

    fn compute(self, p: u32) -> Interval {
        match self {
            // Machin 1706: pi = 16 atan(1/5) - 4 atan(1/239).
            Constant::Pi => inverse_series(&[(16, 5), (-4, 239)], true, p),
            // 2 = (27/25)^9 (2400/2401) (4375/4374)^4, each factor (k+1)/(k-1) with
            // log((k+1)/(k-1)) = 2 atanh(1/k) for k = 26, 4801 (inverted), 8749.
            Constant::Log2 => inverse_series(&[(18, 26), (-2, 4801), (8, 8749)], false, p),
            Constant::E => exponential::exp_thin(&Interval::from(1), p),
            // digamma(1) = -euler, NIST DLMF 5.4.12.
            Constant::Euler => gamma::euler(p),
        }
    }
}

/// The sum of `c * atan(1/k)` (if `alternating`) or `c * atanh(1/k)` over the pairs `(c, k)`.
fn inverse_series(parts: &[(i64, u64)], alternating: bool, p: u32) -> Interval {
    let scale = p + 8;
    let (mut sum, mut err) = (BigInt::ZERO, 0u64);
    for &(factor, k) in parts {
        // Each floor loses less than one unit; the tail is below the last term, which is 0
        // units after the floor, so below one unit, since terms fall by k^2 > 2.
        let mut power = (BigInt::one() << scale) / k;
        let mut n = 1u64;
        while !power.is_zero() {
            let term = &power / n;
            let negative = alternating && n % 4 == 3;
            sum += term * if negative { -factor } else { factor };
            // The power is off by at most two units (1/(1-1/k^2) <= 2), the term by three.
            err += 3 * factor.unsigned_abs();
            power /= k * k;
            n += 2;
        }
        err += 3 * factor.unsigned_abs();
    }
    Fixed::new(sum, err, scale).to_interval(p)
}

/// The Bernoulli number `B_2k`, `k >= 1`.
///
/// From the tangent numbers `T_k`: `B_2k = (-1)^(k-1) 2k T_k / (4^k (4^k - 1))`
/// (NIST DLMF 24.15.4); these by the triangle of Brent and Harvey, "Fast computation of
/// Bernoulli, tangent and secant numbers" (2013), algorithm 2.
pub fn bernoulli(k: usize) -> BigRational {
    BERNOULLI.with_borrow_mut(|known| {
        if known.len() < k {
            *known = bernoulli_up_to((2 * k).max(32));
        }
        known[k - 1].clone()
    })
}

fn bernoulli_up_to(count: usize) -> Vec<BigRational> {
    let mut tangent = vec![BigInt::one(); count];
    for k in 1..count {
        tangent[k] = &tangent[k - 1] * k;
    }
    for k in 1..count {
        for j in k..count {
            tangent[j] = &tangent[j - 1] * (j - k) + &tangent[j] * (j - k + 2);
        }
    }
    let signed = tangent.into_iter().zip(1usize..).map(|(t, k)| {
        let four_k = BigInt::one() << (2 * k);
        let numerator = if k.is_even() { -t } else { t } * (2 * k);
        BigRational::new(numerator, &four_k * (&four_k - 1))
    });
    signed.collect()
}

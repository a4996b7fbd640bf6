//! Exact rational numbers: reading, rounding to integers, powers and roots.

use super::Refusal;
use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Pow, Signed, Zero};

/// Most digits a written number may have.
pub const MAX_DIGITS: usize = 10_000;
/// Largest size of a written decimal exponent.
pub const MAX_DECIMAL_EXPONENT: i64 = 5_000;
/// Most bits the numerator or the denominator of a power may have.
pub const MAX_POWER_BITS: u64 = 1 << 20;

/// Reads `12`, `-3/4`, `0.25` or `1.5e-3` as the rational number it denotes.
///
/// A sign may stand only at the front; `/` separates two plain integers and the
/// second must not be zero; a decimal point has digits on both sides.
pub fn read(text: &str) -> Result<BigRational, Refusal> {
    if text.bytes().filter(u8::is_ascii_digit).count() > MAX_DIGITS {
        return Err(Refusal::TooLarge("digits of a number"));
    }
    let (negative, body) = match text.strip_prefix('-') {
        Some(rest) => (true, rest),
        None => (false, text),
    };
    let value = match body.split_once('/') {
        Some((numerator, denominator)) => {
            let denominator = digits(denominator)?;
            if denominator.is_zero() {
                return Err(Refusal::OutsideDomain("division"));
            }
            BigRational::new(digits(numerator)?, denominator)
        }
        None => decimal(body)?,
    };
    Ok(if negative { -value } else { value })
}

/// Reads an unsigned decimal with optional fraction and exponent.
fn decimal(text: &str) -> Result<BigRational, Refusal> {
    let (significand, exponent) = match text.split_once(['e', 'E']) {
        Some((significand, exponent)) => (significand, decimal_exponent(exponent)?),
        None => (text, 0),
    };
    let (mantissa, places) = match significand.split_once('.') {
        Some((whole, fraction)) => {
            digits(whole)?;
            digits(fraction)?;
            (digits(&format!("{whole}{fraction}"))?, fraction.len() as i64)
        }
        None => (digits(significand)?, 0),
    };
    let shift = exponent - places;
    let ten_power = BigInt::from(10).pow(shift.unsigned_abs() as u32);
    Ok(if shift >= 0 {
        BigRational::from_integer(mantissa * ten_power)
    } else {
        BigRational::new(mantissa, ten_power)
    })
}

fn decimal_exponent(text: &str) -> Result<i64, Refusal> {
    let (sign, body) = match text.as_bytes().first() {
        Some(b'-') => (-1, &text[1..]),
        Some(b'+') => (1, &text[1..]),
        _ => (1, text),
    };
    let size = digits(body)?;
    match i64::try_from(size) {
        Ok(size) if size <= MAX_DECIMAL_EXPONENT => Ok(sign * size),
        _ => Err(Refusal::TooLarge("decimal exponent of a number")),
    }
}

/// Reads one or more ASCII digits and nothing else.
fn digits(text: &str) -> Result<BigInt, Refusal> {
    if text.is_empty() || !text.bytes().all(|b| b.is_ascii_digit()) {
        return Err(Refusal::NotANumber);
    }
    BigInt::parse_bytes(text.as_bytes(), 10).ok_or(Refusal::NotANumber)
}

/// The largest integer not above `x`.
pub fn floor(x: &BigRational) -> BigInt {
    x.floor().to_integer()
}

/// The smallest integer not below `x`.
pub fn ceil(x: &BigRational) -> BigInt {
    x.ceil().to_integer()
}

/// `base^n`. A zero base needs `n > 0`; the result may not pass [`MAX_POWER_BITS`].
pub fn power(base: &BigRational, n: i64) -> Result<BigRational, Refusal> {
    if base.is_zero() {
        return match n {
            1.. => Ok(BigRational::zero()),
            _ => Err(Refusal::OutsideDomain("power")),
        };
    }
    // +1 and -1 have one bit and never grow, so they are not limited by `n`.
    if base.numer().abs().is_one() && base.denom().is_one() {
        let odd_negative = base.is_negative() && n % 2 != 0;
        return Ok(if odd_negative { -BigRational::one() } else { BigRational::one() });
    }
    let bits = base.numer().bits().max(base.denom().bits());
    let size = n.unsigned_abs();
    if bits.saturating_mul(size) > MAX_POWER_BITS {
        return Err(Refusal::TooLarge("bits of a power"));
    }
    let positive = Pow::pow(base.clone(), size as u32);
    Ok(if n < 0 { positive.recip() } else { positive })
}

/// The real `n`-th root of `x` if it exists and is rational.
pub fn root(x: &BigRational, n: u32) -> Option<BigRational> {
    if n == 0 || (n.is_multiple_of(2) && x.is_negative()) {
        return None;
    }
    let root = BigRational::new(x.numer().nth_root(n), x.denom().nth_root(n));
    // A wrong candidate is small enough to be raised: it has at most bits/n bits.
    (power(&root, i64::from(n)).ok()? == *x).then_some(root)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn q(n: i64, d: i64) -> BigRational {
        BigRational::new(n.into(), d.into())
    }

    #[test]
    fn numbers_as_people_write_them() {
        for (text, value) in [
            ("12", q(12, 1)),
            ("-3/4", q(-3, 4)),
            ("6/4", q(3, 2)),
            ("0.25", q(1, 4)),
            ("1.5e-3", q(3, 2000)),
            ("2E+2", q(200, 1)),
            ("-0.0", q(0, 1)),
            ("007.50", q(15, 2)),
        ] {
            assert_eq!(read(text), Ok(value), "{text}");
        }
    }

    #[test]
    fn what_is_not_a_number_is_refused() {
        for text in [
            "", "-", "+1", "1.", ".5", "1e", "1e+", "1/2/3", "1/-2", "--1", "1 ", "0x1", "1.2/3", "1_000",
            "e5", "1.e5", "٣", "inf", "NaN", "1.-5", "1e1.5",
        ] {
            assert_eq!(read(text), Err(Refusal::NotANumber), "{text:?}");
        }
        assert_eq!(read("1/0"), Err(Refusal::OutsideDomain("division")));
        assert_eq!(read("1e5001"), Err(Refusal::TooLarge("decimal exponent of a number")));
        assert_eq!(
            read("1e-99999999999999999999999999"),
            Err(Refusal::TooLarge("decimal exponent of a number"))
        );
        assert_eq!(read(&"1".repeat(10_001)), Err(Refusal::TooLarge("digits of a number")));
        assert!(read(&"1".repeat(10_000)).is_ok());
        assert!(read("1e5000").is_ok() && read("1e-5000").is_ok());
    }

    #[test]
    fn floor_and_ceil() {
        assert_eq!((floor(&q(-7, 2)), ceil(&q(-7, 2))), ((-4).into(), (-3).into()));
        assert_eq!((floor(&q(6, 2)), ceil(&q(6, 2))), (3.into(), 3.into()));
    }

    #[test]
    fn powers() {
        assert_eq!(power(&q(-2, 3), 3), Ok(q(-8, 27)));
        assert_eq!(power(&q(2, 3), -2), Ok(q(9, 4)));
        assert_eq!(power(&q(5, 1), 0), Ok(q(1, 1)));
        assert_eq!(power(&q(0, 1), 2), Ok(q(0, 1)));
        assert_eq!(power(&q(0, 1), 0), Err(Refusal::OutsideDomain("power")));
        assert_eq!(power(&q(0, 1), -1), Err(Refusal::OutsideDomain("power")));
        assert_eq!(power(&q(-1, 1), i64::MIN + 1), Ok(q(-1, 1)));
        assert_eq!(power(&q(2, 1), i64::MAX), Err(Refusal::TooLarge("bits of a power")));
        assert_eq!(power(&q(2, 1), i64::MIN), Err(Refusal::TooLarge("bits of a power")));
    }

    #[test]
    fn roots() {
        assert_eq!(root(&q(9, 4), 2), Some(q(3, 2)));
        assert_eq!(root(&q(-8, 27), 3), Some(q(-2, 3)));
        assert_eq!(root(&q(2, 1), 2), None);
        assert_eq!(root(&q(-4, 1), 2), None);
        assert_eq!(root(&q(4, 1), 0), None);
        assert_eq!(root(&q(0, 1), 2), Some(q(0, 1)));
        assert_eq!(root(&q(1, 1), u32::MAX), Some(q(1, 1)));
        assert_eq!(root(&q(7, 1), u32::MAX), None);
    }
}

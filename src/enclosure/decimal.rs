//! Decimals: reading is checked here, writing is rounded outward.

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{Pow, Signed, Zero};

use super::mpfr::{BigFloat, BigInterval};
use super::rounding::{End, Toward};

/// Exponents of base 10 up to this size are written out with zeros.
const PLAIN_EXPONENT: i32 = 6;

/// Whether a text is a decimal number: an optional sign, digits with at most
/// one point, and an optional exponent of base 10 with at most nine digits.
#[must_use]
pub(super) fn is_decimal(text: &str) -> bool {
    let unsigned = text.strip_prefix(['+', '-']).unwrap_or(text);
    let (number, exponent) = match unsigned.split_once(['e', 'E']) {
        Some((number, exponent)) => (number, Some(exponent)),
        None => (unsigned, None),
    };
    let all_digits = |part: &str| part.bytes().all(|c| c.is_ascii_digit());
    let (whole, fraction) = number.split_once('.').unwrap_or((number, ""));
    let number_is_good =
        all_digits(whole) && all_digits(fraction) && !(whole.is_empty() && fraction.is_empty());
    number_is_good
        && exponent.is_none_or(|exponent| {
            let digits = exponent.strip_prefix(['+', '-']).unwrap_or(exponent);
            (1..=9).contains(&digits.len()) && all_digits(digits)
        })
}

impl BigFloat {
    /// The number in decimals with so many significant digits, rounded in the
    /// given direction; `inf` and `-inf` for the infinities.
    #[must_use]
    pub fn to_decimal(&self, digits: usize, toward: Toward) -> String {
        let sign = if self.sign().is_lt() { "-" } else { "" };
        match self.decimal_digits(digits, toward) {
            Some((digits, exponent)) => format!("{sign}{}", placed(&digits, exponent)),
            None if self.is_infinite() => format!("{sign}inf"),
            None => "0".to_string(),
        }
    }
}

/// A rational number in decimals with so many significant digits, rounded in the
/// given direction.
#[must_use]
pub fn decimal(value: &BigRational, digits: usize, toward: Toward) -> String {
    if value.is_zero() {
        return "0".to_string();
    }
    let digits = i32::try_from(digits.max(1)).unwrap_or(i32::MAX);
    let length = |n: &BigInt| i32::try_from(n.magnitude().to_string().len()).unwrap_or(i32::MAX);
    // The value lies between 10^(most - 2) and 10^most.
    let most = length(value.numer()) - length(value.denom()) + 1;
    let scaled = |places: i32| {
        let power = BigInt::from(10).pow(places.unsigned_abs());
        let scaled = if places < 0 { value / power } else { value * power };
        match toward {
            Toward::Down => scaled.floor(),
            Toward::Up => scaled.ceil(),
        }
        .to_integer()
    };
    let mut exponent = most;
    let mut whole = scaled(digits - exponent);
    if length(&whole) < digits {
        exponent -= 1;
        whole = scaled(digits - exponent);
    }
    // Rounding away from 0 may have carried into a new digit.
    let carried = length(&whole) - digits;
    let sign = if value.is_negative() { "-" } else { "" };
    format!("{sign}{}", placed(&whole.magnitude().to_string(), exponent + carried))
}

/// Digits with a point before the first, times a power of ten, as people write it.
fn placed(digits: &str, exponent: i32) -> String {
    let digits = match digits.trim_end_matches('0') {
        "" => "0",
        kept => kept,
    };
    let count = i32::try_from(digits.len()).unwrap_or(i32::MAX);
    if exponent <= -PLAIN_EXPONENT || exponent > count.max(PLAIN_EXPONENT) {
        let (first, rest) = digits.split_at(1);
        let point = if rest.is_empty() { "" } else { "." };
        return format!("{first}{point}{rest}e{}", exponent - 1);
    }
    if exponent <= 0 {
        return format!("0.{}{digits}", "0".repeat(exponent.unsigned_abs() as usize));
    }
    let places = exponent.unsigned_abs() as usize;
    if count <= exponent {
        return format!("{digits}{}", "0".repeat(places - digits.len()));
    }
    format!("{}.{}", &digits[..places], &digits[places..])
}

impl BigInterval {
    /// Both ends in decimals with so many significant digits, the lower
    /// rounded down and the upper rounded up; nothing if empty.
    #[must_use]
    pub fn to_decimals(&self, digits: usize) -> Option<(String, String)> {
        (!self.is_empty())
            .then(|| (self.lo().to_decimal(digits, Toward::Down), self.hi().to_decimal(digits, Toward::Up)))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::enclosure::mpfr::Bits;

    fn written(text: &str, digits: usize) -> (String, String) {
        BigInterval::from_decimal(text, Bits::new(200))
            .and_then(|x| x.to_decimals(digits))
            .unwrap_or_else(|| panic!("not read: {text}"))
    }

    fn pair(lo: &str, hi: &str) -> (String, String) {
        (lo.to_string(), hi.to_string())
    }

    #[test]
    fn the_lower_end_is_rounded_down_and_the_upper_up() {
        assert_eq!(written("0.1", 3), pair("0.0999", "0.101"));
        assert_eq!(written("1.23456", 3), pair("1.23", "1.24"));
        assert_eq!(written("-1.23456", 3), pair("-1.24", "-1.23"));
        assert_eq!(written("999.5", 3), pair("999", "1000"));
        assert_eq!(written("0.5", 9), pair("0.5", "0.5"));
        assert_eq!(written("-120", 5), pair("-120", "-120"));
    }

    #[test]
    fn large_and_small_numbers_have_an_exponent() {
        assert_eq!(written("12345678", 3), pair("1.23e7", "1.24e7"));
        assert_eq!(written("123456", 6), pair("123456", "123456"));
        assert_eq!(written("5e300", 1), pair("4e300", "6e300"));
        assert_eq!(written("-2.5e-9", 4), pair("-2.501e-9", "-2.499e-9"));
    }

    #[test]
    fn rational_numbers_are_rounded_like_their_enclosures_or_stay_exact() {
        let of = |n: i64, d: i64, digits| {
            let q = BigRational::new(n.into(), d.into());
            (decimal(&q, digits, Toward::Down), decimal(&q, digits, Toward::Up))
        };
        assert_eq!(of(1, 25, 7), pair("0.04", "0.04"));
        assert_eq!(of(1, 3, 3), pair("0.333", "0.334"));
        assert_eq!(of(-1, 3, 3), pair("-0.334", "-0.333"));
        assert_eq!(of(9999, 10, 3), pair("999", "1000"));
        assert_eq!(of(-9999, 10, 3), pair("-1000", "-999"));
        assert_eq!(of(99, 100, 1), pair("0.9", "1"));
        assert_eq!(of(123_456_789, 1, 3), pair("1.23e8", "1.24e8"));
        assert_eq!(of(1, 8_000_000, 2), pair("1.2e-7", "1.3e-7"));
        assert_eq!(of(0, 1, 2), pair("0", "0"));
        for (n, d) in [(22, 7), (1, 99), (98_765, 4321), (7, 80_000_003), (-355, 113)] {
            let q = BigRational::new(n.into(), d.into());
            let enclosed = BigInterval::from_rational(&q, Bits::new(200)).to_decimals(9);
            assert_eq!(enclosed, Some(of(n, d, 9)), "{n}/{d}");
        }
    }

    #[test]
    fn infinities_and_zero() {
        let whole = BigInterval::whole(Bits::default());
        assert_eq!(whole.to_decimals(5), Some(pair("-inf", "inf")));
        assert_eq!(written("0", 5), pair("0", "0"));
        assert_eq!(BigInterval::empty(Bits::default()).to_decimals(5), None);
    }

    #[test]
    fn what_is_no_decimal_is_refused() {
        for text in
            ["", ".", "-", "1e", "1e+", "inf", "nan", "1_0", "0x1", "1.2.3", " 1", "1e1234567890", "@inf@"]
        {
            assert!(!is_decimal(text), "accepted: {text}");
        }
        for text in ["1", "-.5", "+1.", "1e5", "1.25E-3", "1e+999999999"] {
            assert!(is_decimal(text), "refused: {text}");
        }
    }
}

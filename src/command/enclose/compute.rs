//! The enclosure itself: precision is raised until the answer is as narrow as asked.

use num_bigint::BigInt;
use num_rational::BigRational;

use crate::enclosure::{BigInterval, Bits, Definedness, Toward, decimal};
use crate::expression::{End, NoValue, Ranges, Sort, Substitution, Term, enclose};

use super::exact;
use super::request::Question;

/// What is known of an expression on a box.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Answer {
    /// It is certainly defined at no point.
    Nowhere,
    /// Every value lies between two decimals (or infinities).
    Within {
        /// At most every value.
        lo: String,
        /// At least every value.
        hi: String,
        /// Whether it is certainly defined at every point.
        everywhere: bool,
    },
}

/// Encloses the expression: exactly, apart from the decimals, where all is rational;
/// at a point with a relative width of at most 10^-`digits`, and until both ends lie
/// between the same two decimals; on a box until more precision no longer changes the decimals.
/// Where that cannot be had (a value that is 0 or a short decimal but not visibly
/// so, an operation that is discontinuous there), the best enclosure found is the answer.
///
/// # Errors
/// If a range is empty or undefined, or the expression has no value that can be enclosed.
pub fn answer(question: &Question, digits: u32) -> Result<Answer, String> {
    let is_point = question.ranges.iter().all(|(_, lower, upper)| lower == upper);
    // Points are put in as terms, so that rational parts stay exact.
    let mut points = Substitution::new();
    for (name, lower, upper) in &question.ranges {
        if let (End::Finite(value), true) = (lower, lower == upper) {
            points.insert(name.clone(), value.clone());
        }
    }
    let term = points.apply(&question.term);
    if let Some((lo, hi)) = exact::range(&term, &question.ranges) {
        let digits = written(digits);
        let (lo, hi) = (decimal(&lo, digits, Toward::Down), decimal(&hi, digits, Toward::Up));
        return Ok(Answer::Within { lo, hi, everywhere: true });
    }
    let first = digits.saturating_mul(10) / 3 + 72;
    let last = first.saturating_mul(4).max(4096);
    let mut bits = first;
    let mut before: Option<Answer> = None;
    loop {
        let found = at_precision(&term, question, Bits::new(bits), digits)?;
        let settled = match &found.answer {
            Answer::Nowhere => true,
            Answer::Within { everywhere, .. } if is_point => *everywhere && found.narrow,
            _ => before.as_ref() == Some(&found.answer),
        };
        if settled || bits >= last {
            return Ok(found.answer);
        }
        before = Some(found.answer);
        bits = bits.saturating_mul(2).min(last);
    }
}

struct Found {
    answer: Answer,
    /// Whether more precision would not bring the decimals closer to a single value.
    narrow: bool,
}

/// Two digits more than asked for: rounding outward then costs a tenth of the width allowed.
fn written(digits: u32) -> usize {
    digits as usize + 2
}

fn at_precision(term: &Term, question: &Question, bits: Bits, digits: u32) -> Result<Found, String> {
    let mut ranges = Ranges::default();
    for (name, lower, upper) in &question.ranges {
        let (least, most) = (side(lower, bits)?, side(upper, bits)?);
        let range = least
            .zip(most)
            .filter(|(least, most)| least.is_possibly_at_most(most) || lower == upper)
            .and_then(|(least, most)| BigInterval::new(least.lo().clone(), most.hi().clone()));
        let range = range
            .ok_or_else(|| format!("the range of `{name}` is empty: its ends are in the wrong order"))?;
        ranges.push(name.clone(), range, Sort::Real);
    }
    let mut defined = Definedness::Continuous;
    let value =
        enclose(term, &ranges, bits, &mut defined).map_err(|why: NoValue| format!("no enclosure: {why}"))?;
    if defined.is_nowhere() {
        return Ok(Found { answer: Answer::Nowhere, narrow: true });
    }
    Ok(match value.to_decimals(written(digits)) {
        None => Found { answer: Answer::Nowhere, narrow: true },
        Some((lo, hi)) => {
            let narrow = is_narrow(&value, digits, bits);
            Found { answer: Answer::Within { lo, hi, everywhere: defined.is_everywhere() }, narrow }
        }
    })
}

/// One end of a range; nothing if it is infinite on the wrong side.
fn side(end: &End, bits: Bits) -> Result<Option<BigInterval>, String> {
    let term = match end {
        End::Finite(term) => term,
        // An enclosure with infinite ends stands for the infinity: only its outer end is used.
        _ => return Ok(Some(BigInterval::whole(bits))),
    };
    let mut defined = Definedness::Continuous;
    let value: BigInterval = enclose(term, &Ranges::default(), bits, &mut defined)
        .map_err(|why| format!("end of a range: {why}"))?;
    if !defined.is_everywhere() {
        return Err(format!("the end `{term}` of a range is not shown to be defined"));
    }
    Ok((!value.is_empty()).then_some(value))
}

fn is_narrow(value: &BigInterval, digits: u32, bits: Bits) -> bool {
    if value.is_point() {
        return true;
    }
    let places = written(digits);
    let apart = |toward| value.lo().to_decimal(places, toward) != value.hi().to_decimal(places, toward);
    if apart(Toward::Down) || apart(Toward::Up) {
        return false;
    }
    let width = BigInterval::point(value.width_upper());
    let least = BigInterval::point(value.mignitude());
    let power = BigInt::from(10).pow(digits + 1);
    let allowed = least.times(&BigInterval::from_rational(&BigRational::new(1.into(), power), bits));
    value.is_bounded() && width.is_certainly_at_most(&allowed)
}

#[cfg(test)]
mod tests {
    use super::super::request::{read, split_range};
    use super::*;

    fn enclosed(expression: &str, ranges: &[&str], digits: u32) -> Result<Answer, String> {
        let ranges: Vec<_> = ranges.iter().map(|text| split_range(text).unwrap()).collect();
        answer(&read(expression, &ranges)?, digits)
    }

    fn within(lo: &str, hi: &str, everywhere: bool) -> Result<Answer, String> {
        Ok(Answer::Within { lo: lo.into(), hi: hi.into(), everywhere })
    }

    #[test]
    fn points_are_as_narrow_as_asked() {
        // Abramowitz and Stegun, table 1.1: e = 2.71828 18284 59045 23536..., pi = 3.14159 26535 89793...
        assert_eq!(enclosed("exp(1)", &[], 8), within("2.718281828", "2.718281829", true));
        assert_eq!(enclosed("x", &["x=pi"], 6), within("3.1415926", "3.1415927", true));
        assert_eq!(enclosed("3*x - 1", &["x=1/3"], 15), within("0", "0", true));
        assert_eq!(enclosed("floor(3*x)", &["x=1/3"], 15), within("1", "1", true));
        // Almost all digits cancel: exp(x) - 1 - x is about x^2/2.
        assert_eq!(enclosed("exp(x) - 1 - x", &["x=1e-100"], 5), within("5e-201", "5.000001e-201", true));
    }

    #[test]
    fn boxes_get_the_exact_range_of_one_operation() {
        assert_eq!(enclosed("x^2", &["x=[-0.1, 0.2]"], 5), within("0", "0.04", true));
        assert_eq!(enclosed("x", &["x=0.04"], 5), within("0.04", "0.04", true));
        assert_eq!(enclosed("x/3", &["x=[0.1, 1]"], 3), within("0.033333", "0.33334", true));
        assert_eq!(enclosed("exp(x)", &["x=[-inf, 0]"], 5), within("0", "1", true));
        // The upper end is close to pi, where the sine is about the distance to pi,
        // 3.14159265358979323846264338... - 3.1415926535897932384626.
        assert_eq!(
            enclosed("sin(x)", &["x=[3, 3.1415926535897932384626]"], 2),
            within("4.338e-23", "0.1412", true)
        );
    }

    #[test]
    fn definedness_is_told() {
        assert_eq!(enclosed("log(x)", &["x=[0, 1]"], 5), within("-inf", "0", false));
        assert_eq!(enclosed("log(x)", &["x=[-2, -1]"], 5), Ok(Answer::Nowhere));
        assert_eq!(enclosed("1/x", &["x=0"], 5), Ok(Answer::Nowhere));
        assert!(enclosed("x", &["x=[1, 0]"], 5).unwrap_err().contains("empty"));
        assert!(enclosed("x", &["x=[1/0, 2]"], 5).is_err());
    }
}

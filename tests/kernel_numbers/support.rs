//! Conversions, deterministic random numbers, and the one check.

use boundwright::kernel::number::{Dyadic, Function, Interval, apply};
use num_bigint::BigInt;
use rug::Float;
use rug::ops::Pow;

/// A deterministic stream (splitmix64, Steele, Lea, Flood 2014).
pub struct Stream(pub u64);

impl Stream {
    pub fn bits(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let z = (self.0 ^ (self.0 >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        let z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// A number in `[a, b]` with 53 random bits.
    pub fn between(&mut self, a: f64, b: f64) -> f64 {
        a + (b - a) * ((self.bits() >> 11) as f64 / (1u64 << 53) as f64)
    }

    /// A positive number whose binary logarithm is spread over `[a, b]`.
    pub fn magnitude(&mut self, a: i32, b: i32) -> f64 {
        let k = a + (self.bits() % (b - a + 1) as u64) as i32;
        self.between(1.0, 2.0) * 2f64.powi(k)
    }
}

/// The dyadic with exactly that value.
pub fn dyadic(x: &Float) -> Dyadic {
    let (mantissa, exponent) = x.to_integer_exp().expect("finite");
    let mantissa: BigInt = mantissa.to_string().parse().expect("integer");
    Dyadic::new(mantissa, exponent.into()).expect("in range")
}

pub fn point(x: f64) -> Interval {
    Interval::point(dyadic(&Float::with_val(53, x)))
}

/// MPFR's value at `q` bits.
pub fn reference(f: Function, x: &[Float], q: u32) -> Option<Float> {
    let a = x[0].clone();
    let value = match f {
        Function::Exp => Float::with_val(q, a.exp_ref()),
        Function::Log => Float::with_val(q, a.ln_ref()),
        Function::Log2 => Float::with_val(q, a.log2_ref()),
        Function::Sqrt => Float::with_val(q, a.sqrt_ref()),
        Function::Abs => Float::with_val(q, a.abs_ref()),
        Function::Min => Float::with_val(q, a.min_ref(&x[1])),
        Function::Max => Float::with_val(q, a.max_ref(&x[1])),
        Function::Floor => Float::with_val(q, a.floor_ref()),
        Function::Ceil => Float::with_val(q, a.ceil_ref()),
        Function::Sin => Float::with_val(q, a.sin_ref()),
        Function::Cos => Float::with_val(q, a.cos_ref()),
        Function::Tan => Float::with_val(q, a.tan_ref()),
        Function::Asin => Float::with_val(q, a.asin_ref()),
        Function::Acos => Float::with_val(q, a.acos_ref()),
        Function::Atan => Float::with_val(q, a.atan_ref()),
        Function::Sinh => Float::with_val(q, a.sinh_ref()),
        Function::Cosh => Float::with_val(q, a.cosh_ref()),
        Function::Tanh => Float::with_val(q, a.tanh_ref()),
        Function::Asinh => Float::with_val(q, a.asinh_ref()),
        Function::Acosh => Float::with_val(q, a.acosh_ref()),
        Function::Atanh => Float::with_val(q, a.atanh_ref()),
        Function::Gamma => Float::with_val(q, a.gamma_ref()),
        Function::Lgamma => Float::with_val(q, a.ln_gamma_ref()),
        Function::Digamma => Float::with_val(q, a.digamma_ref()),
        Function::Erf => Float::with_val(q, a.erf_ref()),
        Function::Erfc => Float::with_val(q, a.erfc_ref()),
        _ => return None,
    };
    value.is_finite().then_some(value)
}

/// The two neighbours, at its own precision, of a value rounded to nearest.
fn neighbours(value: &Float) -> (Dyadic, Dyadic) {
    let (mut below, mut above) = (value.clone(), value.clone());
    below.next_down();
    above.next_up();
    (dyadic(&below), dyadic(&above))
}

/// Asserts that an enclosure contains a value known to nearest, with relative width at
/// most `2^-bits`.
pub fn check_value(what: &str, enclosure: &Interval, value: &Float, bits: i32) {
    let (below, above) = neighbours(value);
    let lower = enclosure.lower().unwrap_or_else(|| panic!("{what}: no lower end"));
    let upper = enclosure.upper().unwrap_or_else(|| panic!("{what}: no upper end"));
    assert!(*lower <= above && below <= *upper, "{what}: {value} is outside {enclosure:?}");
    if value.is_zero() {
        return;
    }
    let width = upper.add(&lower.neg(), 64, boundwright::kernel::number::Toward::Up).expect("finite");
    let size = value.clone().abs() * Float::with_val(64, 2).pow(-bits);
    assert!(width <= dyadic(&size), "{what}: too wide for {bits} bits: {enclosure:?} around {value}");
}

/// Asserts containment and tightness of a function at a point.
pub fn check(f: Function, arguments: &[Float], p: u32) {
    let what = format!("{}({arguments:?}) at {p} bits", f.name());
    let boxes: Vec<Interval> = arguments.iter().map(|x| Interval::point(dyadic(x))).collect();
    let enclosure = apply(f, &boxes, p).unwrap_or_else(|refusal| panic!("{what}: {refusal}"));
    let Some(value) = reference(f, arguments, p + 80) else {
        panic!("{what}: no reference value");
    };
    check_value(&what, &enclosure, &value, p as i32 - 4);
}

/// [`check`] at a double.
pub fn check_f64(f: Function, x: f64, p: u32) {
    check(f, &[Float::with_val(53, x)], p);
}

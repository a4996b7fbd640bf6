//! Values at points: drawn at random, and where it hurts.

use super::support::*;
use boundwright::kernel::number::Function::{self, *};
use rug::Float;
use std::f64::consts::{FRAC_1_SQRT_2, FRAC_PI_2, FRAC_PI_4, SQRT_2};

const PRECISIONS: [u32; 4] = [32, 64, 100, 200];

fn sweep(f: Function, count: usize, mut draw: impl FnMut(&mut Stream) -> f64) {
    let mut stream = Stream(f as u64 + 1);
    for i in 0..count {
        check_f64(f, draw(&mut stream), PRECISIONS[i % PRECISIONS.len()]);
    }
    for _ in 0..3 {
        check_f64(f, draw(&mut stream), 1000);
    }
}

#[test]
fn exponential_family() {
    for f in [Exp, Sinh, Cosh, Tanh] {
        sweep(f, 200, |s| s.between(-40.0, 40.0));
        sweep(f, 200, |s| s.magnitude(-60, 3) * if s.bits() & 1 == 0 { 1.0 } else { -1.0 });
        for x in [0.5, 1.0, -1.0, 0.999999, 1e-300, -1e-300, 700.0, -700.0, 1e6] {
            check_f64(f, x, 64);
            check_f64(f, x, 300);
        }
    }
    check_f64(Exp, 1e6, 64);
    check_f64(Exp, -1e6, 2000);
}

#[test]
fn logarithmic_family() {
    for f in [Log, Log2] {
        sweep(f, 200, |s| s.magnitude(-1000, 1000));
        sweep(f, 200, |s| 1.0 + s.magnitude(-52, -2) * if s.bits() & 1 == 0 { 1.0 } else { -0.5 });
        for x in [0.5, FRAC_1_SQRT_2, SQRT_2, 0.7, 1.41, 1e300, 1e-300, 3.0] {
            check_f64(f, x, 64);
        }
    }
    for f in [Asinh, Atanh] {
        sweep(f, 200, |s| s.magnitude(-80, -1) * if s.bits() & 1 == 0 { 1.0 } else { -1.0 });
    }
    sweep(Asinh, 200, |s| s.magnitude(-3, 1000));
    sweep(Acosh, 200, |s| 1.0 + s.magnitude(-50, 500));
    sweep(Atanh, 200, |s| 1.0 - s.magnitude(-50, -1) / 2.0);
    check_f64(Log, 1.0, 64);
    check_f64(Acosh, 1.0, 64);
}

#[test]
fn circular_family() {
    for f in [Sin, Cos, Tan, Atan] {
        sweep(f, 200, |s| s.between(-20.0, 20.0));
        sweep(f, 200, |s| s.magnitude(-80, 300) * if s.bits() & 1 == 0 { 1.0 } else { -1.0 });
        for x in [1e300, -1e300, 1e-300, FRAC_PI_4, 1.0, 0.5] {
            check_f64(f, x, 64);
        }
        // The doubles nearest to multiples of pi/2; 5.319372648326541416707296656673541083813475031793921822105998164685e255
        // is the double closest, relatively, to a multiple of pi/2 (Muller, Elementary
        // Functions, chapter "Range reduction": 6381956970095103 * 2^797).
        for k in 1..200 {
            let x = k as f64 * FRAC_PI_2;
            check_f64(f, x, 64);
            check_f64(f, -x, 53);
        }
        check(f, &[Float::with_val(53, 6381956970095103u64) << 797], 64);
        // pi/2 to 300 bits: the value next to it is 2^-300 away.
        let close = Float::with_val(300, rug::float::Constant::Pi) / 2u32;
        for p in [64, 300] {
            check(f, std::slice::from_ref(&close), p);
        }
    }
    for f in [Asin, Acos] {
        sweep(f, 200, |s| s.between(-1.0, 1.0));
        sweep(f, 100, |s| s.magnitude(-80, -1));
        sweep(f, 100, |s| 1.0 - s.magnitude(-50, -2));
        sweep(f, 100, |s| -1.0 + s.magnitude(-50, -2));
        for x in [0.5, -0.5, 1.0, -1.0] {
            check_f64(f, x, 64);
        }
    }
    for f in [Sin, Tan, Asin, Atan, Sinh, Tanh, Asinh, Atanh, Erf] {
        check_f64(f, 0.0, 64);
    }
}

#[test]
fn gamma_family() {
    for f in [Gamma, Lgamma, Digamma] {
        sweep(f, 100, |s| s.between(1e-3, 30.0));
        sweep(f, 60, |s| s.magnitude(-60, 10));
        for x in [0.5, 1.5, 2.5, 1e-300, 170.5, 1.4616321449683623, 1.4616321449683625, 1000.0] {
            check_f64(f, x, 64);
        }
    }
    for f in [Lgamma, Digamma] {
        sweep(f, 30, |s| s.magnitude(30, 1000));
        // Zeros of lgamma, and what a double can come near to.
        for x in [1.0, 2.0, 1.0 + f64::EPSILON, 2.0 - f64::EPSILON, 1e300] {
            check_f64(f, x, 64);
        }
    }
    check_f64(Gamma, 1e7 + 0.5, 64);
}

#[test]
fn error_functions() {
    sweep(Erf, 200, |s| s.between(-8.0, 8.0));
    sweep(Erf, 100, |s| s.magnitude(-80, 4));
    sweep(Erfc, 200, |s| s.between(-8.0, 30.0));
    sweep(Erfc, 100, |s| s.magnitude(-80, 8));
    for x in [0.5, 6.9, 7.0, 7.5, 8.0, 8.2, 8.9, 9.5, 26.0, 1000.0] {
        for p in [32, 53, 64, 80, 128, 500] {
            check_f64(Erfc, x, p);
            check_f64(Erf, x, p);
        }
    }
}

#[test]
fn simple_functions() {
    sweep(Sqrt, 300, |s| s.magnitude(-1000, 1000));
    for f in [Floor, Ceil, Abs] {
        sweep(f, 100, |s| s.between(-100.0, 100.0));
    }
    let mut stream = Stream(5);
    for f in [Min, Max] {
        for _ in 0..50 {
            let (x, y) = (stream.between(-2.0, 2.0), stream.between(-2.0, 2.0));
            check(f, &[Float::with_val(53, x), Float::with_val(53, y)], 64);
        }
    }
}

#[test]
fn four_thousand_bits() {
    for f in [Exp, Log, Sin, Cos, Tan, Atan, Sinh, Tanh, Asinh, Gamma, Lgamma, Digamma, Erf, Erfc] {
        check_f64(f, 2.6875, 4096);
    }
}

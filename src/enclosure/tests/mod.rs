//! Tests of the enclosures by a second road: exact rationals for arithmetic,
//! MPFR at single points for functions on boxes, and hulls of small pieces
//! for tightness.

mod arithmetic;
mod boxes;
mod definedness;
mod integers;
mod isotonicity;
mod powers;

use super::{BigInterval, Bits, Enclosure, End, Function, Interval, Toward};

/// A reproducible stream of test numbers (the generator "splitmix64" of
/// Steele, Lea and Flood, 2014).
struct Random(u64);

impl Random {
    fn bits(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    fn below(&mut self, count: u64) -> u64 {
        self.bits() % count
    }

    /// Uniform in `[0, 1)`.
    fn unit(&mut self) -> f64 {
        (self.bits() >> 11) as f64 / (1u64 << 53) as f64
    }

    fn choose<T: Copy>(&mut self, items: &[T]) -> T {
        items[self.below(items.len() as u64) as usize]
    }

    /// A finite number: ordinary, special, of any magnitude, or next to a special one.
    fn number(&mut self) -> f64 {
        const SPECIAL: [f64; 24] = [
            0.0,
            1.0,
            -1.0,
            2.0,
            -2.0,
            0.5,
            -0.5,
            3.0,
            -3.0,
            std::f64::consts::FRAC_PI_2,
            -std::f64::consts::FRAC_PI_2,
            std::f64::consts::PI,
            -std::f64::consts::PI,
            1.461_632_144_968_362_3,
            f64::MIN_POSITIVE,
            -f64::MIN_POSITIVE,
            5e-324,
            -5e-324,
            f64::MAX,
            f64::MIN,
            1e10,
            -1e10,
            709.0,
            -745.0,
        ];
        match self.below(6) {
            0 => self.choose(&SPECIAL),
            1 => {
                let x = self.choose(&SPECIAL);
                if self.below(2) == 0 { x.next_up() } else { x.next_down() }
            }
            2 => loop {
                let x = f64::from_bits(self.bits());
                if x.is_finite() {
                    return x;
                }
            },
            3 => 40.0 * (self.unit() - 0.5),
            _ => 6.0 * (self.unit() - 0.5),
        }
        .clamp(f64::MIN, f64::MAX)
    }

    /// A box: often ordinary, sometimes thin, a point, or unbounded.
    fn interval(&mut self) -> Interval {
        let a = self.number();
        let b = match self.below(8) {
            0 => a,
            1 => a + a.abs().max(1e-300) * 1e-9 * self.unit(),
            2 => f64::INFINITY,
            3 => f64::NEG_INFINITY,
            _ => self.number(),
        };
        Interval::new(a.min(b), a.max(b)).unwrap_or_else(|| Interval::point(a))
    }

    /// A bounded box of ordinary size.
    fn ordinary_interval(&mut self) -> Interval {
        let scale = self.choose(&[0.01, 1.0, 4.0, 12.0]);
        let a = 12.0 * (self.unit() - 0.5);
        Interval::new(a, a + scale * self.unit()).expect("in order")
    }

    /// A member of a box.
    fn member(&mut self, x: &Interval) -> f64 {
        let (lo, hi) = (*x.lo(), *x.hi());
        let value = match self.below(6) {
            0 => lo,
            1 => hi,
            2 => self.number(),
            3 => x.midpoint().expect("not empty"),
            _ => lo + (hi - lo) * self.unit(),
        };
        if x.contains(&value) { value } else { x.midpoint().expect("not empty") }
    }
}

/// The bits of the reference values.
const REFERENCE: u32 = 140;

fn bits() -> Bits {
    Bits::new(REFERENCE)
}

fn big(x: &Interval) -> BigInterval {
    BigInterval::from_interval(x, bits())
}

fn interval(lo: f64, hi: f64) -> Interval {
    Interval::new(lo, hi).expect("ends in order")
}

/// The box a few units of its last digit wider at each end.
fn widened<E: End>(x: &Enclosure<E>, units: f64) -> Enclosure<E> {
    let precision = x.precision();
    let spacing = E::spacing(precision).times(&E::from_f64(units, precision, Toward::Up), Toward::Up);
    let smallest = E::from_f64(1e-320, precision, Toward::Up);
    let slack = |end: &E| {
        let size = if end.sign().is_lt() { end.negated() } else { end.clone() };
        if size.is_infinite() {
            smallest.clone()
        } else {
            size.times(&spacing, Toward::Up).plus(&smallest, Toward::Up)
        }
    };
    if x.is_empty() {
        return x.clone();
    }
    Enclosure::new(x.lo().minus(&slack(x.lo()), Toward::Down), x.hi().plus(&slack(x.hi()), Toward::Up))
        .expect("wider than before")
}

/// The functions of one real argument.
fn unary() -> impl Iterator<Item = Function> {
    Function::ALL.into_iter().filter(|f| f.arity() == super::Arity::Exactly(1) && *f != Function::Factorial)
}

/// The box cut into pieces of equal width.
fn pieces(x: &Interval, count: u32) -> Vec<Interval> {
    let (lo, hi) = (*x.lo(), *x.hi());
    let cut = |i: u32| {
        if i == count { hi } else { (lo + (hi - lo) * f64::from(i) / f64::from(count)).clamp(lo, hi) }
    };
    (0..count).map(|i| interval(cut(i), cut(i + 1))).collect()
}

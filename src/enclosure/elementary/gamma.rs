//! The gamma function, the logarithm of its absolute value, and the digamma
//! function.
//!
//! Their poles 0, -1, -2, ... cut the line into pieces. On each piece digamma
//! increases (NIST Digital Library of Mathematical Functions, 5.15.1 with
//! `n = 1`: its derivative is a sum of squares), so `log |gamma|` is convex
//! there: it is at most the greater of its values at two ends, and at least
//! its tangents.

use crate::enclosure::domain::Definedness;
use crate::enclosure::function::Function;
use crate::enclosure::interval::{Enclosure, greater, lesser};
use crate::enclosure::rounding::{End, Toward};
use Toward::{Down, Up};

/// Where the gamma function of positive numbers has its minimum
/// (1.46163214496836234..., DLMF 5.4(iii)), between two numbers.
const MINIMUM: (f64, f64) = (1.461_632_144_968_362, 1.461_632_144_968_363);

/// A box without a pole in its interior.
struct Piece<'a, E: End> {
    lo: &'a E,
    hi: &'a E,
    lo_is_pole: bool,
    hi_is_pole: bool,
    /// Whether the gamma function is positive on the piece, if that is known.
    positive: Option<bool>,
}

/// What the shape of a convex function says about its least value on a box.
enum Least<E> {
    AtLo,
    AtHi,
    /// At least the value at the first number with the increment given second
    /// (`<= 0`) added to the logarithm.
    Inside(E, E),
    Unknown,
}

impl<E: End> Piece<'_, E> {
    fn is_point(&self) -> bool {
        self.lo == self.hi
    }

    /// A bound of digamma at an end, or its limit towards a pole from inside.
    fn slope_at_lo(&self, toward: Toward) -> E {
        if self.lo_is_pole {
            return E::small(f64::NEG_INFINITY, self.lo.precision());
        }
        self.lo.at(Function::Digamma, toward)
    }

    fn slope_at_hi(&self, toward: Toward) -> E {
        if self.hi_is_pole {
            return E::small(f64::INFINITY, self.lo.precision());
        }
        self.hi.at(Function::Digamma, toward)
    }

    /// A bound of `|gamma|` or of its logarithm at an end.
    fn size(&self, f: Function, x: &E, is_pole: bool, toward: Toward) -> E {
        if is_pole {
            return E::small(f64::INFINITY, self.lo.precision());
        }
        if f == Function::Gamma && self.positive == Some(false) {
            return x.at(f, toward.reversed()).negated();
        }
        if f == Function::Gamma && self.positive.is_none() {
            // The logarithm has no sign that could be unknown.
            return x.at(Function::Lgamma, toward).at(Function::Exp, toward);
        }
        x.at(f, toward)
    }

    fn least(&self) -> Least<E> {
        let precision = self.lo.precision();
        let (mut c, mut d) = (self.lo.clone(), self.hi.clone());
        let mut c_is_pole = self.lo_is_pole;
        if self.lo.sign().is_ge() {
            let before = E::from_f64(MINIMUM.0, precision, Down);
            let after = E::from_f64(MINIMUM.1, precision, Up);
            if self.lo.order(&after).is_ge() {
                return Least::AtLo;
            }
            if self.hi.order(&before).is_le() {
                return Least::AtHi;
            }
            c_is_pole &= before.order(&c).is_le();
            c = greater(&c, &before).clone();
            d = lesser(&d, &after).clone();
        }
        if self.slope_at_lo(Down).sign().is_ge() {
            return Least::AtLo;
        }
        if self.slope_at_hi(Up).sign().is_le() {
            return Least::AtHi;
        }
        loop {
            if !c_is_pole {
                let slope = c.at(Function::Digamma, Down);
                let drop = slope.negated().times(&d.minus(&c, Up), Up);
                if drop.order(&E::spacing(precision)).is_le() {
                    // A slope that is not negative leaves the value at c.
                    return Least::Inside(c, lesser(&drop.negated(), &E::small(0.0, precision)).clone());
                }
            }
            let middle = E::between(&c, &d);
            let inside = c.order(&middle).is_lt() && middle.order(&d).is_lt();
            if inside && middle.at(Function::Digamma, Up).sign().is_le() {
                (c, c_is_pole) = (middle, false);
            } else if inside && middle.at(Function::Digamma, Down).sign().is_ge() {
                d = middle;
            } else if c_is_pole {
                return Least::Unknown;
            } else {
                let drop = c.at(Function::Digamma, Down).times(&d.minus(&c, Up), Down);
                return Least::Inside(c, lesser(&drop, &E::small(0.0, precision)).clone());
            }
        }
    }

    /// `|gamma|` or its logarithm on the piece.
    fn range(&self, f: Function) -> Enclosure<E> {
        let at_lo = |toward| self.size(f, self.lo, self.lo_is_pole, toward);
        let at_hi = |toward| self.size(f, self.hi, self.hi_is_pole, toward);
        if self.is_point() {
            return Enclosure::both(at_lo);
        }
        let precision = self.lo.precision();
        let hi = greater(&at_lo(Up), &at_hi(Up)).clone();
        let lo = match self.least() {
            Least::AtLo => at_lo(Down),
            Least::AtHi => at_hi(Down),
            Least::Inside(c, increment) => {
                let value = self.size(f, &c, false, Down);
                if f == Function::Lgamma {
                    value.plus(&increment, Down)
                } else {
                    // exp(t) >= 1 + t.
                    let factor = E::small(1.0, precision).plus(&increment, Down);
                    let zero = E::small(0.0, precision);
                    greater(&value.times(&factor, Down), &zero).clone()
                }
            }
            Least::Unknown if f == Function::Gamma => E::small(0.0, precision),
            Least::Unknown => E::small(f64::NEG_INFINITY, precision),
        };
        Enclosure::between(lo, hi)
    }
}

impl<E: End> Enclosure<E> {
    /// The piece that contains this non-empty box, or nothing if a pole lies inside.
    fn piece(&self) -> Option<Piece<'_, E>> {
        let (lo, hi) = (self.lo(), self.hi());
        if lo.sign().is_ge() {
            return Some(Piece {
                lo,
                hi,
                lo_is_pole: lo.sign().is_eq(),
                hi_is_pole: false,
                positive: Some(true),
            });
        }
        if lo.is_infinite() {
            return None;
        }
        let left = lo.floor();
        let right = left.plus(&E::small(1.0, self.precision()), Down);
        if hi.order(&right).is_gt() {
            return None;
        }
        Some(Piece {
            lo,
            hi,
            lo_is_pole: *lo == left,
            hi_is_pole: *hi == right,
            positive: left.as_integer().map(|n| n % 2 == 0),
        })
    }

    /// The piece, after recording what it says about definedness; or the
    /// answer, if there is no such piece.
    fn piece_or_answer(&self, defined: &mut Definedness) -> Result<Piece<'_, E>, Self> {
        match self.piece() {
            None => {
                defined.lower_to(Definedness::Partly);
                Err(Self::whole(self.precision()))
            }
            Some(piece) if piece.is_point() && (piece.lo_is_pole || piece.hi_is_pole) => {
                defined.lower_to(Definedness::Nowhere);
                Err(Self::empty(self.precision()))
            }
            Some(piece) => {
                if piece.lo_is_pole || piece.hi_is_pole {
                    defined.lower_to(Definedness::Partly);
                }
                Ok(piece)
            }
        }
    }

    pub(super) fn digamma(&self, defined: &mut Definedness) -> Self {
        match self.piece_or_answer(defined) {
            Ok(piece) => Self::between(piece.slope_at_lo(Down), piece.slope_at_hi(Up)),
            Err(answer) => answer,
        }
    }

    pub(super) fn lgamma(&self, defined: &mut Definedness) -> Self {
        match self.piece_or_answer(defined) {
            Ok(piece) => piece.range(Function::Lgamma),
            Err(answer) => answer,
        }
    }

    pub(super) fn gamma(&self, defined: &mut Definedness) -> Self {
        let piece = match self.piece_or_answer(defined) {
            Ok(piece) => piece,
            Err(answer) => return answer,
        };
        let size = piece.range(Function::Gamma);
        match piece.positive {
            Some(true) => size,
            Some(false) => size.negated(),
            None => size.hull(&size.negated()),
        }
    }
}

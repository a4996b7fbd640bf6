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
use crate::enclosure::interval::{Enclosure, greater};
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

/// Two numbers `c <= d` between which digamma changes its sign.
struct Turn<E> {
    c: E,
    d: E,
    c_is_pole: bool,
    d_is_pole: bool,
}

impl<E: End> Turn<E> {
    /// An upper bound of how much `log |gamma|` can fall from `c` to anywhere
    /// before `d`, by its tangent at `c`, which is no pole.
    fn drop(&self) -> E {
        let slope = self.c.at(Function::Digamma, Down);
        let zero = E::small(0.0, self.c.precision());
        let drop = slope.negated().times(&self.d.minus(&self.c, Up), Up);
        greater(&drop, &zero).clone()
    }

    /// Takes over a number if it is inside and the sign of digamma at it is known.
    fn try_at(&mut self, x: E) {
        if self.c.order(&x).is_lt() && x.order(&self.d).is_lt() {
            if x.at(Function::Digamma, Up).sign().is_le() {
                (self.c, self.c_is_pole) = (x, false);
            } else if x.at(Function::Digamma, Down).sign().is_ge() {
                (self.d, self.d_is_pole) = (x, false);
            }
        }
    }

    /// Replaces `c` by a greater number where digamma is known to be negative.
    fn raise_c(&mut self, x: E) {
        if self.c.order(&x).is_lt() {
            (self.c, self.c_is_pole) = (x, false);
        }
    }

    /// Replaces `d` by a smaller number where digamma is known to be positive.
    fn lower_d(&mut self, x: E) {
        if x.order(&self.d).is_lt() {
            (self.d, self.d_is_pole) = (x, false);
        }
    }

    /// Brings `c` and `d` together until the drop between them is below
    /// rounding or nothing helps any more.
    fn narrow(&mut self) {
        // Far below rounding, as the logarithm may itself be small.
        let precision = self.c.precision();
        let negligible = E::spacing(precision).times(&E::small(1.0 / 256.0, precision), Up);
        loop {
            if !self.c_is_pole && self.drop().order(&negligible).is_le() {
                return;
            }
            let width = self.d.minus(&self.c, Up);
            self.try_near_secant(&width);
            let half = width.times(&E::small(0.5, width.precision()), Up);
            if self.d.minus(&self.c, Up).order(&half).is_gt() {
                self.try_at(E::between(&self.c, &self.d));
                if self.d.minus(&self.c, Up).order(&width).is_ge() {
                    return;
                }
            }
        }
    }

    /// The secant through `c` and `d` misses the zero by about the square of
    /// their distance: tries the numbers so far to both sides of it.
    fn try_near_secant(&mut self, width: &E) {
        if self.c_is_pole || self.d_is_pole || self.d.is_infinite() {
            return;
        }
        let at_c = self.c.at(Function::Digamma, Down);
        let at_d = self.d.at(Function::Digamma, Up);
        let rise = at_d.minus(&at_c, Up);
        if at_c.is_infinite() || at_d.is_infinite() || rise.sign().is_le() {
            return;
        }
        let step = at_c.negated().over(&rise, Down).times(width, Down);
        let zero = self.c.plus(&step, Down);
        let miss = width.times(width, Up);
        self.try_at(zero.minus(&miss, Down));
        self.try_at(zero.plus(&miss, Up));
    }
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
        let mut turn = Turn {
            c: self.lo.clone(),
            d: self.hi.clone(),
            c_is_pole: self.lo_is_pole,
            d_is_pole: self.hi_is_pole,
        };
        if self.lo.sign().is_ge() {
            let before = E::from_f64(MINIMUM.0, precision, Down);
            let after = E::from_f64(MINIMUM.1, precision, Up);
            if self.lo.order(&after).is_ge() {
                return Least::AtLo;
            }
            if self.hi.order(&before).is_le() {
                return Least::AtHi;
            }
            turn.raise_c(before);
            turn.lower_d(after);
        }
        if self.slope_at_lo(Down).sign().is_ge() {
            return Least::AtLo;
        }
        if self.slope_at_hi(Up).sign().is_le() {
            return Least::AtHi;
        }
        turn.narrow();
        if turn.c_is_pole {
            return Least::Unknown;
        }
        let increment = turn.drop().negated();
        Least::Inside(turn.c, increment)
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
        if hi.order(&right).is_gt() && !self.is_point() {
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

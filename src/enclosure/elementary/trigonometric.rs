//! `sin`, `cos` and `tan` on boxes.
//!
//! Which quarter of the circle an angle lies in is read off the signs of its
//! sine and cosine, so no approximation of pi and no division by it is needed
//! to decide which extrema and poles lie inside a box.

use crate::enclosure::domain::Definedness;
use crate::enclosure::function::Function;
use crate::enclosure::interval::Enclosure;
use crate::enclosure::rounding::{End, Toward};
use Toward::{Down, Up};

/// How many times the box, in the direction of growing angles, enters a new
/// quarter of the circle, and the quarter (0 to 3) where it begins.
struct Quarters {
    first: u8,
    entered: u8,
}

impl Quarters {
    /// Whether the box enters quarter `q` from the one before.
    fn enters(&self, q: u8) -> bool {
        (1..=self.entered).any(|step| (self.first + step) % 4 == q)
    }
}

/// The quarter of a finite angle, counted from 0 in the direction of growing angles.
fn quarter<E: End>(angle: &E) -> Option<u8> {
    if !angle.angle_is_computable() {
        return None;
    }
    let one = E::small(1.0, angle.precision());
    if angle.order(&one).is_le() && angle.negated().order(&one).is_le() {
        // Also where the sine is too small to have a sign after rounding.
        return Some(if angle.sign().is_lt() { 3 } else { 0 });
    }
    // A bound that is rounded to 0 or across it leaves the sign undecided.
    let sign = |f| {
        let (lo, hi) = (angle.at(f, Down).sign(), angle.at(f, Up).sign());
        if lo.is_gt() {
            Some(true)
        } else if hi.is_lt() {
            Some(false)
        } else {
            None
        }
    };
    Some(match (sign(Function::Sin)?, sign(Function::Cos)?) {
        (true, true) => 0,
        (true, false) => 1,
        (false, false) => 2,
        (false, true) => 3,
    })
}

impl<E: End> Enclosure<E> {
    /// The quarters of a box of width at most 4. As 4 is less than three
    /// quarters of a turn, fewer than four quarters are entered, and counting
    /// modulo 4 is enough.
    fn quarters(&self) -> Option<Quarters> {
        if self.width_upper().order(&E::small(4.0, self.precision())).is_gt() {
            return None;
        }
        let first = quarter(self.lo())?;
        let last = quarter(self.hi())?;
        Some(Quarters { first, entered: (last + 4 - first) % 4 })
    }

    /// `sin` or `cos`, with the quarters whose beginnings are its maximum and minimum.
    fn wave(&self, f: Function, maximum: u8, minimum: u8) -> Self {
        if let Some(range) = self.short_wave(f, maximum, minimum) {
            return range;
        }
        // The halves of a box up to a turn and more are short enough again.
        let eight = E::small(8.0, self.precision());
        if self.width_upper().order(&eight).is_le()
            && let Some((left, right)) = self.halves()
            && let Some(left) = left.short_wave(f, maximum, minimum)
            && let Some(right) = right.short_wave(f, maximum, minimum)
        {
            return left.hull(&right);
        }
        Self::small(-1.0, 1.0, self.precision())
    }

    fn short_wave(&self, f: Function, maximum: u8, minimum: u8) -> Option<Self> {
        let quarters = self.quarters()?;
        let mut range = Self::both_ends(self.lo(), self.hi(), f);
        if quarters.enters(minimum) {
            range = range.hull(&self.alike(-1.0));
        }
        if quarters.enters(maximum) {
            range = range.hull(&self.alike(1.0));
        }
        Some(range)
    }

    /// The hull of the values at two points.
    fn both_ends(a: &E, b: &E, f: Function) -> Self {
        let at = |x: &E| Self::both(|toward| x.at(f, toward));
        if a == b { at(a) } else { at(a).hull(&at(b)) }
    }

    pub(super) fn sin(&self) -> Self {
        self.wave(Function::Sin, 1, 3)
    }

    pub(super) fn cos(&self) -> Self {
        self.wave(Function::Cos, 0, 2)
    }

    pub(super) fn tan(&self, defined: &mut Definedness) -> Self {
        // The poles are where quarters 1 and 3 begin.
        if let Some(quarters) = self.quarters()
            && !quarters.enters(1)
            && !quarters.enters(3)
        {
            return self.increasing(Function::Tan);
        }
        defined.lower_to(Definedness::Partly);
        Self::whole(self.precision())
    }
}

//! Values of terms at points, and enclosures from below on boxes in the three
//! forms that the kernel knows: natural, by slopes, by second derivatives.

use num_rational::BigRational;

use crate::enclosure::{BigInterval, Bits, Enclosure, End as Number};

use super::integer::Sorts;
use super::tape::{Jets, Order, Tape};
use super::term::{Name, Term};

/// How a term is enclosed on a box.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Form {
    /// Interval arithmetic as the term is written.
    Natural,
    /// Faces by the sign of derivatives, then the mean value form.
    Slope,
    /// Faces by the sign of derivatives, then Taylor's formula of second order.
    Bend,
}

/// An interval whose lower end bounds the root from below on the box; nothing if
/// the term is not seen to be defined (and smooth enough) on the whole box.
pub fn from_below<E: Number>(
    tape: &Tape<E>,
    root: usize,
    ranges: &[Enclosure<E>],
    form: Form,
    jets: &mut Jets<E>,
) -> Option<Enclosure<E>> {
    if form == Form::Natural {
        tape.run(ranges, Order::Value, jets);
        return jets.defined.is_everywhere().then(|| tape.value(root, jets).clone());
    }
    let n = ranges.len();
    let mut face = ranges.to_vec();
    let (value, slopes) = loop {
        tape.run(&face, Order::Slope, jets);
        if !(jets.defined.is_everywhere() && jets.smooth) {
            return None;
        }
        let mut moved = false;
        for (i, x) in face.iter_mut().enumerate() {
            if x.is_point() {
                continue;
            }
            let finite = |e: &E| (!e.is_infinite()).then(|| e.clone());
            let end = match tape.slope(root, i, jets) {
                None => finite(x.lo()).or_else(|| finite(x.hi())).or_else(|| x.midpoint()),
                Some(d) if d.is_certainly_non_negative() => finite(x.lo()),
                Some(d) if d.is_certainly_non_positive() => finite(x.hi()),
                Some(_) => None,
            };
            if let Some(end) = end {
                *x = Enclosure::point(end);
                moved = true;
            }
        }
        if !moved {
            let slopes: Vec<Option<Enclosure<E>>> =
                (0..n).map(|i| tape.slope(root, i, jets).cloned()).collect();
            break (tape.value(root, jets).clone(), slopes);
        }
    };
    if face.iter().all(Enclosure::is_point) || face.iter().any(|x| !x.is_bounded()) {
        return Some(value);
    }
    let centre: Vec<Enclosure<E>> =
        face.iter().map(|x| x.midpoint().map(Enclosure::point)).collect::<Option<_>>()?;
    let away: Vec<Enclosure<E>> = face.iter().zip(&centre).map(|(x, c)| x.minus(c)).collect();
    let sum = if form == Form::Slope {
        tape.run(&centre, Order::Value, jets);
        let mut sum = tape.value(root, jets).clone();
        for (slope, away) in slopes.iter().zip(&away) {
            if let Some(slope) = slope {
                sum = sum.plus(&slope.times(away));
            }
        }
        sum
    } else {
        tape.run(&centre, Order::Slope, jets);
        let mut sum = tape.value(root, jets).clone();
        for (i, x) in away.iter().enumerate() {
            if let Some(d) = tape.slope(root, i, jets) {
                sum = sum.plus(&d.times(x));
            }
        }
        tape.run(&face, Order::Bend, jets);
        if !jets.smooth {
            return None;
        }
        for (i, x) in away.iter().enumerate() {
            for (j, y) in away[..=i].iter().enumerate() {
                let Some(h) = tape.bend(root, i, j, jets) else { continue };
                sum = if i == j {
                    let half = Enclosure::from_rational(&BigRational::new(1.into(), 2.into()), x.precision());
                    sum.plus(&h.times(&x.square()).times(&half))
                } else {
                    sum.plus(&h.times(&x.times(y)))
                };
            }
        }
        sum
    };
    let both = sum.intersection(&value);
    if both.is_empty() { Some(value) } else { Some(both) }
}

/// The value of a term at a point of intervals, with whether it is defined there;
/// nothing if it cannot be evaluated.
#[must_use]
pub fn at(
    term: &Term,
    names: &[Name],
    point: &[BigInterval],
    sorts: &dyn Sorts,
    bits: u32,
) -> Option<BigInterval> {
    let tape: Tape<crate::enclosure::BigFloat> =
        Tape::new(std::slice::from_ref(term), names, sorts, Bits::new(bits))?;
    let mut jets = Jets::default();
    tape.run_with(point, Bits::new(bits), Order::Value, &mut jets);
    jets.defined.is_everywhere().then(|| tape.value(0, &jets).clone())
}

//! Enclosures of a term on a box from below: three forms, each dearer and
//! sharper on small boxes than the one before.
//!
//! All are refused unless the term is defined, and for the later two
//! continuously differentiable, on the whole box. Source: Moore, Kearfott,
//! Cloud, Introduction to Interval Analysis, 2009, chapters 5 and 6.

use super::evaluate::{Jet, Order, Program, pair, refused};
use super::number::{Dyadic, Interval, Toward};
use super::verdict::{Checked, Reason, refuse};

/// How the term is enclosed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Form {
    /// Interval arithmetic as the term is written.
    Natural,
    /// Faces by the sign of derivatives, then the mean value form.
    Slope,
    /// Faces by the sign of derivatives, then Taylor's formula of second order.
    Bend,
}

/// An interval whose lower end bounds the only term of the program from below on the box.
pub fn from_below(program: &Program, ranges: &[Interval], form: Form, bits: u32) -> Checked<Interval> {
    if form == Form::Natural {
        return Ok(run(program, ranges, Order::Value)?.value);
    }
    let (face, jet) = lowest_face(program, ranges)?;
    if face.iter().all(|x| x.as_point().is_some()) {
        return Ok(jet.value);
    }
    // A coordinate on which the term does not depend has been fixed with the others.
    let Some(centre) = face.iter().map(|x| inner_point(x, bits)).collect::<Option<Vec<Interval>>>() else {
        return Ok(jet.value);
    };
    let away: Vec<Interval> = face.iter().zip(&centre).map(|(x, c)| x.sub(c, bits)).collect();
    let sum = if form == Form::Slope {
        let mut sum = run(program, &centre, Order::Value)?.value;
        for (slope, away) in jet.slope.iter().zip(&away) {
            if let Some(slope) = slope {
                sum = sum.add(&slope.mul(away, bits), bits);
            }
        }
        sum
    } else {
        taylor(&run(program, &centre, Order::Slope)?, &run(program, &face, Order::Bend)?, &away, bits)?
    };
    // Both enclose the values on the face.
    match sum.intersection(&jet.value) {
        Some(both) => Ok(both),
        None => refuse(Reason::Condition, "two enclosures of one term have no common member"),
    }
}

/// A member about the middle, of no more bits than needed; `None` if an end is infinite.
fn inner_point(x: &Interval, bits: u32) -> Option<Interval> {
    let lower = x.lower()?;
    let rounded = x.midpoint()?.round(bits, Toward::Down)?;
    Some(Interval::point(if rounded < *lower { lower.clone() } else { rounded }))
}

fn run(program: &Program, ranges: &[Interval], order: Order) -> Checked<Jet> {
    Ok(program.run(ranges, order)?.swap_remove(0))
}

/// A face of the box on which the infimum over the box is found, with the jet of
/// first order on it: a coordinate along which the term is monotone is fixed at
/// its lower or upper end, as long as one is found.
fn lowest_face(program: &Program, ranges: &[Interval]) -> Checked<(Vec<Interval>, Jet)> {
    let mut face = ranges.to_vec();
    loop {
        let jet = run(program, &face, Order::Slope)?;
        let mut moved = false;
        for (x, slope) in face.iter_mut().zip(&jet.slope) {
            if x.as_point().is_some() {
                continue;
            }
            let end = match slope {
                // Constant along this coordinate: any member will do.
                None => x.lower().or(x.upper()).cloned().or(Some(Dyadic::zero())),
                Some(d) if d.is_certainly_nonnegative() => x.lower().cloned(),
                Some(d) if d.is_certainly_nonpositive() => x.upper().cloned(),
                Some(_) => None,
            };
            if let Some(end) = end {
                *x = Interval::point(end);
                moved = true;
            }
        }
        if !moved {
            return Ok((face, jet));
        }
    }
}

/// `F(c) + F'(c)(x-c) + (x-c)' F''(X) (x-c)/2`.
fn taylor(at: &Jet, on: &Jet, away: &[Interval], bits: u32) -> Checked<Interval> {
    let mut sum = at.value.clone();
    let mut add = |term: Interval| sum = sum.add(&term, bits);
    for (i, x) in away.iter().enumerate() {
        if let Some(d) = &at.slope[i] {
            add(d.mul(x, bits));
        }
        for (j, y) in away[..=i].iter().enumerate() {
            let Some(h) = &on.bend[pair(i, j)] else { continue };
            if i == j {
                // The square of x is never negative: sharper than a product.
                let square = x.powi(2, bits).map_err(refused)?;
                add(h.mul(&square, bits).div(&Interval::from(2), bits).map_err(refused)?);
            } else {
                add(h.mul(&x.mul(y, bits), bits));
            }
        }
    }
    Ok(sum)
}

//! Exact zeros, and what vanishes at them: where the target is zero and no multiplier
//! is negative, every square with a positive multiplier is zero.

use num_rational::BigRational;
use num_traits::{One, Zero};

use super::{Block, Problem};
use crate::search::polynomial::{Polynomial, Rewrite};

/// Numbers at which zeros are looked for, the likeliest first.
const LIKELY: [(i64, i64); 25] = [
    (0, 1),
    (1, 1),
    (-1, 1),
    (2, 1),
    (1, 2),
    (-2, 1),
    (-1, 2),
    (3, 1),
    (-3, 1),
    (1, 3),
    (2, 3),
    (3, 5),
    (4, 5),
    (-3, 5),
    (-4, 5),
    (3, 2),
    (-3, 2),
    (1, 4),
    (3, 4),
    (4, 1),
    (-4, 1),
    (-1, 3),
    (-2, 3),
    (5, 1),
    (-5, 1),
];

/// Simple rational points at which a polynomial is zero and the equations hold.
#[must_use]
pub fn simple_zeros(target: &Polynomial, rules: &[Rewrite], variables: usize) -> Vec<Vec<BigRational>> {
    let side = match variables {
        0..=2 => LIKELY.len(),
        3 => 9,
        4 => 5,
        5 | 6 => 3,
        _ => 2,
    };
    let values: Vec<BigRational> =
        LIKELY[..side].iter().map(|(n, d)| BigRational::new((*n).into(), (*d).into())).collect();
    let seen: Vec<f64> = LIKELY[..side].iter().map(|(n, d)| *n as f64 / *d as f64).collect();
    let mut found = Vec::new();
    let mut choice = vec![0; variables];
    loop {
        let near: Vec<f64> = choice.iter().map(|i| seen[*i]).collect();
        let close = |p: &Polynomial, x: f64| (p.at(&near) - x).abs() <= 1e-9 * (1.0 + x.abs());
        let on = |r: &Rewrite| close(&r.by, near[r.variable].powi(i32::from(r.power)));
        if close(target, 0.0) && rules.iter().all(on) {
            let point: Vec<BigRational> = choice.iter().map(|i| values[*i].clone()).collect();
            let exactly = |r: &Rewrite| {
                r.by.value(&point) == num_traits::pow(point[r.variable].clone(), usize::from(r.power))
            };
            if target.value(&point).is_zero() && rules.iter().all(exactly) {
                found.push(point);
            }
        }
        let Some(place) = choice.iter().position(|i| i + 1 < side) else { return found };
        choice[place] += 1;
        choice[..place].fill(0);
    }
}

/// Restricts the bases to what vanishes at the zeros of the target.
pub fn restricted(problem: &Problem, blocks: &mut [Block]) {
    let zero = BigRational::zero();
    let inside = |z: &&Vec<BigRational>| blocks.iter().all(|b| b.multiplier.value(z) >= zero);
    let points: Vec<&Vec<BigRational>> = problem.zeros.iter().filter(inside).collect();
    for block in blocks {
        let strict = points.iter().filter(|z| block.multiplier.value(z) > zero);
        let rows = strict.map(|z| block.basis.iter().map(|q| q.value(z)).collect()).collect();
        if let Some(combinations) = kernel(rows, block.basis.len()) {
            let combined = |row: &Vec<BigRational>| {
                row.iter().zip(&block.basis).fold(Polynomial::default(), |sum, (c, p)| sum.plus(&p.scaled(c)))
            };
            block.basis = combinations.iter().map(combined).collect();
        }
    }
}

/// A basis of the vectors orthogonal to all rows; nothing if the rows are all 0.
fn kernel(rows: Vec<Vec<BigRational>>, width: usize) -> Option<Vec<Vec<BigRational>>> {
    // Rows in echelon form, each with its pivot, a 1, the only entry of its column.
    let mut echelon: Vec<(usize, Vec<BigRational>)> = Vec::new();
    for mut row in rows {
        for (pivot, other) in &echelon {
            let factor = row[*pivot].clone();
            row.iter_mut().zip(other).for_each(|(x, y)| *x -= &factor * y);
        }
        let Some(pivot) = row.iter().position(|x| !x.is_zero()) else { continue };
        let lead = row[pivot].clone();
        row.iter_mut().for_each(|x| *x = &*x / &lead);
        for (_, other) in &mut echelon {
            let factor = other[pivot].clone();
            other.iter_mut().zip(&row).for_each(|(x, y)| *x -= &factor * y);
        }
        echelon.push((pivot, row));
    }
    if echelon.is_empty() {
        return None;
    }
    let is_pivot = |j: usize| echelon.iter().any(|(p, _)| *p == j);
    let free = (0..width).filter(|j| !is_pivot(*j));
    let vector = |j: usize| {
        let mut v = vec![BigRational::zero(); width];
        v[j] = BigRational::one();
        echelon.iter().for_each(|(p, row)| v[*p] = -row[j].clone());
        v
    };
    Some(free.map(vector).collect())
}

//! From an approximate positive definite solution to an exact one: rounding,
//! projection back onto the identity, and elimination with rational pivots.
//! Source: Peyrl, Parrilo, Computing sum of squares decompositions with rational
//! coefficients, 2008.

use std::collections::BTreeMap;

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{Signed, ToPrimitive, Zero};

/// Linear equations with their solution for the pivots, by the free unknowns.
pub struct Equations {
    /// Pivot, right side, coefficients of the free unknowns.
    rows: Vec<(usize, BigRational, BTreeMap<usize, BigRational>)>,
}

type Row = (BTreeMap<usize, BigRational>, BigRational);

impl Equations {
    /// Solves by elimination; nothing if they contradict each other or the limit of
    /// elementary operations is reached. `weak` says which unknowns are better pivots.
    #[must_use]
    pub fn new(mut rows: Vec<Row>, weak: &dyn Fn(usize) -> bool, mut limit: usize) -> Option<Equations> {
        let mut solved: Vec<(usize, BigRational, BTreeMap<usize, BigRational>)> = Vec::new();
        while let Some((mut row, mut right)) = rows.pop() {
            for (pivot, value, others) in &solved {
                let Some(c) = row.remove(pivot) else { continue };
                limit = limit.checked_sub(others.len() + 1)?;
                right -= &c * value;
                for (i, q) in others {
                    subtract(&mut row, *i, &c * q);
                }
            }
            let best = row
                .iter()
                .max_by(|a, b| (weak(*a.0), a.1.abs()).cmp(&(weak(*b.0), b.1.abs())).then(b.0.cmp(a.0)));
            let Some((&pivot, _)) = best else {
                if right.is_zero() {
                    continue;
                }
                return None;
            };
            let lead = row.remove(&pivot)?.recip();
            row.values_mut().for_each(|q| *q = &*q * &lead);
            right *= lead;
            for (_, value, others) in &mut solved {
                let Some(c) = others.remove(&pivot) else { continue };
                limit = limit.checked_sub(row.len() + 1)?;
                *value -= &c * &right;
                for (i, q) in &row {
                    subtract(others, *i, &c * q);
                }
            }
            solved.push((pivot, right, row));
        }
        Some(Equations { rows: solved })
    }

    /// Puts the values of the free unknowns and computes the pivots.
    pub fn complete(&self, values: &mut [BigRational]) {
        for (pivot, right, others) in &self.rows {
            values[*pivot] = others.iter().fold(right.clone(), |sum, (i, q)| sum - q * &values[*i]);
        }
    }
}

fn subtract(row: &mut BTreeMap<usize, BigRational>, i: usize, q: BigRational) {
    let entry = row.entry(i).or_insert_with(BigRational::zero);
    *entry -= q;
    if entry.is_zero() {
        row.remove(&i);
    }
}

/// `D` and the rows of `L'` with `A = L D L'` and unit diagonal, if every pivot is positive,
/// or zero with nothing beside it.
#[must_use]
pub fn pivots(mut a: Vec<Vec<BigRational>>) -> Option<Vec<(BigRational, Vec<BigRational>)>> {
    let n = a.len();
    let mut found = Vec::new();
    for k in 0..n {
        let pivot = a[k][k].clone();
        if pivot.is_negative() {
            return None;
        }
        if pivot.is_zero() {
            if a[k][k..].iter().any(|q| !q.is_zero()) {
                return None;
            }
            continue;
        }
        let row: Vec<BigRational> = a[k]
            .iter()
            .enumerate()
            .map(|(j, q)| if j < k { BigRational::zero() } else { q / &pivot })
            .collect();
        for i in k + 1..n {
            if row[i].is_zero() {
                continue;
            }
            for j in i..n {
                let less = &row[i] * &pivot * &row[j];
                let new = &a[i][j] - less;
                a[i][j] = new.clone();
                a[j][i] = new;
            }
        }
        found.push((pivot, row));
    }
    Some(found)
}

/// The multiple of `1/denominator` nearest to x.
#[must_use]
pub fn rounded(x: f64, denominator: u64) -> Option<BigRational> {
    let scaled = (x * denominator as f64).round();
    if scaled.abs() < 9e15 {
        return Some(BigRational::new(BigInt::from(scaled as i64), denominator.into()));
    }
    BigRational::from_float(x)
}

/// The rational of small height near x, if there is one.
#[must_use]
pub fn recognised(x: f64, tolerance: f64) -> Option<BigRational> {
    for denominator in 1..=360i64 {
        let top = (x * denominator as f64).round();
        if (x - top / denominator as f64).abs() <= tolerance && top.abs() < 1e9 {
            return Some(BigRational::new(BigInt::from(top.to_i64()?), denominator.into()));
        }
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;

    fn q(n: i64) -> BigRational {
        BigRational::from_integer(n.into())
    }

    #[test]
    fn equations_and_pivots() {
        // x + y = 3, y + z = 4
        let row = |list: &[usize], right: i64| (list.iter().map(|i| (*i, q(1))).collect(), q(right));
        let e = Equations::new(vec![row(&[0, 1], 3), row(&[1, 2], 4)], &|_| true, 100).unwrap();
        let mut values = vec![q(5), q(5), q(5)];
        e.complete(&mut values);
        assert_eq!((&values[0] + &values[1], &values[1] + &values[2]), (q(3), q(4)));
        assert!(Equations::new(vec![row(&[0], 3), row(&[0], 4)], &|_| true, 100).is_none());
        let found = pivots(vec![vec![q(2), q(1)], vec![q(1), q(1)]]).unwrap();
        assert_eq!(found[1].0, BigRational::new(1.into(), 2.into()));
        assert!(pivots(vec![vec![q(1), q(2)], vec![q(2), q(1)]]).is_none());
        assert!(pivots(vec![vec![q(0), q(1)], vec![q(1), q(1)]]).is_none());
        assert_eq!(recognised(0.333_333_4, 1e-5), Some(BigRational::new(1.into(), 3.into())));
        assert_eq!(recognised(std::f64::consts::PI, 1e-9), None);
        assert_eq!(rounded(0.26, 4), Some(BigRational::new(1.into(), 4.into())));
    }
}

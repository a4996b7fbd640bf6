//! Systems `A x = b`, `x >= 0` over the rationals, solved exactly: columns that cannot
//! take part are dropped, then the simplex method with Bland's rule finds a vertex.
//!
//! Source: Schrijver, Theory of Linear and Integer Programming, 1986, chapter 11.

use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use crate::search::engine::{Search, Stuck};

/// One column of `A`: rows in rising order with entries other than 0.
pub type Column = Vec<(usize, BigRational)>;

/// Larger systems are not tried, counted after columns are dropped.
const MOST_ENTRIES: usize = 40_000;
/// More exchanges are not made.
const MOST_PIVOTS: usize = 400;
/// Numbers of more bits end the attempt.
const MOST_BITS: u64 = 600;

/// Values `x >= 0` of all columns with `A x = b`, of which some column in `gain` is
/// positive unless `gain` is nothing; none if there are no such values or the
/// system is too large.
///
/// # Errors
/// When the budget is used up.
pub fn solve(
    columns: &[Column],
    b: &[BigRational],
    gain: Option<&[bool]>,
    search: &mut Search,
) -> Result<Option<Vec<BigRational>>, Stuck> {
    let Some(kept) = useful(columns, b) else { return Ok(None) };
    let mut rows: Vec<usize> = kept.iter().flat_map(|&j| columns[j].iter().map(|(i, _)| *i)).collect();
    rows.sort_unstable();
    rows.dedup();
    if rows.len().saturating_mul(kept.len()) > MOST_ENTRIES {
        return Ok(None);
    }
    let mut t = Tableau::new(columns, b, &kept, &rows);
    let mut values = vec![BigRational::zero(); columns.len()];
    loop {
        match t.step(&t.infeasibility(), search)? {
            Step::Moved => {}
            Step::Best => break,
            Step::Unbounded(_) | Step::TooLong => return Ok(None),
        }
    }
    if t.artificial_value().is_positive() {
        return Ok(None);
    }
    let mut extra = None;
    if let Some(gain) = gain {
        let gain: Vec<bool> = kept.iter().map(|&j| gain[j]).collect();
        while !t.gains(&gain) {
            match t.step(&t.improvement(&gain), search)? {
                Step::Moved => {}
                Step::Unbounded(j) => {
                    extra = Some(j);
                    break;
                }
                Step::Best | Step::TooLong => return Ok(None),
            }
        }
    }
    for (place, value) in t.vertex(extra) {
        values[kept[place]] = value;
    }
    Ok(Some(values))
}

/// The columns that can be positive in a solution, as far as the signs in single
/// rows tell; nothing if some row cannot be satisfied.
fn useful(columns: &[Column], b: &[BigRational]) -> Option<Vec<usize>> {
    let mut alive = vec![true; columns.len()];
    loop {
        let (mut above, mut below) = (vec![0usize; b.len()], vec![0usize; b.len()]);
        for (column, _) in columns.iter().zip(&alive).filter(|(_, alive)| **alive) {
            for (i, q) in column {
                *(if q.is_positive() { &mut above[*i] } else { &mut below[*i] }) += 1;
            }
        }
        for (i, q) in b.iter().enumerate() {
            if (q.is_positive() && above[i] == 0) || (q.is_negative() && below[i] == 0) {
                return None;
            }
        }
        let idle = |(i, q): &(usize, BigRational)| {
            if q.is_positive() {
                below[*i] == 0 && !b[*i].is_positive()
            } else {
                above[*i] == 0 && !b[*i].is_negative()
            }
        };
        let before = alive.iter().filter(|a| **a).count();
        for (column, alive) in columns.iter().zip(&mut alive) {
            *alive = *alive && !column.iter().any(idle);
        }
        if alive.iter().filter(|a| **a).count() == before {
            return Some((0..columns.len()).filter(|j| alive[*j]).collect());
        }
    }
}

enum Step {
    Moved,
    Best,
    Unbounded(usize),
    TooLong,
}

/// Rows of `[A | b]` in terms of the present basis; columns from `width` on are artificial.
struct Tableau {
    rows: Vec<Vec<BigRational>>,
    right: Vec<BigRational>,
    basis: Vec<usize>,
    width: usize,
    pivots: usize,
}

impl Tableau {
    fn new(columns: &[Column], b: &[BigRational], kept: &[usize], used: &[usize]) -> Tableau {
        let mut rows = vec![vec![BigRational::zero(); kept.len()]; used.len()];
        for (place, &j) in kept.iter().enumerate() {
            for (i, q) in &columns[j] {
                if let Ok(row) = used.binary_search(i) {
                    rows[row][place] = q.clone();
                }
            }
        }
        let mut right: Vec<BigRational> = used.iter().map(|&i| b[i].clone()).collect();
        for (row, value) in rows.iter_mut().zip(&mut right) {
            if value.is_negative() {
                *value = -value.clone();
                row.iter_mut().for_each(|q| *q = -q.clone());
            }
        }
        let basis = (0..used.len()).map(|i| kept.len() + i).collect();
        Tableau { rows, right, basis, width: kept.len(), pivots: 0 }
    }

    fn is_artificial(&self, row: usize) -> bool {
        self.basis[row] >= self.width
    }

    fn artificial_value(&self) -> BigRational {
        let rows = (0..self.rows.len()).filter(|&i| self.is_artificial(i));
        rows.map(|i| self.right[i].clone()).sum()
    }

    /// How fast each column would lower the sum of the artificial values.
    fn infeasibility(&self) -> Vec<BigRational> {
        let mut rate = vec![BigRational::zero(); self.width];
        for i in (0..self.rows.len()).filter(|&i| self.is_artificial(i)) {
            for (r, q) in rate.iter_mut().zip(&self.rows[i]).filter(|(_, q)| !q.is_zero()) {
                *r += q;
            }
        }
        rate
    }

    /// How fast each column would raise the sum of the columns in `gain`.
    fn improvement(&self, gain: &[bool]) -> Vec<BigRational> {
        let one = BigRational::one;
        let mut rate: Vec<BigRational> =
            gain.iter().map(|g| if *g { one() } else { BigRational::zero() }).collect();
        for (i, &j) in self.basis.iter().enumerate() {
            if j < self.width && gain[j] {
                for (r, q) in rate.iter_mut().zip(&self.rows[i]).filter(|(_, q)| !q.is_zero()) {
                    *r -= q;
                }
            }
        }
        rate
    }

    fn gains(&self, gain: &[bool]) -> bool {
        self.basis.iter().zip(&self.right).any(|(&j, v)| j < self.width && gain[j] && v.is_positive())
    }

    /// Lets the first column of positive rate into the basis (Bland's rule).
    fn step(&mut self, rate: &[BigRational], search: &mut Search) -> Result<Step, Stuck> {
        let Some(enter) = rate.iter().position(Signed::is_positive) else { return Ok(Step::Best) };
        search.spend(1 + (self.rows.len() * self.width) as u64 / 20)?;
        self.pivots += 1;
        let mut leave: Option<(usize, BigRational)> = None;
        for (i, row) in self.rows.iter().enumerate() {
            let q = &row[enter];
            let ratio = if q.is_positive() {
                &self.right[i] / q
            } else if !q.is_zero() && self.is_artificial(i) && self.right[i].is_zero() {
                // An artificial value that is 0 must stay 0.
                BigRational::zero()
            } else {
                continue;
            };
            let better = leave.as_ref().is_none_or(|(other, least)| {
                ratio < *least || (ratio == *least && self.basis[i] < self.basis[*other])
            });
            if better {
                leave = Some((i, ratio));
            }
        }
        let Some((leave, _)) = leave else { return Ok(Step::Unbounded(enter)) };
        self.exchange(leave, enter);
        let long = |q: &BigRational| q.numer().bits().max(q.denom().bits()) > MOST_BITS;
        if self.pivots > MOST_PIVOTS || self.right.iter().any(long) {
            return Ok(Step::TooLong);
        }
        Ok(Step::Moved)
    }

    fn exchange(&mut self, leave: usize, enter: usize) {
        let pivot = self.rows[leave][enter].clone();
        let front = std::mem::take(&mut self.rows[leave]);
        let front: Vec<BigRational> =
            front.into_iter().map(|q| if q.is_zero() { q } else { q / &pivot }).collect();
        let value = &self.right[leave] / &pivot;
        for (i, row) in self.rows.iter_mut().enumerate().filter(|(i, _)| *i != leave) {
            let factor = row[enter].clone();
            if factor.is_zero() {
                continue;
            }
            for (q, p) in row.iter_mut().zip(&front).filter(|(_, p)| !p.is_zero()) {
                *q -= &factor * p;
            }
            self.right[i] -= &factor * &value;
        }
        self.rows[leave] = front;
        self.right[leave] = value;
        self.basis[leave] = enter;
    }

    /// The values of the basis, moved by 1 along the direction of an unbounded column.
    fn vertex(&self, extra: Option<usize>) -> Vec<(usize, BigRational)> {
        let mut found: Vec<(usize, BigRational)> =
            extra.map(|j| (j, BigRational::one())).into_iter().collect();
        for (i, &j) in self.basis.iter().enumerate().filter(|(_, j)| **j < self.width) {
            let moved = extra.map_or_else(BigRational::zero, |e| self.rows[i][e].clone());
            found.push((j, &self.right[i] - moved));
        }
        found
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::search::Effort;

    fn q(n: i64) -> BigRational {
        BigRational::from_integer(n.into())
    }

    /// Columns given as dense lists.
    fn run(columns: &[&[i64]], b: &[i64], gain: Option<&[bool]>) -> Option<Vec<BigRational>> {
        let sparse: Vec<Column> = columns
            .iter()
            .map(|c| c.iter().enumerate().filter(|(_, v)| **v != 0).map(|(i, v)| (i, q(*v))).collect())
            .collect();
        let b: Vec<BigRational> = b.iter().map(|v| q(*v)).collect();
        let found = solve(&sparse, &b, gain, &mut Search::new(Effort::default(), 0)).unwrap()?;
        for (i, wanted) in b.iter().enumerate() {
            let sum: BigRational = columns.iter().zip(&found).map(|(c, x)| q(c[i]) * x).sum();
            assert_eq!(sum, *wanted);
        }
        assert!(found.iter().all(|x| !x.is_negative()));
        Some(found)
    }

    #[test]
    fn finds_multipliers_or_says_there_are_none() {
        assert!(run(&[&[1, 0], &[1, 1]], &[3, 2], None).is_some());
        assert!(run(&[&[1, 0], &[1, 1]], &[2, 3], None).is_none());
        assert!(run(&[&[1, -1], &[-1, 1]], &[1, 1], None).is_none());
        assert!(run(&[&[2, 1], &[1, 3], &[-1, -1]], &[0, 0], None).is_some());
        // A row that no column reaches.
        assert!(run(&[&[1, 0]], &[1, 1], None).is_none());
    }

    #[test]
    fn asks_for_a_positive_column_where_strictness_needs_one() {
        let gain = |g: &[bool]| run(&[&[1, 1], &[1, 1], &[1, 2]], &[1, 1], Some(g));
        assert!(gain(&[false, true, false]).is_some_and(|x| x[1].is_positive()));
        assert!(gain(&[false, false, true]).is_none());
        // Along a direction without end.
        assert!(run(&[&[1], &[-1]], &[0], Some(&[true, false])).is_some_and(|x| x[0].is_positive()));
    }
}

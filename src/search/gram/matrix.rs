//! Small dense symmetric matrices in `f64`. Only operations that IEEE 754 rounds
//! correctly are used, so the results are the same on every machine.

/// Rows.
pub type Matrix = Vec<Vec<f64>>;

/// A matrix of zeros.
#[must_use]
pub fn zeros(rows: usize, columns: usize) -> Matrix {
    vec![vec![0.0; columns]; rows]
}

/// The lower triangle L with `A = L L'`, if A is positive definite.
#[must_use]
pub fn cholesky(a: &Matrix) -> Option<Matrix> {
    let n = a.len();
    let mut l = zeros(n, n);
    for i in 0..n {
        for j in 0..=i {
            let dot: f64 = (0..j).map(|k| l[i][k] * l[j][k]).sum();
            let left = a[i][j] - dot;
            if i > j {
                l[i][j] = left / l[j][j];
            } else if left > 1e-14 * a[i][i].abs() {
                l[i][i] = left.sqrt();
            } else {
                return None;
            }
        }
    }
    Some(l)
}

/// The solution of `L L' x = b`.
#[must_use]
pub fn solved(l: &Matrix, b: &[f64]) -> Vec<f64> {
    let n = l.len();
    let mut x = b.to_vec();
    for i in 0..n {
        let dot: f64 = (0..i).map(|k| l[i][k] * x[k]).sum();
        x[i] = (x[i] - dot) / l[i][i];
    }
    for i in (0..n).rev() {
        let dot: f64 = (i + 1..n).map(|k| l[k][i] * x[k]).sum();
        x[i] = (x[i] - dot) / l[i][i];
    }
    x
}

/// The inverse of `L L'`.
#[must_use]
pub fn inverse(l: &Matrix) -> Matrix {
    let n = l.len();
    let mut rows = Vec::with_capacity(n);
    for i in 0..n {
        let mut unit = vec![0.0; n];
        unit[i] = 1.0;
        rows.push(solved(l, &unit));
    }
    rows
}

/// Eigenvalues, and eigenvectors as rows, in rising order (Jacobi's method).
#[must_use]
pub fn eigen(a: &Matrix) -> (Vec<f64>, Matrix) {
    let n = a.len();
    let mut a = a.clone();
    let mut v = zeros(n, n);
    for (i, row) in v.iter_mut().enumerate() {
        row[i] = 1.0;
    }
    for _ in 0..60 {
        let off: f64 = (0..n).map(|i| (0..i).map(|j| a[i][j] * a[i][j]).sum::<f64>()).sum();
        let size: f64 = (0..n).map(|i| a[i][i] * a[i][i]).sum();
        if off <= 1e-30 * size {
            break;
        }
        for p in 0..n {
            for q in p + 1..n {
                if a[p][q] == 0.0 {
                    continue;
                }
                let theta = (a[q][q] - a[p][p]) / (2.0 * a[p][q]);
                let t = theta.signum() / (theta.abs() + (theta * theta + 1.0).sqrt());
                let c = 1.0 / (t * t + 1.0).sqrt();
                let s = t * c;
                for row in &mut a {
                    (row[p], row[q]) = (c * row[p] - s * row[q], s * row[p] + c * row[q]);
                }
                turn(&mut a, p, q, c, s);
                turn(&mut v, p, q, c, s);
            }
        }
    }
    let mut order: Vec<usize> = (0..n).collect();
    order.sort_by(|&i, &j| a[i][i].total_cmp(&a[j][j]));
    (order.iter().map(|&i| a[i][i]).collect(), order.iter().map(|&i| v[i].clone()).collect())
}

/// Turns two rows, p < q, into combinations of each other.
fn turn(rows: &mut [Vec<f64>], p: usize, q: usize, c: f64, s: f64) {
    let (before, after) = rows.split_at_mut(q);
    for (x, y) in before[p].iter_mut().zip(&mut after[0]) {
        (*x, *y) = (c * *x - s * *y, s * *x + c * *y);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn factors_and_eigenvalues() {
        let a = vec![vec![4.0, 2.0, 0.0], vec![2.0, 3.0, 1.0], vec![0.0, 1.0, 2.0]];
        let l = cholesky(&a).unwrap();
        let x = solved(&l, &[8.0, 9.0, 5.0]);
        let back: Vec<f64> = a.iter().map(|r| r.iter().zip(&x).map(|(p, q)| p * q).sum()).collect();
        assert!(back.iter().zip([8.0, 9.0, 5.0]).all(|(p, q)| (p - q).abs() < 1e-12));
        let (values, vectors) = eigen(&a);
        for (value, v) in values.iter().zip(&vectors) {
            for (row, x) in a.iter().zip(v) {
                let image: f64 = row.iter().zip(v).map(|(p, q)| p * q).sum();
                assert!((image - value * x).abs() < 1e-12);
            }
        }
        assert!(values.windows(2).all(|w| w[0] <= w[1]));
        assert!(cholesky(&vec![vec![1.0, 2.0], vec![2.0, 1.0]]).is_none());
        let product = inverse(&l).iter().map(|r| r[0] * 4.0 + r[1] * 2.0).collect::<Vec<_>>();
        assert!((product[0] - 1.0).abs() < 1e-12 && product[1].abs() < 1e-12);
    }
}

//! Polynomials as sums of squares with multipliers:
//! `target = sum over blocks of multiplier * v' G v`, G positive semidefinite.
//!
//! Numerically one minimises `<target, y> - sum log det M(y)`, where the entry of the
//! block's `M(y)` at a, b is the multiplier times the a-th times the b-th member of v
//! with every monomial replaced by its y: a convex function, self-concordant, for which
//! damped Newton steps work from any start; moments of points are one. At the
//! minimum `G = M(y)^-1` solves the equation and is as far inside as possible. If
//! there is none, y runs off in a direction in which `M` has a kernel that every
//! solution must respect: the members of v are then combined to those that vanish
//! at the common zeros (facial reduction), and one starts again. What is found is
//! rounded and put back onto the equation exactly; the kernel checks the result.
//!
//! Sources: Nesterov, Nemirovskii, Interior-Point Polynomial Algorithms, 1994;
//! Parrilo, Semidefinite programming relaxations for semialgebraic problems, 2003;
//! Permenter, Parrilo, Partial facial reduction, 2018.

mod exact;
pub mod matrix;
mod zeros;

use std::collections::{BTreeMap, BTreeSet};

use num_rational::BigRational;
use num_traits::{One, Signed, ToPrimitive, Zero};

use self::exact::{Equations, pivots, recognised, rounded};
use self::matrix::{Matrix, cholesky, eigen, inverse, solved, zeros};
use super::polynomial::{Polynomial, Powers, Rewrite};
pub use zeros::simple_zeros;

/// Squares of combinations of the basis, times the multiplier.
#[derive(Clone, Debug)]
pub struct Block {
    /// Not negative on the domain.
    pub multiplier: Polynomial,
    /// What is combined and squared.
    pub basis: Vec<Polynomial>,
}

/// A polynomial that is to be such a sum.
pub struct Problem<'a> {
    /// The polynomial.
    pub target: Polynomial,
    /// The blocks.
    pub blocks: Vec<Block>,
    /// Equations among the variables.
    pub rules: &'a [Rewrite],
    /// Points of the domain, many and in general position.
    pub points: &'a [Vec<f64>],
    /// Exact zeros of the target, as many as are known.
    pub zeros: &'a [Vec<BigRational>],
}

/// One summand: weight times multiplier of the block times the square of the root.
#[derive(Clone, Debug)]
pub struct Square {
    /// The block.
    pub block: usize,
    /// Positive.
    pub weight: BigRational,
    /// What is squared.
    pub root: Polynomial,
}

/// Why there is no decomposition.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Lack {
    /// The polynomial is not such a sum, as far as the numbers tell.
    Separated,
    /// Too large, or the numbers do not settle.
    Unsettled,
    /// No exact solution near the approximate one.
    NotRounded,
    /// The budget is used up.
    Exhausted,
}

/// Most members of all bases together.
const MAX_SIZE: usize = 90;
/// Most monomials of the equation.
const MAX_EQUATIONS: usize = 420;
/// Most steps of one minimisation.
const MAX_STEPS: usize = 90;
/// Most reductions one after the other.
const MAX_REDUCTIONS: usize = 5;

/// Finds a decomposition. `spend` counts work and says whether there is more.
///
/// # Errors
/// [`Lack`] says what stands in the way.
pub fn decompose(problem: &Problem, spend: &mut dyn FnMut(u64) -> bool) -> Result<Vec<Square>, Lack> {
    let mut blocks = problem.blocks.clone();
    pruned(problem, &mut blocks)?;
    zeros::restricted(problem, &mut blocks);
    for _ in 0..MAX_REDUCTIONS {
        pruned(problem, &mut blocks)?;
        let system = System::new(problem, &blocks)?;
        match system.centre(problem, spend)? {
            End::Inside(gram) => return system.round(&blocks, &gram),
            End::Face(kernels) => {
                let mut smaller = false;
                for (block, kernel) in blocks.iter_mut().zip(kernels) {
                    let Some(kernel) = kernel else { continue };
                    smaller = true;
                    block.basis = combined(&block.basis, &kernel).ok_or(Lack::NotRounded)?;
                }
                if !smaller || blocks.iter().all(|b| b.basis.is_empty()) {
                    return Err(Lack::Unsettled);
                }
            }
        }
    }
    Err(Lack::Unsettled)
}

/// How a minimisation ends.
enum End {
    /// At a minimum: the Gram matrices.
    Inside(Vec<Matrix>),
    /// Running off: for each block the combinations that are still allowed, if fewer.
    Face(Vec<Option<Matrix>>),
}

/// Drops members of bases that no sum can use: a monomial that the target does not
/// have and that arises only as the square of members, always with a positive
/// coefficient (the Newton polytope, and more).
fn pruned(problem: &Problem, blocks: &mut [Block]) -> Result<(), Lack> {
    loop {
        let size: usize = blocks.iter().map(|b| b.basis.len()).sum();
        if size > 4 * MAX_SIZE {
            return Err(Lack::Unsettled);
        }
        // For each monomial the members whose squares have it, unless something else has it too.
        let mut only: BTreeMap<Powers, Option<BTreeSet<(usize, usize)>>> = BTreeMap::new();
        for (j, block) in blocks.iter().enumerate() {
            for (a, b, column) in columns(problem, block)? {
                for (m, q) in column.terms() {
                    let entry = only.entry(m.clone()).or_insert_with(|| Some(BTreeSet::new()));
                    if a == b && q.is_positive() && !problem.target.has(m) {
                        if let Some(set) = entry {
                            set.insert((j, a));
                        }
                    } else {
                        *entry = None;
                    }
                }
            }
        }
        let useless: BTreeSet<(usize, usize)> = only.into_values().flatten().flatten().collect();
        if useless.is_empty() {
            return Ok(());
        }
        for (j, block) in blocks.iter_mut().enumerate() {
            let mut a = 0;
            block.basis.retain(|_| {
                a += 1;
                !useless.contains(&(j, a - 1))
            });
        }
    }
}

/// The products of a block: members a <= b, and the polynomial that belongs to the entry.
fn columns(problem: &Problem, block: &Block) -> Result<Vec<(usize, usize, Polynomial)>, Lack> {
    let mut all = Vec::new();
    for (b, q) in block.basis.iter().enumerate() {
        let outer = block.multiplier.times(q).ok_or(Lack::Unsettled)?;
        for (a, p) in block.basis[..=b].iter().enumerate() {
            let product = outer.times(p).and_then(|p| p.reduced(problem.rules)).ok_or(Lack::Unsettled)?;
            all.push((a, b, product));
        }
    }
    Ok(all)
}

/// New members of a basis; the entries of the combinations must be rationals of small height.
fn combined(basis: &[Polynomial], kernel: &Matrix) -> Option<Vec<Polynomial>> {
    let rows = echelon(kernel)?;
    let mut new = Vec::new();
    for row in rows {
        let mut sum = Polynomial::default();
        for (x, p) in row.iter().zip(basis) {
            sum = sum.plus(&p.scaled(&recognised(*x, 2e-4)?));
        }
        new.push(sum);
    }
    Some(new)
}

/// The reduced echelon form of rows that are independent.
fn echelon(rows: &Matrix) -> Option<Matrix> {
    let mut rows = rows.clone();
    let (count, width) = (rows.len(), rows.first()?.len());
    let mut done = 0;
    for column in 0..width {
        if done == count {
            break;
        }
        let best = (done..count).max_by(|&i, &j| rows[i][column].abs().total_cmp(&rows[j][column].abs()))?;
        let size: f64 = rows[best].iter().fold(0.0, |m, x| x.abs().max(m));
        if rows[best][column].abs() <= 1e-3 * size.max(1e-3) {
            continue;
        }
        rows.swap(done, best);
        let lead = rows[done][column];
        rows[done].iter_mut().for_each(|x| *x /= lead);
        for i in (0..count).filter(|&i| i != done) {
            let factor = rows[i][column];
            let unit = rows[done].clone();
            rows[i].iter_mut().zip(&unit).for_each(|(x, u)| *x -= factor * u);
        }
        done += 1;
    }
    (done == count).then_some(rows)
}

/// The equation `sum of entries times columns = target`, monomial by monomial.
struct System {
    monomials: Vec<Powers>,
    target: Vec<f64>,
    exact_target: Vec<BigRational>,
    blocks: Vec<Columns>,
}

/// Coefficients by the numbers of monomials.
type Column = Vec<(usize, BigRational)>;

/// The columns of a block.
struct Columns {
    size: usize,
    /// Members a <= b and, exactly, the monomials of their product.
    exact: Vec<(usize, usize, Column)>,
    /// For each monomial where it stands in the matrix, both triangles.
    places: Vec<Vec<(usize, usize, f64)>>,
}

impl System {
    fn new(problem: &Problem, blocks: &[Block]) -> Result<System, Lack> {
        let mut index: BTreeMap<Powers, usize> = BTreeMap::new();
        let mut raw = Vec::new();
        for block in blocks {
            let list = columns(problem, block)?;
            for (_, _, p) in &list {
                for (m, _) in p.terms() {
                    let next = index.len();
                    index.entry(m.clone()).or_insert(next);
                }
            }
            raw.push((block.basis.len(), list));
        }
        if problem.target.terms().any(|(m, _)| !index.contains_key(m)) {
            return Err(Lack::Separated);
        }
        let size: usize = blocks.iter().map(|b| b.basis.len()).sum();
        if size > MAX_SIZE || index.len() > MAX_EQUATIONS {
            return Err(Lack::Unsettled);
        }
        let mut monomials = vec![Powers::new(); index.len()];
        for (m, i) in &index {
            monomials[*i] = m.clone();
        }
        let exact_target: Vec<BigRational> =
            monomials.iter().map(|m| problem.target.coefficient(m)).collect();
        let target = exact_target.iter().map(|q| q.to_f64().unwrap_or(f64::NAN)).collect();
        let blocks = raw
            .into_iter()
            .map(|(size, list)| {
                let mut places = vec![Vec::new(); monomials.len()];
                let mut exact = Vec::new();
                for (a, b, p) in list {
                    let mut column = Vec::new();
                    for (m, q) in p.terms() {
                        let i = index[m];
                        let x = q.to_f64().unwrap_or(f64::NAN);
                        places[i].push((a, b, x));
                        if a != b {
                            places[i].push((b, a, x));
                        }
                        column.push((i, q.clone()));
                    }
                    exact.push((a, b, column));
                }
                Columns { size, exact, places }
            })
            .collect();
        Ok(System { monomials, target, exact_target, blocks })
    }

    /// `M(y)` of every block.
    fn matrices(&self, y: &[f64]) -> Vec<Matrix> {
        let matrix = |block: &Columns| {
            let mut m = zeros(block.size, block.size);
            for (places, y) in block.places.iter().zip(y) {
                for (a, b, x) in places {
                    m[*a][*b] += x * y;
                }
            }
            m
        };
        self.blocks.iter().map(matrix).collect()
    }

    /// Cholesky factors of all blocks, scaled to unit diagonals, and the logarithm of the
    /// determinant; nothing outside the cone.
    fn factors(&self, y: &[f64]) -> Option<(Vec<Matrix>, f64)> {
        let mut sum = 0.0;
        let mut all = Vec::new();
        for m in self.matrices(y) {
            let scale: Vec<f64> = (0..m.len()).map(|i| m[i][i].sqrt()).collect();
            if !scale.iter().all(|d| *d > 0.0 && d.is_finite()) {
                return None;
            }
            let unit: Matrix = m
                .iter()
                .enumerate()
                .map(|(i, row)| row.iter().enumerate().map(|(j, x)| x / (scale[i] * scale[j])).collect())
                .collect();
            let mut l = cholesky(&unit)?;
            for (row, d) in l.iter_mut().zip(&scale) {
                row.iter_mut().for_each(|x| *x *= d);
            }
            sum += (0..l.len()).map(|i| 2.0 * logarithm(l[i][i])).sum::<f64>();
            all.push(l);
        }
        Some((all, sum))
    }

    /// Moments of the points.
    fn start(&self, problem: &Problem) -> Vec<f64> {
        let one = BigRational::one();
        let mean = |m: &Powers| {
            let p = Polynomial::single(one.clone(), m.clone());
            problem.points.iter().map(|x| p.at(x)).sum::<f64>() / problem.points.len() as f64
        };
        self.monomials.iter().map(mean).collect()
    }

    fn centre(&self, problem: &Problem, spend: &mut dyn FnMut(u64) -> bool) -> Result<End, Lack> {
        let entries: usize =
            self.blocks.iter().map(|b| b.places.iter().map(Vec::len).sum::<usize>() * b.size * b.size).sum();
        let count = self.monomials.len();
        let cost = 1 + (entries + count * count * count / 3) as u64 / 2000;
        let mut y = self.start(problem);
        let first = self.matrices(&y);
        let (mut l, mut log) = self.factors(&y).ok_or(Lack::Unsettled)?;
        let value = |y: &[f64]| y.iter().zip(&self.target).map(|(y, b)| y * b).sum::<f64>();
        for _ in 0..MAX_STEPS {
            if !spend(cost) {
                return Err(Lack::Exhausted);
            }
            let gram: Vec<Matrix> = l.iter().map(inverse).collect();
            let mut slope = self.target.clone();
            let mut hessian = zeros(count, count);
            for (block, g) in self.blocks.iter().zip(&gram) {
                self.add_derivatives(block, g, &mut slope, &mut hessian);
            }
            // Scaled to a unit diagonal, with a trace of a ridge for dependent monomials.
            let scale: Vec<f64> = (0..count).map(|i| hessian[i][i].max(1e-300).sqrt()).collect();
            for i in 0..count {
                for j in 0..count {
                    hessian[i][j] /= scale[i] * scale[j];
                }
                hessian[i][i] += 1e-13;
            }
            let right: Vec<f64> = slope.iter().zip(&scale).map(|(g, d)| -g / d).collect();
            let Some(h) = cholesky(&hessian) else { break };
            let scaled = solved(&h, &right);
            let decrement = scaled.iter().zip(&right).map(|(a, b)| a * b).sum::<f64>().max(0.0).sqrt();
            let step: Vec<f64> = scaled.iter().zip(&scale).map(|(x, d)| x / d).collect();
            if decrement < 1e-7 {
                return Ok(End::Inside(gram));
            }
            let before = value(&y) - log;
            let mut t = if decrement > 0.5 { 4.0 } else { 1.0 };
            let next = loop {
                let tried: Vec<f64> = y.iter().zip(&step).map(|(y, d)| y + t * d).collect();
                if let Some((l, log)) = self.factors(&tried)
                    && value(&tried) - log < before - 1e-3 * t * decrement * decrement * 0.1
                {
                    break Some((tried, l, log));
                }
                t /= 2.0;
                if t < 1e-9 {
                    break None;
                }
            };
            let Some(next) = next else { break };
            (y, l, log) = next;
            let size: f64 = y.iter().zip(&self.target).map(|(y, b)| (y * b).abs()).sum();
            if value(&y) < -1e-7 * size {
                return Err(Lack::Separated);
            }
            let grown = self
                .matrices(&y)
                .iter()
                .zip(&first)
                .any(|(m, m0)| (0..m.len()).any(|i| m[i][i] > 1e9 * m0[i][i]));
            if grown {
                break;
            }
        }
        Ok(self.face(&y, &first))
    }

    fn add_derivatives(&self, block: &Columns, g: &Matrix, slope: &mut [f64], hessian: &mut Matrix) {
        let n = block.size;
        for (l, places) in block.places.iter().enumerate() {
            if places.is_empty() {
                continue;
            }
            let mut t = zeros(n, n);
            for (a, b, x) in places {
                slope[l] -= x * g[*a][*b];
                for (row, ga) in t.iter_mut().zip(&g[*a]) {
                    let factor = x * ga;
                    for (entry, gb) in row.iter_mut().zip(&g[*b]) {
                        *entry += factor * gb;
                    }
                }
            }
            for (i, others) in block.places.iter().enumerate().skip(l) {
                let sum: f64 = others.iter().map(|(a, b, x)| x * t[*a][*b]).sum();
                hessian[i][l] += sum;
                if i != l {
                    hessian[l][i] += sum;
                }
            }
        }
    }

    /// The combinations of each basis along which the moments stay small.
    fn face(&self, y: &[f64], first: &[Matrix]) -> End {
        let mut kernels = Vec::new();
        for (m, m0) in self.matrices(y).iter().zip(first) {
            let n = m.len();
            if n == 0 {
                kernels.push(None);
                continue;
            }
            // Relative to the points' own moments.
            let scale: Vec<f64> = (0..n).map(|i| m0[i][i].sqrt()).collect();
            let unit: Matrix =
                (0..n).map(|i| (0..n).map(|j| m[i][j] / (scale[i] * scale[j])).collect()).collect();
            let (values, vectors) = eigen(&unit);
            let floor = values[n - 1].abs() * 1e-14;
            let gap = |i: usize| values[i + 1].max(floor) / values[i].max(floor);
            let Some(cut) = (0..n.saturating_sub(1)).max_by(|&i, &j| gap(i).total_cmp(&gap(j))) else {
                kernels.push((values[0] > 1e6).then(Vec::new));
                continue;
            };
            if values[0] > 1e6 {
                kernels.push(Some(Vec::new()));
            } else if gap(cut) > 30.0 && values[n - 1] > 1e4 {
                let rows = vectors[..=cut]
                    .iter()
                    .map(|v| v.iter().zip(&scale).map(|(x, d)| x / d).collect())
                    .collect();
                kernels.push(Some(rows));
            } else {
                kernels.push(None);
            }
        }
        End::Face(kernels)
    }

    /// Rounds coarsely first, finer and finer, until the exact matrices have positive pivots.
    fn round(&self, blocks: &[Block], gram: &[Matrix]) -> Result<Vec<Square>, Lack> {
        let mut values = Vec::new();
        let mut rows: Vec<(BTreeMap<usize, BigRational>, BigRational)> =
            self.exact_target.iter().map(|q| (BTreeMap::new(), q.clone())).collect();
        let mut is_diagonal = Vec::new();
        for (block, g) in self.blocks.iter().zip(gram) {
            for (a, b, column) in &block.exact {
                let unknown = values.len();
                values.push(g[*a][*b]);
                is_diagonal.push(a == b);
                for (i, q) in column {
                    let twice = if a == b { q.clone() } else { q + q };
                    rows[*i].0.insert(unknown, twice);
                }
            }
        }
        let equations = Equations::new(rows, &|i| !is_diagonal[i], 3_000_000).ok_or(Lack::NotRounded)?;
        let coarse = [1u64, 2, 4, 6, 12, 24, 60, 120, 360, 1 << 10, 1 << 13];
        let fine = (16..=44).step_by(4).map(|n| 1u64 << n);
        for denominator in coarse.into_iter().chain(fine) {
            let put: Option<Vec<BigRational>> = values.iter().map(|x| rounded(*x, denominator)).collect();
            let Some(mut put) = put else { continue };
            equations.complete(&mut put);
            if let Some(squares) = self.taken_apart(blocks, &put) {
                return Ok(squares);
            }
        }
        Err(Lack::NotRounded)
    }

    fn taken_apart(&self, blocks: &[Block], values: &[BigRational]) -> Option<Vec<Square>> {
        let mut next = values.iter();
        let mut squares = Vec::new();
        for (j, (columns, block)) in self.blocks.iter().zip(blocks).enumerate() {
            let n = columns.size;
            let mut g = vec![vec![BigRational::zero(); n]; n];
            for (a, b, _) in &columns.exact {
                let q = next.next()?;
                g[*a][*b] = q.clone();
                g[*b][*a] = q.clone();
            }
            for (weight, row) in pivots(g)? {
                let mut root = Polynomial::default();
                for (q, p) in row.iter().zip(&block.basis) {
                    root = root.plus(&p.scaled(q));
                }
                // Whole coefficients read better.
                let content = root.content();
                let weight = weight * &content * &content;
                squares.push(Square { block: j, weight, root: root.scaled(&content.recip()) });
            }
        }
        Some(squares)
    }
}

/// The natural logarithm to about 10 digits, the same on every machine.
fn logarithm(x: f64) -> f64 {
    // x = m 2^e with m in [2/3, 4/3); log m = 2 artanh((m-1)/(m+1)).
    let bits = x.to_bits();
    let mut e = ((bits >> 52) & 0x7ff) as i64 - 1023;
    let mut m = f64::from_bits((bits & 0x000f_ffff_ffff_ffff) | 0x3ff0_0000_0000_0000);
    if m > 4.0 / 3.0 {
        m /= 2.0;
        e += 1;
    }
    let z = (m - 1.0) / (m + 1.0);
    let mut sum = 0.0;
    for k in (0..12).rev() {
        sum = sum * z * z + 1.0 / f64::from(2 * k + 1);
    }
    2.0 * z * sum + e as f64 * std::f64::consts::LN_2
}

#[cfg(test)]
mod tests;

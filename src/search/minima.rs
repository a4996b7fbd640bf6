//! Points where both sides of a goal are equal, read exactly: descent from the
//! best of many points, Newton's method, then the simplest fractions nearby, then
//! an exact check.

use num_rational::BigRational;
use num_traits::ToPrimitive;

use crate::enclosure::Interval;
use crate::expression::tape::{Jets, Order, Tape};
use crate::expression::{Name, Term};
use crate::statement::{Rel, Relation, Sequent};

use super::engine::Search;
use super::exact::{placed, truth};
use super::gram::matrix::{Matrix, cholesky, solved};
use super::sample::{Look, Probe, descend, points, simplest, values};

/// Points from which descents start.
const MOST_STARTS: usize = 12;
/// Points looked at first.
const MOST_POINTS: usize = 300;
/// Steps of Newton's method.
const NEWTON_STEPS: usize = 12;
/// How far a coordinate may be from its fraction.
const NEAR: (i64, i64) = (1, 100_000);

/// Such points of a weak inequality, at most a few.
#[must_use]
pub fn touching(s: &Sequent, search: &mut Search) -> Vec<Vec<Term>> {
    let Some(goal) = s.relation().map(Relation::turned).filter(|r| r.rel == Rel::LessEqual) else {
        return Vec::new();
    };
    let Some(mut probe) = Probe::<f64>::new(s, ()) else { return Vec::new() };
    let names: Vec<Name> = s.variables.iter().map(|d| d.name.clone()).collect();
    let Some(tape) = Tape::<f64>::new(&[goal.difference()], &names, s, ()) else { return Vec::new() };
    let mut jets = Jets::default();
    let mut starts = Vec::new();
    for point in points(s, MOST_POINTS) {
        if !probe.pay(1, search) {
            return Vec::new();
        }
        let Some(at) = values::<f64>(&point, ()) else { continue };
        if let Look::Margin(m, false) = probe.look(&at) {
            starts.push((m, point));
        }
    }
    starts.sort_by(|a, b| a.0.compare(&b.0));
    let mut found: Vec<Vec<Term>> = Vec::new();
    for (_, start) in starts.into_iter().take(MOST_STARTS) {
        let (low, _, _) = descend(s, &mut probe, &start, (120, 1), search);
        let Some(low) = polished(&tape, &low, &mut jets) else { continue };
        let near = BigRational::new(NEAR.0.into(), NEAR.1.into());
        let simple = |x: &f64| {
            let q = BigRational::from_float(*x)?;
            Some(Term::number(simplest(&(&q - &near), &(&q + &near))))
        };
        let Some(point) = low.iter().map(simple).collect::<Option<Vec<Term>>>() else { continue };
        let equal = Relation::new(goal.left.clone(), Rel::Equal, goal.right.clone());
        if !found.contains(&point) && truth(&equal.under(&placed(s, &point)), 64) == Some(true) {
            found.push(point);
        }
    }
    found
}

/// Newton's method for a critical point of the only root of the tape, as long as its second
/// derivatives are positive definite.
fn polished(tape: &Tape<f64>, start: &[Term], jets: &mut Jets<f64>) -> Option<Vec<f64>> {
    let value = |t: &Term| t.as_number().and_then(ToPrimitive::to_f64);
    let mut x: Vec<f64> = start.iter().map(value).collect::<Option<_>>()?;
    let n = x.len();
    for _ in 0..NEWTON_STEPS {
        let at: Vec<Interval> = x.iter().map(|x| Interval::point(*x)).collect();
        tape.run(&at, Order::Bend, jets);
        let seen = |v: Option<&Interval>| v.map_or(Some(0.0), Interval::midpoint);
        let slope: Vec<f64> = (0..n).map(|i| seen(tape.slope(0, i, jets))).collect::<Option<_>>()?;
        let row = |i: usize| (0..n).map(|j| seen(tape.bend(0, i, j, jets))).collect::<Option<Vec<f64>>>();
        let bend: Matrix = (0..n).map(row).collect::<Option<_>>()?;
        let Some(l) = cholesky(&bend) else { break };
        let step = solved(&l, &slope);
        x.iter_mut().zip(&step).for_each(|(x, d)| *x -= d);
    }
    x.iter().all(|x| x.is_finite()).then_some(x)
}

#[cfg(test)]
mod tests {
    use super::super::budget::Effort;
    use super::*;
    use crate::search::method::testing::opened;

    #[test]
    fn simple_fractions_are_read() {
        let found = |claim: &str| -> Vec<String> {
            let (s, _, _) = opened(claim);
            let mut search = Search::new(Effort::default(), 0);
            touching(&s, &mut search).iter().map(|p| format!("{} {}", p[0], p[1])).collect()
        };
        let quartic = "x^4 + (x - 1/3)^2 + exp(y) - y - 1 >= x^4";
        assert_eq!(found(&format!("for x in [-2, 2], y in [-2, 2]: {quartic}")), ["1/3 0"]);
        assert!(found(&format!("for x in [-2, 2], y in [-2, 2]: {quartic} - 1/10^6")).is_empty());
        let product = "(1 + (x + y + 1)^2*(4 + x^2))*(30 + (2*x - 3*y - 3)^2*(2 + y^2)) >= 30";
        assert_eq!(found(&format!("for x in [-2, 2], y in [-2, 2]: {product}")), ["0 -1"]);
    }
}

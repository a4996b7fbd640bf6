//! Points where both sides of a goal are equal, read exactly: descent from the
//! best of many points, then the simplest fractions nearby, then an exact check.

use num_rational::BigRational;

use crate::expression::Term;
use crate::statement::{Rel, Relation, Sequent};

use super::engine::Search;
use super::exact::{placed, truth};
use super::sample::{Look, Probe, descend, points, simplest, values};

/// Points from which descents start.
const MOST_STARTS: usize = 12;
/// Points looked at first.
const MOST_POINTS: usize = 300;
/// How far a coordinate may be from its fraction.
const NEAR: (i64, i64) = (1, 100_000);

/// Such points of a weak inequality, at most a few.
#[must_use]
pub fn touching(s: &Sequent, search: &mut Search) -> Vec<Vec<Term>> {
    let Some(goal) = s.relation().map(Relation::turned).filter(|r| r.rel == Rel::LessEqual) else {
        return Vec::new();
    };
    let Some(mut probe) = Probe::<f64>::new(s, ()) else { return Vec::new() };
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
        let (low, margin, _) = descend(s, &mut probe, &start, (120, 1), search);
        if margin.gap > 1e-6 && margin.relative > 1e-6 {
            continue;
        }
        let near = BigRational::new(NEAR.0.into(), NEAR.1.into());
        let simple =
            |t: &Term| t.rational_value().map(|q| Term::number(simplest(&(&q - &near), &(&q + &near))));
        let Some(point) = low.iter().map(simple).collect::<Option<Vec<Term>>>() else { continue };
        let equal = Relation::new(goal.left.clone(), Rel::Equal, goal.right.clone());
        if !found.contains(&point) && truth(&equal.under(&placed(s, &point)), 64) == Some(true) {
            found.push(point);
        }
    }
    found
}

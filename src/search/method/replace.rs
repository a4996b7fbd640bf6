//! Parts of the goal replaced by their bounds, where the goal moves one way with
//! them: from `norm <= bound` and a goal that is harder the larger `norm` is, the
//! goal with `bound` in its place. The kernel says whether the shape of the goal
//! tells how it moves; several parts are replaced one after another. By an equation
//! its left side is replaced everywhere.

use crate::expression::Term;
use crate::statement::{Conclusion, Rel, Relation, Sequent};

use super::super::engine::{Answer, Method, Search, Stuck};
use super::super::proof::Proof;
use super::super::sample::quick;
use super::combine::Combine;
use super::exact::Exact;
use super::facts::{Source, facts};

/// The method.
pub struct Replace;

/// Steps one after another.
const MOST_STEPS: usize = 6;
/// Goals looked at in all.
const MOST_GOALS: usize = 40;
/// Tried in the first reductions only: it branches.
const DEEPEST: usize = 3;

impl Method for Replace {
    fn name(&self) -> &'static str {
        "replacement by bounds"
    }

    fn share(&self) -> u64 {
        40
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let Some(goal) = s.relation() else { return Err(Stuck::NotApplicable("no relation")) };
        if !matches!(goal.turned().rel, Rel::LessEqual | Rel::Less) {
            return Err(Stuck::NotApplicable("no inequality"));
        }
        if search.depth() > DEEPEST {
            return Err(Stuck::NotApplicable("too many reductions around it"));
        }
        let s = s.with_goal(goal.turned());
        // Breadth first, so that the shortest way is found; each with the way to it.
        let mut goals: Vec<(Sequent, Vec<Proof>)> = vec![(s, Vec::new())];
        let mut next = 0;
        while next < goals.len() {
            let (at, way) = goals[next].clone();
            next += 1;
            if way.len() >= MOST_STEPS {
                continue;
            }
            for (step, new) in replaced(&at, search)? {
                if goals.len() >= MOST_GOALS {
                    break;
                }
                if goals.iter().any(|(old, _)| *old == new) || quick(&new, 24, search).is_some() {
                    continue;
                }
                let mut way = way.clone();
                way.extend(step);
                for method in [&Exact as &dyn Method, &Combine { products: false }] {
                    if let Ok(proof) = search.attempt(method, &new) {
                        return Ok(finished(&way, proof));
                    }
                }
                goals.push((new, way));
            }
        }
        // The goals that have come furthest are the simplest.
        let ends = goals.iter().skip(1).rev().filter(|(_, way)| !way.is_empty());
        for (new, way) in ends.take(2) {
            let share = search.left() / 3;
            if let Ok(proof) = search.within(share, |search| search.prove(new)) {
                return Ok(finished(way, proof));
            }
        }
        match goals.len() {
            1 => Err(Stuck::NotApplicable("nothing to replace by a bound")),
            _ => Err(Stuck::because("no replacement leads on")),
        }
    }
}

fn finished(way: &[Proof], proof: Proof) -> Proof {
    way.iter().rev().fold(proof, |rest, step| step.clone().with(rest))
}

/// All ways to replace one part by its bound: the steps that lead on, each without its
/// last premise, and what is left to show.
fn replaced(s: &Sequent, search: &mut Search) -> Result<Vec<(Vec<Proof>, Sequent)>, Stuck> {
    let Some(goal) = s.relation() else { return Ok(vec![]) };
    let mut found = Vec::new();
    for (i, h) in s.hypotheses.iter().enumerate().filter(|(_, h)| h.rel == Rel::Equal) {
        if h.left.as_number().is_some() || h.right.replace(&h.left, &h.right) != h.right {
            continue;
        }
        let put = |t: &Term| t.replace(&h.left, &h.right);
        let after = goal.map(put);
        if after != *goal {
            let step = Proof::new("substitute").word(&format!("h{}", i + 1));
            let keep = |r: &Relation| if r == h { r.clone() } else { r.map(put) };
            let hypotheses = s.hypotheses.iter().map(keep).collect();
            found.push((vec![step], Sequent { hypotheses, ..s.with_goal(after) }));
        }
    }
    for fact in facts(s) {
        let (a, b) = (&fact.relation.left, &fact.relation.right);
        for (old, new, word) in [(a, b, "down"), (b, a, "up")] {
            let put = |t: &Term| t.replace(old, new);
            let after = goal.map(put);
            if old.as_number().is_some() || after == *goal || new.replace(old, new) != *new {
                continue;
            }
            let step = Proof::new("replace").with(old).with(new).word(word);
            let step = step.with(Proof::new("sign")).with(Proof::new("structure"));
            let mut inner = s.clone();
            let mut way = Vec::new();
            if let Source::Lemma(lemma) = &fact.source {
                inner.hypotheses.push(fact.relation.clone());
                way.push(lemma.clone());
            }
            if search.examine(&inner, &step.clone().with(Proof::open()))? != Answer::Open {
                continue;
            }
            inner.goal = Conclusion::Relation(after);
            way.push(step);
            found.push((way, inner));
        }
    }
    Ok(found)
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::*;

    #[test]
    fn bounds_in_place_of_what_they_bound() {
        let given = "for n in [0, infinity), L in [0, infinity), u in (0, infinity), r in [1, infinity) \
                     given n <= (1 + L)^r, u <= 2 + n";
        proves(&Replace, &format!("{given}: exp(-1/(3 + (1 + L)^r)) >= exp(-1/(1 + u))"), "replace");
        leaves(&Replace, &[&format!("{given}: exp(-1/(3 + (1 + L)^r)) <= exp(-1/(1 + u))")]);
        proves(&Replace, "for x in [1, 2], y in [3, infinity): log(x + 3*y) <= log(2 + 3*y)", "replace");
        leaves(&Replace, &["for x in [1, 3], y in [3, infinity): log(x + 3*y) <= log(2 + 3*y)"]);
    }

    #[test]
    fn equations_anywhere() {
        let given = "for d in [2, infinity), t in (0, 1), m in [3, infinity) given d = m^2, t <= 1 - 1/m^2";
        proves(&Replace, &format!("{given}: t <= 1 - 1/d"), "substitute");
        leaves(&Replace, &[&format!("{given}: t <= 1 - 2/d")]);
    }
}

//! Homogeneity: where multiplying some of the variables by one positive number
//! multiplies both sides by a power of it, one of them, `a`, is taken out: the others
//! become `a t`, the power of `a` a common factor, and there is one variable fewer.
//! Logarithms of ratios count as degree 0 because the normal form cancels `log a`.
//!
//! Source: Hardy, Littlewood, Polya, Inequalities, 1934, 1.4.

use num_traits::{One, Zero};

use crate::expression::{End, Name, Sort, Term};
use crate::search::engine::{Answer, Method, Search, Stuck};
use crate::search::laurent::{Algebra, Exponent, Monomial, Poly};
use crate::search::plain::is_plainly_positive;
use crate::search::proof::Proof;
use crate::statement::{Declaration, Domain, Rel, Relation, Sequent};

use super::ladder::{narrowed, well_posed};

/// The method.
pub struct Homogeneous;

/// More variables than this are not tried in all combinations.
const MOST_VARIABLES: usize = 5;

impl Method for Homogeneous {
    fn name(&self) -> &'static str {
        "homogeneity"
    }

    fn share(&self) -> u64 {
        70
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let Some(goal) = s.relation().map(Relation::turned) else {
            return Err(Stuck::NotApplicable("no relation"));
        };
        if !matches!(goal.rel, Rel::LessEqual | Rel::Less) || s.variables.len() < 2 {
            return Err(Stuck::NotApplicable("no inequality in several variables"));
        }
        if let Some((word, smaller)) = narrowed(s) {
            let mut proof = Proof::new("narrow").word(&word).with(self.attempt(&smaller, search)?);
            if let Some(defined) = well_posed(&smaller, search)? {
                proof = proof.with(defined);
            }
            return Ok(proof);
        }
        for (i, pivot) in s.variables.iter().enumerate() {
            let others: Vec<&Name> = s.variables[i + 1..]
                .iter()
                .filter(|d| d.domain.sort == Sort::Real && goal.difference().mentions(&d.name))
                .map(|d| &d.name)
                .collect();
            let unbounded = pivot.domain.sort == Sort::Real && pivot.domain.upper.finite().is_none();
            let a = Term::variable(pivot.name.clone());
            if !unbounded || !is_plainly_positive(s, &a) || others.len() > MOST_VARIABLES {
                continue;
            }
            // The more variables are scaled the better.
            let mut choices: Vec<u32> = (1..1 << others.len()).collect();
            choices.sort_by_key(|c| std::cmp::Reverse(c.count_ones()));
            for choice in choices {
                let scaled: Vec<Name> =
                    (0..others.len()).filter(|j| choice >> j & 1 == 1).map(|j| others[j].clone()).collect();
                search.spend(20 * u64::from(goal.difference().size()))?;
                let Some(reduced) = Reduced::new(s, &goal, &a, &scaled, search) else { continue };
                if search.examine(s, &reduced.written(Proof::open()))? == Answer::Open {
                    let rest = search.prove(&reduced.sequent)?;
                    return Ok(reduced.written(rest));
                }
            }
        }
        Err(Stuck::NotApplicable("not homogeneous"))
    }
}

/// A sequent with the common factor taken out, and how it came about.
struct Reduced {
    sequent: Sequent,
    /// One change of variable after the other.
    changes: Vec<Change>,
    /// The step from the changed goal to the reduced one: goal, factor, the pivot if
    /// nothing mentions it any more.
    goal: Relation,
    factor: Term,
    forgotten: Option<Name>,
}

struct Change {
    old: Declaration,
    new: Declaration,
    phi: Term,
    psi: Term,
    /// The factor `1/a` by which the ends were divided.
    over: Term,
    hypotheses: usize,
}

impl Reduced {
    fn new(s: &Sequent, goal: &Relation, a: &Term, scaled: &[Name], search: &mut Search) -> Option<Reduced> {
        let fixed = |t: &Term| !scaled.iter().any(|x| t.mentions(x)) && !t.mentions(a.as_variable().unwrap());
        if s.hypotheses.iter().any(|h| !fixed(&h.left) || !fixed(&h.right)) {
            return None;
        }
        let mut now = s.with_goal(goal.clone());
        let mut changes = Vec::new();
        for x in scaled {
            let place = now.variables.iter().position(|d| d.name == *x)?;
            let old = now.variables[place].clone();
            let name = search.fresh_variable("t", &now);
            let divided = |end: &End| match end {
                End::Finite(e) => {
                    let q = algebra(&now, |al| al.poly(&e.divide(a)))?.to_term();
                    (!q.mentions(a.as_variable()?)).then_some(End::Finite(q))
                }
                other => Some(other.clone()),
            };
            let domain = Domain {
                lower: divided(&old.domain.lower)?,
                upper: divided(&old.domain.upper)?,
                ..old.domain
            };
            let new = Declaration { name: name.clone(), domain };
            let phi = a.multiply(&Term::variable(name));
            let ends = old.domain.ends().count();
            changes.push(Change {
                old: old.clone(),
                new: new.clone(),
                phi: phi.clone(),
                psi: Term::variable(x.clone()).divide(a),
                over: Term::integer(1).divide(a),
                hypotheses: ends,
            });
            now.variables[place] = new;
            for d in &mut now.variables[place + 1..] {
                d.domain = d.domain.map(|t| t.with(x, &phi));
            }
            let put = now.relation()?.map(|t| t.with(x, &phi));
            now = now.with_goal(put);
        }
        let changed = now.relation()?.clone();
        let side = |t: &Term| algebra(&now, |al| degree(&al.poly(t)?, a));
        let (goal, k) = match (side(&changed.left), side(&changed.right)) {
            (Some((l, i)), Some((r, j))) if i == j || l.is_empty() || r.is_empty() => {
                let k = if l.is_empty() { j } else { i };
                (Relation::new(l.to_term(), changed.rel, r.to_term()), k)
            }
            _ => {
                let (all, k) = side(&changed.difference())?;
                (Relation::new(Term::integer(0), changed.rel, all.to_term()), k)
            }
        };
        let factor = Monomial::atom(a.clone(), k).to_term(&One::one());
        let mut sequent = now.with_goal(goal.clone());
        let pivot = a.as_variable()?;
        let elsewhere = sequent.variables.iter().any(|d| d.domain.ends().any(|e| e.mentions(pivot)));
        let forgotten = (!elsewhere).then(|| pivot.clone());
        if forgotten.is_some() {
            sequent.variables.retain(|d| d.name != *pivot);
        }
        Some(Reduced { sequent, changes, goal, factor, forgotten })
    }

    fn written(&self, rest: Proof) -> Proof {
        let rest = match &self.forgotten {
            Some(a) => Proof::new("forget").word(a).with(rest),
            None => rest,
        };
        let mut proof = Proof::new("scale")
            .with(self.goal.clone())
            .with(&self.factor)
            .with(Proof::new("sign"))
            .with(rest);
        for c in self.changes.iter().rev() {
            if c.hypotheses > 0 {
                let mut forget = Proof::new("forget");
                for i in 1..=c.hypotheses {
                    forget = forget.word(&format!("h{i}"));
                }
                proof = forget.with(proof);
            }
            let x = &c.old.name;
            let mut change = Proof::new("change").word(x).with(c.new.clone()).with(&c.phi).with(&c.psi);
            for (end, word) in c.old.ends().into_iter().map(|r| r.turned()).zip(words(&c.old)) {
                let step = Proof::new("linear").with(Term::integer(1)).word(&word);
                change = change
                    .with(Proof::new("scale").with(end).with(&c.over).with(Proof::new("sign")).with(step));
            }
            proof = change.with(Proof::new("identity")).with(proof);
        }
        proof
    }
}

/// What a certificate calls the finite ends, lower first.
fn words(d: &Declaration) -> Vec<String> {
    let finite = |e: &End| e.finite().is_some();
    let mut list = Vec::new();
    if finite(&d.domain.lower) {
        list.push(format!("lo.{}", d.name));
    }
    if finite(&d.domain.upper) {
        list.push(format!("hi.{}", d.name));
    }
    list
}

fn algebra<T>(s: &Sequent, f: impl FnOnce(&Algebra) -> T) -> T {
    f(&Algebra { positive: &|t| is_plainly_positive(s, t) })
}

/// `p = a^k q` with q free of a.
fn degree(p: &Poly, a: &Term) -> Option<(Poly, Exponent)> {
    let name = a.as_variable()?;
    let mut k: Option<Exponent> = None;
    for (m, _) in p.terms() {
        let own = m.exponent(a);
        if k.is_some_and(|k| k != own) || m.factors().iter().any(|(t, _)| t != a && t.mentions(name)) {
            return None;
        }
        k = Some(own);
    }
    let k = k.unwrap_or_else(Exponent::zero);
    Some((p.shifted(&Monomial::atom(a.clone(), -k)), k))
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::*;

    #[test]
    fn one_variable_fewer() {
        let two = "for x in (0, infinity), y in (0, infinity)";
        proves(&Homogeneous, &format!("{two}: x - y <= x*log(x/y)"), "change");
        proves(&Homogeneous, &format!("{two}: sqrt(x + y) <= sqrt(x) + sqrt(y)"), "change");
        proves(&Homogeneous, "for x in (0, infinity), y in [x, infinity): x^2 <= x*y", "change");
    }

    #[test]
    fn false_or_not_homogeneous() {
        leaves(
            &Homogeneous,
            &[
                "for x in (0, infinity), y in (0, infinity): 1.001*(x - y) <= x*log(x/y)",
                "for x in (0, infinity), y in (0, infinity): x - y <= x*log(x/y) + x^2",
                "for x in (0, infinity), y in (-infinity, infinity): x*y <= x^2",
                "for x in [0, infinity), y in (-infinity, infinity): 2*x*y <= x^2 + y^2",
            ],
        );
    }
}

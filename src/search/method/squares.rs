//! Sums of squares with multipliers (Stengle's certificates of
//! bounded degree). The goal is brought to a polynomial in atoms;
//! ends, hypotheses and non-negative atoms are multipliers, alone first, then their
//! products; last the whole is multiplied by a positive polynomial, which forms
//! such as Motzkin's need. Weighted arithmetic-geometric means are among them.
//!
//! Sources: Parrilo 2003; Putinar 1993, Schmuedgen 1991 for the multipliers; Polya
//! 1928, Reznick 1995 for the positive factor.

use num_rational::BigRational;
use num_traits::One;

use crate::expression::Term;
use crate::statement::{Rel, Relation, Sequent};

use super::super::algebraic::Algebraic;
use super::super::engine::{Method, Search, Stuck};
use super::super::gram::{Block, Lack, Problem, decompose, simple_zeros};
use super::super::polynomial::{Polynomial, monomials};
use super::super::proof::Proof;

/// The method.
pub struct Squares;

/// With more variables the Gram matrices are too large to be worth a try.
const MOST_VARIABLES: usize = 8;
/// Higher degrees are not tried.
const MAX_DEGREE: usize = 12;
/// Most members of all bases before they are pruned.
const MAX_MEMBERS: usize = 260;
/// Points at which moments are taken.
const POINTS: usize = 600;

impl Method for Squares {
    fn name(&self) -> &'static str {
        "squares"
    }

    fn share(&self) -> u64 {
        25
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let goal = s.relation().ok_or(Stuck::NotApplicable("no relation"))?.turned();
        if !matches!(goal.rel, Rel::LessEqual | Rel::Less) {
            return Err(Stuck::NotApplicable("no inequality"));
        }
        if s.variables.len() > MOST_VARIABLES {
            return Err(Stuck::NotApplicable("too many variables"));
        }
        search.spend(20)?;
        let form = Algebraic::of(s, &goal.difference())
            .ok_or(Stuck::NotApplicable("not a polynomial in few atoms"))?;
        if form.target.degree() > MAX_DEGREE || form.target.as_number().is_some() {
            return Err(Stuck::NotApplicable("a number, or of too high a degree"));
        }
        let opaque = |t: &Term| t.as_variable().is_none() && t.free_variables().len() > 1;
        if form.rules.is_empty() && form.atoms.iter().filter(|t| opaque(t)).count() > 1 {
            return Err(Stuck::NotApplicable("atoms without an equation"));
        }
        let points = form.points(POINTS);
        search.spend(POINTS as u64 * 10)?;
        if points.len() < POINTS / 4 {
            return Err(Stuck::NotApplicable("no points in general position"));
        }
        // A clearly negative value settles the matter.
        if points.iter().any(|x| form.target.at(x) < -1e-9 * (1.0 + size(&form.target, x))) {
            return Err(Stuck::because("negative at a sampled point"));
        }
        let constraints = constraints(s, &form);
        let zeros = simple_zeros(&form.target, &form.rules, form.atoms.len());
        search.spend(100)?;
        let mut told = Stuck::because("no sum of squares of low degree");
        for plan in plans(&form, &constraints) {
            let whole = form.target.times(&plan.factor).and_then(|p| p.reduced(&form.rules));
            let Some(target) = whole else { continue };
            let blocks = blocks(&form, &target, &plan.multipliers, plan.extra);
            let problem = Problem { target, blocks, rules: &form.rules, points: &points, zeros: &zeros };
            match decompose(&problem, &mut |units| search.spend(units).is_ok()) {
                Ok(squares) => {
                    let parts: Vec<Part> = squares
                        .into_iter()
                        .map(|q| Part {
                            weight: q.weight,
                            root: q.root,
                            multiplier: &plan.multipliers[q.block],
                        })
                        .collect();
                    if goal.rel == Rel::Less && !parts.iter().any(|p| p.is_strict(&form)) {
                        told = Stuck::because("only the weak inequality");
                        continue;
                    }
                    match proof(s, &form, &plan, &parts, search).and_then(|p| search.accepted(s, p)) {
                        Err(Stuck::Exhausted) => return Err(Stuck::Exhausted),
                        Err(stuck) => told = stuck,
                        found => return found,
                    }
                }
                Err(Lack::Exhausted) => return Err(Stuck::Exhausted),
                Err(_) => {}
            }
        }
        Err(told)
    }
}

fn size(p: &Polynomial, x: &[f64]) -> f64 {
    p.terms().map(|(m, q)| Polynomial::single(q.clone(), m.clone()).at(x).abs()).sum()
}

/// Something known to be not negative, and how the kernel may be told.
#[derive(Clone)]
struct Multiplier {
    value: Polynomial,
    /// Atoms with a plain sign.
    atoms: Vec<usize>,
    /// References.
    words: Vec<String>,
    /// Whether it is positive.
    strict: bool,
}

impl Multiplier {
    fn one(n: usize) -> Multiplier {
        Multiplier {
            value: Polynomial::number(BigRational::one(), n),
            atoms: vec![],
            words: vec![],
            strict: true,
        }
    }

    fn times(&self, other: &Multiplier) -> Option<Multiplier> {
        Some(Multiplier {
            value: self.value.times(&other.value)?,
            atoms: [self.atoms.as_slice(), &other.atoms].concat(),
            words: [self.words.as_slice(), &other.words].concat(),
            strict: self.strict && other.strict,
        })
    }
}

/// Ends, hypotheses and atoms with a sign.
fn constraints(s: &Sequent, form: &Algebraic) -> Vec<Multiplier> {
    let n = form.atoms.len();
    let mut list: Vec<Multiplier> = Vec::new();
    for i in 0..n {
        if let Some(strict) = form.sign(i) {
            let value = Polynomial::variable(i, n);
            list.push(Multiplier { value, atoms: vec![i], words: vec![], strict });
        }
    }
    let mut add = |word: String, r: &Relation| {
        let r = r.turned();
        let strict = match r.rel {
            Rel::LessEqual => false,
            Rel::Less => true,
            _ => return,
        };
        let Some(value) = form.polynomial(&r.difference()) else { return };
        if value.as_number().is_none() && !list.iter().any(|m| m.value == value) {
            list.push(Multiplier { value, atoms: vec![], words: vec![word], strict });
        }
    };
    for d in &s.variables {
        for r in d.ends() {
            let word = if matches!(r.rel, Rel::GreaterEqual | Rel::Greater) { "lo" } else { "hi" };
            add(format!("{word}.{}", d.name), &r);
        }
    }
    for (i, h) in s.hypotheses.iter().enumerate() {
        add(format!("h{}", i + 1), h);
    }
    list
}

/// One attempt: a positive factor, the multipliers, and how much the degree is raised.
struct Plan {
    factor: Polynomial,
    multipliers: Vec<Multiplier>,
    extra: usize,
}

fn plans(form: &Algebraic, constraints: &[Multiplier]) -> Vec<Plan> {
    let n = form.atoms.len();
    let one = Multiplier::one(n);
    let degree = form.target.degree();
    let mut products = vec![one.clone()];
    let mut sets = vec![products.clone()];
    for rank in 1..=3usize {
        // Products of `rank` different constraints.
        let mut chosen: Vec<(usize, Multiplier)> = vec![(0, one.clone())];
        for _ in 0..rank {
            let mut next = Vec::new();
            for (from, m) in &chosen {
                for (i, c) in constraints.iter().enumerate().skip(*from) {
                    if let Some(product) = m.times(c)
                        && product.value.degree() <= degree + 1
                    {
                        next.push((i + 1, product));
                    }
                }
            }
            chosen = next;
        }
        if chosen.is_empty() || products.len() + chosen.len() > 40 {
            break;
        }
        products.extend(chosen.into_iter().map(|(_, m)| m));
        sets.push(products.clone());
    }
    let number = |q: i64| Polynomial::number(BigRational::from_integer(q.into()), n);
    let signs: Vec<Option<bool>> = (0..n).map(|i| form.sign(i)).collect();
    let variables = (0..n).map(|i| Polynomial::variable(i, n));
    let sum = if signs.iter().all(|s| *s == Some(true)) {
        variables.fold(Polynomial::default(), |sum, x| sum.plus(&x))
    } else if signs.iter().all(Option::is_some) {
        variables.fold(number(1), |sum, x| sum.plus(&x))
    } else {
        variables.fold(number(1), |sum, x| sum.plus(&x.times(&x).unwrap_or_default()))
    };
    let mut all: Vec<Plan> = Vec::new();
    for set in &sets {
        all.push(Plan { factor: number(1), multipliers: set.clone(), extra: 0 });
    }
    for set in &sets {
        all.push(Plan { factor: sum.clone(), multipliers: set.clone(), extra: 0 });
    }
    if let Some(square) = sum.times(&sum) {
        all.push(Plan { factor: square, multipliers: sets[0].clone(), extra: 0 });
    }
    if let Some(set) = sets.get(2).or(sets.get(1)) {
        all.push(Plan { factor: number(1), multipliers: set.clone(), extra: 2 });
    }
    all
}

fn blocks(form: &Algebraic, target: &Polynomial, multipliers: &[Multiplier], extra: usize) -> Vec<Block> {
    let n = form.atoms.len();
    let degree = target.degree() + target.degree() % 2 * usize::from(multipliers.len() > 1) + extra;
    let mut members = 0;
    multipliers
        .iter()
        .map(|m| {
            let room = (degree.saturating_sub(m.value.degree())) / 2;
            let basis: Vec<Polynomial> = monomials(n, room)
                .into_iter()
                .filter(|powers| form.rules.iter().all(|r| powers[r.variable] < r.power))
                .map(|powers| Polynomial::single(BigRational::one(), powers))
                .collect();
            members += basis.len();
            let basis = if members > MAX_MEMBERS { vec![] } else { basis };
            Block { multiplier: m.value.clone(), basis }
        })
        .collect()
}

/// A weighted square with its multiplier.
struct Part<'a> {
    weight: BigRational,
    root: Polynomial,
    multiplier: &'a Multiplier,
}

impl Part<'_> {
    /// Whether the kernel will see that it is positive.
    fn is_strict(&self, form: &Algebraic) -> bool {
        let mut terms = self.root.terms();
        let single = terms.next().filter(|_| self.root.len() == 1);
        let positive =
            |powers: &[u16]| powers.iter().enumerate().all(|(i, e)| *e == 0 || form.sign(i) == Some(true));
        self.multiplier.strict && single.is_some_and(|(powers, _)| positive(powers))
    }
}

fn proof(
    s: &Sequent,
    form: &Algebraic,
    plan: &Plan,
    parts: &[Part],
    search: &mut Search,
) -> Result<Proof, Stuck> {
    let own = form.term(&plan.factor);
    let factor = if own.is_one() {
        form.factor.clone()
    } else if form.factor.is_one() {
        own
    } else {
        form.factor.multiply(&own)
    };
    let mut proof = Proof::new("squares").with(&factor);
    if !form.factor_is_plain {
        let positive = Relation::new(Term::integer(0), Rel::Less, factor);
        let share = search.left() / 10;
        proof = proof.with(search.within(share, |search| search.prove(&s.with_goal(positive)))?);
    }
    for part in parts {
        let mut powers = vec![0u16; form.atoms.len()];
        part.multiplier.atoms.iter().for_each(|i| powers[*i] += 1);
        let mut square =
            Proof::new("square").with(form.product(&powers, &part.weight)).with(form.term(&part.root));
        for word in &part.multiplier.words {
            square = square.word(word);
        }
        proof = proof.with(square);
    }
    Ok(proof)
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::Squares;

    #[test]
    fn touching_on_curves_at_points_and_at_infinity() {
        for claim in [
            "for x in (-infinity, infinity), y in (-infinity, infinity): x^4*y^2 + x^2*y^4 + 1 >= 3*x^2*y^2",
            "for a in (0, infinity), b in (0, infinity): sqrt(a*b) <= (a + b)/2",
            "for x in [0, 1], y in [0, 1]: x*(1 - x)*y*(1 - y) <= 1/16",
            "for x in (-infinity, infinity): sin(x)*cos(x) <= 1/2",
        ] {
            proves(&Squares, claim, "squares");
        }
    }

    #[test]
    fn constants_a_little_too_sharp() {
        leaves(
            &Squares,
            &[
                "for x in (-infinity, infinity), y in (-infinity, infinity): x^2 + y^2 >= 2.0000001*x*y",
                "for x in [0, 1], y in [0, 1]: x*(1 - x)*y*(1 - y) <= 0.0624999",
                "for x in (-infinity, infinity): (x^2 - 2)^2 > 0",
            ],
        );
    }
}

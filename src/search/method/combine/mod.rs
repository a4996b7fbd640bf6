//! The goal as a combination of known relations: `r - l = c + m1 d1 + m2 d2 + ..`
//! with multipliers of known sign, found by an exact linear program over the
//! products of atoms that occur.
//!
//! Multipliers are 1 first; then the products of atoms that carry a summand of a
//! relation to one of the goal, among them the reciprocals of denominators; then
//! other relations, for products of two. Bounds of closed terms such as `log(2)`
//! come from enclosures.
//!
//! Source: Farkas, Theorie der einfachen Ungleichungen, 1902; Schrijver, Theory of
//! Linear and Integer Programming, 1986. The products of relations are those of
//! Handelman, Representing polynomials by positive linear functions, 1988.

mod lemmas;
mod simplex;

use std::collections::{BTreeMap, BTreeSet};

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use crate::enclosure::End as _;
use crate::expression::Term;
use crate::statement::{Rel, Relation, Sequent};

use super::super::engine::{Method, Search, Stuck};
use super::super::exact::enclose;
use super::super::laurent::{Algebra, Exponent, Monomial, Poly, is_base};
use super::super::proof::Proof;
use super::facts::{Fact, Sign, Signs, Source, facts};
pub use lemmas::lemmas;

/// The method.
pub struct Combine {
    /// Whether to multiply relations with each other.
    pub products: bool,
}

impl Method for Combine {
    fn name(&self) -> &'static str {
        "combination"
    }

    fn share(&self) -> u64 {
        20
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let lemmas = lemmas(s, search)?;
        let stages: &[Stage] = if self.products && search.depth() <= DEEPEST {
            &[Stage::Plain, Stage::Near, Stage::Far, Stage::Products]
        } else {
            &[Stage::Plain, Stage::Near, Stage::Far]
        };
        combine(s, lemmas, stages, search)
    }
}

/// Relations with more summands are not used.
const MOST_SUMMANDS: usize = 40;
/// Most products of atoms that multipliers aim at.
const MOST_AIMS: usize = 50;
/// Most multiples of relations in one program.
const MOST_COLUMNS: usize = 700;
/// Multipliers of more atoms, or of larger exponents, are not tried.
const MOST_FACTORS: usize = 6;
/// Most products of two relations.
const MOST_PAIRS: usize = 60;
/// Relations are multiplied with each other in the first reductions only.
const DEEPEST: usize = 3;
/// Bits of the bounds of closed terms.
const CLOSED_BITS: u32 = 50;

/// Proves the goal from the facts of the sequent and further lemmas.
///
/// # Errors
/// [`Stuck`] if no combination is found.
fn combine(s: &Sequent, lemmas: Vec<Fact>, stages: &[Stage], search: &mut Search) -> Result<Proof, Stuck> {
    let goal = match s.relation() {
        Some(r) => r.turned(),
        None => Relation::new(Term::integer(0), Rel::Less, Term::integer(0)),
    };
    if goal.rel == Rel::NotEqual {
        return Err(Stuck::NotApplicable("not for `!=`"));
    }
    let referee = search.referee();
    let signs = Signs::new(s, referee);
    let positive = |t: &Term| signs.of(t) == Sign::Positive;
    let algebra = Algebra { positive: &positive };
    let poly = |r: &Relation| algebra.poly(&r.difference()).filter(|p| p.len() <= MOST_SUMMANDS);
    let Some(target) = poly(&goal) else { return Err(Stuck::NotApplicable("too many summands")) };
    let mut known: Vec<(Fact, Poly)> = Vec::new();
    let usable = |f: &Fact| goal.rel != Rel::Equal || f.relation.rel == Rel::Equal;
    for fact in facts(s).into_iter().chain(lemmas).filter(usable) {
        search.spend(2)?;
        if let Some(p) = poly(&fact.relation).filter(|p| !p.is_empty()) {
            known.push((fact, p));
        }
    }
    let closed = if goal.rel == Rel::Equal { vec![] } else { closed_bounds(&target, &known) };
    for fact in closed {
        if let Some(p) = poly(&fact.relation) {
            known.push((fact, p));
        }
    }
    signs.pay(search)?;
    for stage in stages {
        let multiples = multiples(&target, &known, *stage, &signs, search)?;
        signs.pay(search)?;
        let Some(found) = program(&goal, &target, &known, &multiples, &signs, search)? else { continue };
        signs.pay(search)?;
        let (refs, rest) = found;
        for rest in [None, Some(rest)] {
            let proof = written(s, &known, &refs, rest);
            if let Ok(proof) = search.accepted(s, proof) {
                return Ok(proof);
            }
        }
    }
    Err(Stuck::because("no combination of what is known"))
}

/// How far to go in the choice of multipliers.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Stage {
    /// None.
    Plain,
    /// Those that carry a summand of a relation to one of the goal.
    Near,
    /// Or to a summand of such a product.
    Far,
    /// As near, of products of two relations too.
    Products,
}

/// A multiple of a fact: its multiplier, a product of atoms and perhaps another fact.
struct Multiple {
    fact: usize,
    monomial: Monomial,
    other: Option<usize>,
    poly: Poly,
}

fn multiples(
    target: &Poly,
    known: &[(Fact, Poly)],
    stage: Stage,
    signs: &Signs,
    search: &mut Search,
) -> Result<Vec<Multiple>, Stuck> {
    let mut list: Vec<Multiple> = known
        .iter()
        .enumerate()
        .map(|(fact, (_, p))| Multiple { fact, monomial: Monomial::one(), other: None, poly: p.clone() })
        .collect();
    if stage == Stage::Plain {
        return Ok(list);
    }
    let mut seen: BTreeSet<(usize, Option<usize>, Monomial)> =
        list.iter().map(|m| (m.fact, None, m.monomial.clone())).collect();
    let mut aims: Vec<Monomial> = target.terms().map(|(m, _)| m.clone()).collect();
    for m in over_denominator(target).into_iter().chain([Monomial::one()]) {
        if !aims.contains(&m) {
            aims.push(m);
        }
    }
    if stage == Stage::Products {
        let weak = |i: &usize| known[*i].0.relation.rel != Rel::Equal && known[*i].1.len() <= 4;
        let short: Vec<usize> = (0..known.len()).filter(weak).collect();
        for (place, &i) in short.iter().enumerate() {
            for &j in &short[place..] {
                if known[i].1.len() == 1 || known[j].1.len() == 1 || list.len() >= known.len() + MOST_PAIRS {
                    // Single products are multipliers of their own.
                    continue;
                }
                if let Some(poly) = known[i].1.times(&known[j].1) {
                    list.push(Multiple { fact: i, monomial: Monomial::one(), other: Some(j), poly });
                }
            }
        }
    }
    let starts = list.len();
    let mut from = 0;
    for _ in 0..if stage == Stage::Far { 2 } else { 1 } {
        let goals: Vec<Monomial> = aims[from..].to_vec();
        from = aims.len();
        for start in 0..starts {
            let (fact, other, base) = (list[start].fact, list[start].other, list[start].poly.clone());
            let free = known[fact].0.relation.rel == Rel::Equal;
            if !free && base.len() == 1 {
                // Left over anyway, as a product with a sign.
                continue;
            }
            for (own, _) in base.terms() {
                let back = own.raised(&-Exponent::one());
                search.spend(1 + goals.len() as u64 / 2)?;
                for aim in &goals {
                    let monomial = aim.times(&back);
                    if list.len() >= MOST_COLUMNS
                        || !is_simple(&monomial)
                        || !(free || signs.of_monomial(&monomial).is_non_negative())
                        || !seen.insert((fact, other, monomial.clone()))
                    {
                        continue;
                    }
                    let poly = base.shifted(&monomial);
                    list.push(Multiple { fact, monomial, other, poly });
                }
            }
        }
        for m in &list {
            for (n, _) in m.poly.terms() {
                if aims.len() < MOST_AIMS && !aims.contains(n) {
                    aims.push(n.clone());
                }
            }
        }
    }
    Ok(list)
}

/// The summands of the numerator, each over the denominator.
fn over_denominator(p: &Poly) -> Vec<Monomial> {
    let Some((numerator, front)) = p.cleared() else { return vec![] };
    numerator.terms().map(|(m, _)| m.times(&front)).collect()
}

fn is_simple(m: &Monomial) -> bool {
    let most = Exponent::from_integer(8);
    m.factors().len() <= MOST_FACTORS && m.factors().iter().all(|(_, e)| *e <= most && -*e <= most)
}

/// The multipliers of the facts used, as terms, and what is left.
type Found = (Vec<(usize, Term)>, Relation);

fn program(
    goal: &Relation,
    target: &Poly,
    known: &[(Fact, Poly)],
    multiples: &[Multiple],
    signs: &Signs,
    search: &mut Search,
) -> Result<Option<Found>, Stuck> {
    // What may be left over: products of atoms with a sign.
    let mut slack: Vec<(Monomial, BigRational, Sign)> = Vec::new();
    if goal.rel != Rel::Equal {
        let mut left: BTreeSet<&Monomial> = target.terms().map(|(m, _)| m).collect();
        left.extend(multiples.iter().flat_map(|m| m.poly.terms().map(|(m, _)| m)));
        let one = Monomial::one();
        left.insert(&one);
        let over = over_denominator(target);
        left.extend(&over);
        for m in left {
            let sign = signs.of_monomial(m);
            match sign {
                Sign::Unknown => {}
                _ if sign.is_non_negative() => slack.push((m.clone(), BigRational::one(), sign)),
                Sign::Negative => slack.push((m.clone(), -BigRational::one(), Sign::Positive)),
                _ => slack.push((m.clone(), -BigRational::one(), Sign::NonNegative)),
            }
        }
    }
    let mut polys: Vec<Poly> = multiples.iter().map(|m| m.poly.clone()).collect();
    polys.extend(slack.iter().map(|(m, q, _)| Poly::single(q.clone(), m.clone())));
    polys.push(target.clone());
    let Some(polys) = over_one_denominator(polys, search)? else { return Ok(None) };
    let Some((target, polys)) = polys.split_last() else { return Ok(None) };
    let mut rows: BTreeMap<&Monomial, usize> = BTreeMap::new();
    for (m, _) in polys.iter().chain([target]).flat_map(Poly::terms) {
        let next = rows.len();
        rows.entry(m).or_insert(next);
    }
    let mut b = vec![BigRational::zero(); rows.len()];
    for (m, q) in target.terms() {
        b[rows[m]] = q.clone();
    }
    let column = |p: &Poly, negate: bool| {
        let mut entries: simplex::Column =
            p.terms().map(|(m, q)| (rows[m], if negate { -q } else { q.clone() })).collect();
        entries.sort_by_key(|(i, _)| *i);
        entries
    };
    let mut columns: Vec<simplex::Column> = polys.iter().map(|p| column(p, false)).collect();
    let strict = |m: &Multiple| {
        known[m.fact].0.relation.rel == Rel::Less
            && m.other.is_none_or(|o| known[o].0.relation.rel == Rel::Less)
            && signs.of_monomial(&m.monomial) == Sign::Positive
    };
    let mut gain: Vec<bool> = multiples.iter().map(strict).collect();
    gain.extend(slack.iter().map(|(_, _, sign)| *sign == Sign::Positive));
    // Equations may also be subtracted.
    let free: Vec<usize> =
        (0..multiples.len()).filter(|&i| known[multiples[i].fact].0.relation.rel == Rel::Equal).collect();
    for &i in &free {
        columns.push(column(&polys[i], true));
        gain.push(false);
    }
    let gain = (goal.rel == Rel::Less).then_some(&gain[..]);
    let Some(mut values) = simplex::solve(&columns, &b, gain, search)? else { return Ok(None) };
    for (place, &i) in free.iter().enumerate() {
        let subtracted = values[polys.len() + place].clone();
        values[i] -= subtracted;
    }
    let mut refs: Vec<(usize, Term)> = Vec::new();
    let mut is_strict = false;
    for (m, c) in multiples.iter().zip(&values).filter(|(_, c)| !c.is_zero()) {
        is_strict |= strict(m);
        let mut term = m.monomial.to_term(c);
        if let Some(other) = m.other {
            let factor = known[other].0.relation.difference();
            term = if term.is_one() { factor } else { term.multiply(&factor) };
        }
        match refs.iter_mut().find(|(fact, _)| *fact == m.fact) {
            Some((_, sum)) => *sum = sum.add(&term),
            None => refs.push((m.fact, term)),
        }
    }
    let mut rest = Poly::zero();
    for ((m, q, _), c) in slack.iter().zip(&values[multiples.len()..]) {
        rest = rest.plus(&Poly::single(q * c, m.clone()));
    }
    let rel = match goal.rel {
        Rel::Equal => Rel::Equal,
        Rel::Less if !is_strict => Rel::Less,
        _ => Rel::LessEqual,
    };
    Ok(Some((refs, Relation::new(Term::integer(0), rel, rest.to_term()))))
}

/// The same sums multiplied by the sums that stand in denominators, and multiplied
/// out; none if that is too large.
fn over_one_denominator(polys: Vec<Poly>, search: &mut Search) -> Result<Option<Vec<Poly>>, Stuck> {
    let mut polys = polys;
    for _ in 0..4 {
        let mut least: BTreeMap<Term, Exponent> = BTreeMap::new();
        let mut high = false;
        for (a, e) in polys.iter().flat_map(Poly::terms).flat_map(|(m, _)| m.factors()) {
            if is_base(a) {
                high |= *e >= Exponent::one();
                let lowest = least.entry(a.clone()).or_insert_with(Exponent::zero);
                *lowest = (*lowest).min(e.floor());
            }
        }
        least.retain(|_, e| e.is_negative());
        if least.is_empty() && !high {
            return Ok(Some(polys));
        }
        let common = least.iter().fold(Monomial::one(), |m, (a, e)| m.times(&Monomial::atom(a.clone(), -e)));
        for p in &mut polys {
            search.spend(1 + p.len() as u64)?;
            match p.shifted(&common).multiplied_out() {
                Some(new) => *p = new,
                None => return Ok(None),
            }
        }
    }
    Ok(None)
}

/// The step: lemmas first, each a hypothesis more, then the combination.
fn written(s: &Sequent, known: &[(Fact, Poly)], refs: &[(usize, Term)], rest: Option<Relation>) -> Proof {
    let mut step = Proof::new("linear");
    let mut lemmas: Vec<&Proof> = Vec::new();
    for (fact, multiplier) in refs {
        step = step.with(multiplier);
        step = match &known[*fact].0.source {
            Source::Reference(word) => step.word(word),
            Source::Lemma(lemma) => {
                lemmas.push(lemma);
                step.word(&format!("h{}", s.hypotheses.len() + lemmas.len()))
            }
        };
    }
    if let Some(rest) = rest {
        step = step.with(rest).with(Proof::new("sign"));
    }
    lemmas.into_iter().rev().fold(step, |step, lemma| lemma.clone().with(step))
}

/// Rational bounds of the closed factors, such as `log(2)` or `pi*sqrt(3)`, of all products.
fn closed_bounds(target: &Poly, known: &[(Fact, Poly)]) -> Vec<Fact> {
    let mut factors: BTreeSet<Term> = BTreeSet::new();
    for (m, _) in known.iter().map(|(_, p)| p).chain([target]).flat_map(Poly::terms) {
        let (closed, _) = m.partition(|a| a.free_variables().is_empty() && a.quantities().is_empty());
        if !closed.is_one() && factors.len() < 12 {
            factors.insert(closed.to_term(&BigRational::one()));
        }
    }
    let scale = BigRational::from_integer(BigInt::one() << CLOSED_BITS);
    let mut found = Vec::new();
    for term in factors {
        let Some(value) = enclose(&term, 128) else { continue };
        let (Some(low), Some(high)) = (value.lo().to_rational(), value.hi().to_rational()) else { continue };
        let low = Term::number((low * &scale).floor() / &scale);
        let high = Term::number((high * &scale).ceil() / &scale);
        let below = Relation::new(low, Rel::LessEqual, term.clone());
        let above = Relation::new(term, Rel::LessEqual, high);
        for relation in [below, above] {
            let lemma = Proof::new("cut").with(relation.clone()).with(Proof::new("enclose").with(128u32));
            found.push(Fact { relation, source: Source::Lemma(lemma) });
        }
    }
    found
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::*;

    const ALL: Combine = Combine { products: true };

    #[test]
    fn plain_combinations() {
        let given = "for x in (-infinity, infinity), y in (-infinity, infinity) given x + y <= 1, x - y <= 3";
        proves(&ALL, &format!("{given}: x <= 2"), "linear");
        leaves(&ALL, &[&format!("{given}: x < 2"), &format!("{given}: x <= 19/10")]);
        let equal = "for x in (-infinity, infinity), y in (-infinity, infinity) given x + y = 1, x - y = 3";
        proves(&ALL, &format!("{equal}: 3*x + y = 5"), "linear");
        leaves(&ALL, &[&format!("{equal}: 3*x + y = 6"), &format!("{given}: 2*x = 4")]);
    }

    #[test]
    fn strict_where_something_is_strict() {
        let given = "for x in (-infinity, infinity), y in (-infinity, infinity) given x < y, y <= 3";
        proves(&ALL, &format!("{given}: x < 3"), "linear");
        leaves(&ALL, &["for x in (-infinity, infinity), y in [0, 3] given x <= y: x < 3"]);
    }

    #[test]
    fn multipliers_of_known_sign() {
        let given = "for w in [0, infinity), m in (0, infinity), a in [1, infinity) given w <= m";
        proves(&ALL, &format!("{given}: exp(-a)*(w/a) <= m/a*exp(-a)"), "linear");
        // Nothing says that b is not negative.
        leaves(&ALL, &["for w in [0, 9], m in [0, 9], b in [-1, 1] given w <= m: b*w <= b*m"]);
        let divided = "for x in [0, infinity), u in (0, infinity) given x*u <= 3*u";
        proves(&ALL, &format!("{divided}: x <= 3"), "linear");
        leaves(&ALL, &["for x in [0, infinity), u in [0, infinity) given x*u <= 3*u: x <= 3"]);
    }

    #[test]
    fn sums_in_denominators_and_bounds_of_closed_terms() {
        let given = "for m in (0, infinity), E in (0, infinity)";
        proves(&ALL, &format!("{given}: m*E/(1 - exp(-2)) <= 6/5*m*E"), "linear");
        leaves(&ALL, &[&format!("{given}: m*E/(1 - exp(-2)) <= 23/20*m*E")]);
        proves(&ALL, "for x in [0, infinity): x/(1 + x) <= 1", "linear");
    }

    #[test]
    fn products_of_two_relations() {
        let given = "for x in (-infinity, infinity), y in (-infinity, infinity) given x >= 1, y >= 2";
        proves(&ALL, &format!("{given}: x*y - 2*x - y + 2 >= 0"), "linear");
        leaves(&ALL, &[&format!("{given}: x*y - 2*x - y + 1 >= 0")]);
    }

    #[test]
    fn rounding_by_its_definition_only() {
        proves(&ALL, "for x in (-infinity, infinity): 2*ceil(x) < 2*x + 2", "known");
        proves(&ALL, "for x in (0, infinity): ceil(log(1 + x)) >= 1", "cut");
        leaves(
            &ALL,
            &["for x in (-infinity, infinity): ceil(x) > x", "for x in [0, infinity): ceil(log(1 + x)) >= 1"],
        );
    }

    #[test]
    fn comparisons_under_one_function() {
        let given = "for t in (0, 1), D in [3, infinity)";
        proves(&ALL, &format!("{given}: t*log(D - 1) + t <= t*log(D) + t"), "replace");
        leaves(&ALL, &["for t in (0, 1), D in [3, infinity): t*log(D) <= t*log(D - 1) + 1/10"]);
        let divided = "for t in (0, 1], n in [2, infinity), y in [n, infinity) given 2*log(e*n/t) <= e*n/t";
        let half = "t/(2*log(e*n/t))";
        let sum = "(log(e*n/t) + log(2*log(e*n/t)))";
        proves(&ALL, &format!("{divided}: {half}*{sum} <= {half}*(2*log(e*n/t))"), "replace");
    }
}

//! Jensen's inequality: a goal that says a convex function at a mean is at most the
//! mean of its values, with the weights read off the goal.
//!
//! Write the goal as `F >= 0`. Either some `phi` occurs at several arguments and F is
//! `sum of c_i phi(x_i) - c phi(y)` with `c = sum of c_i`, `c y = sum of c_i x_i`, up to
//! a rest; or the same with the exponential, F being a sum of monomials
//! `sum of c_i M_i - c M` with `M^c = product of M_i^c_i` (the mean inequality with
//! weights). Logarithms of both sides are tried too.
//!
//! Source: Hardy, Littlewood, Polya, Inequalities, 1934, 2.5, 3.6, 3.10.

use std::cmp::Ordering;

use num_rational::BigRational;
use num_traits::One;

use crate::enclosure::Function;
use crate::expression::{End, Name, Node, Sort, Term, differentiate};
use crate::search::engine::{Method, Search, Stuck};
use crate::search::laurent::{Algebra, Monomial, Poly};
use crate::search::plain::{is_plainly_non_negative, is_plainly_positive};
use crate::search::proof::Proof;
use crate::statement::{Declaration, Domain, Rel, Relation, Sequent};

use super::ladder::{Line, forms, premise};

/// The method.
pub struct Convex;

/// Functions looked at for one goal.
const MOST_SHAPES: usize = 12;
/// Most points of a mean.
const MOST_POINTS: usize = 8;

impl Method for Convex {
    fn name(&self) -> &'static str {
        "convexity"
    }

    fn share(&self) -> u64 {
        20
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let Some(goal) = s.relation().map(Relation::turned) else {
            return Err(Stuck::NotApplicable("no relation"));
        };
        if goal.rel != Rel::LessEqual {
            return Err(Stuck::NotApplicable("no weak inequality"));
        }
        let mut told = Stuck::NotApplicable("no mean of values of one function");
        for form in [forms::plain, forms::logarithms] {
            let Some(form) = form(s, &goal) else { continue };
            let difference = logarithms_apart(&form.goal.right).subtract(&logarithms_apart(&form.goal.left));
            search.spend(20 * u64::from(difference.size()))?;
            let mut means = means_of_monomials(s, &difference, search);
            means.extend(means_of_values(s, &difference));
            for mean in means {
                search.spend(200)?;
                let inner = s.with_goal(form.goal.clone());
                let tried = prove(&inner, &mean, search)
                    .and_then(|rest| form.wrap(s, rest, &mut |sequent| premise(search, sequent)));
                match tried {
                    Ok(proof) => return Ok(proof),
                    Err(Stuck::Exhausted) => return Err(Stuck::Exhausted),
                    Err(stuck) => told = stuck,
                }
            }
        }
        Err(told)
    }
}

/// `F = factor * (sum of weights * phi(points) - phi(mean)) + rest`.
struct Mean {
    /// The function, in the variable [`Mean::u`].
    phi: Term,
    u: Name,
    /// Points with their weights.
    points: Vec<(Term, Term)>,
    /// A positive factor.
    factor: Term,
    /// What is left over; nothing if that is 0.
    rest: Option<Term>,
}

/// Logarithms of products as sums, without looking at what the factors are.
fn logarithms_apart(t: &Term) -> Term {
    let log = |a: &Term| Term::apply1(Function::Log, a);
    if let Node::Apply(Function::Log, args) = t.node() {
        let scaled = |a: &Term, b: &Term| a.as_number().is_some() || b.as_number().is_some();
        return match args[0].node() {
            // The mean of a few numbers stays whole.
            Node::Multiply(a, b) | Node::Divide(a, b) if scaled(a, b) => t.clone(),
            Node::Multiply(a, b) => logarithms_apart(&log(a)).add(&logarithms_apart(&log(b))),
            Node::Divide(a, b) => logarithms_apart(&log(a)).subtract(&logarithms_apart(&log(b))),
            Node::Power(a, p) => p.multiply(&logarithms_apart(&log(a))),
            _ => t.clone(),
        };
    }
    match t.node() {
        Node::Apply(..) => t.clone(),
        _ => t.map_children(&mut logarithms_apart),
    }
}

fn algebra<T>(s: &Sequent, f: impl FnOnce(&Algebra) -> T) -> T {
    f(&Algebra { positive: &|t| is_plainly_positive(s, t) })
}

fn is_zero(s: &Sequent, t: &Term) -> bool {
    algebra(s, |a| a.poly(t)).is_some_and(|p| p.is_zero())
}

/// A name for the variable of the function.
fn fresh(s: &Sequent, search: &mut Search) -> Name {
    search.fresh_variable("u", s)
}

/// The strict sign of a term on the whole domain, by samples along one variable.
fn sign(s: &Sequent, t: &Term) -> Option<Ordering> {
    if let Some(q) = t.as_number() {
        return Some(q.cmp(&BigRational::from_integer(0.into())));
    }
    let x = s.variables.iter().find(|d| t.mentions(&d.name) && d.domain.sort == Sort::Real)?;
    Line::new(s, &x.name, 4000)?.sign(t).filter(|o| o.is_ne())
}

/// The monomials of F in the variables that stand in no exponent, with their
/// coefficients, if exactly one of these is negative.
fn means_of_monomials(s: &Sequent, difference: &Term, search: &mut Search) -> Vec<Mean> {
    mean_of_monomials(s, difference, search).into_iter().collect()
}

fn mean_of_monomials(s: &Sequent, difference: &Term, search: &mut Search) -> Option<Mean> {
    let poly = algebra(s, |a| a.poly(difference))?;
    if poly.len() > 4 * MOST_POINTS {
        return None;
    }
    let mut exponents: Vec<Name> = Vec::new();
    difference.walk(&mut |t| {
        if let Node::Power(_, p) = t.node() {
            exponents.extend(p.free_variables());
        }
        true
    });
    let is_base = |t: &Term| t.free_variables().iter().any(|v| !exponents.contains(v));
    let mut groups: Vec<(Monomial, Poly)> = Vec::new();
    for (m, q) in poly.terms() {
        let (base, weight) = m.partition(|a| is_base(a));
        let part = Poly::single(q.clone(), weight);
        match groups.iter_mut().find(|(g, _)| *g == base) {
            Some((_, sum)) => *sum = sum.plus(&part),
            None => groups.push((base, part)),
        }
    }
    if groups.len() < 3 || groups.len() > MOST_POINTS {
        return None;
    }
    let one = BigRational::one();
    let parts: Vec<(Term, Term, Ordering)> = groups
        .iter()
        .map(|(m, c)| {
            let c = c.to_term();
            let o = sign(s, &c)?;
            Some((m.to_term(&one), c, o))
        })
        .collect::<Option<_>>()?;
    let mut negative = parts.iter().filter(|p| p.2 == Ordering::Less);
    let ((lowest, c, _), None) = (negative.next()?, negative.next()) else { return None };
    let factor = c.negate();
    let log = |t: &Term| Term::apply1(Function::Log, t);
    let points: Vec<(Term, Term)> = parts
        .iter()
        .filter(|p| p.2 == Ordering::Greater)
        .map(|(m, c, _)| (m, c, is_plainly_positive(s, m)))
        .map(|(m, c, positive)| positive.then(|| (log(m), quotient(s, c, &factor))))
        .collect::<Option<_>>()?;
    let u = fresh(s, search);
    let phi = Term::apply1(Function::Exp, &Term::variable(u.clone()));
    is_mean(s, &points, &log(lowest)).then_some(Mean { phi, u, points, factor, rest: None })
}

/// The quotient, simplified where it is a number.
fn quotient(s: &Sequent, a: &Term, b: &Term) -> Term {
    let q = a.divide(b);
    algebra(s, |al| al.poly(&q)).map_or(q, |p| p.to_term())
}

/// Whether the weights add up to 1 and the weighted points to the mean.
fn is_mean(s: &Sequent, points: &[(Term, Term)], mean: &Term) -> bool {
    let sum = |f: &dyn Fn(&(Term, Term)) -> Term| points.iter().map(f).reduce(|a, b| a.add(&b));
    let (Some(weights), Some(weighted)) = (sum(&|p| p.1.clone()), sum(&|p| p.1.multiply(&p.0))) else {
        return false;
    };
    is_zero(s, &weights.subtract(&Term::integer(1))) && is_zero(s, &weighted.subtract(mean))
}

/// Functions of one argument that occur at several arguments, one of them the mean
/// of the others by the weights with which they occur.
fn means_of_values(s: &Sequent, difference: &Term) -> Vec<Mean> {
    let u: Name = "u".into();
    if s.declaration(&u).is_some() {
        return Vec::new();
    }
    let mut shapes: Vec<(Term, Vec<(Term, Term)>)> = Vec::new();
    difference.walk(&mut |t| {
        let mut inner = t.clone();
        let mut wraps: Vec<Term> = Vec::new();
        // From the outside in: phi is what stands around an argument.
        while let Some((argument, around)) = argument(&inner, &u) {
            wraps.push(around);
            let phi = wraps.iter().rev().fold(Term::variable(u.clone()), |inside, w| w.with(&u, &inside));
            if !argument.free_variables().is_empty() {
                match shapes.iter_mut().find(|(f, _)| *f == phi) {
                    Some((_, at)) if at.iter().all(|(a, _)| *a != argument) => {
                        at.push((argument.clone(), t.clone()));
                    }
                    Some(_) => {}
                    None => shapes.push((phi.clone(), vec![(argument.clone(), t.clone())])),
                }
            }
            inner = argument;
        }
        true
    });
    shapes.retain(|(_, at)| (3..=MOST_POINTS).contains(&at.len()));
    shapes.truncate(MOST_SHAPES);
    shapes.into_iter().filter_map(|(phi, at)| mean_of_values(s, difference, &u, &phi, &at)).collect()
}

/// The argument of a call or the base of a power, and what stands around it.
fn argument(t: &Term, u: &Name) -> Option<(Term, Term)> {
    let hole = Term::variable(u.clone());
    match t.node() {
        Node::Apply(f, args) if args.len() == 1 => Some((args[0].clone(), Term::apply1(*f, &hole))),
        Node::Power(b, p) if !b.free_variables().is_empty() => Some((b.clone(), hole.power(p))),
        Node::Divide(a, b) if a.as_number().is_some() => Some((b.clone(), a.divide(&hole))),
        _ => None,
    }
}

fn mean_of_values(s: &Sequent, difference: &Term, u: &Name, phi: &Term, at: &[(Term, Term)]) -> Option<Mean> {
    // Every value in a variable of its own, which must occur linearly.
    let names: Vec<Term> = (0..at.len()).map(|i| Term::variable(format!("value{i}"))).collect();
    let open = at.iter().zip(&names).fold(difference.clone(), |t, ((_, value), z)| t.replace(value, z));
    let mut rest = algebra(s, |a| a.poly(&open))?;
    let mut coefficients = Vec::new();
    for z in &names {
        let z = z.as_variable()?;
        let list = rest.polynomial_in(z)?;
        let [without, c] = list.as_slice() else { return None };
        if names.iter().any(|n| n.as_variable().is_some_and(|n| c.to_term().mentions(n))) {
            return None;
        }
        coefficients.push(c.to_term());
        rest = without.clone();
    }
    let signs: Vec<Ordering> = coefficients.iter().map(|c| sign(s, c)).collect::<Option<_>>()?;
    let (mut over, mut under): (Vec<usize>, Vec<usize>) =
        (0..at.len()).partition(|&i| signs[i] == Ordering::Greater);
    // A convex function has one value that counts negatively, a concave one the others.
    let convex = under.len() == 1;
    if !convex {
        std::mem::swap(&mut over, &mut under);
    }
    let [middle] = under.as_slice() else { return None };
    let factor = if convex { coefficients[*middle].negate() } else { coefficients[*middle].clone() };
    let points: Vec<(Term, Term)> = over
        .iter()
        .map(|&i| {
            let c = if convex { coefficients[i].clone() } else { coefficients[i].negate() };
            (at[i].0.clone(), quotient(s, &c, &factor))
        })
        .collect();
    if !is_mean(s, &points, &at[*middle].0) {
        return None;
    }
    let phi = if convex { phi.clone() } else { phi.negate() };
    let rest = if rest.is_zero() { None } else { Some(rest.to_term()) };
    Some(Mean { phi, u: u.clone(), points, factor, rest })
}

/// Intervals on which the function may be convex: that of the points, if they are
/// variables of one domain, and the usual ones.
fn domains(s: &Sequent, points: &[(Term, Term)]) -> Vec<Domain> {
    let mut list: Vec<Domain> = Vec::new();
    for (x, _) in points {
        if let Some(d) = x.as_variable().and_then(|x| s.declaration(x))
            && d.domain.free_variables().is_empty()
        {
            let domain = Domain { sort: Sort::Real, ..d.domain.clone() };
            if !list.contains(&domain) {
                list.push(domain);
            }
        }
    }
    let ray = |a: i64| Domain { lower: End::Finite(Term::integer(a)), ..Domain::all(Sort::Real) };
    for domain in [Domain::all(Sort::Real), ray(0), ray(1)] {
        if !list.contains(&domain) {
            list.push(domain);
        }
    }
    list
}

fn prove(s: &Sequent, mean: &Mean, search: &mut Search) -> Result<Proof, Stuck> {
    let slope = differentiate(&mean.phi, &mean.u).map_err(|_| Stuck::because("no derivative"))?;
    let bend = differentiate(&slope, &mean.u).map_err(|_| Stuck::because("no second derivative"))?;
    let zero = Term::integer(0);
    let mut told = Stuck::because("no interval on which the function is convex");
    for domain in domains(s, &mean.points) {
        let mut whole = s.clone();
        whole.variables.push(Declaration { name: mean.u.clone(), domain: domain.clone() });
        let upward = Relation::new(zero.clone(), Rel::LessEqual, bend.clone());
        let Some(line) = Line::new(&whole, &mean.u, search.left() / 10) else { continue };
        let curved = line.sign(&bend);
        search.spend(line.work.get())?;
        if !matches!(curved, Some(Ordering::Greater | Ordering::Equal)) {
            continue;
        }
        let inside = line.inside.with_goal(upward);
        match written(s, mean, &domain, &line, &inside, search) {
            Ok(proof) => return Ok(proof),
            Err(Stuck::Exhausted) => return Err(Stuck::Exhausted),
            Err(stuck) => told = stuck,
        }
    }
    Err(told)
}

fn written(
    s: &Sequent,
    mean: &Mean,
    domain: &Domain,
    line: &Line,
    inside: &Sequent,
    search: &mut Search,
) -> Result<Proof, Stuck> {
    let declaration = Declaration { name: mean.u.clone(), domain: domain.clone() };
    let mut proof = Proof::new("convex").word("jensen").with(declaration).with(&mean.phi);
    let mut conditions = Vec::new();
    for (x, t) in &mean.points {
        proof = proof.with(x).with(t);
        conditions.extend(domain.membership(x));
        conditions.push(Relation::new(Term::integer(0), Rel::LessEqual, t.clone()));
    }
    for c in conditions {
        proof = proof.with(premise(search, &s.with_goal(c))?);
    }
    proof = proof.with(premise(search, inside)?);
    let first = format!("h{}", s.hypotheses.len() + 1);
    let mut rest = Proof::new("linear").with(&mean.factor).word(&first);
    if !is_plainly_non_negative(s, &mean.factor) {
        let positive = Relation::new(Term::integer(0), Rel::LessEqual, mean.factor.clone());
        let step = premise(search, &s.with_goal(positive))?;
        rest = rest.with(Proof::new("forget").word(&first).with(step));
    }
    if let Some(left) = &mean.rest {
        let left = Relation::new(Term::integer(0), Rel::LessEqual, left.clone());
        let step = premise(search, &s.with_goal(left.clone()))?;
        rest = rest.with(left).with(Proof::new("forget").word(&first).with(step));
    }
    proof = proof.with(rest);
    let mut needed = Vec::new();
    super::ladder::smoothness(&mean.phi, &mean.u, &mut needed);
    if let Some(defined) = super::ladder::defined(line, &[&mean.phi], needed, search)? {
        proof = proof.with(defined);
    }
    search.accepted(s, proof)
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::*;

    const TWO: &str = "for x in (0, infinity), y in (0, infinity)";

    #[test]
    fn values_of_one_function() {
        let line = "for x in (-infinity, infinity), y in (-infinity, infinity)";
        proves(&Convex, &format!("{line}: 2*cosh((x + y)/2) <= cosh(x) + cosh(y)"), "convex");
        proves(&Convex, &format!("{line}: exp((x + 2*y)/3) <= exp(x)/3 + 2*exp(y)/3 + x^2"), "convex");
        proves(&Convex, &format!("{TWO}: log(x) + log(y) <= 2*log((x + y)/2)"), "convex");
        proves(&Convex, "for x in [0, pi], y in [0, pi]: (sin(x) + sin(y))/2 <= sin((x + y)/2)", "convex");
        proves(&Convex, &format!("{TWO}: gamma((x + y)/2)^2 <= gamma(x)*gamma(y)"), "both");
    }

    #[test]
    fn means_with_weights() {
        let all = "for a in (0, infinity), b in (0, infinity), t in [0, 1]";
        proves(&Convex, &format!("{all}: a^t*b^(1 - t) <= t*a + (1 - t)*b"), "convex");
        leaves(&Convex, &[&format!("{all}: a^t*b^(1 - t) <= (1 - t)*a + t*b")]);
        proves(&Convex, &format!("{TWO}: sqrt(x*y) <= (x + y)/2"), "convex");
        leaves(&Convex, &[&format!("{TWO}: sqrt(x*y) <= (x + y)/3")]);
    }

    #[test]
    fn not_convex_or_not_a_mean() {
        leaves(
            &Convex,
            &[
                "for x in [0, 4], y in [0, 4]: (sin(x) + sin(y))/2 <= sin((x + y)/2)",
                "for x in [0, pi], y in [0, pi]: (sin(x) + sin(y))/2 <= sin((x + 2*y)/3)",
                "for x in (0, infinity), y in (0, infinity): gamma((x + 2*y)/3)^3 <= gamma(x)^2*gamma(y)",
                "for x in [0, 1], y in [0, 1]: 2*cosh((x + y)/2) < cosh(x) + cosh(y)",
            ],
        );
    }
}

//! Integer variables as real ones: from the least value on at which the inequality
//! holds for real values too, what is below being left to enumeration.

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::One;

use crate::expression::{End, Name, Sort, Term};
use crate::search::engine::{Method, Search, Stuck};
use crate::search::proof::Proof;
use crate::search::sample::quick;
use crate::statement::{Condition, Rel, Relation, Sequent, Signature, conditions};

use super::{premise, smooth_premise};

/// The method.
pub struct Relax;

/// How far above the least value the real variable may have to start.
const STARTS: [i64; 9] = [1, 2, 3, 5, 8, 13, 21, 34, 60];
/// Starts tried in earnest.
const MOST_TRIED: u32 = 2;
/// Points looked at before a start is tried.
const POINTS: usize = 120;

impl Method for Relax {
    fn name(&self) -> &'static str {
        "integers as reals"
    }

    fn share(&self) -> u64 {
        60
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let integers: Vec<Name> = integers(s);
        if integers.is_empty() {
            return Err(Stuck::NotApplicable("no integer variable"));
        }
        if let Some((step, closed)) = from_first_value(s, &integers) {
            let rest = self.attempt(&closed, search)?;
            return Ok(step(rest));
        }
        if !is_real(&relaxed(s, &integers)) {
            return Err(Stuck::NotApplicable("a term that is defined for integers only"));
        }
        let told = match as_reals(s, &integers, search) {
            Ok(proof) => return Ok(proof),
            Err(Stuck::Exhausted) => return Err(Stuck::Exhausted),
            Err(stuck) => stuck,
        };
        let mut tried = 0;
        for n in &integers {
            let Some(least) = least(s, n) else { continue };
            for start in STARTS {
                let first = &least + BigInt::from(start);
                let above = starting_at(s, n, &first);
                if quick(&relaxed(&above, &integers), POINTS, search).is_some() {
                    continue;
                }
                tried += 1;
                if tried > MOST_TRIED {
                    return Err(told);
                }
                let share = search.left() / 2;
                let upper = match search.within(share, |search| as_reals(&above, &integers, search)) {
                    Ok(proof) => proof,
                    Err(_) if search.left() > 0 => continue,
                    Err(stuck) => return Err(stuck),
                };
                let lower = premise(search, &up_to(s, n, &(&first - BigInt::one())))?;
                return Ok(parted(s, n, &first, lower, upper));
            }
        }
        Err(told)
    }
}

/// The integer variables.
pub fn integers(s: &Sequent) -> Vec<Name> {
    s.variables.iter().filter(|d| d.domain.sort.is_discrete()).map(|d| d.name.clone()).collect()
}

/// The least value of an integer variable with a literal lower end.
pub fn least(s: &Sequent, n: &Name) -> Option<BigInt> {
    let d = s.declaration(n)?;
    let end = d.domain.lower.finite()?.as_number()?;
    (!d.domain.lower_open && d.domain.sort != Sort::Real).then(|| end.ceil().to_integer())
}

/// The same sequent with reals for these integers.
pub fn relaxed(s: &Sequent, integers: &[Name]) -> Sequent {
    let mut s = s.clone();
    for d in s.variables.iter_mut().filter(|d| integers.contains(&d.name)) {
        d.domain.sort = Sort::Real;
    }
    s
}

/// Whether every term keeps a meaning for real values.
fn is_real(s: &Sequent) -> bool {
    let nothing: Vec<Signature> = Vec::new();
    let terms = s.variables.iter().flat_map(|d| d.domain.ends());
    let sides = s.hypotheses.iter().chain(s.relation()).flat_map(|r| [&r.left, &r.right]);
    terms
        .chain(sides)
        .all(|t| conditions(s, &nothing, t).iter().all(|c| matches!(c, Condition::OneOf { .. })))
}

fn as_reals(s: &Sequent, integers: &[Name], search: &mut Search) -> Result<Proof, Stuck> {
    let rest = smooth_premise(search, &relaxed(s, integers))?;
    let mut proof = rest;
    for (i, n) in integers.iter().enumerate().rev() {
        let context = relaxed(s, &integers[..=i]);
        let sides: Vec<Term> = context
            .hypotheses
            .iter()
            .chain(context.relation())
            .flat_map(|r| [r.left.clone(), r.right.clone()])
            .collect();
        let terms: Vec<&Term> = sides.iter().collect();
        let step = Proof::new("relax").word(n).with(proof);
        proof = super::with_defined(step, &context, &terms, search)?;
    }
    Ok(proof)
}

/// The sequent from `first` on.
pub fn starting_at(s: &Sequent, n: &Name, first: &BigInt) -> Sequent {
    let mut s = s.clone();
    for d in s.variables.iter_mut().filter(|d| d.name == *n) {
        (d.domain.lower, d.domain.lower_open) = (End::Finite(Term::integer(first.clone())), false);
    }
    s
}

/// The sequent up to `last`.
pub fn up_to(s: &Sequent, n: &Name, last: &BigInt) -> Sequent {
    let mut s = s.clone();
    for d in s.variables.iter_mut().filter(|d| d.name == *n) {
        (d.domain.upper, d.domain.upper_open) = (End::Finite(Term::integer(last.clone())), false);
    }
    s
}

/// `n < first` by one proof, `n >= first` by the other.
pub fn parted(s: &Sequent, n: &Name, first: &BigInt, lower: Proof, upper: Proof) -> Proof {
    let x = Term::variable(n.clone());
    let hypothesis = format!("h{}", s.hypotheses.len() + 1);
    let narrowed = |rest: Proof| Proof::new("narrow").word(&hypothesis).with(rest);
    Proof::new("cases")
        .with(Relation::new(x.clone(), Rel::LessEqual, Term::integer(first - BigInt::one())))
        .with(Relation::new(Term::integer(first.clone()), Rel::LessEqual, x))
        .with(narrowed(lower))
        .with(narrowed(upper))
}

type Wrap = Box<dyn Fn(Proof) -> Proof>;

/// An open or fractional lower end of an integer variable made its first value.
fn from_first_value(s: &Sequent, integers: &[Name]) -> Option<(Wrap, Sequent)> {
    for n in integers {
        let d = &s.declaration(n)?.domain;
        let Some(end) = d.lower.finite().and_then(Term::as_number) else { continue };
        if d.sort != Sort::Integer || end.is_integer() && !d.lower_open {
            continue;
        }
        let first = if d.lower_open { end.floor() + BigRational::one() } else { end.ceil() }.to_integer();
        let word = format!("lo.{n}");
        let hypothesis = format!("h{}", s.hypotheses.len() + 1);
        let wrap = move |rest: Proof| {
            let narrow = Proof::new("narrow").word(&hypothesis).with(rest);
            Proof::new("strengthen").word(&word).with(narrow)
        };
        return Some((Box::new(wrap), starting_at(s, n, &first)));
    }
    None
}

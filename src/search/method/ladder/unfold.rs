//! Absolute values, minima and maxima are taken apart: one goal for each case. What
//! a case says about a single variable becomes an end of its domain; of what it
//! says otherwise the goal mostly has no need.

use num_rational::BigRational;
use num_traits::{Signed, Zero};

use crate::enclosure::Function;
use crate::expression::{End, Name, Node, Sort, Term};
use crate::search::engine::{Method, Search, Stuck};
use crate::search::laurent::Algebra;
use crate::search::plain::is_plain;
use crate::search::proof::Proof;
use crate::statement::{Rel, Relation, Sequent};

use super::{premise, well_posed};

/// The method.
pub struct Unfold;

impl Method for Unfold {
    fn name(&self) -> &'static str {
        "cases of abs, min and max"
    }

    fn share(&self) -> u64 {
        60
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let Some(goal) = s.relation() else { return Err(Stuck::NotApplicable("no relation")) };
        let Some(call) = innermost(goal) else {
            return Err(Stuck::NotApplicable("no abs, min or max"));
        };
        let mut proof = Proof::new("unfold").with(&call.term);
        for (condition, value) in call.cases() {
            let with = |r: &Relation| r.map(|t| t.replace(&call.term, &value));
            let mut case = s.with_goal(with(goal));
            case.hypotheses = s.hypotheses.iter().map(with).collect();
            proof = proof.with(in_case(&case, &condition, search)?);
        }
        Ok(proof)
    }
}

/// An application that is to be taken apart.
struct Call {
    term: Term,
    function: Function,
    args: Vec<Term>,
}

/// The first application whose arguments contain no other.
fn innermost(goal: &Relation) -> Option<Call> {
    let mut found = None;
    for side in [&goal.left, &goal.right] {
        side.walk(&mut |t| {
            if let Node::Apply(function @ (Function::Abs | Function::Min | Function::Max), args) = t.node() {
                found = Some(Call { term: t.clone(), function: *function, args: args.clone() });
            }
            // An index of a series is no variable of the sequent.
            !matches!(t.node(), Node::Series { .. })
        });
        if found.is_some() {
            break;
        }
    }
    found
}

impl Call {
    /// What is known in each case, and what the application is there, in the order of
    /// the kernel's rule.
    fn cases(&self) -> [(Relation, Term); 2] {
        let first = &self.args[0];
        if self.function == Function::Abs {
            let case = |rel| Relation::new(first.clone(), rel, Term::integer(0));
            return [(case(Rel::GreaterEqual), first.clone()), (case(Rel::Less), first.negate())];
        }
        let rest = match &self.args[1..] {
            [one] => one.clone(),
            more => Term::apply(self.function, more.to_vec()),
        };
        let (below, above) = match self.function {
            Function::Min => (first.clone(), rest.clone()),
            _ => (rest.clone(), first.clone()),
        };
        let case = |rel| Relation::new(first.clone(), rel, rest.clone());
        [(case(Rel::LessEqual), below), (case(Rel::Greater), above)]
    }
}

/// Proves the goal of `s` with one more hypothesis.
fn in_case(s: &Sequent, condition: &Relation, search: &mut Search) -> Result<Proof, Stuck> {
    let mut whole = s.clone();
    whole.hypotheses.push(condition.clone());
    let last = format!("h{}", whole.hypotheses.len());
    if is_plain(s, condition) {
        return forgotten(s, &last, search);
    }
    if is_plain(s, &condition.negation()) {
        let sign = || Proof::new("sign");
        return Ok(Proof::new("absurd").with(condition.negation()).with(sign()).with(sign()));
    }
    if let Some(bound) = as_bound(s, condition) {
        return narrowed(s, &whole, &bound, search);
    }
    // Nothing is as easily found as a counterexample without the hypothesis.
    let share = search.left() / 2;
    match search.within(share, |search| forgotten(s, &last, search)) {
        Ok(proof) => Ok(proof),
        Err(_) => premise(search, &whole),
    }
}

fn forgotten(s: &Sequent, hypothesis: &str, search: &mut Search) -> Result<Proof, Stuck> {
    let proof = Proof::new("forget").word(hypothesis).with(premise(search, s)?);
    Ok(match well_posed(s, search)? {
        Some(defined) => proof.with(defined),
        None => proof,
    })
}

/// A bound of a variable that a condition linear in it says.
struct Bound {
    x: Name,
    at: BigRational,
    lower: bool,
    open: bool,
    /// By what the condition is multiplied.
    factor: BigRational,
}

fn as_bound(s: &Sequent, condition: &Relation) -> Option<Bound> {
    let difference = condition.difference();
    let variables = difference.free_variables();
    let x = variables.iter().next().filter(|_| variables.len() == 1)?;
    let algebra = Algebra { positive: &|_| false };
    let list = algebra.poly(&difference)?.polynomial_in(x)?;
    let [free, slope] = list.as_slice() else { return None };
    let (free, slope) = (free.as_number()?, slope.as_number()?);
    if slope.is_zero() || s.declaration(x)?.domain.sort != Sort::Real {
        return None;
    }
    Some(Bound {
        x: x.clone(),
        at: -free / &slope,
        lower: slope.is_positive(),
        open: condition.turned().rel == Rel::Less,
        factor: slope.abs().recip(),
    })
}

/// The case as a smaller domain, or as impossible.
fn narrowed(s: &Sequent, whole: &Sequent, bound: &Bound, search: &mut Search) -> Result<Proof, Stuck> {
    let count = whole.hypotheses.len();
    let mut new = s.clone();
    let Some(d) = new.variables.iter_mut().find(|d| d.name == bound.x) else {
        return Err(Stuck::because("a bound for no variable"));
    };
    let domain = &mut d.domain;
    let end = if bound.lower { &domain.lower } else { &domain.upper };
    // An end that is no number may be the tighter one.
    if end.finite().is_some_and(|e| e.as_number().is_none()) {
        return premise(search, whole);
    }
    let other = if bound.lower { &domain.upper } else { &domain.lower };
    let beyond = other.finite().and_then(Term::as_number).is_some_and(|e| {
        let open = bound.open || if bound.lower { domain.upper_open } else { domain.lower_open };
        (if bound.lower { bound.at > *e } else { bound.at < *e }) || (bound.at == *e && open)
    });
    let x = Term::variable(bound.x.clone());
    let at = Term::number(bound.at.clone());
    let rel = match (bound.lower, bound.open) {
        (true, false) => Rel::GreaterEqual,
        (true, true) => Rel::Greater,
        (false, false) => Rel::LessEqual,
        (false, true) => Rel::Less,
    };
    if bound.lower {
        (domain.lower, domain.lower_open) = (End::Finite(at.clone()), bound.open);
    } else {
        (domain.upper, domain.upper_open) = (End::Finite(at.clone()), bound.open);
    }
    let (rest, defined) = if beyond {
        (Proof::new("empty").word(&bound.x), None)
    } else {
        (premise(search, &new)?, well_posed(&new, search)?)
    };
    let with_defined = |proof: Proof| match &defined {
        Some(defined) => proof.with(defined.clone()),
        None => proof,
    };
    let shown = Proof::new("linear").with(Term::number(bound.factor.clone())).word(&format!("h{count}"));
    let forget = with_defined(Proof::new("forget").word(&format!("h{count}")).with(rest));
    let narrow = with_defined(Proof::new("narrow").word(&format!("h{}", count + 1)).with(forget));
    Ok(Proof::new("cut").with(Relation::new(x, rel, at)).with(shown).with(narrow))
}

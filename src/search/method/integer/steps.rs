//! From one value of a variable to the next: the difference of a term at n + 1 and
//! at n is simpler than the term, factorials, gamma functions and sums cancelling.
//! If it is `>= 0`, the first value decides (induction); if it is `<= 0`, the limit
//! at infinity does (descent). Products of powers go over to logarithms first.
//!
//! Source: the proof of Stirling's formula in Knopp, Theory and Application of
//! Infinite Series, 1951, section 64.

use num_bigint::BigInt;

use crate::enclosure::Function;
use crate::expression::{End, Name, Node, Sort, Term, simplify};
use crate::search::engine::{Method, Search, Stuck};
use crate::search::laurent::Algebra;
use crate::search::plain::is_plainly_positive;
use crate::search::proof::Proof;
use crate::search::sample::quick;
use crate::search::towards::{Place, Tends, Towards};
use crate::statement::{Declaration, Rel, Relation, Sequent};

use super::recurrence::{
    advance, by_gamma, factor, is_exactly_zero, logarithm, moves, moving_sums, special_sum,
};
use super::relax::{Relax, least, parted, starting_at, up_to};
use super::{premise, smooth_premise, with_defined};

/// The method.
pub struct Steps;

impl Method for Steps {
    fn name(&self) -> &'static str {
        "steps from n to n + 1"
    }

    fn share(&self) -> u64 {
        70
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let Some(goal) = s.relation().map(Relation::turned) else {
            return Err(Stuck::NotApplicable("no relation"));
        };
        if !matches!(goal.rel, Rel::LessEqual | Rel::Less) {
            return Err(Stuck::NotApplicable("no inequality"));
        }
        let mut told = Stuck::NotApplicable("no variable that goes on in steps");
        let names: Vec<Name> = candidates(s, &goal);
        if names.is_empty() {
            return Err(told);
        }
        for form in [by_logarithms, as_it_stands] {
            let Some(form) = form(s, &goal, search)? else { continue };
            let inner = s.with_goal(form.goal());
            for n in &names {
                let share = search.left() / 5 * 4;
                match search.within(share, |search| along(&inner, &form, n, search)) {
                    Ok(rest) => return (form.wrap)(s, rest, search),
                    Err(Stuck::Exhausted) if search.left() == 0 => return Err(Stuck::Exhausted),
                    Err(stuck) => told = stuck,
                }
            }
            if form.logarithmic {
                break;
            }
        }
        Err(told)
    }
}

/// Variables that may go on in steps, on which a gamma function or a sum depends:
/// integers from a first value on, reals without an upper end.
fn candidates(s: &Sequent, goal: &Relation) -> Vec<Name> {
    let difference = goal.difference();
    let free = |d: &Declaration| {
        let x = &d.name;
        difference.mentions(x)
            && !s.variables.iter().any(|d| d.domain.ends().any(|e| e.mentions(x)))
            && !s.hypotheses.iter().any(|h| h.left.mentions(x) || h.right.mentions(x))
    };
    let fits = |d: &Declaration| match d.domain.sort {
        Sort::Integer => d.domain.lower.finite().is_some() && !d.domain.lower_open,
        Sort::Real => d.domain.upper == End::PlusInfinity,
        Sort::Even => false,
    };
    s.variables
        .iter()
        .rev()
        .filter(|d| free(d) && fits(d) && has_steps(&difference, &d.name))
        .map(|d| d.name.clone())
        .collect()
}

/// Whether a gamma function or its kin, or a series, depends on the variable.
fn has_steps(t: &Term, x: &Name) -> bool {
    use Function::{Binomial, Digamma, Factorial, Gamma, Lgamma};
    let mut found = false;
    t.walk(&mut |part| {
        let steps = matches!(
            part.node(),
            Node::Apply(Gamma | Lgamma | Digamma | Factorial | Binomial, _) | Node::Series { .. }
        );
        found |= steps && part.mentions(x);
        !found
    });
    found
}

type Wrap<'a> = Box<dyn Fn(&Sequent, Proof, &mut Search) -> Result<Proof, Stuck> + 'a>;

/// The goal as `0 <= difference` or `0 < difference`, and the way back.
struct Form<'a> {
    rel: Rel,
    difference: Term,
    /// Whether it is a difference of logarithms.
    logarithmic: bool,
    wrap: Wrap<'a>,
}

impl Form<'_> {
    fn goal(&self) -> Relation {
        Relation::new(Term::integer(0), self.rel, self.difference.clone())
    }
}

/// Collected as far as the search's own algebra goes.
fn collected(s: &Sequent, t: &Term) -> Term {
    let positive = |a: &Term| is_plainly_positive(s, a);
    Algebra { positive: &positive }.poly(t).map_or_else(|| simplify(t), |p| p.to_term())
}

fn as_it_stands<'a>(s: &Sequent, goal: &'a Relation, _: &mut Search) -> Result<Option<Form<'a>>, Stuck> {
    let difference = by_gamma(&goal.difference());
    if goal.left.is_zero() && difference == goal.right {
        let wrap: Wrap = Box::new(|_, rest, _| Ok(rest));
        return Ok(Some(Form { rel: goal.rel, difference, logarithmic: false, wrap }));
    }
    let difference = collected(s, &difference);
    let new = Relation::new(Term::integer(0), goal.rel, difference.clone());
    let wrap: Wrap = Box::new(move |s, rest, search| {
        with_defined(Proof::new("linear").with(new.clone()).with(rest), s, &[&new.right], search)
    });
    Ok(Some(Form { rel: goal.rel, difference, logarithmic: false, wrap }))
}

fn by_logarithms<'a>(
    s: &Sequent,
    goal: &'a Relation,
    search: &mut Search,
) -> Result<Option<Form<'a>>, Stuck> {
    let products = goal.map(by_gamma);
    if !has_power(&products.left) && !has_power(&products.right) {
        return Ok(None);
    }
    let mut signs = Vec::new();
    for side in [&products.left, &products.right] {
        let positive = Relation::new(Term::integer(0), Rel::Less, side.clone());
        let share = search.left() / 10;
        match search.within(share, |search| premise(search, &s.with_goal(positive))) {
            Ok(step) => signs.push(step),
            Err(Stuck::Exhausted) if search.left() == 0 => return Err(Stuck::Exhausted),
            Err(_) => return Ok(None),
        }
    }
    let difference = collected(s, &logarithm(&products.right).subtract(&logarithm(&products.left)));
    let new = Relation::new(Term::integer(0), goal.rel, difference.clone());
    let wrap: Wrap = Box::new(move |s, rest, search| {
        let rest = with_defined(Proof::new("linear").with(new.clone()).with(rest), s, &[&new.right], search)?;
        let logs = Proof::new("both").word("log").with_all(signs.clone()).with(rest);
        if products == *goal {
            return Ok(logs);
        }
        let sides = [&products.left, &products.right];
        with_defined(Proof::new("linear").with(products.clone()).with(logs), s, &sides, search)
    });
    Ok(Some(Form { rel: goal.rel, difference, logarithmic: true, wrap }))
}

/// Whether powers with symbolic exponents, exponentials or gamma functions stand in products.
fn has_power(t: &Term) -> bool {
    match t.node() {
        Node::Multiply(a, b) | Node::Divide(a, b) => has_power(a) || has_power(b),
        Node::Power(b, p) => p.as_number().is_none() || has_power(b),
        Node::Apply(Function::Exp | Function::Gamma, _) => true,
        _ => false,
    }
}

/// A proof of `0 <= difference` in steps of `n`.
fn along(s: &Sequent, form: &Form, n: &Name, search: &mut Search) -> Result<Proof, Stuck> {
    let Some(next) = advance(&form.difference, n) else {
        return Err(Stuck::because("a sum that does not go on by its last terms"));
    };
    let step = collected(s, &next.subtract(&form.difference));
    let whole = s.declaration(n).is_some_and(|d| d.domain.sort == Sort::Integer);
    let mut told = Stuck::because("the difference has no sign");
    if whole {
        match ascend(s, form, n, &step, search) {
            Err(Stuck::Exhausted) if search.left() == 0 => return Err(Stuck::Exhausted),
            Err(stuck) => told = stuck,
            ok => return ok,
        }
    }
    match descend(s, form, n, &step, search) {
        Err(Stuck::NotApplicable(_)) => Err(told),
        other => other,
    }
}

/// Most values below the one from which on the steps go up.
const MOST_BELOW: i64 = 40;

/// Induction, from the value on where the differences are `>= 0`.
fn ascend(s: &Sequent, form: &Form, n: &Name, step: &Term, search: &mut Search) -> Result<Proof, Stuck> {
    let up = Relation::new(Term::integer(0), Rel::LessEqual, step.clone());
    let Some(least) = least(s, n) else { return induct(s, form, n, &up, search) };
    for below in [0, 1, 2, 3, 5, 8, 13, 21, MOST_BELOW] {
        let first = &least + BigInt::from(below);
        let part = starting_at(s, n, &first);
        if quick(&part.with_goal(up.clone()), 120, search).is_some() {
            continue;
        }
        let upper = induct(&part, form, n, &up, search)?;
        if below == 0 {
            return Ok(upper);
        }
        let lower = premise(search, &up_to(s, n, &(&first - BigInt::from(1))))?;
        return Ok(parted(s, n, &first, lower, upper));
    }
    Err(Stuck::because("the differences are not all positive"))
}

fn induct(s: &Sequent, form: &Form, n: &Name, up: &Relation, search: &mut Search) -> Result<Proof, Stuck> {
    let Some(declared) = s.declaration(n) else { return Err(Stuck::NotApplicable("no variable")) };
    let Some(start) = declared.domain.lower.finite() else {
        return Err(Stuck::NotApplicable("no first value"));
    };
    let goal = form.goal();
    let one = Term::integer(1);
    let next = Term::variable(n.clone()).add(&one);
    let within = |t: &Term| {
        let rel = if declared.domain.upper_open { Rel::Less } else { Rel::LessEqual };
        declared.domain.upper.finite().map(|b| Relation::new(t.clone(), rel, b.clone()))
    };
    let mut base = s.with_goal(goal.map(|t| t.with(n, start)));
    base.variables.retain(|d| d.name != *n);
    base.hypotheses.extend(within(start));
    let exact = base.relation().filter(|r| r.rel == Rel::LessEqual).map(Relation::difference);
    let base = match exact {
        Some(gap) if gap.free_variables().is_empty() && is_exactly_zero(&gap) => Proof::new("linear"),
        _ => premise(search, &base)?,
    };

    // The hypothesis at n is used once and then dropped.
    let mut context = s.clone();
    context.hypotheses.extend(within(&next));
    let share = search.left() / 10 * 9;
    let mut rest = search.within(share, |search| {
        let rising = context.with_goal(up.clone());
        match search.attempt(&Relax, &rising) {
            Err(_) if search.left() > 0 => premise(search, &rising),
            other => other,
        }
    })?;
    let at_next = form.difference.with(n, &next);
    let mut splits = Vec::new();
    let mut combination = Proof::new("linear").with(&one).word(&hypothesis(&context, 1));
    for sum in moving_sums(&form.difference, n) {
        let Node::Series { index, lower: End::Finite(a), upper: End::Finite(b), body, kind } = sum.node()
        else {
            return Err(Stuck::because("a sum without a last term"));
        };
        let Some(steps) = moves(b, n) else { return Err(Stuck::because("a sum that goes on in leaps")) };
        let part = sum.with(n, &next);
        let Some(by) = factor(&at_next, &part) else {
            return Err(Stuck::because("a sum that does not enter linearly"));
        };
        let mut last = b.with(n, &next);
        for _ in 0..steps {
            let upper = End::Finite(last.clone());
            let whole = Term::series(*kind, index.clone(), End::Finite(a.clone()), upper, body.clone());
            let nonempty = Relation::new(a.clone(), Rel::LessEqual, last.clone());
            let shown = premise(search, &context.with_goal(nonempty))?;
            splits.push(Proof::new("series").word("last").with(whole).with(forgetting(
                &context,
                1,
                shown,
                splits.len(),
            )));
            combination = combination.with(by.negate()).word(&hypothesis(&context, 1 + splits.len()));
            last = last.subtract(&one);
        }
    }
    rest = forgetting(&context, 1, rest, splits.len());
    let mut proof = combination.with(up.clone()).with(rest);
    proof = with_defined(proof, &context, &[&up.right], search)?;
    for split in splits.into_iter().rev() {
        proof = split.with(proof);
    }
    Ok(Proof::new("induct").word(n).with(1).with(base).with(proof))
}

/// The name of the i-th hypothesis after those of the context.
fn hypothesis(context: &Sequent, i: usize) -> String {
    format!("h{}", context.hypotheses.len() + i)
}

/// A proof in the context alone, as a proof in one with `more` hypotheses and `then` after them.
fn forgetting(context: &Sequent, more: usize, proof: Proof, then: usize) -> Proof {
    if proof.rule == "sign" {
        return proof;
    }
    let mut forget = Proof::new("forget");
    for i in 1..=more + then {
        forget = forget.word(&hypothesis(context, i));
    }
    forget.with(proof)
}

/// Descent to the limit at infinity, as reals.
fn descend(s: &Sequent, form: &Form, n: &Name, step: &Term, search: &mut Search) -> Result<Proof, Stuck> {
    let none = |why| Err(Stuck::NotApplicable(why));
    // Sums become special functions, and an upper end is given up.
    let mut smooth = form.difference.clone();
    let mut laws = Vec::new();
    for sum in moving_sums(&form.difference, n) {
        let Some((law, argument, value)) = special_sum(&sum) else { return none("a sum without a limit") };
        let Some(by) = factor(&smooth, &sum) else { return none("a sum that does not enter linearly") };
        smooth = smooth.replace(&sum, &value);
        laws.push((law, argument, by));
    }
    let smooth = if laws.is_empty() { smooth } else { collected(s, &smooth) };
    let mut real = s.with_goal(Relation::new(Term::integer(0), form.rel, smooth.clone()));
    let Some(place) = real.variables.iter().position(|d| d.name == *n) else { return none("no variable") };
    let declared = real.variables[place].clone();
    let domain = &mut real.variables[place].domain;
    domain.sort = Sort::Real;
    (domain.upper, domain.upper_open) = (End::PlusInfinity, true);

    let down = Relation::new(step.clone(), form.rel, Term::integer(0));
    if quick(&real.with_goal(down.clone()), 120, search).is_some() {
        return Err(Stuck::because("the differences are not all negative"));
    }
    let limit = limit(&real, n, &smooth, search)?;
    let share = search.left() / 10 * 9;
    let rest = search.within(share, |search| smooth_premise(search, &real.with_goal(down.clone())))?;
    let rest = with_defined(Proof::new("linear").with(down).with(rest), &real, &[step], search)?;
    let mut proof = Proof::new("descend").word(n).with(rest);
    if let Some(limit) = limit {
        proof = proof.with(limit);
    }
    if declared.domain.sort == Sort::Integer {
        proof = with_defined(Proof::new("relax").word(n).with(proof), &real, &[&smooth], search)?;
    }
    if declared.domain.upper.finite().is_some() {
        proof = with_defined(Proof::new("widen").word(n).word("hi").with(proof), &real, &[&smooth], search)?;
    }
    if laws.is_empty() {
        return Ok(proof);
    }
    let mut combination = Proof::new("linear");
    let mut wraps = Vec::new();
    for (i, (law, argument, by)) in laws.into_iter().enumerate() {
        let condition = Relation::new(argument.clone(), Rel::GreaterEqual, Term::integer(0));
        let shown = premise(search, &s.with_goal(condition))?;
        let law = Proof::new("law").with(super::super::super::proof::Field::Text(law.into()));
        wraps.push(law.with(argument).with(forgetting(s, 0, shown, i)));
        combination = combination.with(by.negate()).word(&hypothesis(s, i + 1));
    }
    let names = wraps.len();
    let goal = real.relation().cloned().ok_or(Stuck::NotApplicable("no relation"))?;
    let rest = forgetting(s, names, proof, 0);
    let mut proof = with_defined(combination.with(goal).with(rest), s, &[&smooth], search)?;
    for wrap in wraps.into_iter().rev() {
        proof = wrap.with(proof);
    }
    Ok(proof)
}

/// Whether the limit at infinity is not negative, with a proof if the kernel may need one.
fn limit(s: &Sequent, n: &Name, t: &Term, search: &mut Search) -> Result<Option<Proof>, Stuck> {
    let mut base = s.clone();
    base.variables.retain(|d| d.name != *n);
    let sign = |c: &Term| {
        let zero = Term::integer(0);
        for (rel, order) in
            [(Rel::Less, std::cmp::Ordering::Greater), (Rel::Greater, std::cmp::Ordering::Less)]
        {
            let r = Relation::new(zero.clone(), rel, c.clone());
            if crate::search::exact::truth(&r, 128) == Some(true) || super::is_plain(&base, &r) {
                return Some(order);
            }
        }
        None
    };
    let found = (Towards { sign: &sign, x: n, place: Place::Above, order: 0 }).limit(t);
    search.spend(200)?;
    match found {
        Some(Tends::Up) => Ok(None),
        Some(Tends::To(c)) if c.is_zero() => Ok(None),
        Some(Tends::To(c)) => {
            let weak = Relation::new(c, Rel::GreaterEqual, Term::integer(0));
            Ok(Some(premise(search, &base.with_goal(weak))?))
        }
        Some(Tends::Down) => Err(Stuck::because("it tends to minus infinity")),
        None => Err(Stuck::because("no limit at infinity")),
    }
}

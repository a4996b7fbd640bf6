//! Ladders of derivatives in one variable: the sign of a term from the sign
//! pattern of the derivative of a multiple of it, and so on down to a term
//! whose signs are plain. The domain is split where the two sides touch.

mod chain;
mod curve;
mod face;
pub(super) mod forms;
mod line;
mod roots;
mod unfold;
mod zeros;

use num_rational::BigRational;
use num_traits::Signed;

use crate::enclosure::Function;
use crate::expression::{Constant, End, Name, Node, Sort, Term};
use crate::statement::{Conclusion, Condition, Rel, Relation, Sequent, Signature, conditions};

use super::super::engine::{Method, Search, Stuck};
use super::super::plain::{is_plain, is_plainly_non_negative, is_plainly_positive};
use super::super::proof::{Field, Proof};
use super::super::towards::Claim;
use chain::{Chains, Leaf, Level, Tried};
pub use face::Faces;
use forms::Form;
pub use line::Line;
pub use unfold::Unfold;

/// The method.
pub struct Ladder;

/// Chains tried in earnest before giving up.
const MOST_TRIED: usize = 6;
/// Derivatives looked at for one variable.
const MOST_NODES: usize = 120;

impl Method for Ladder {
    fn name(&self) -> &'static str {
        "ladder of derivatives"
    }

    fn share(&self) -> u64 {
        50
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let Some(goal) = s.relation() else { return Err(Stuck::NotApplicable("no relation")) };
        let goal = goal.turned();
        if !matches!(goal.rel, Rel::LessEqual | Rel::Less) {
            return Err(Stuck::NotApplicable("no inequality"));
        }
        let plain = if goal.rel == Rel::Less { is_plainly_positive } else { is_plainly_non_negative };
        if plain(s, &goal.difference()) {
            return Ok(Proof::new("sign"));
        }
        if let Some((word, smaller)) = narrowed(s) {
            let mut proof = Proof::new("narrow").word(&word).with(self.attempt(&smaller, search)?);
            if let Some(defined) = well_posed(&smaller, search)? {
                proof = proof.with(defined);
            }
            return Ok(proof);
        }
        let forms: Vec<Form> =
            [forms::plain, forms::squares, forms::logarithms].iter().filter_map(|f| f(s, &goal)).collect();
        let mut told = Stuck::NotApplicable("no real variable to move alone");
        // Chains that end in plain signs are cheap: every form gets its chance to have
        // one before the rest of the search is set on what is left of any.
        for (zeal, percent) in [(Zeal::Plain, 50), (Zeal::Open, 100)] {
            let share = (search.left() / 100).saturating_mul(percent);
            let result = search.within(share, |search| each_form(s, &goal, &forms, zeal, search));
            match result {
                Err(Stuck::NotApplicable(why)) => return Err(Stuck::NotApplicable(why)),
                Err(Stuck::Exhausted) if search.left() == 0 => return Err(Stuck::Exhausted),
                Err(stuck) => told = stuck,
                proved => return proved,
            }
        }
        Err(told)
    }
}

/// How much a chain may ask of the rest of the search.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Zeal {
    /// It ends in signs that are plain.
    Plain,
    /// Its last sign, and parts of the domain, may be goals of their own.
    Open,
}

/// Tries every form along every variable.
fn each_form(
    s: &Sequent,
    goal: &Relation,
    forms: &[Form],
    zeal: Zeal,
    search: &mut Search,
) -> Result<Proof, Stuck> {
    let mut told = Stuck::NotApplicable("no real variable to move alone");
    for form in forms {
        for x in candidates(s, goal) {
            let inner = s.with_goal(form.goal.clone());
            let share = search.left() / 3 * 2;
            let tried = search.within(share, |search| {
                along(&inner, &form.goal, &x, zeal, search, 2)
                    .and_then(|rest| form.wrap(s, rest, &mut |sequent| premise(search, sequent)))
            });
            match tried {
                Ok(proof) => return Ok(proof),
                Err(Stuck::NotApplicable(_)) => {}
                Err(stuck) => told = stuck,
            }
        }
    }
    Err(told)
}

/// The first hypothesis that is an end of a real variable's domain, made one where
/// the present end is infinite or plainly wider.
pub fn narrowed(s: &Sequent) -> Option<(String, Sequent)> {
    for (i, h) in s.hypotheses.iter().enumerate() {
        let h = h.turned();
        if !matches!(h.rel, Rel::LessEqual | Rel::Less) {
            continue;
        }
        for (side, c, upper) in [(&h.left, &h.right, true), (&h.right, &h.left, false)] {
            let Some(place) = side.as_variable().and_then(|x| s.variables.iter().position(|d| d.name == *x))
            else {
                continue;
            };
            let d = &s.variables[place];
            let earlier = |v: &Name| s.variables[..place].iter().any(|e| e.name == *v);
            if d.domain.sort != Sort::Real || !c.free_variables().iter().all(earlier) {
                continue;
            }
            let wider = match if upper { &d.domain.upper } else { &d.domain.lower } {
                End::Finite(old) => {
                    let gap = if upper { old.subtract(c) } else { c.subtract(old) };
                    old != c && within_domain(s, c, old, upper) || is_plainly_non_negative(s, &gap)
                }
                _ => true,
            };
            if !wider {
                continue;
            }
            let mut new = s.clone();
            new.hypotheses.remove(i);
            let domain = &mut new.variables[place].domain;
            let open = h.rel == Rel::Less;
            if upper {
                (domain.upper, domain.upper_open) = (End::Finite(c.clone()), open);
            } else {
                (domain.lower, domain.lower_open) = (End::Finite(c.clone()), open);
            }
            return Some((format!("h{}", i + 1), new));
        }
    }
    None
}

/// Whether `c` is a variable whose own end on that side is `old`.
fn within_domain(s: &Sequent, c: &Term, old: &Term, upper: bool) -> bool {
    let Some(d) = c.as_variable().and_then(|x| s.declaration(x)) else { return false };
    (if upper { &d.domain.upper } else { &d.domain.lower }).finite() == Some(old)
}

/// Real variables of the goal, those that occur least first.
fn candidates(s: &Sequent, goal: &Relation) -> Vec<Name> {
    let difference = goal.difference();
    s.variables.iter().rev().map(|d| d.name.clone()).filter(|x| difference.mentions(x)).collect()
}

/// A proof along one variable, splitting its domain at most `splits` times.
fn along(
    s: &Sequent,
    goal: &Relation,
    x: &Name,
    zeal: Zeal,
    search: &mut Search,
    splits: u32,
) -> Result<Proof, Stuck> {
    let Some(line) = Line::new(s, x, search.left() / 2) else {
        return Err(Stuck::NotApplicable("the variable does not move alone"));
    };
    let difference = goal.difference();
    match line.signs(&difference) {
        None if line.is_worn_out() => return Err(Stuck::Exhausted),
        None => return Err(Stuck::because("a side is not defined at a sample")),
        Some(all) if all.iter().flatten().any(|plus| !plus) => {
            return Err(Stuck::because("a sample contradicts it"));
        }
        Some(_) => {}
    }
    let zero = if splits > 0 { zeros::inner_zero(&line, &difference) } else { None };
    if let Some(c) = zero {
        return split(s, goal, x, &c, zeal, search, splits);
    }
    if splits > 0
        && s.variables.len() > 1
        && let Some(c) = curve::zero(s, &difference, x, search)?
    {
        return from_curve(s, goal, x, &c, zeal, search, splits);
    }
    let result = chain(s, goal, &line, zeal, search);
    search.spend(line.work.get())?;
    let stuck = match result {
        Err(stuck) if splits > 0 && !matches!(stuck, Stuck::Exhausted) => stuck,
        other => return other,
    };
    let domain = &line.declared.domain;
    let literal = |e: &End| e.finite().map(|t| t.as_number().cloned());
    match (literal(&domain.lower), literal(&domain.upper)) {
        (None, None) => split(s, goal, x, &Term::integer(0), zeal, search, splits),
        (Some(Some(a)), None) if a.is_negative() => {
            split(s, goal, x, &Term::integer(0), zeal, search, splits)
        }
        (None, Some(Some(b))) if b.is_positive() => {
            split(s, goal, x, &Term::integer(0), zeal, search, splits)
        }
        (Some(Some(a)), Some(Some(b))) if a.is_negative() && b.is_positive() => {
            split(s, goal, x, &Term::integer(0), zeal, search, splits)
        }
        // A far part by derivatives, the rest as it may be.
        (Some(Some(a)), None) if s.variables.len() == 1 && zeal == Zeal::Open => {
            for far in [2, 5, 20] {
                let c = Term::number(&a + BigRational::from_integer(far.into()));
                let tail = upper_part(s, x, &c);
                if let Some(line) = Line::new(&tail, x, search.left() / 10)
                    && let Ok(above) = chain(&tail, goal, &line, zeal, search)
                {
                    let below = premise(search, &lower_part(s, x, &c))?;
                    return Ok(Proof::new("split").word(x).with(c).with(below).with(above));
                }
            }
            Err(stuck)
        }
        _ => Err(stuck),
    }
}

/// The sequent for x up to c.
fn lower_part(s: &Sequent, x: &Name, c: &Term) -> Sequent {
    let mut part = s.clone();
    for d in part.variables.iter_mut().filter(|d| d.name == *x) {
        (d.domain.upper, d.domain.upper_open) = (End::Finite(c.clone()), false);
    }
    part
}

/// The sequent for x from c on.
fn upper_part(s: &Sequent, x: &Name, c: &Term) -> Sequent {
    let mut part = s.clone();
    for d in part.variables.iter_mut().filter(|d| d.name == *x) {
        (d.domain.lower, d.domain.lower_open) = (End::Finite(c.clone()), false);
    }
    part
}

/// A split at a term in the other variables, of which some may be declared later.
fn from_curve(
    s: &Sequent,
    goal: &Relation,
    x: &Name,
    c: &Term,
    zeal: Zeal,
    search: &mut Search,
    splits: u32,
) -> Result<Proof, Stuck> {
    let earlier = s.variables.iter().take_while(|d| d.name != *x);
    let earlier: Vec<&Name> = earlier.map(|d| &d.name).collect();
    if c.free_variables().iter().all(|v| earlier.contains(&v)) {
        return split(s, goal, x, c, zeal, search, splits);
    }
    let at_goal = s.with_goal(goal.clone());
    let Some((moved, name, proof)) = curve::declared_last(&at_goal, x, search) else {
        return Err(Stuck::because("a zero on a curve, but the variable bounds another"));
    };
    let goal = moved.relation().cloned().ok_or(Stuck::NotApplicable("no relation"))?;
    let rest = split(&moved, &goal, &name, c, zeal, search, splits)?;
    Ok(proof.with(Proof::new("forget").word(x).with(rest)))
}

fn split(
    s: &Sequent,
    goal: &Relation,
    x: &Name,
    c: &Term,
    zeal: Zeal,
    search: &mut Search,
    splits: u32,
) -> Result<Proof, Stuck> {
    let mut proof = Proof::new("split").word(x).with(c.clone());
    for part in [lower_part(s, x, c), upper_part(s, x, c)] {
        let step = match along(&part, goal, x, zeal, search, splits - 1) {
            Ok(step) => step,
            Err(stuck) if zeal == Zeal::Plain || stuck == Stuck::Exhausted => return Err(stuck),
            Err(_) => premise(search, &part)?,
        };
        proof = proof.with(step);
    }
    Ok(proof)
}

fn chain(s: &Sequent, goal: &Relation, line: &Line, zeal: Zeal, search: &mut Search) -> Result<Proof, Stuck> {
    let mut told = Stuck::because("no chain of derivatives whose samples lift to the goal");
    if let Some((factor, rest)) = Chains::new(line, 0).plain_factor(&goal.difference()) {
        let domain = &line.declared.domain;
        let closed = |e: &End, open: bool| e.finite().is_some() && !open;
        let inside_only =
            closed(&domain.lower, domain.lower_open) || closed(&domain.upper, domain.upper_open);
        let both_plain = is_plainly_positive(s, &factor) && is_plainly_positive(s, &rest);
        if both_plain || !inside_only {
            let zero = Term::integer(0);
            let mut proof = Proof::new("scale")
                .with(Relation::new(zero.clone(), goal.rel, rest.clone()))
                .with(&factor)
                .with(by_factors(line, Relation::new(factor.clone(), Rel::Greater, zero), search)?)
                .with(Proof::new("sign"));
            if let Some(defined) = defined(line, &[&factor, &rest], Vec::new(), search)? {
                proof = proof.with(defined);
            }
            return Ok(proof);
        }
    }
    let mut found = None;
    let mut tried = 0;
    let mut steps: Vec<(Level, Proof)> = Vec::new();
    Chains::new(line, MOST_NODES).find(&goal.difference(), zeal, &mut |levels, last, leaf| {
        tried += 1;
        let mut written = Proof::new("ladder").word(&line.x);
        let result = (0..levels.len()).try_for_each(|i| {
            let known =
                steps.get(i).filter(|(l, _): &&(Level, Proof)| *l == levels[i]).map(|(_, p)| p.clone());
            let step = match known {
                Some(step) => step,
                None => {
                    let step =
                        write_level(line, &levels[i], search).map_err(|e| (Tried::LevelFailed(i), e))?;
                    steps.truncate(i);
                    steps.push((levels[i].clone(), step.clone()));
                    step
                }
            };
            written = written.clone().with(step);
            Ok(())
        });
        let result = result.and_then(|()| {
            let leaf = write_leaf(line, last, leaf, goal, search).map_err(|e| (Tried::LeafFailed, e))?;
            write_ends(s, goal, line, written.with(leaf), search).map_err(|e| (Tried::Stop, e))
        });
        match result {
            Ok(proof) => {
                found = Some(proof);
                Tried::Proved
            }
            Err((which, stuck)) => {
                let over = matches!(stuck, Stuck::Exhausted) || tried >= MOST_TRIED;
                told = stuck;
                if over { Tried::Stop } else { which }
            }
        }
    });
    found.ok_or(told)
}

/// Proves a premise. That it is false says nothing about the goal.
pub fn premise(search: &mut Search, sequent: &Sequent) -> Result<Proof, Stuck> {
    if sequent.relation().is_some_and(|r| is_plain(sequent, r)) {
        return Ok(Proof::new("sign"));
    }
    search.prove(sequent).map_err(|stuck| match stuck {
        Stuck::Counterexample(at) => Stuck::because(format!("{sequent} is false at {at:?}")),
        other => other,
    })
}

fn write_leaf(
    line: &Line,
    last: &Term,
    leaf: Leaf,
    goal: &Relation,
    search: &mut Search,
) -> Result<Proof, Stuck> {
    let proof = Proof::new("leaf");
    let (word, rel) = match (leaf, goal.rel == Rel::Less) {
        (Leaf::Coefficients(about), _) => return Ok(proof.word("coefficients").word(about)),
        (Leaf::Roots, _) => return Ok(proof.word("roots")),
        (Leaf::Sign(true), false) => ("plus", Rel::GreaterEqual),
        (Leaf::Sign(true), true) => ("positive", Rel::Greater),
        (Leaf::Sign(false), false) => ("minus", Rel::LessEqual),
        (Leaf::Sign(false), true) => ("negative", Rel::Less),
    };
    let claim = line.inside.with_goal(Relation::new(last.clone(), rel, Term::integer(0)));
    let share = search.left() / 4;
    Ok(proof.word(word).with(search.within(share, |search| premise(search, &claim))?))
}

/// A level, with proofs of all it takes for granted.
fn write_level(line: &Line, level: &Level, search: &mut Search) -> Result<Proof, Stuck> {
    let zero = Term::integer(0);
    let mut step = Proof::new("level")
        .with(&level.multiplier)
        .with(&level.product)
        .with(&level.factor)
        .with(&level.next);
    for (word, end) in [("from", &level.from), ("to", &level.to)] {
        let Some((plus, claim)) = end else { continue };
        step = step.word(word).word(if *plus { "plus" } else { "minus" });
        if let Claim::Needs(r) = claim
            && r.left.as_number().is_none()
        {
            step = step.with(premise(search, &line.base.with_goal(r.clone()))?);
        }
    }
    for (word, term) in [("multiplier", &level.multiplier), ("factor", &level.factor)] {
        if !is_plainly_positive(&line.inside, term) {
            let positive = Relation::new(term.clone(), Rel::Greater, zero.clone());
            step = step.with(Proof::new(word).with(by_factors(line, positive, search)?));
        }
    }
    let terms = [&level.multiplier, &level.product, &level.factor, &level.next];
    let mut needed = Vec::new();
    smoothness(&level.product, &line.x, &mut needed);
    if let Some(defined) = defined(line, &terms, needed, search)? {
        step = step.with(defined);
    }
    Ok(step)
}

/// Proves that a product is positive from the signs of its factors, those that
/// are not plain one by one.
fn by_factors(line: &Line, goal: Relation, search: &mut Search) -> Result<Proof, Stuck> {
    let mut facts = Vec::new();
    factors(&line.inside, &goal.left, &mut facts);
    let zero = Term::integer(0);
    let mut cuts = Vec::new();
    for f in facts {
        let rel = match line.sign(&f) {
            Some(std::cmp::Ordering::Greater) => Rel::Greater,
            Some(std::cmp::Ordering::Less) => Rel::Less,
            _ => return premise(search, &line.inside.with_goal(goal)),
        };
        let fact = Relation::new(f, rel, zero.clone());
        if fact == goal {
            return premise(search, &line.inside.with_goal(goal));
        }
        let mut step = premise(search, &line.inside.with_goal(fact.clone()))?;
        // It is proved without the facts cut in before it.
        if !cuts.is_empty() {
            let first = line.inside.hypotheses.len() + 1;
            let mut forget = Proof::new("forget");
            for i in 0..cuts.len() {
                forget = forget.word(&format!("h{}", first + i));
            }
            step = forget.with(step);
        }
        cuts.push((fact, step));
    }
    let mut proof = Proof::new("sign");
    for (fact, step) in cuts.into_iter().rev() {
        proof = Proof::new("cut").with(fact).with(step).with(proof);
    }
    Ok(proof)
}

/// The factors of a product whose signs are not plain.
fn factors(s: &Sequent, term: &Term, found: &mut Vec<Term>) {
    match term.node() {
        Node::Multiply(a, b) | Node::Divide(a, b) => {
            factors(s, a, found);
            factors(s, b, found);
        }
        Node::Negate(a) => factors(s, a, found),
        Node::Power(a, p) if p.as_number().is_some() => factors(s, a, found),
        Node::Apply(Function::Sqrt, args) => factors(s, &args[0], found),
        Node::Number(_) => {}
        _ if is_plainly_positive(s, term) || found.contains(term) => {}
        _ => found.push(term.clone()),
    }
}

/// The closed ends, where the inequality inside does not reach them.
fn write_ends(
    s: &Sequent,
    goal: &Relation,
    line: &Line,
    mut proof: Proof,
    search: &mut Search,
) -> Result<Proof, Stuck> {
    let strict = goal.rel == Rel::Less;
    let domain = &line.declared.domain;
    let fixed = |e: &End| e.finite().is_some_and(|t| t.free_variables().is_empty());
    let both_closed = !domain.lower_open
        && !domain.upper_open
        && domain.lower.finite().is_some()
        && domain.upper.finite().is_some();
    let maybe_point = both_closed && !(fixed(&domain.lower) && fixed(&domain.upper));
    for (word, end, open, low) in [
        ("lower", &domain.lower, domain.lower_open, true),
        ("upper", &domain.upper, domain.upper_open, false),
    ] {
        let End::Finite(end) = end else { continue };
        if open || !(strict || low && maybe_point) {
            continue;
        }
        let at = goal.map(|t| t.with(&line.x, end));
        let base = line::base(s, &line.declared, false).with_goal(at);
        proof = proof.with(Proof::new(word).with(premise(search, &base)?));
    }
    Ok(proof)
}

/// Conditions beyond definedness under which the kernel differentiates.
pub fn smoothness(term: &Term, x: &str, needed: &mut Vec<Relation>) {
    let mut add = |left: &Term, rel: Rel, right: i64| {
        let r = Relation::new(left.clone(), rel, Term::integer(right));
        if !needed.contains(&r) {
            needed.push(r);
        }
    };
    term.walk(&mut |t| {
        if !t.mentions(x) {
            return false;
        }
        match t.node() {
            Node::Power(b, p)
                if !p.as_number().is_some_and(BigRational::is_integer)
                    && !matches!(b.node(), Node::Constant(Constant::E)) =>
            {
                add(b, Rel::Greater, 0);
            }
            Node::Apply(f, args) => match f {
                Function::Sqrt | Function::Gamma | Function::Lgamma | Function::Digamma => {
                    add(&args[0], Rel::Greater, 0);
                }
                Function::Asin | Function::Acos => {
                    add(&args[0], Rel::Greater, -1);
                    add(&args[0], Rel::Less, 1);
                }
                Function::Acosh => add(&args[0], Rel::Greater, 1),
                Function::Abs => add(&args[0], Rel::NotEqual, 0),
                _ => {}
            },
            _ => {}
        }
        true
    });
}

/// `{defined [c] {p} ..}` for a sequent that was made from another: its ends, hypotheses
/// in order, and goal. Nothing if there is nothing to show.
pub fn well_posed(s: &Sequent, search: &mut Search) -> Result<Option<Proof>, Stuck> {
    let mut seen = Sequent { variables: vec![], hypotheses: vec![], goal: Conclusion::Absurd };
    let mut proof = Proof::new("defined");
    let mut shown: Vec<Relation> = Vec::new();
    let mut show = |seen: &Sequent, terms: &[&Term]| -> Result<(), Stuck> {
        for term in terms {
            let nothing: Vec<Signature> = Vec::new();
            for condition in conditions(seen, &nothing, term) {
                for r in showable(seen, condition, search)? {
                    if !shown.contains(&r.0) {
                        shown.push(r.0.clone());
                        proof.fields.extend([Field::Relation(r.0), Field::Proof(r.1)]);
                    }
                }
            }
        }
        Ok(())
    };
    for d in &s.variables {
        for e in d.domain.ends() {
            show(&seen, &[e])?;
        }
        seen.variables.push(d.clone());
    }
    for h in &s.hypotheses {
        show(&seen, &[&h.left, &h.right])?;
        seen.hypotheses.push(h.clone());
    }
    if let Some(r) = s.relation() {
        show(&seen, &[&r.left, &r.right])?;
    }
    Ok(if proof.fields.is_empty() { None } else { Some(proof) })
}

/// What shows one condition of definedness; nothing if it is plain.
fn showable(s: &Sequent, condition: Condition, search: &mut Search) -> Result<Vec<(Relation, Proof)>, Stuck> {
    let Condition::OneOf { indices, alternatives, .. } = condition else {
        return Err(Stuck::because("a term whose definedness cannot be shown"));
    };
    if alternatives.iter().any(|all| all.iter().all(|r| is_plain(s, r))) {
        return Ok(Vec::new());
    }
    if !indices.is_empty() {
        return Err(Stuck::because("a series whose definedness is to be shown"));
    }
    let mut told = Stuck::because("a condition without alternatives");
    // Methods prove the strict forms of `!= 0`.
    for all in alternatives.iter().filter(|all| all.iter().all(|r| r.rel != Rel::NotEqual)) {
        let proved: Result<Vec<_>, Stuck> =
            all.iter().map(|r| Ok((r.clone(), premise(search, &s.with_goal(r.clone()))?))).collect();
        match proved {
            Err(Stuck::Exhausted) => return Err(Stuck::Exhausted),
            Err(stuck) => told = stuck,
            proved => return proved,
        }
    }
    Err(told)
}

/// `{defined [c] {p} ..}` for terms inside the line, with further relations; nothing
/// if there is nothing to show.
pub fn defined(
    line: &Line,
    terms: &[&Term],
    mut needed: Vec<Relation>,
    search: &mut Search,
) -> Result<Option<Proof>, Stuck> {
    let nothing: Vec<Signature> = Vec::new();
    for term in terms {
        for condition in conditions(&line.inside, &nothing, term) {
            let Condition::OneOf { indices, alternatives, .. } = condition else {
                return Err(Stuck::because("a term whose definedness cannot be shown"));
            };
            if !indices.is_empty() {
                return Err(Stuck::because("a series whose definedness is to be shown"));
            }
            let fits = |all: &Vec<Relation>| {
                all.iter().all(|r| {
                    r.rel != Rel::NotEqual
                        && line.sign(&r.difference()).is_some_and(|o| o == std::cmp::Ordering::Greater)
                })
            };
            let Some(way) = alternatives.iter().find(|a| fits(a)) else {
                return Err(Stuck::because("a term that is not defined along the line"));
            };
            for r in way {
                if !needed.contains(r) {
                    needed.push(r.clone());
                }
            }
        }
    }
    let mut proof = Proof::new("defined");
    for r in needed {
        let plain = r.right.is_zero() && r.rel == Rel::Greater && is_plainly_positive(&line.inside, &r.left);
        if !plain {
            let step = if r.rel == Rel::Greater && r.right.is_zero() {
                by_factors(line, r.clone(), search)?
            } else {
                premise(search, &line.inside.with_goal(r.clone()))?
            };
            proof = proof.with(r).with(step);
        }
    }
    Ok(if proof.fields.is_empty() { None } else { Some(proof) })
}

//! What "defined" means, and how it is demanded.
//!
//! A term is defined at a point if all its parts are and each operation is
//! inside its domain: `a/b` needs `b != 0`; `log` a positive argument; `b^p` a
//! positive base, or an integer exponent with a non-zero base or a positive
//! exponent, or a base `>= 0` with a positive exponent (so `0^0` is undefined); a
//! quantity an argument in its declared domain; and so on, see [`conditions`].
//!
//! Sequents are kept *well posed*: ends, hypotheses in order and goal are defined
//! wherever what stands before them holds. A rule that brings in new terms calls
//! [`require_defined`] for exactly those; a rule that enlarges the context calls
//! [`require_well_posed`]. Rewriting never counts as a proof of definedness:
//! otherwise `x/x >= 1` would pass on [-1, 1].

use num_traits::Signed;

use super::integer::{is_even, is_integer};
use super::number::Function;
use super::rule::{Kernel, check};
use super::sequent::{Declaration, Domain, End, Goal, Rel, Relation, Sequent, Sort};
use super::step::{Field, Step};
use super::term::{Limit, Name, Node, SeriesKind, Term};
use super::verdict::{Checked, Reason, refuse};

/// One thing a term needs in order to be defined.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Condition {
    /// At least one of these conjunctions; `indices` are the series it stands in.
    OneOf {
        /// The indices of enclosing series, outermost first.
        indices: Vec<Declaration>,
        /// Alternatives, each a conjunction.
        alternatives: Vec<Vec<Relation>>,
        /// Further alternatives that no proof may use, because the rules read
        /// "defined" as the ones above; a witness must violate them as well.
        also: Vec<Vec<Relation>>,
    },
    /// Something the kernel has no way to establish from relations, said in words.
    Unshowable(String),
}

impl Condition {
    /// The alternative people would write first.
    pub fn first(&self) -> &[Relation] {
        match self {
            Condition::OneOf { alternatives, .. } => alternatives.first().map_or(&[], Vec::as_slice),
            Condition::Unshowable(_) => &[],
        }
    }
}

/// All conditions of a term that are not decided by literals or by the declared
/// domain of one variable, inner parts first, without repetition.
pub fn conditions(s: &Sequent, kernel: &Kernel, term: &Term) -> Vec<Condition> {
    let mut found = Vec::new();
    collect(s, kernel, term, &mut Vec::new(), &mut found);
    found
}

fn collect(s: &Sequent, k: &Kernel, term: &Term, indices: &mut Vec<Declaration>, found: &mut Vec<Condition>) {
    if let Node::Series { kind, index, lower, upper, body } = &**term {
        return series(s, k, (*kind, index, lower, upper, body), indices, found);
    }
    for child in term.children() {
        collect(s, k, child, indices, found);
    }
    let zero = Term::zero;
    let one = || Term::integer(1);
    let rel = |l: &Term, r: Rel, t: Term| Relation::new(l.clone(), r, t);
    let nonzero = |t: &Term| {
        vec![vec![rel(t, Rel::Ne, zero())], vec![rel(t, Rel::Gt, zero())], vec![rel(t, Rel::Lt, zero())]]
    };
    let inner = within_indices(s, indices);
    let whole = |t: &Term, r: Rel| rel(&Term::apply(Function::Floor, t), r, t.clone());
    let mut add_but = |alternatives: Vec<Vec<Relation>>, also: Vec<Vec<Relation>>| {
        let settled = alternatives.iter().any(|all| all.iter().all(|r| is_trivial(&inner, r)));
        let condition = Condition::OneOf { indices: indices.clone(), alternatives, also };
        if !settled && !found.contains(&condition) {
            found.push(condition);
        }
    };
    let mut add = |alternatives| add_but(alternatives, vec![]);
    match &**term {
        Node::Divide(_, b) => add(nonzero(b)),
        Node::Power(b, p) => {
            let positive_base = vec![rel(b, Rel::Gt, zero())];
            match p.as_number() {
                Some(q) if q.is_integer() && q.is_positive() => {}
                Some(q) if q.is_integer() => add(nonzero(b)),
                Some(q) if q.is_positive() => add(vec![vec![rel(b, Rel::Ge, zero())], positive_base]),
                Some(_) => add(vec![positive_base]),
                None => {
                    let mut ways = vec![positive_base];
                    let mut also = vec![];
                    if is_integer(&inner, p) {
                        ways.extend(nonzero(b));
                        ways.push(vec![rel(p, Rel::Gt, zero())]);
                    } else {
                        // An exponent may be an integer by its value alone.
                        also.push(vec![whole(p, Rel::Eq), rel(b, Rel::Ne, zero())]);
                        also.push(vec![whole(p, Rel::Eq), rel(p, Rel::Gt, zero())]);
                    }
                    ways.push(vec![rel(b, Rel::Ge, zero()), rel(p, Rel::Gt, zero())]);
                    add_but(ways, also);
                }
            }
        }
        Node::Apply(f, args) => {
            let a = &args[0];
            let minus_one = || Term::integer(-1);
            match f {
                Function::Log | Function::Log2 => add(vec![vec![rel(a, Rel::Gt, zero())]]),
                Function::Sqrt => add(vec![vec![rel(a, Rel::Ge, zero())]]),
                Function::Asin | Function::Acos => {
                    add(vec![vec![rel(a, Rel::Ge, minus_one())]]);
                    add(vec![vec![rel(a, Rel::Le, one())]]);
                }
                Function::Acosh => add(vec![vec![rel(a, Rel::Ge, one())]]),
                Function::Atanh => {
                    add(vec![vec![rel(a, Rel::Gt, minus_one())]]);
                    add(vec![vec![rel(a, Rel::Lt, one())]]);
                }
                Function::Tan => add(nonzero(&Term::apply(Function::Cos, a))),
                Function::Gamma | Function::Lgamma | Function::Digamma | Function::Trigamma => {
                    // Undefined at 0, -1, -2, .. only; the rules know them for positive arguments.
                    add_but(vec![vec![rel(a, Rel::Gt, zero())]], vec![vec![whole(a, Rel::Lt)]]);
                }
                Function::Factorial | Function::Binomial | Function::Chebyshev => {
                    let count = if *f == Function::Binomial { 2 } else { 1 };
                    for n in &args[..count] {
                        if !is_integer(&inner, n) {
                            let why = format!("{n} is not an integer by its shape");
                            found.push(Condition::Unshowable(why));
                            return;
                        }
                    }
                    for n in &args[..count] {
                        add(vec![vec![rel(n, Rel::Ge, zero())]]);
                    }
                }
                _ => {}
            }
        }
        Node::Quantity(name, args) => {
            let Some((domains, _)) = k.quantities.get(name) else {
                return found.push(Condition::Unshowable(format!("`{name}` is not a declared quantity")));
            };
            if domains.len() != args.len() {
                return found
                    .push(Condition::Unshowable(format!("`{name}` takes {} arguments", domains.len())));
            }
            let wrong = args.iter().zip(domains).find(|(a, d)| !has_sort(&inner, a, d.sort));
            if let Some((a, d)) = wrong {
                let why = format!("{a} is not {} by its shape", d.sort.name());
                return found.push(Condition::Unshowable(why));
            }
            for (a, d) in args.iter().zip(domains) {
                for r in membership(a, d) {
                    add(vec![vec![r]]);
                }
            }
        }
        _ => {}
    }
}

/// A sum or product over a finite range of integers; the kernel has no rule yet
/// that would establish the convergence of an infinite one or the existence of
/// an integral.
fn series(
    s: &Sequent,
    k: &Kernel,
    (kind, index, lower, upper, body): (SeriesKind, &Name, &Limit, &Limit, &Term),
    indices: &mut Vec<Declaration>,
    found: &mut Vec<Condition>,
) {
    let (Limit::Finite(a), Limit::Finite(b)) = (lower, upper) else {
        return found.push(Condition::Unshowable("a series with an infinite limit".into()));
    };
    collect(s, k, a, indices, found);
    collect(s, k, b, indices, found);
    let inner = within_indices(s, indices);
    if kind == SeriesKind::Integral {
        return found.push(Condition::Unshowable("an integral".into()));
    }
    if !is_integer(&inner, a) || !is_integer(&inner, b) {
        return found
            .push(Condition::Unshowable("a series whose limits are not integers by their shape".into()));
    }
    let end = |t: &Term| Some(End { term: t.clone(), open: false });
    let domain = Domain { sort: Sort::Integer, lower: end(a), upper: end(b) };
    // The index hides a variable of the same name; the condition would be
    // ambiguous, so it is renamed apart.
    let mut fresh: String = index.to_string();
    while inner.declaration(&fresh).is_some() {
        fresh.push('\'');
    }
    let body = body.substitute(index, &Term::variable(&fresh));
    indices.push(Declaration { name: fresh.as_str().into(), domain });
    collect(s, k, &body, indices, found);
    indices.pop();
}

fn within_indices(s: &Sequent, indices: &[Declaration]) -> Sequent {
    let mut inner = s.clone();
    inner.variables.extend(indices.iter().cloned());
    inner
}

/// Whether the term has the sort by its shape.
pub fn has_sort(s: &Sequent, term: &Term, sort: Sort) -> bool {
    match sort {
        Sort::Real => true,
        Sort::Integer => is_integer(s, term),
        Sort::Even => is_even(s, term),
    }
}

/// The relations that say `term` lies between the ends of the domain.
pub fn membership(term: &Term, domain: &Domain) -> Vec<Relation> {
    let mut all = Vec::new();
    if let Some(e) = &domain.lower {
        all.push(Relation::new(term.clone(), if e.open { Rel::Gt } else { Rel::Ge }, e.term.clone()));
    }
    if let Some(e) = &domain.upper {
        all.push(Relation::new(term.clone(), if e.open { Rel::Lt } else { Rel::Le }, e.term.clone()));
    }
    all
}

/// Whether a relation is decided by literals, or by the literal ends of the one
/// variable that it compares with a literal.
pub fn is_trivial(s: &Sequent, relation: &Relation) -> bool {
    let r = relation.turned();
    match (r.left.as_number(), r.right.as_number()) {
        (Some(a), Some(b)) => {
            return match r.rel {
                Rel::Le => a <= b,
                Rel::Lt => a < b,
                Rel::Eq => a == b,
                _ => a != b,
            };
        }
        (None, None) => return false,
        _ => {}
    }
    let (variable, literal, variable_right) = match (&*r.left, &*r.right) {
        (Node::Variable(x), Node::Number(q)) => (x, q, false),
        (Node::Number(q), Node::Variable(x)) => (x, q, true),
        _ => return false,
    };
    let Some(d) = s.declaration(variable) else { return false };
    let above = |strict: bool| {
        d.domain.lower.as_ref().is_some_and(|e| {
            e.term.as_number().is_some_and(|end| end > literal || (end == literal && (!strict || e.open)))
        })
    };
    let below = |strict: bool| {
        d.domain.upper.as_ref().is_some_and(|e| {
            e.term.as_number().is_some_and(|end| end < literal || (end == literal && (!strict || e.open)))
        })
    };
    match (r.rel, variable_right) {
        (Rel::Le, true) => above(false),
        (Rel::Lt, true) => above(true),
        (Rel::Le, false) => below(false),
        (Rel::Lt, false) => below(true),
        (Rel::Ne, _) => above(true) || below(true),
        _ => false,
    }
}

/// Demands that the terms are defined wherever the context holds. `proofs` is a
/// step `{defined [c1] {p1} [c2] {p2} ..}` for what quick sign analysis does not
/// settle.
pub fn require_defined(s: &Sequent, terms: &[&Term], proofs: Option<&Step>, kernel: &Kernel) -> Checked {
    let given = listed(proofs)?;
    let mut checked: Vec<Relation> = Vec::new();
    for term in terms {
        s.require_closed(term)?;
        kernel.spend(term.size_up_to(100_000) as u64)?;
        for condition in conditions(s, kernel, term) {
            require(s, &condition, &given, &mut checked, kernel)?;
        }
    }
    Ok(())
}

fn require(
    s: &Sequent,
    condition: &Condition,
    given: &[(&Relation, &Step)],
    checked: &mut Vec<Relation>,
    kernel: &Kernel,
) -> Checked {
    let (indices, alternatives) = match condition {
        Condition::Unshowable(what) => return refuse(Reason::Undefined, what.clone()),
        Condition::OneOf { indices, alternatives, .. } => (indices, alternatives),
    };
    let inner = within_indices(s, indices);
    // First without the listed proofs: they may be dear.
    for all in alternatives {
        if all.iter().all(|r| settled(&inner, r)) {
            return Ok(());
        }
    }
    'next: for all in alternatives {
        for r in all {
            if settled(&inner, r) || checked.contains(r) {
                continue;
            }
            let Some((_, step)) = given.iter().find(|(c, _)| c.turned() == r.turned()) else {
                continue 'next;
            };
            check(&inner.with_goal(r.clone()), step, kernel)?;
            // Under a series the same relation may mean another index.
            if indices.is_empty() {
                checked.push(r.clone());
            }
        }
        return Ok(());
    }
    let wanted: Vec<String> = condition.first().iter().map(ToString::to_string).collect();
    refuse(Reason::Undefined, format!("{} is not shown", wanted.join(" and ")))
}

/// Whether a relation is settled without a proof: by literals, by a hypothesis or
/// by quick sign analysis.
pub fn settled(s: &Sequent, r: &Relation) -> bool {
    is_trivial(s, r) || s.hypotheses.iter().any(|h| h.turned() == r.turned()) || super::sign::settles(s, r)
}

/// The pairs of a step `{defined [c1] {p1} ..}`.
pub fn listed(proofs: Option<&Step>) -> Checked<Vec<(&Relation, &Step)>> {
    let Some(step) = proofs else { return Ok(vec![]) };
    if &*step.rule != "defined" {
        return refuse(Reason::Fields, "expected a step `defined`");
    }
    let mut pairs = Vec::new();
    for pair in step.fields.chunks(2) {
        match pair {
            [Field::Relation(c), Field::Step(p)] => pairs.push((c, p)),
            _ => return refuse(Reason::Fields, "`defined` lists relations, each with its step"),
        }
    }
    Ok(pairs)
}

/// Demands that ends, hypotheses in order, and goal are defined.
pub fn require_well_posed(s: &Sequent, proofs: Option<&Step>, kernel: &Kernel) -> Checked {
    require_context(s, proofs, kernel)?;
    match &s.goal {
        Goal::Relation(r) => require_defined(s, &[&r.left, &r.right], proofs, kernel),
        Goal::Absurd => Ok(()),
    }
}

/// Demands that the ends of the declarations and the hypotheses, in order, are defined.
pub fn require_context(s: &Sequent, proofs: Option<&Step>, kernel: &Kernel) -> Checked {
    let mut seen = Sequent { variables: vec![], hypotheses: vec![], goal: Goal::Absurd };
    for d in &s.variables {
        for e in [&d.domain.lower, &d.domain.upper].into_iter().flatten() {
            require_defined(&seen, &[&e.term], proofs, kernel)?;
        }
        seen.require_fresh(&d.name)?;
        seen.variables.push(d.clone());
    }
    for h in &s.hypotheses {
        require_defined(&seen, &[&h.left, &h.right], proofs, kernel)?;
        seen.hypotheses.push(h.clone());
    }
    Ok(())
}

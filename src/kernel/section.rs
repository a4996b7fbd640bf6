//! One variable at a time: the sections of a context in a real variable.
//!
//! Statement: for a context accepted by [`Section::of`], the points with fixed
//! values of the other variables form the interval between the declared ends of
//! `x`. That is refused where a hypothesis mentions `x` or another variable's
//! end does: then the section is not that interval (drop or rewrite them first).
//! The declared range of a quantity is such a hypothesis too: with q in [0, x] the
//! value of q at one x need not be in range at another.

use super::defined::{listed, require_defined, settled};
use super::end::{Place, Towards};
use super::rule::{Kernel, check};
use super::sequent::{Domain, End, Rel, Relation, Sequent, Sort};
use super::step::Step;
use super::term::{Name, Term};
use super::verdict::{Checked, Reason, refuse};

/// A context seen as intervals of one variable over the others.
pub struct Section {
    /// The variable.
    pub x: Name,
    /// Its lower end.
    pub lower: Option<End>,
    /// Its upper end.
    pub upper: Option<End>,
    /// The context with both ends of the variable open.
    pub inside: Sequent,
    /// The context without the variable.
    without: Sequent,
}

impl Section {
    /// The sections of the sequent's context in `x`.
    pub fn of(s: &Sequent, x: &Name, kernel: &Kernel) -> Checked<Section> {
        let Some(d) = s.declaration(x) else {
            return refuse(Reason::Name, format!("`{x}` is not declared"));
        };
        if d.domain.sort != Sort::Real {
            return refuse(Reason::Condition, format!("`{x}` is not a real variable"));
        }
        let ends = s.variables.iter().flat_map(|d| [&d.domain.lower, &d.domain.upper]).flatten();
        if let Some(e) = ends.into_iter().find(|e| e.term.mentions(x)) {
            return refuse(Reason::Condition, format!("the end {} moves with `{x}`", e.term));
        }
        if let Some(h) = s.hypotheses.iter().find(|h| h.mentions(x)) {
            return refuse(Reason::Condition, format!("the hypothesis {h} moves with `{x}`"));
        }
        kernel.require_unmoved(s, x)?;
        let open = |e: &Option<End>| e.as_ref().map(|e| End { term: e.term.clone(), open: true });
        let (lower, upper) = (d.domain.lower.clone(), d.domain.upper.clone());
        let mut inside = s.clone();
        for v in &mut inside.variables {
            if v.name == *x {
                v.domain = Domain { sort: Sort::Real, lower: open(&lower), upper: open(&upper) };
            }
        }
        let mut without = s.clone();
        without.variables.retain(|v| v.name != *x);
        Ok(Section { x: x.clone(), lower, upper, inside, without })
    }

    /// The context without the variable, for values of the others for which the
    /// section has an inner point (`inner`) or at least one point.
    pub fn base(&self, inner: bool) -> Sequent {
        match (&self.lower, &self.upper) {
            (Some(a), Some(b)) if a.term.as_number().is_none() || b.term.as_number().is_none() => {
                let strict = inner || a.open || b.open;
                let rel = if strict { Rel::Lt } else { Rel::Le };
                self.without.with_hypothesis(Relation::new(a.term.clone(), rel, b.term.clone()))
            }
            _ => self.without.clone(),
        }
    }

    /// Whether every section that has a point has an inner point.
    pub fn has_inner_points(&self) -> bool {
        match (&self.lower, &self.upper) {
            (Some(a), Some(b)) if !a.open && !b.open => {
                settled(&self.without, &Relation::new(a.term.clone(), Rel::Lt, b.term.clone()))
            }
            _ => true,
        }
    }

    /// Towards the lower (`low`) or upper end.
    pub fn towards<'a>(&'a self, base: &'a Sequent, low: bool, kernel: &'a Kernel) -> Towards<'a> {
        let place = match (low, &self.lower, &self.upper) {
            (true, Some(a), _) => Place::From(a.term.clone()),
            (true, None, _) => Place::Below,
            (false, _, Some(b)) => Place::To(b.term.clone()),
            (false, _, None) => Place::Above,
        };
        Towards { base, x: &self.x, place, kernel }
    }

    /// The contexts left and right of `c`, which must lie between the ends, inside
    /// them where they are open, and use variables declared before `x` only; `c`
    /// belongs to both.
    pub fn split(s: &Sequent, x: &str, c: &Term, kernel: &Kernel) -> Checked<(Sequent, Sequent)> {
        let Some(place) = s.variables.iter().position(|d| &*d.name == x) else {
            return refuse(Reason::Name, format!("`{x}` is not declared"));
        };
        if s.variables[place].domain.sort != Sort::Real {
            return refuse(Reason::Condition, format!("`{x}` is not a real variable"));
        }
        let mut earlier = s.clone();
        earlier.variables.truncate(place);
        earlier.hypotheses.clear();
        require_defined(&earlier, &[c], None, kernel)?;
        let (mut left, mut right) = (s.clone(), s.clone());
        let domain = &s.variables[place].domain;
        for (end, below) in [(&domain.lower, true), (&domain.upper, false)] {
            let Some(end) = end else { continue };
            let (a, b) = if below { (&end.term, c) } else { (c, &end.term) };
            // At an open end itself the sequent need not be defined.
            let rel = if end.open { Rel::Lt } else { Rel::Le };
            let order = Relation::new(a.clone(), rel, b.clone());
            if !settled(&earlier, &order) {
                return refuse(Reason::Condition, format!("{order} is not settled"));
            }
        }
        let end = || Some(End { term: c.clone(), open: false });
        left.variables[place].domain.upper = end();
        right.variables[place].domain.lower = end();
        Ok((left, right))
    }
}

/// Demands each relation on the context: settled quickly, or proved in a step
/// `{defined [c1] {p1} ..}`.
pub fn require(s: &Sequent, relations: &[Relation], proofs: Option<&Step>, kernel: &Kernel) -> Checked {
    let given = listed(proofs)?;
    for r in relations {
        if settled(s, r) {
            continue;
        }
        match given.iter().find(|(c, _)| c.turned() == r.turned()) {
            Some((_, step)) => check(&s.with_goal(r.clone()), step, kernel)?,
            None => return refuse(Reason::Condition, format!("{r} is not shown")),
        }
    }
    Ok(())
}

//! Instances of facts (rule R4 of logic: universal instantiation with sorts).
//!
//! A fact holds for all its `for` variables in their domains, under its `given`
//! hypotheses, for all quantities with the signatures of its schema, if its
//! required properties hold. An instance puts terms for the variables and quantities for
//! the schema. What has to be shown for it: each term lies in its domain (sort by
//! shape), each hypothesis holds, each property is among those at hand, each
//! quantity has a signature at least as good. Then the stated relations hold, and are
//! defined because the fact itself was shown to be well posed.

use std::collections::BTreeMap;

use super::defined::{has_sort, membership};
use super::rule::Signature;
use super::sequent::{Domain, End, Relation, Sequent};
use super::term::{Name, Node, Term};
use super::theory::{Fact, Property, Use};
use super::verdict::{Checked, Reason, refuse};

/// An instance of a fact, ready to be used.
pub struct Instance {
    /// What has to be shown, in order.
    pub conditions: Vec<Relation>,
    /// What then holds.
    pub conclusions: Vec<Relation>,
    /// Properties that have to be at hand.
    pub requires: Vec<Property>,
    /// The property it states.
    pub property: Option<Property>,
    /// The terms that were put in.
    pub terms: Vec<Term>,
}

/// Instantiates `fact` in the context `s`; `quantities` are those in scope there.
pub fn instantiate(
    fact: &Fact,
    instance: &Use,
    s: &Sequent,
    quantities: &BTreeMap<Name, Signature>,
) -> Checked<Instance> {
    let c = &fact.context;
    let renamed = renamings(fact, instance, quantities)?;
    let mut terms = Vec::new();
    for d in &c.variables {
        let mut found = instance.bindings.iter().filter(|(n, _)| *n == d.name);
        let (Some((_, term)), None) = (found.next(), found.next()) else {
            return refuse(Reason::Name, format!("`{}` of `{}` needs exactly one term", d.name, fact.name));
        };
        terms.push(term.clone());
    }
    if instance.bindings.len() != terms.len() {
        return refuse(Reason::Name, format!("a variable given for `{}` is none of its own", fact.name));
    }
    // In two steps, because a term may mention a variable of the fact's own name:
    // no text can contain a name with `#`.
    let put = |t: &Term| {
        let mut t = rename_quantities(t, &renamed);
        for (i, d) in c.variables.iter().enumerate() {
            t = t.substitute(&d.name, &Term::variable(&format!("#{i}")));
        }
        for (i, term) in terms.iter().enumerate() {
            t = t.substitute(&format!("#{i}"), term);
        }
        t
    };
    let mut conditions = Vec::new();
    for (d, term) in c.variables.iter().zip(&terms) {
        if !has_sort(s, term, d.domain.sort) {
            let sort = d.domain.sort.name();
            return refuse(
                Reason::Condition,
                format!("{term}, put for `{}`, is not {sort} by its shape", d.name),
            );
        }
        let end = |e: &Option<End>| e.as_ref().map(|e| End { term: put(&e.term), open: e.open });
        let domain = Domain { sort: d.domain.sort, lower: end(&d.domain.lower), upper: end(&d.domain.upper) };
        conditions.extend(membership(term, &domain));
    }
    conditions.extend(c.given.iter().map(|g| g.map(put)));
    let property = |(name, args): &Property| {
        (name.clone(), args.iter().map(|a| renamed.get(a).unwrap_or(a).clone()).collect())
    };
    Ok(Instance {
        conditions,
        conclusions: fact.states.iter().map(|r| r.map(put)).collect(),
        requires: c.requires.iter().map(property).collect(),
        property: fact.property.as_ref().map(property),
        terms,
    })
}

/// The quantity put for each quantity of the schema, with its signature checked.
pub fn renamings(
    fact: &Fact,
    instance: &Use,
    quantities: &BTreeMap<Name, Signature>,
) -> Checked<BTreeMap<Name, Name>> {
    let mut renamed = BTreeMap::new();
    for (own, wanted) in &fact.context.schema {
        let mut found = instance.renamings.iter().filter(|(n, _)| n == own);
        let (Some((_, actual)), None) = (found.next(), found.next()) else {
            return refuse(Reason::Name, format!("`{own}` of `{}` needs exactly one quantity", fact.name));
        };
        let Some(signature) = quantities.get(actual) else {
            return refuse(Reason::Name, format!("`{actual}` is not a declared quantity"));
        };
        let fits = signature.0.len() == wanted.0.len()
            && wanted.0.iter().zip(&signature.0).all(|(inner, outer)| lies_within(inner, outer))
            && lies_within(&signature.1, &wanted.1);
        if !fits {
            return refuse(
                Reason::Condition,
                format!("`{actual}` has not the domain and range that `{own}` has"),
            );
        }
        renamed.insert(own.clone(), actual.clone());
    }
    if instance.renamings.len() != renamed.len() {
        return refuse(Reason::Name, format!("a quantity given for `{}` is none of its own", fact.name));
    }
    Ok(renamed)
}

/// Whether a domain is seen to lie within another: the same or better sort, and
/// ends that are the same term or ordered literals.
fn lies_within(inner: &Domain, outer: &Domain) -> bool {
    let inside = |i: &Option<End>, o: &Option<End>, lower: bool| match (i, o) {
        (_, None) => true,
        (None, Some(_)) => false,
        (Some(i), Some(o)) if i.term == o.term => i.open || !o.open,
        (Some(i), Some(o)) => match (i.term.as_number(), o.term.as_number()) {
            (Some(a), Some(b)) => {
                if lower {
                    a > b
                } else {
                    a < b
                }
            }
            _ => false,
        },
    };
    inner.sort >= outer.sort
        && inside(&inner.lower, &outer.lower, true)
        && inside(&inner.upper, &outer.upper, false)
}

/// The term with quantities renamed.
pub fn rename_quantities(term: &Term, renamed: &BTreeMap<Name, Name>) -> Term {
    if renamed.is_empty() {
        return term.clone();
    }
    term.rebuild(&mut |t| match &**t {
        Node::Quantity(name, args) => {
            let args = args.iter().map(|a| rename_quantities(a, renamed)).collect();
            Some(Node::Quantity(renamed.get(name).unwrap_or(name).clone(), args).into())
        }
        _ => None,
    })
}

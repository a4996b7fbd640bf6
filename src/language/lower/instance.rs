//! The instances of cited facts that a link uses.
//!
//! What the user wrote in parentheses is taken as it stands. What is left open is
//! found by matching the fact's stated terms against the terms of the link (then
//! against what the other reasons state, then against the link's own hypotheses).
//! Of the instances that fit, those are used whose terms occur most; there may be
//! several. A variable that nothing determines stands for the variable of the
//! same name, if one is in force.

use std::collections::{BTreeMap, BTreeSet};

use crate::diagnostic::Code;
use crate::expression::{Name, Node, Term, has_sort};
use crate::statement::{
    Conclusion, Declaration, Domain, Fact, Instance, Property, Relation, Says, Sequent, Signature, Use,
    has_at_hand,
};

use super::Lowering;
use super::goal::Local;
use super::matching::{Anchors, Binding, Pattern, Targets};
use super::names::Named;
use super::reason::{Cited, CitedFact};

/// Most instances of one fact in one link.
const MAX_INSTANCES: usize = 24;
/// Most instances that are compared.
const MAX_CANDIDATES: usize = 256;
/// Most attempts at matching for one reason.
const MAX_ATTEMPTS: usize = 20_000;

/// What a link uses.
#[derive(Default)]
pub(super) struct Found {
    pub uses: Vec<Use>,
    pub missing: Vec<Property>,
    /// The places in the list of reasons for which no instance was found.
    pub(super) unmatched: BTreeSet<usize>,
}

impl Lowering {
    /// The instances that a link uses; none if its reasons have errors.
    pub(super) fn uses(&mut self, cited: &Cited, local: &Local, relation: &Relation) -> Option<Found> {
        if !cited.sound {
            return None;
        }
        if cited.list.is_empty() {
            return Some(Found::default());
        }
        let mut targets = Targets::default();
        targets.add(relation);
        // What an instance is judged by, beyond what it is looked for in.
        let mut around = targets.clone();
        local.given.iter().for_each(|(_, r)| around.add(r));
        let properties: Vec<Property> = local
            .requires
            .iter()
            .cloned()
            .chain(cited.list.iter().filter_map(|c| match &c.fact.says {
                Says::Property(property) if c.fact.context.schema.is_empty() => Some(property.clone()),
                _ => None,
            }))
            .collect();
        let mut instances: BTreeMap<usize, Vec<Binding>> = BTreeMap::new();
        let mut open: Vec<usize> = (0..cited.list.len()).collect();
        let mut with_hypotheses = false;
        let mut crowded: BTreeSet<usize> = BTreeSet::new();
        while !open.is_empty() {
            let before = open.len();
            let mut next = targets.clone();
            open.retain(|&i| {
                let mut found = self.instances(&cited.list[i], local, &targets, &around, &properties);
                if found.len() > MAX_INSTANCES {
                    found.truncate(MAX_INSTANCES);
                    crowded.insert(i);
                }
                for binding in &found {
                    let instance = as_use(&cited.list[i], binding, self);
                    for relation in Instance::of(&cited.list[i].fact, &instance).stated() {
                        next.add(&relation);
                        around.add(&relation);
                    }
                }
                let none = found.is_empty();
                if !none {
                    instances.insert(i, found);
                }
                none
            });
            if open.len() == before {
                if with_hypotheses {
                    break;
                }
                with_hypotheses = true;
                local.given.iter().for_each(|(_, r)| next.add(r));
            }
            targets = next;
        }
        for i in crowded {
            let one = &cited.list[i];
            self.warning(
                Code::BadReason,
                one.span,
                format!("more than {MAX_INSTANCES} instances of `{}` fit; the first ones are used", one.text),
            )
            .hint("write the instances that are needed, each with its values");
        }
        let mut found = Found { unmatched: open.into_iter().collect(), ..Found::default() };
        let all = instances.iter().flat_map(|(i, bindings)| bindings.iter().map(|b| (*i, b)));
        let all = all.map(|(i, binding)| (&cited.list[i].fact, as_use(&cited.list[i], binding, self)));
        found.uses = self.in_order(all.collect(), local);
        found.missing = self.missing(&found.uses, cited, local);
        Some(found)
    }

    /// The instances in an order in which each finds at hand what its conditions speak
    /// of: first those with nothing to show, then each after those that state
    /// something about a value of a quantity in its conditions, else as written.
    fn in_order(&self, all: Vec<(&Fact, Use)>, local: &Local) -> Vec<Use> {
        let mut variables: Vec<Declaration> =
            self.theory.parameters.iter().map(|p| p.declaration.clone()).collect();
        variables.extend(local.variables.iter().cloned());
        let hypotheses = self.theory.wheres.iter().map(|w| w.relation.clone()).chain(local.given()).collect();
        let gamma = Sequent { variables, hypotheses, goal: Conclusion::Absurd };
        struct Waiting {
            one: Use,
            needs: BTreeSet<Term>,
            gives: BTreeSet<Term>,
            free: bool,
        }
        let mut waiting: Vec<Waiting> = all
            .into_iter()
            .map(|(fact, one)| {
                let instance = Instance::of(fact, &one);
                let open: Vec<Relation> =
                    instance.conditions().into_iter().filter(|c| !has_at_hand(&gamma, c)).collect();
                let (needs, gives) = (values(&open), values(&instance.stated()));
                Waiting { needs, gives, free: open.is_empty(), one }
            })
            .collect();
        let mut ordered = Vec::new();
        while !waiting.is_empty() {
            let ready = |i: usize| {
                let others = waiting.iter().enumerate().filter(|(j, _)| *j != i);
                others.into_iter().all(|(_, w)| w.gives.is_disjoint(&waiting[i].needs))
            };
            let next = waiting
                .iter()
                .position(|w| w.free)
                .or_else(|| (0..waiting.len()).find(|i| ready(*i)))
                .unwrap_or(0);
            ordered.push(waiting.remove(next).one);
        }
        ordered
    }

    /// Drops the instances that speak of values of quantities which the relation does
    /// not: at the base of an induction the one-step facts of the step serve nothing.
    pub(super) fn keep_anchored(&self, found: &mut Found, cited: &Cited, relation: &Relation) {
        let mut targets = Targets::default();
        targets.add(relation);
        found.uses.retain(|one| {
            let Some(fact) = cited.list.iter().find(|c| c.fact.name == one.fact).map(|c| &c.fact) else {
                return true;
            };
            let mut strange = false;
            for side in Instance::of(fact, one).stated().iter().flat_map(|r| [&r.left, &r.right]) {
                side.walk(&mut |t| {
                    strange |= matches!(t.node(), Node::Quantity(..)) && !targets.contains(t);
                    true
                });
            }
            fact.context.variables.is_empty() || !strange
        });
    }

    /// Tells of the reasons that fit none of the links they were given for.
    pub(super) fn tell_unmatched(&mut self, cited: &Cited, found: &[Found]) -> bool {
        let nowhere = |i: &usize| !found.is_empty() && found.iter().all(|f| f.unmatched.contains(i));
        let unmatched: Vec<usize> = (0..cited.list.len()).filter(nowhere).collect();
        for i in &unmatched {
            let one = &cited.list[*i];
            let mut open: Vec<String> = one
                .fact
                .context
                .variables
                .iter()
                .filter(|d| !one.written.terms.contains_key(&d.name))
                .map(|d| format!("{} = ...", d.name))
                .collect();
            let quantities: Vec<String> = one
                .fact
                .context
                .schema
                .iter()
                .filter(|s| !one.written.quantities.contains_key(&s.name))
                .map(|s| format!("{} = ...", s.name))
                .collect();
            if !quantities.is_empty() {
                open = vec![format!("{}; {}", open.join(", "), quantities.join(", "))];
            }
            let told =
                self.error(Code::BadReason, one.span, format!("cannot find the instance of `{}`", one.text));
            if open.is_empty() {
                let _ = told.hint("the instance that is written does not fit: a term has the wrong sort or lies outside its domain, or a quantity has another domain or range");
            } else {
                let _ = told.hint(format!("write `{}({})`", one.text, open.join(", ")));
            }
        }
        unmatched.is_empty()
    }

    fn missing(&self, uses: &[Use], cited: &Cited, local: &Local) -> Vec<Property> {
        let mut at_hand: BTreeSet<Property> = local.requires.iter().cloned().collect();
        let fact = |one: &Use| cited.list.iter().find(|c| c.fact.name == one.fact).map(|c| &c.fact);
        let renamed = |p: &Property, one: &Use| {
            let find = |a: &Name| one.renamings.iter().find(|(q, _)| q == a).map_or(a, |(_, to)| to).clone();
            Property { name: p.name.clone(), arguments: p.arguments.iter().map(find).collect() }
        };
        for one in uses {
            if let Some(Says::Property(property)) = fact(one).map(|f| &f.says) {
                at_hand.insert(renamed(property, one));
            }
        }
        let mut missing = Vec::new();
        for one in uses {
            let Some(fact) = fact(one) else { continue };
            for property in &fact.context.requires {
                let wanted = renamed(property, one);
                if !at_hand.contains(&wanted) && !missing.contains(&wanted) {
                    missing.push(wanted);
                }
            }
        }
        missing
    }

    /// The instances of one cited fact that fit; none if there is no such.
    fn instances(
        &self,
        cited: &CitedFact,
        local: &Local,
        targets: &Targets,
        around: &Targets,
        properties: &[Property],
    ) -> Vec<Binding> {
        let fact = &cited.fact;
        let variables: Vec<Name> = fact.context.variables.iter().map(|d| d.name.clone()).collect();
        let schema: Vec<Name> = fact.context.schema.iter().map(|s| s.name.clone()).collect();
        let pattern = Pattern { variables: &variables, schema: &schema };
        let anchors = Anchors::of(fact.relations(), &pattern);
        let mut search =
            Search { pattern: &pattern, lowering: self, local, targets, attempts: 0, found: vec![] };
        let starts = by_properties(&cited.written, fact, &schema, properties);
        // What only the hypotheses mention is looked for last.
        let supposed = Anchors::of(&fact.context.given, &pattern);
        let strong: Vec<&Term> =
            anchors.sides.iter().chain(&anchors.quantities).chain(&supposed.quantities).collect();
        for start in &starts {
            search.extend(&strong, start.clone());
        }
        let score = |binding: &Binding| {
            let count = |list: &[Term]| {
                list.iter().filter(|a| around.contains(&pattern.instance(a, binding))).count()
            };
            3 * count(&anchors.sides) + 4 * count(&anchors.quantities) + count(&anchors.functions)
        };
        let fits = |binding: &Binding| self.fits(cited, binding, local);
        let mut found: Vec<Binding> =
            std::mem::take(&mut search.found).into_iter().filter(|b| fits(b)).collect();
        let anchored = found.iter().any(|b| score(b) > 0);
        if !anchored {
            let weak: Vec<&Term> = anchors.functions.iter().collect();
            for start in &starts {
                search.extend(&weak, start.clone());
            }
            let identity = found.first().cloned();
            found.extend(search.found.into_iter().filter(|b| fits(b)));
            let best = found.iter().map(score).max().unwrap_or(0);
            // Function values alone are weak evidence: the variables of the same names win.
            if let Some(identity) = identity.filter(|b| score(b) >= best) {
                return vec![identity];
            }
        }
        let best = found.iter().map(score).max().unwrap_or(0);
        found.retain(|b| score(b) == best);
        let mut distinct = BTreeSet::new();
        found.retain(|b| distinct.insert(b.clone()));
        found
    }

    /// Whether an instance has the right sorts and signatures, and no condition that
    /// is literally false.
    fn fits(&self, cited: &CitedFact, binding: &Binding, local: &Local) -> bool {
        let context = &cited.fact.context;
        let mut declared: Vec<Declaration> =
            self.theory.parameters.iter().map(|p| p.declaration.clone()).collect();
        declared.extend(local.variables.iter().cloned());
        let sequent = Sequent { variables: declared, hypotheses: vec![], goal: Conclusion::Absurd };
        let sorts = context
            .variables
            .iter()
            .all(|d| binding.terms.get(&d.name).is_some_and(|t| has_sort(t, d.domain.sort, &sequent)));
        let signatures = context.schema.iter().all(|wanted| {
            let actual = binding.quantities.get(&wanted.name).and_then(|q| self.theory.signature(q));
            actual.is_some_and(|actual| serves(actual, wanted))
        });
        // What the user wrote is not second-guessed: a false condition is a failing obligation.
        let chosen = context.variables.iter().all(|d| cited.written.terms.contains_key(&d.name));
        sorts
            && signatures
            && (chosen
                || Instance::of(&cited.fact, &as_use(cited, binding, self))
                    .conditions()
                    .iter()
                    .all(|r| r.literal() != Some(false)))
    }

    fn default_quantity(&self, name: &Name) -> Option<Name> {
        matches!(self.names.terms.get(name), Some((_, Named::Quantity(_)))).then(|| name.clone())
    }

    fn default_term(&self, name: &Name, local: &Local) -> Option<Term> {
        let in_force = local.variables.iter().any(|d| d.name == *name)
            || matches!(self.names.terms.get(name), Some((_, Named::Parameter)));
        in_force.then(|| Term::variable(name.clone()))
    }
}

/// Backtracking over the anchors of a fact.
struct Search<'a> {
    pattern: &'a Pattern<'a>,
    lowering: &'a Lowering,
    local: &'a Local,
    targets: &'a Targets,
    attempts: usize,
    found: Vec<Binding>,
}

impl Search<'_> {
    fn is_complete(&self, binding: &Binding) -> bool {
        self.pattern.variables.iter().all(|v| binding.terms.contains_key(v))
            && self.pattern.schema.iter().all(|q| binding.quantities.contains_key(q))
    }

    fn push(&mut self, binding: Binding) {
        if self.found.len() < MAX_CANDIDATES && !self.found.contains(&binding) {
            self.found.push(binding);
        }
    }

    fn extend(&mut self, anchors: &[&Term], binding: Binding) {
        if self.is_complete(&binding) {
            return self.push(binding);
        }
        // The variables of the same names come first, whatever matching finds.
        self.push_defaults(binding.clone());
        self.match_from(anchors, binding);
    }

    fn push_defaults(&mut self, mut binding: Binding) {
        for variable in self.pattern.variables {
            if !binding.terms.contains_key(variable)
                && let Some(term) = self.lowering.default_term(variable, self.local)
            {
                binding.terms.insert(variable.clone(), term);
            }
        }
        for quantity in self.pattern.schema {
            if !binding.quantities.contains_key(quantity)
                && let Some(name) = self.lowering.default_quantity(quantity)
            {
                binding.quantities.insert(quantity.clone(), name);
            }
        }
        if self.is_complete(&binding) {
            self.push(binding);
        }
    }

    fn match_from(&mut self, anchors: &[&Term], binding: Binding) {
        if self.is_complete(&binding) {
            return self.push(binding);
        }
        let Some((anchor, rest)) = anchors.split_first() else { return self.push_defaults(binding) };
        for target in self.targets.iter() {
            if self.attempts >= MAX_ATTEMPTS || self.found.len() >= MAX_CANDIDATES {
                return;
            }
            self.attempts += 1;
            let mut extended = binding.clone();
            if self.pattern.matches(anchor, target, &mut extended) && extended != binding {
                self.match_from(rest, extended);
            }
        }
        self.match_from(rest, binding);
    }
}

/// The applications of quantities in relations.
fn values(relations: &[Relation]) -> BTreeSet<Term> {
    let mut found = BTreeSet::new();
    for side in relations.iter().flat_map(|r| [&r.left, &r.right]) {
        side.walk(&mut |t| {
            if matches!(t.node(), Node::Quantity(..)) {
                found.insert(t.clone());
            }
            true
        });
    }
    found
}

/// What the properties at hand say about the quantities of a fact's schema: one
/// binding for every way in which all required properties can be met.
fn by_properties(start: &Binding, fact: &Fact, schema: &[Name], properties: &[Property]) -> Vec<Binding> {
    let mut ways = vec![start.clone()];
    for wanted in &fact.context.requires {
        let mut next: Vec<Binding> = Vec::new();
        for way in &ways {
            for property in properties.iter().filter(|p| p.name == wanted.name) {
                let mut extended = way.clone();
                let fits = wanted.arguments.len() == property.arguments.len()
                    && wanted.arguments.iter().zip(&property.arguments).all(|(own, actual)| {
                        if !schema.contains(own) {
                            return own == actual;
                        }
                        extended.quantities.entry(own.clone()).or_insert_with(|| actual.clone()) == actual
                    });
                if fits && next.len() < MAX_CANDIDATES && !next.contains(&extended) {
                    next.push(extended);
                }
            }
        }
        // A property that nobody states is reported later, as a missing one.
        if !next.is_empty() {
            ways = next;
        }
    }
    ways
}

fn as_use(cited: &CitedFact, binding: &Binding, lowering: &Lowering) -> Use {
    let context = &cited.fact.context;
    let term = |name: &Name| binding.terms.get(name).map(|t| (name.clone(), t.clone()));
    let quantity = |name: &Name| binding.quantities.get(name).map(|q| (name.clone(), q.clone()));
    Use {
        fact: cited.fact.name.clone(),
        bindings: context.variables.iter().filter_map(|d| term(&d.name)).collect(),
        renamings: context.schema.iter().filter_map(|s| quantity(&s.name)).collect(),
        place: Some(lowering.place(cited.span)),
    }
}

/// Whether a quantity can stand for one that a fact leaves open: it takes at least
/// the same arguments and has no other values.
fn serves(actual: &Signature, wanted: &Signature) -> bool {
    actual.arguments.len() == wanted.arguments.len()
        && wanted.arguments.iter().zip(&actual.arguments).all(|(inner, outer)| lies_within(inner, outer))
        && lies_within(&actual.range, &wanted.range)
}

fn lies_within(inner: &Domain, outer: &Domain) -> bool {
    let inside = |i: Option<&Term>, i_open: bool, o: Option<&Term>, o_open: bool, lower: bool| match (i, o) {
        (_, None) => true,
        (None, Some(_)) => false,
        (Some(i), Some(o)) if i == o => i_open || !o_open,
        (Some(i), Some(o)) => match (i.as_number(), o.as_number()) {
            (Some(a), Some(b)) if lower => a > b,
            (Some(a), Some(b)) => a < b,
            _ => false,
        },
    };
    inner.sort >= outer.sort
        && inside(inner.lower.finite(), inner.lower_open, outer.lower.finite(), outer.lower_open, true)
        && inside(inner.upper.finite(), inner.upper_open, outer.upper.finite(), outer.upper_open, false)
}

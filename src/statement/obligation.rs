//! What has to be shown for a theory: links, side conditions, definedness.
//!
//! For a goal with uses 1..n the context grows: Gamma_0 declares the parameters
//! in scope and the goal's own variables, with the `where` conditions and the
//! goal's own hypotheses; Gamma_i adds what use i states. The side conditions of
//! use i are to be shown in Gamma_(i-1), the link itself in Gamma_n.

use std::collections::BTreeMap;

use crate::expression::{Name, Renaming, Substitution, Term};

use super::declaration::{Declaration, Signature};
use super::defined::{Condition, Signatures, conditions, has_at_hand};
use super::relation::Relation;
use super::sequent::{Conclusion, Sequent};
use super::theory::{Context, Fact, Goal, Says, Standing, Theory, Use, Where};

/// What an obligation is for.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum ObligationKind {
    /// The relation of a goal.
    Link,
    /// A condition under which a used fact holds.
    Side,
    /// That terms are defined.
    Definedness,
}

/// A condition of definedness, and how much of the context may be used for it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Needed {
    /// The first so many variables of the sequent are declared.
    pub variables: usize,
    /// The first so many hypotheses of the sequent may be used.
    pub hypotheses: usize,
    /// What is to be shown.
    pub condition: Condition,
}

/// One thing to be shown.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Obligation {
    /// The kernel's name for it: `goal`, `goal.s1`, `goal.d1`, `fact.d1` or `domain.d1`.
    /// People see it with the file's stem and a dot before it.
    pub id: String,
    /// What it is for.
    pub kind: ObligationKind,
    /// The context, and for a link or a side condition the relation. The context of
    /// a definedness obligation is the last one in which something is needed; its
    /// goal is absurdity.
    pub sequent: Sequent,
    /// For a definedness obligation: what is needed, in order.
    pub needed: Vec<Needed>,
    /// The goal it belongs to, if any.
    pub goal: Option<Name>,
    /// The item (or the fact, or `domain`) it belongs to.
    pub item: Name,
    /// The link's place in its item, from 1.
    pub link: Option<usize>,
    /// For a side condition: which use of the goal (from 0) needs it.
    pub side_of: Option<usize>,
}

/// All obligations of a theory, in the kernel's order: those of the parameters, of the
/// facts taken as given, and of the goals (side conditions, link, definedness).
/// Goals with a missing property have none.
#[must_use]
pub fn obligations(theory: &Theory) -> Vec<Obligation> {
    let tables = Tables::of(theory);
    let mut all = Vec::new();
    all.extend(tables.of_domain());
    for fact in &theory.facts {
        if !matches!(fact.standing, Standing::Proved(_)) && matches!(fact.says, Says::Relations(_)) {
            all.extend(tables.of_fact(fact));
        }
    }
    for goal in theory.goals.iter().filter(|g| g.missing.is_empty()) {
        tables.of_goal(goal, &mut all);
    }
    all
}

/// A theory with its names looked up.
struct Tables<'a> {
    theory: &'a Theory,
    facts: BTreeMap<&'a str, &'a Fact>,
    parameters: BTreeMap<&'a str, &'a Declaration>,
    wheres: BTreeMap<&'a str, &'a Where>,
    quantities: BTreeMap<&'a str, &'a Signature>,
}

/// The quantities of the dossier and those a statement is a schema for.
struct Scope<'a> {
    global: &'a BTreeMap<&'a str, &'a Signature>,
    schema: &'a [Signature],
}

impl Signatures for Scope<'_> {
    fn signature(&self, quantity: &str) -> Option<&Signature> {
        self.schema.iter().find(|s| &*s.name == quantity).or_else(|| self.global.get(quantity).copied())
    }
}

/// A context being built, with what its terms need.
struct Growing<'a> {
    sequent: Sequent,
    scope: Scope<'a>,
    needed: Vec<Needed>,
    /// The numbers of variables and hypotheses where something was needed last.
    last: (usize, usize),
}

impl Growing<'_> {
    fn require(&mut self, term: &Term) {
        for condition in conditions(&self.sequent, &self.scope, term) {
            let (variables, hypotheses) = (self.sequent.variables.len(), self.sequent.hypotheses.len());
            self.last = (variables, hypotheses);
            if !self.needed.iter().any(|n| n.condition == condition) {
                self.needed.push(Needed { variables, hypotheses, condition });
            }
        }
    }

    fn declare(&mut self, declaration: &Declaration, check: bool) {
        if check {
            declaration.domain.ends().for_each(|t| self.require(t));
        }
        self.sequent.variables.push(declaration.clone());
    }

    fn suppose(&mut self, relation: Relation, check: bool) {
        if check {
            self.require(&relation.left);
            self.require(&relation.right);
        }
        self.sequent.hypotheses.push(relation);
    }
}

impl<'a> Tables<'a> {
    fn of(theory: &'a Theory) -> Tables<'a> {
        Tables {
            theory,
            facts: theory.facts.iter().map(|f| (&*f.name, f)).collect(),
            parameters: theory.parameters.iter().map(|p| (&*p.declaration.name, &p.declaration)).collect(),
            wheres: theory.wheres.iter().map(|w| (&*w.name, w)).collect(),
            quantities: theory.quantities.iter().map(|q| (&*q.signature.name, &q.signature)).collect(),
        }
    }

    fn start(&'a self, schema: &'a [Signature]) -> Growing<'a> {
        Growing {
            sequent: Sequent { variables: vec![], hypotheses: vec![], goal: Conclusion::Absurd },
            scope: Scope { global: &self.quantities, schema },
            needed: vec![],
            last: (0, 0),
        }
    }

    /// Gamma_0. The parameters' own definedness is settled once, in `domain.d1`.
    fn enter(&'a self, context: &'a Context) -> Growing<'a> {
        let mut gamma = self.start(&context.schema);
        for declaration in context.over.iter().filter_map(|n| self.parameters.get(&**n)) {
            gamma.declare(declaration, false);
        }
        for condition in context.under.iter().filter_map(|n| self.wheres.get(&**n)) {
            gamma.suppose(condition.relation.clone(), false);
        }
        for declaration in &context.variables {
            gamma.declare(declaration, true);
        }
        for relation in &context.given {
            gamma.suppose(relation.clone(), true);
        }
        gamma
    }

    fn of_domain(&'a self) -> Option<Obligation> {
        let mut gamma = self.start(&[]);
        for parameter in &self.theory.parameters {
            gamma.declare(&parameter.declaration, true);
        }
        for condition in &self.theory.wheres {
            gamma.suppose(condition.relation.clone(), true);
        }
        for quantity in &self.theory.quantities {
            for domain in quantity.signature.arguments.iter().chain([&quantity.signature.range]) {
                domain.ends().for_each(|end| gamma.require(end));
            }
        }
        self.definedness(gamma, "domain".into(), None)
    }

    fn of_fact(&'a self, fact: &'a Fact) -> Option<Obligation> {
        let mut gamma = self.enter(&fact.context);
        if let Says::Relations(relations) = &fact.says {
            for relation in relations {
                gamma.suppose(relation.clone(), true);
            }
        }
        self.definedness(gamma, fact.name.clone(), None)
    }

    fn of_goal(&'a self, goal: &'a Goal, all: &mut Vec<Obligation>) {
        let mut gamma = self.enter(&goal.context);
        let mut sides = 0;
        for (place, instance) in goal.uses.iter().enumerate() {
            let Some(fact) = self.facts.get(&*instance.fact) else { continue };
            let instance = Instance::of(fact, instance);
            for (_, term) in &instance.bindings {
                gamma.require(term);
            }
            for relation in instance.conditions() {
                if has_at_hand(&gamma.sequent, &relation) {
                    continue;
                }
                sides += 1;
                all.push(Obligation {
                    id: format!("{}.s{sides}", goal.name),
                    kind: ObligationKind::Side,
                    sequent: gamma.sequent.with_goal(relation),
                    needed: vec![],
                    goal: Some(goal.name.clone()),
                    item: goal.item.clone(),
                    link: Some(goal.link),
                    side_of: Some(place),
                });
            }
            for relation in instance.stated() {
                gamma.suppose(relation, false);
            }
        }
        gamma.require(&goal.relation.left);
        gamma.require(&goal.relation.right);
        let link = Obligation {
            id: goal.name.to_string(),
            kind: ObligationKind::Link,
            sequent: gamma.sequent.with_goal(goal.relation.clone()),
            needed: vec![],
            goal: Some(goal.name.clone()),
            item: goal.item.clone(),
            link: Some(goal.link),
            side_of: None,
        };
        all.push(link);
        all.extend(self.definedness(gamma, goal.item.clone(), Some(goal)));
    }

    fn definedness(&self, mut gamma: Growing, item: Name, goal: Option<&Goal>) -> Option<Obligation> {
        if gamma.needed.is_empty() {
            return None;
        }
        gamma.sequent.variables.truncate(gamma.last.0);
        gamma.sequent.hypotheses.truncate(gamma.last.1);
        let owner = goal.map_or(&item, |g| &g.name);
        Some(Obligation {
            id: format!("{owner}.d1"),
            kind: ObligationKind::Definedness,
            sequent: gamma.sequent,
            needed: gamma.needed,
            goal: goal.map(|g| g.name.clone()),
            link: goal.map(|g| g.link),
            item,
            side_of: None,
        })
    }
}

/// A fact with terms for its variables and quantities for its schema.
pub struct Instance<'a> {
    fact: &'a Fact,
    bindings: Vec<(Name, Term)>,
    substitution: Substitution,
    renaming: Renaming,
}

impl<'a> Instance<'a> {
    /// The instance a use names.
    #[must_use]
    pub fn of(fact: &'a Fact, instance: &Use) -> Instance<'a> {
        Instance {
            fact,
            bindings: instance.bindings.clone(),
            substitution: instance.bindings.iter().cloned().collect(),
            renaming: instance.renamings.iter().cloned().collect(),
        }
    }

    fn at(&self, relation: &Relation) -> Relation {
        relation.map(|t| self.substitution.apply(&t.rename_quantities(&self.renaming)))
    }

    /// What must hold for the instance: each variable's term inside its domain,
    /// then the fact's hypotheses, in order.
    #[must_use]
    pub fn conditions(&self) -> Vec<Relation> {
        let ends = self.fact.context.variables.iter().flat_map(Declaration::ends);
        ends.chain(self.fact.context.given.iter().cloned()).map(|r| self.at(&r)).collect()
    }

    /// What the instance states.
    #[must_use]
    pub fn stated(&self) -> Vec<Relation> {
        self.fact.relations().iter().map(|r| self.at(r)).collect()
    }
}

//! Facts of used files.
//!
//! A used file speaks of its own parameters and quantities. Brought in, each of its
//! facts holds for all of them: its parameters become variables of the fact, its
//! `where` conditions hypotheses, its quantities open ones. A proved fact comes
//! with its goals. A fact that rests on an assumption of the used file does not
//! hold for all quantities and cannot be brought in.

use std::collections::BTreeSet;

use crate::diagnostic::Code;
use crate::expression::{Name, Term};
use crate::source::Span;
use crate::statement::{
    Context, Fact, Goal, Item, Property, Relation, Says, Signature, Standing, Theory, Use,
};

use super::Lowering;
use super::names::Module;

/// Deepest chain of facts that rest on one another across files.
const MAX_DEPTH: usize = 500;

impl Lowering {
    /// Brings in a fact of a used file; its name here, or none after telling why not.
    pub(super) fn import_fact(&mut self, module: &Module, local: &str, span: Span) -> Option<Name> {
        match self.bring(module, local, 0) {
            Ok(name) => Some(name),
            Err(why) => {
                self.error(Code::BadReason, span, format!("`{local}` cannot be used here: {why}"))
                    .hint("a shared lemma states what it needs with `given` and `requires`");
                None
            }
        }
    }

    /// Brings in what a single link of a used file establishes.
    pub(super) fn import_link(
        &mut self,
        module: &Module,
        item: &str,
        goal: &Name,
        span: Span,
    ) -> Option<Name> {
        self.import_fact(module, item, span)?;
        let here = self.names.import(self.file, module, goal);
        let name: Name = format!("{here}.link").into();
        if self.theory.fact(&name).is_none() {
            let goal = self.theory.goal(&here)?;
            let fact = Fact {
                name: name.clone(),
                standing: Standing::Proved(crate::statement::Proof::All(vec![goal.name.clone()])),
                context: goal.context.clone(),
                says: Says::Relations(vec![goal.relation.clone()]),
                origin: goal.origin.clone(),
            };
            self.theory.facts.push(fact);
        }
        Some(name)
    }

    fn bring(&mut self, module: &Module, local: &str, depth: usize) -> Result<Name, String> {
        let name = self.names.import(self.file, module, local);
        if self.theory.fact(&name).is_some() {
            return Ok(name);
        }
        if depth > MAX_DEPTH {
            return Err("it rests on too long a chain of facts".into());
        }
        let theory = &module.theory;
        let Some(fact) = theory.fact(local) else { return Err("it has an error in its own file".into()) };
        let open = Open::of(theory, fact);
        if let Some(signature) = open.schema.iter().find(|s| !s.free_variables().is_empty()) {
            return Err(format!("the domain of its quantity `{}` depends on a parameter", signature.name));
        }
        if let (Standing::Cited(_) | Standing::Argued(_), Some(name)) = (&fact.standing, open.assumed(theory))
        {
            let known = module.names.foreign.contains_key(local);
            if !known {
                return Err(format!(
                    "its file assumes something about `{name}`, so it is not stated for all of them"
                ));
            }
        }
        let standing = match &fact.standing {
            // Facts that this module brought in itself are general already.
            Standing::Assumption if !module.names.foreign.contains_key(local) => {
                return Err(format!("it rests on the assumption `{local}` of its own file"));
            }
            Standing::Proved(proof) => {
                let goals: Vec<Name> = proof.goals().into_iter().cloned().collect();
                for goal in &goals {
                    self.bring_goal(module, goal, &open, depth)?;
                }
                let rename = |n: &Name, names: &mut super::names::Names| names.import(self.file, module, n);
                Standing::Proved(match proof {
                    crate::statement::Proof::Chain(goals) => crate::statement::Proof::Chain(
                        goals.iter().map(|g| rename(g, &mut self.names)).collect(),
                    ),
                    crate::statement::Proof::All(goals) => crate::statement::Proof::All(
                        goals.iter().map(|g| rename(g, &mut self.names)).collect(),
                    ),
                    crate::statement::Proof::Induction { variable, base, step } => {
                        crate::statement::Proof::Induction {
                            variable: variable.clone(),
                            base: rename(base, &mut self.names),
                            step: rename(step, &mut self.names),
                        }
                    }
                })
            }
            other => other.clone(),
        };
        let context = self.opened(module, &fact.context, &open);
        let says = match &fact.says {
            Says::Relations(relations) => Says::Relations(relations.clone()),
            Says::Property(property) => Says::Property(self.renamed(module, property)),
        };
        self.theory.facts.push(Fact {
            name: name.clone(),
            standing,
            context,
            says,
            origin: fact.origin.clone(),
        });
        Ok(name)
    }

    fn bring_goal(&mut self, module: &Module, local: &Name, open: &Open, depth: usize) -> Result<(), String> {
        let name = self.names.import(self.file, module, local);
        if self.theory.goal(&name).is_some() {
            return Ok(());
        }
        let theory = &module.theory;
        let Some(goal) = theory.goal(local) else { return Err("it has an error in its own file".into()) };
        let mut uses = Vec::new();
        for one in &goal.uses {
            let fact = self.bring(module, &one.fact, depth + 1)?;
            let Some(used) = theory.fact(&one.fact) else { continue };
            // The used fact is stated over parameters and quantities that are open now:
            // it is used at those of this goal, which have the same names.
            let inner = Open::of(theory, used);
            let mut bindings: Vec<(Name, Term)> =
                inner.over.iter().map(|p| (p.clone(), Term::variable(p.clone()))).collect();
            bindings.extend(one.bindings.iter().cloned());
            let mut renamings: Vec<(Name, Name)> =
                inner.schema.iter().map(|s| (s.name.clone(), s.name.clone())).collect();
            renamings.extend(one.renamings.iter().cloned());
            uses.push(Use { fact, bindings, renamings, place: one.place });
        }
        let context = self.opened(module, &goal.context, open);
        let missing = goal.missing.iter().map(|p| self.renamed(module, p)).collect();
        let item = self.names.import(self.file, module, &goal.item);
        match self.theory.items.iter_mut().find(|i| i.name == item) {
            Some(known) => known.goals.push(name.clone()),
            None => {
                if let Some(known) = theory.items.iter().find(|i| i.name == goal.item) {
                    let goals = vec![name.clone()];
                    self.theory.items.push(Item {
                        name: item.clone(),
                        goals,
                        imported: true,
                        ..known.clone()
                    });
                }
            }
        }
        self.theory.goals.push(Goal { name, item, context, uses, missing, ..goal.clone() });
        Ok(())
    }

    /// A context with the file's parameters, conditions and quantities opened.
    fn opened(&mut self, module: &Module, context: &Context, open: &Open) -> Context {
        let theory = &module.theory;
        let known = |n: &Name| theory.parameter(n).map(|p| p.declaration.clone());
        let parameters = open.over.iter().filter_map(known);
        let wheres = theory.wheres.iter().filter(|w| open.under.contains(&w.name));
        let given: Vec<Relation> =
            wheres.map(|w| w.relation.clone()).chain(context.given.iter().cloned()).collect();
        Context {
            over: vec![],
            under: vec![],
            schema: open.schema.iter().chain(&context.schema).cloned().collect(),
            variables: parameters.chain(context.variables.iter().cloned()).collect(),
            given,
            requires: context.requires.iter().map(|p| self.renamed(module, p)).collect(),
        }
    }

    fn renamed(&mut self, module: &Module, property: &Property) -> Property {
        Property {
            name: self.names.import(self.file, module, &property.name),
            arguments: property.arguments.clone(),
        }
    }
}

/// What of a file one of its facts leaves open.
struct Open {
    schema: Vec<Signature>,
    /// Parameters, in the file's order.
    over: Vec<Name>,
    /// Conditions on them.
    under: BTreeSet<Name>,
}

impl Open {
    /// Those that the fact, the other facts and goals of its item, or anything these
    /// use, mention: all goals of one item share one context.
    fn of(theory: &Theory, fact: &Fact) -> Open {
        let mut names = BTreeSet::new();
        let mut seen = BTreeSet::new();
        collect(theory, fact, &mut names, &mut seen);
        let schema = theory.quantities.iter().map(|q| q.signature.clone());
        let schema = schema.filter(|s| names.contains(&s.name)).collect();
        let (mut over, mut under): (BTreeSet<&Name>, BTreeSet<Name>) = Default::default();
        let mut take = |context: &'_ Context| {
            let known = theory.parameters.iter().map(|p| &p.declaration.name);
            over.extend(known.filter(|n| context.over.contains(n)));
            under.extend(context.under.iter().cloned());
        };
        take(&fact.context);
        let items = items_of(theory, fact);
        theory.goals.iter().filter(|g| items.contains(&g.item)).for_each(|g| take(&g.context));
        let over =
            theory.parameters.iter().map(|p| &p.declaration.name).filter(|n| over.contains(n)).cloned();
        Open { schema, over: over.collect(), under }
    }
}

impl Open {
    /// A quantity or parameter that the file itself assumes something about: a lemma
    /// that is not proved may be true of just this one.
    fn assumed(&self, theory: &Theory) -> Option<Name> {
        let mut assumed = BTreeSet::new();
        for fact in theory.facts.iter().filter(|f| f.standing == Standing::Assumption) {
            assumed.extend(fact.context.over.iter().cloned());
            context_quantities(&fact.context, &mut assumed);
            match &fact.says {
                Says::Relations(relations) => {
                    relations.iter().for_each(|r| relation_quantities(r, &mut assumed))
                }
                Says::Property(property) => assumed.extend(property.arguments.iter().cloned()),
            }
        }
        let own = self.schema.iter().map(|s| &s.name).chain(&self.over);
        own.into_iter().find(|name| assumed.contains(*name)).cloned()
    }
}

fn collect(theory: &Theory, fact: &Fact, names: &mut BTreeSet<Name>, seen: &mut BTreeSet<Name>) {
    let mut waiting = vec![fact];
    while let Some(fact) = waiting.pop() {
        if !seen.insert(fact.name.clone()) {
            continue;
        }
        context_quantities(&fact.context, names);
        match &fact.says {
            Says::Relations(relations) => relations.iter().for_each(|r| relation_quantities(r, names)),
            Says::Property(property) => names.extend(property.arguments.iter().cloned()),
        }
        let items = items_of(theory, fact);
        for goal in theory.goals.iter().filter(|g| items.contains(&g.item)) {
            context_quantities(&goal.context, names);
            relation_quantities(&goal.relation, names);
            for one in &goal.uses {
                one.bindings.iter().for_each(|(_, t)| names.extend(t.quantities()));
                names.extend(one.renamings.iter().map(|(_, q)| q.clone()));
                waiting.extend(theory.fact(&one.fact));
            }
        }
    }
}

/// The items whose goals prove a fact.
fn items_of<'a>(theory: &'a Theory, fact: &Fact) -> BTreeSet<&'a Name> {
    let Standing::Proved(proof) = &fact.standing else { return BTreeSet::new() };
    proof.goals().into_iter().filter_map(|n| theory.goal(n)).map(|g| &g.item).collect()
}

fn relation_quantities(relation: &Relation, names: &mut BTreeSet<Name>) {
    names.extend(relation.left.quantities());
    names.extend(relation.right.quantities());
}

fn context_quantities(context: &Context, names: &mut BTreeSet<Name>) {
    context.variables.iter().flat_map(|d| d.domain.ends()).for_each(|t| names.extend(t.quantities()));
    context.given.iter().for_each(|r| relation_quantities(r, names));
    names.extend(context.requires.iter().flat_map(|p| p.arguments.iter().cloned()));
}

//! Goals and the facts they prove: contexts, names, and what they are stated over.

use std::collections::BTreeSet;

use crate::diagnostic::Code;
use crate::expression::{Name, Term};
use crate::language::tree;
use crate::source::Span;
use crate::statement::{
    Case, Conclusion, Condition, Context, Declaration, Fact, Goal, Item, ItemKind, Origin, Proof, Property,
    Relation, Says, Sequent, Signature, Signatures, Standing, Theory, Use, conditions,
};

use super::Lowering;
use super::names::{Entry, Variables};

/// What a statement is said for: the variables and hypotheses of its blocks, then its own.
#[derive(Debug, Clone, Default)]
pub(super) struct Local {
    pub variables: Vec<Declaration>,
    pub given: Vec<(Option<Name>, Relation)>,
    pub requires: Vec<Property>,
}

impl Local {
    pub fn scope(&self) -> Variables {
        Variables::of(self.variables.iter().map(|d| d.name.clone()))
    }

    pub fn given(&self) -> Vec<Relation> {
        self.given.iter().map(|(_, r)| r.clone()).collect()
    }

    /// The context without parameters; they are found once all goals are known.
    pub fn context(&self) -> Context {
        Context {
            variables: self.variables.clone(),
            given: self.given(),
            requires: self.requires.clone(),
            ..Context::default()
        }
    }
}

/// A goal before its parameters are known.
#[derive(Debug, Clone)]
pub(super) struct Draft {
    pub name: Name,
    pub link: usize,
    pub local: Local,
    pub relation: Relation,
    pub uses: Vec<Use>,
    pub cases: Vec<Case>,
    pub missing: Vec<Property>,
    pub origin: Origin,
}

/// A fact before its parameters are known.
pub(super) struct DraftFact {
    pub name: Name,
    pub proof: Proof,
    pub local: Local,
    pub states: Vec<Relation>,
    pub origin: Origin,
}

/// An item with everything that proves it.
pub(super) struct DraftItem {
    pub name: Name,
    pub kind: ItemKind,
    pub at: Option<Name>,
    pub origin: Origin,
    pub goals: Vec<Draft>,
    pub facts: Vec<DraftFact>,
}

/// Finds the signatures of a dossier's quantities.
pub(super) struct Known<'a>(pub &'a Theory);

impl Signatures for Known<'_> {
    fn signature(&self, quantity: &str) -> Option<&Signature> {
        self.0.signature(quantity)
    }
}

impl Lowering {
    /// Puts a finished item into the theory. A goal is stated over what it speaks of
    /// and what the facts it uses speak of; a fact over all that its goals are stated
    /// over, so that it follows from them as they stand.
    pub(super) fn finish(&mut self, item: DraftItem) {
        let goals: Vec<Name> = item.goals.iter().map(|g| g.name.clone()).collect();
        let mut facts = item.facts.into_iter().peekable();
        for goal in item.goals {
            let (over, under) = self.theory.reach(&self.spoken_of(&goal));
            self.theory.goals.push(Goal {
                name: goal.name,
                item: item.name.clone(),
                link: goal.link,
                context: Context { over, under, ..goal.local.context() },
                uses: goal.uses,
                relation: goal.relation,
                cases: goal.cases,
                missing: goal.missing,
                origin: goal.origin,
            });
            // A fact stands ready as soon as its goals do: the next goal may use it.
            while let Some(fact) =
                facts.next_if(|f| f.proof.goals().iter().all(|g| self.theory.goal(g).is_some()))
            {
                self.establish(fact);
            }
        }
        facts.for_each(|fact| self.establish(fact));
        self.theory.items.push(Item {
            name: item.name,
            kind: item.kind,
            goals,
            at: item.at,
            imported: false,
            origin: item.origin,
        });
    }

    fn establish(&mut self, fact: DraftFact) {
        let mut names = BTreeSet::new();
        let context = fact.local.context();
        collect_context(&context, &mut names);
        fact.states.iter().for_each(|r| collect_relation(r, &mut names));
        for goal in fact.proof.goals().into_iter().filter_map(|n| self.theory.goal(n)) {
            names.extend(goal.context.over.iter().cloned());
        }
        let (over, under) = self.theory.reach(&names);
        self.theory.facts.push(Fact {
            name: fact.name,
            standing: Standing::Proved(fact.proof),
            context: Context { over, under, ..context },
            says: Says::Relations(fact.states),
            origin: fact.origin,
        });
    }

    fn spoken_of(&self, goal: &Draft) -> BTreeSet<Name> {
        let mut names = BTreeSet::new();
        collect_context(&goal.local.context(), &mut names);
        collect_relation(&goal.relation, &mut names);
        for instance in &goal.uses {
            instance.bindings.iter().for_each(|(_, t)| collect_term(t, &mut names));
            names.extend(instance.renamings.iter().map(|(_, q)| q.clone()));
            let Some(fact) = self.theory.fact(&instance.fact) else { continue };
            names.extend(fact.context.over.iter().cloned());
            for relation in fact.relations() {
                names.extend(relation.left.quantities());
                names.extend(relation.right.quantities());
            }
        }
        names
    }

    /// Adds a fact that is taken as given.
    pub(super) fn give(
        &mut self,
        name: &tree::Name,
        standing: Standing,
        local: &Local,
        says: Says,
        origin: Origin,
    ) {
        let mut names = BTreeSet::new();
        let context = local.context();
        collect_context(&context, &mut names);
        match &says {
            Says::Relations(relations) => relations.iter().for_each(|r| collect_relation(r, &mut names)),
            Says::Property(property) => names.extend(property.arguments.iter().cloned()),
        }
        let (over, under) = self.theory.reach(&names);
        let context = Context { over, under, ..context };
        self.theory.facts.push(Fact { name: name.text.as_str().into(), standing, context, says, origin });
        if let Some((_, entry)) = self.names.entries.get_mut(&*name.text) {
            *entry = Entry::Fact;
        }
    }

    fn has_integer_quantity(&self, term: &Term) -> bool {
        let discrete = |q: &Name| self.theory.signature(q).is_some_and(|s| s.range.sort.is_discrete());
        term.quantities().iter().any(discrete)
    }

    /// Tells what literals and shapes alone show to be wrong with the terms of a
    /// statement: an argument outside a quantity's domain, a real number in an
    /// integer position.
    pub(super) fn check_terms(&mut self, local: &Local, relations: &[Relation], span: Span) -> bool {
        let names = local.variables.iter().flat_map(|d| d.domain.free_variables());
        let names: BTreeSet<Name> = names
            .chain(relations.iter().flat_map(Relation::free_variables))
            .chain(local.given.iter().flat_map(|(_, r)| r.free_variables()))
            .collect();
        let (over, _) = self.theory.reach(&names);
        let mut variables: Vec<Declaration> =
            over.iter().filter_map(|n| self.theory.parameter(n)).map(|p| p.declaration.clone()).collect();
        variables.extend(local.variables.iter().cloned());
        let sequent = Sequent { variables, hypotheses: local.given(), goal: Conclusion::Absurd };
        let mut told: Vec<String> = Vec::new();
        let given: Vec<Relation> = local.given();
        for relation in given.iter().chain(relations) {
            for side in [&relation.left, &relation.right] {
                for condition in conditions(&sequent, &Known(&self.theory), side) {
                    let message = match &condition {
                        // A quantity may well be an integer, though not by its shape.
                        Condition::NotOfSort { term, .. } if self.has_integer_quantity(term) => continue,
                        Condition::NotOfSort { term, sort } => {
                            let kind = if *sort == crate::expression::Sort::Even {
                                "an even integer"
                            } else {
                                "an integer"
                            };
                            format!("`{}` stands where {kind} is needed", crate::expression::for_people(term))
                        }
                        Condition::OneOf { .. } | Condition::Unshowable(_) => continue,
                    };
                    if !told.contains(&message) {
                        told.push(message);
                    }
                }
            }
        }
        let mut sound = told.is_empty();
        for relation in given.iter().chain(relations) {
            sound &= self.check_arguments(&relation.left, span) & self.check_arguments(&relation.right, span);
        }
        for message in told {
            self.error(Code::BadArgument, span, message);
        }
        sound
    }
}

fn collect_term(term: &Term, names: &mut BTreeSet<Name>) {
    names.extend(term.free_variables());
    names.extend(term.quantities());
}

fn collect_relation(relation: &Relation, names: &mut BTreeSet<Name>) {
    collect_term(&relation.left, names);
    collect_term(&relation.right, names);
}

fn collect_context(context: &Context, names: &mut BTreeSet<Name>) {
    let own: BTreeSet<Name> = context.variables.iter().map(|d| d.name.clone()).collect();
    let mut found = BTreeSet::new();
    context.variables.iter().flat_map(|d| d.domain.ends()).for_each(|t| collect_term(t, &mut found));
    context.given.iter().for_each(|r| collect_relation(r, &mut found));
    found.extend(context.requires.iter().flat_map(|p| p.arguments.iter().cloned()));
    names.extend(found.difference(&own).cloned());
}

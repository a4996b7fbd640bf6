//! Clauses: what a statement is said for, under which conditions, at which numbers.

use std::collections::BTreeSet;

use crate::diagnostic::Code;
use crate::expression::{Name, Node, Substitution, Term, for_people};
use crate::language::tree::{self, Application, Clauses, ExpressionKind};
use crate::language::words;
use crate::source::Span;
use crate::statement::{Case, Property, Rel, Relation, Says};

use super::Lowering;
use super::domain::literal_membership;
use super::goal::Local;
use super::names::{Entry, Named};
use super::reason::Cited;
use super::term::{counted, written};

impl Lowering {
    /// What a statement is said for.
    pub(super) fn local(&mut self, clauses: &Clauses) -> Option<Local> {
        let own = self.variables(&clauses.variables, &self.block.clone())?;
        let mut local = Local {
            variables: self.block.iter().cloned().chain(own).collect(),
            given: self.block_given.clone(),
            requires: vec![],
        };
        let scope = local.scope();
        let mut sound = true;
        for condition in &clauses.given {
            let label: Option<Name> = condition.name.as_ref().map(|n| n.text.as_str().into());
            if let Some(name) = &condition.name {
                let taken = local.given.iter().any(|(other, _)| other.as_deref() == Some(name.text.as_str()));
                if taken || self.names.entries.contains_key(&*name.text) {
                    self.error(
                        Code::DuplicateName,
                        name.span,
                        format!("`{}` already names a fact", name.text),
                    );
                    sound = false;
                }
            }
            match self.relations(&condition.relations, &scope) {
                Some(relations) => local.given.extend(relations.into_iter().map(|r| (label.clone(), r))),
                None => sound = false,
            }
        }
        for application in &clauses.requires {
            match self.application(application) {
                Some(property) if !local.requires.contains(&property) => local.requires.push(property),
                Some(_) => {}
                None => sound = false,
            }
        }
        sound.then_some(local)
    }

    /// A property at quantities.
    fn application(&mut self, application: &Application) -> Option<Property> {
        let path = &application.property;
        let text = written(path);
        let unknown = |lowering: &mut Lowering, near: Option<String>| {
            let hint =
                near.map_or("declare it with `property`".to_owned(), |n| format!("perhaps `{n}` is meant"));
            lowering.error(Code::UnknownName, path.span, format!("there is no property `{text}`")).hint(hint);
        };
        let (name, count): (Name, usize) = match path.parts.as_slice() {
            [name] => match self.names.properties.get(&*name.text) {
                Some((_, count)) => (name.text.as_str().into(), *count),
                None if matches!(self.names.entries.get(&*name.text), Some((_, Entry::Broken))) => {
                    return None;
                }
                None => {
                    let known: Vec<&str> = self.names.properties.keys().map(|n| &**n).collect();
                    let near = words::nearest(&name.text, &known).map(str::to_owned);
                    unknown(self, near);
                    return None;
                }
            },
            [alias, name] => {
                let Some((_, module)) = self.names.aliases.get(&*alias.text) else {
                    unknown(self, None);
                    return None;
                };
                let module = module.clone()?;
                let Some((_, count)) = module.names.properties.get(&*name.text) else {
                    let known: Vec<&str> = module.names.properties.keys().map(|n| &**n).collect();
                    let near = words::nearest(&name.text, &known);
                    unknown(self, near.map(|n| format!("{}.{n}", alias.text)));
                    return None;
                };
                (self.names.import(self.file, &module, &name.text), *count)
            }
            _ => {
                unknown(self, None);
                return None;
            }
        };
        if application.arguments.len() != count {
            let message = format!(
                "`{text}` takes {}, not {}",
                counted(&count.to_string()),
                application.arguments.len()
            );
            self.error(Code::WrongArity, application.span, message);
            return None;
        }
        let mut arguments = Vec::new();
        for argument in &application.arguments {
            let quantity = match &argument.kind {
                ExpressionKind::Name(path) => match path.parts.as_slice() {
                    [name] => match self.names.terms.get(&*name.text) {
                        Some((_, Named::Quantity(_))) => Some(Name::from(name.text.as_str())),
                        Some((_, Named::Broken)) => return None,
                        _ => None,
                    },
                    _ => None,
                },
                _ => None,
            };
            match quantity {
                Some(quantity) => arguments.push(quantity),
                None => {
                    self.error(
                        Code::WrongKind,
                        argument.span,
                        "a property is stated of quantities, by their names",
                    )
                    .hint("declare what it is stated of with `quantity`");
                    return None;
                }
            }
        }
        Some(Property { name, arguments })
    }

    pub(super) fn says(&mut self, fact: &tree::Fact, local: &Local) -> Option<Says> {
        match fact {
            tree::Fact::Relations(relations) => {
                self.relations(relations, &local.scope()).map(Says::Relations)
            }
            tree::Fact::Property(application) => self.application(application).map(Says::Property),
        }
    }

    pub(super) fn check_says(&mut self, local: &Local, says: &Says, span: Span) -> bool {
        match says {
            Says::Relations(relations) => self.check_terms(local, relations, span),
            Says::Property(_) => true,
        }
    }

    pub(super) fn cases(&mut self, clauses: &Clauses, local: &Local) -> Vec<Case> {
        let scope = local.scope();
        let mut cases: Vec<Case> = Vec::new();
        for case in &clauses.cases {
            let name: Name = case.name.text.as_str().into();
            if cases.iter().any(|c| c.name == name) {
                self.error(Code::BadCases, case.name.span, format!("two cases are named `{name}`"));
            }
            if let Some(condition) = self.relations(&case.condition, &scope) {
                cases.push(Case { name, condition });
            }
        }
        if let ([_], [case]) = (clauses.cases.as_slice(), clauses.cases.as_slice()) {
            self.error(Code::BadCases, case.span, "a distinction has at least two cases")
                .hint("cases are separated by `|`");
        }
        cases
    }

    /// A statement at a set of numbers. Without reasons the numbers are put in;
    /// with reasons, which speak of the parameters, they become hypotheses.
    pub(super) fn at_numbers(
        &mut self,
        clauses: &Clauses,
        mut local: Local,
        relations: Vec<Relation>,
        cited: &Cited,
    ) -> Option<(Local, Vec<Relation>)> {
        let Some(at) = &clauses.at else { return Some((local, relations)) };
        let Some(numbers) = self.theory.numbers.iter().find(|n| *n.name == *at.text).cloned() else {
            let known: Vec<&str> = self.theory.numbers.iter().map(|n| &*n.name).collect();
            let near = words::nearest(&at.text, &known).map(|n| format!("perhaps `{n}` is meant"));
            let hint = near.unwrap_or_else(|| "numbers are declared above with `numbers`".into());
            self.error(Code::UnknownName, at.span, format!("there are no numbers `{}`", at.text)).hint(hint);
            return None;
        };
        if !cited.is_empty() {
            let mut names: BTreeSet<Name> = relations.iter().flat_map(Relation::free_variables).collect();
            names.extend(local.given.iter().flat_map(|(_, r)| r.free_variables()));
            names.extend(local.variables.iter().flat_map(|d| d.domain.free_variables()));
            names.extend(cited.parameters());
            let (over, _) = self.theory.reach(&names);
            let spoken_of = numbers.values.iter().filter(|(name, _)| over.contains(name));
            let equal = |(name, value): &(Name, Term)| {
                (None, Relation::new(Term::variable(name.clone()), Rel::Equal, value.clone()))
            };
            local.given.extend(spoken_of.map(equal));
            return Some((local, relations));
        }
        let values: Substitution = numbers.values.iter().cloned().collect();
        for declaration in &mut local.variables {
            declaration.domain = declaration.domain.under(&values);
        }
        for (_, relation) in &mut local.given {
            *relation = relation.under(&values);
        }
        let relations = relations.iter().map(|r| r.under(&values)).collect();
        Some((local, relations))
    }

    /// Tells of arguments of quantities that lie outside their declared domains once
    /// definitions are written out.
    pub(super) fn check_arguments(&mut self, term: &Term, span: Span) -> bool {
        let mut wrong = Vec::new();
        term.walk(&mut |part| {
            if let Node::Quantity(name, arguments) = part.node() {
                let outside =
                    arguments.iter().enumerate().filter_map(|(at, one)| self.outside(name, at, one));
                wrong.extend(outside);
            }
            true
        });
        wrong.sort();
        wrong.dedup();
        let sound = wrong.is_empty();
        for (message, hint) in wrong {
            self.error(Code::BadArgument, span, message).hint(hint);
        }
        sound
    }

    /// What to say of an argument that lies outside the domain of a quantity's argument
    /// at this place, and what to do.
    pub(super) fn outside(&self, quantity: &str, at: usize, argument: &Term) -> Option<(String, String)> {
        let domain = self.theory.signature(quantity)?.arguments.get(at)?;
        (literal_membership(argument, domain) == Some(false)).then(|| {
            let argument = for_people(argument);
            (
                format!("`{argument}` is outside the declared domain of `{quantity}`"),
                format!("the argument of `{quantity}` is {domain}"),
            )
        })
    }
}

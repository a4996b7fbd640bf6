//! Warnings about names that nothing uses.

use std::collections::BTreeSet;

use crate::diagnostic::{Code, Diagnostic};
use crate::expression::{Name, Term};
use crate::statement::{Context, Says};

use super::Lowering;
use super::names::Named;

impl Lowering {
    /// Warns of parameters and quantities that occur nowhere. A file with nothing but
    /// declarations is a list for others and gets no warning; a file with errors may
    /// use them where it could not be read.
    pub(super) fn tell_unused(&mut self) {
        let nothing = self.theory.facts.is_empty() && self.theory.goals.is_empty();
        if nothing || self.out.iter().any(Diagnostic::is_error) {
            return;
        }
        let mut used = self.mentioned.clone();
        let mut note = |t: &Term| {
            used.extend(t.free_variables());
            used.extend(t.quantities());
        };
        let theory = &self.theory;
        for parameter in &theory.parameters {
            parameter.declaration.domain.ends().for_each(&mut note);
        }
        for condition in &theory.wheres {
            note(&condition.relation.left);
            note(&condition.relation.right);
        }
        let mut properties: BTreeSet<Name> = BTreeSet::new();
        let mut context = |c: &Context, note: &mut dyn FnMut(&Term)| {
            c.variables.iter().flat_map(|d| d.domain.ends()).for_each(&mut *note);
            c.given.iter().for_each(|r| {
                note(&r.left);
                note(&r.right);
            });
            properties.extend(c.requires.iter().flat_map(|p| p.arguments.iter().cloned()));
        };
        let mut stated: BTreeSet<Name> = BTreeSet::new();
        for fact in &theory.facts {
            context(&fact.context, &mut note);
            match &fact.says {
                Says::Relations(relations) => relations.iter().for_each(|r| {
                    note(&r.left);
                    note(&r.right);
                }),
                Says::Property(property) => stated.extend(property.arguments.iter().cloned()),
            }
        }
        for goal in &theory.goals {
            context(&goal.context, &mut note);
            note(&goal.relation.left);
            note(&goal.relation.right);
            goal.uses.iter().flat_map(|u| &u.bindings).for_each(|(_, t)| note(t));
        }
        for quantity in &theory.quantities {
            let s = &quantity.signature;
            s.arguments.iter().chain([&s.range]).flat_map(|d| d.ends()).for_each(&mut note);
        }
        used.extend(properties);
        used.extend(stated);
        let unused: Vec<_> = self
            .names
            .terms
            .iter()
            .filter(|(name, (_, named))| {
                matches!(named, Named::Parameter | Named::Quantity(_)) && !used.contains(*name)
            })
            .map(|(name, (span, named))| (*span, name.clone(), matches!(named, Named::Parameter)))
            .collect();
        for (span, name, is_parameter) in unused {
            let kind = if is_parameter { "parameter" } else { "quantity" };
            self.warning(Code::UnusedName, span, format!("the {kind} `{name}` is not used"));
        }
    }
}

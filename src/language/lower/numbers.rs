//! Named sets of parameter values.

use crate::diagnostic::Code;
use crate::expression::{Name, Substitution, Term};
use crate::language::tree;
use crate::source::Span;
use crate::statement::{Numbers, Relation};

use super::Lowering;
use super::domain::literal_membership;
use super::names::{Named, Variables};

impl Lowering {
    pub(super) fn numbers(&mut self, numbers: &tree::Numbers, span: Span) {
        if !self.block.is_empty() {
            return self.only_outside_blocks(span);
        }
        if let Some(first) = self.theory.numbers.iter().find(|n| *n.name == *numbers.name.text) {
            let first = first.origin.place;
            let told = self.error(
                Code::DuplicateName,
                numbers.name.span,
                format!("`{}` is already declared", numbers.name.text),
            );
            if let Some(first) = first {
                let _ = told.label(first, "first declared here");
            }
            return;
        }
        let mut values: Vec<(Name, Term)> = Vec::new();
        for binding in &numbers.values {
            let value = self.term(&binding.value, &Variables::default());
            let name = &binding.name;
            let Some(parameter) = self.theory.parameter(&name.text).cloned() else {
                if !matches!(self.names.terms.get(&*name.text), Some((_, Named::Broken))) {
                    self.error(Code::BadNumbers, name.span, format!("`{}` is not a parameter", name.text));
                }
                continue;
            };
            let Some(value) = value else { continue };
            if values.iter().any(|(n, _)| **n == *name.text) {
                self.error(Code::BadNumbers, name.span, format!("`{}` is given twice", name.text));
                continue;
            }
            if !value.free_variables().is_empty() || !value.quantities().is_empty() {
                self.error(Code::BadNumbers, binding.value.span, "a value depends on no parameter");
                continue;
            }
            let domain = parameter.declaration.domain.clone();
            if literal_membership(&value, &domain) == Some(false) {
                let told = self.error(
                    Code::BadNumbers,
                    binding.value.span,
                    format!("the value lies outside the domain of `{}`", name.text),
                );
                if let Some(place) = parameter.origin.place {
                    let _ = told.label(place, "the domain is declared here");
                }
                continue;
            }
            values.push((name.text.as_str().into(), value));
        }
        let order: Vec<&Name> = self.theory.parameters.iter().map(|p| &p.declaration.name).collect();
        values.sort_by_key(|(name, _)| order.iter().position(|n| *n == name));
        self.check_numbers(&values, span);
        let origin = self.remark(span, &numbers.remark);
        self.theory.numbers.push(Numbers { name: numbers.name.text.as_str().into(), values, origin });
    }

    /// Domains that depend on other parameters, and `where` conditions, at the values.
    fn check_numbers(&mut self, values: &[(Name, Term)], span: Span) {
        let at: Substitution = values.iter().cloned().collect();
        let ends = self.theory.parameters.iter().flat_map(|p| p.declaration.ends());
        let wheres = self.theory.wheres.iter().map(|w| w.relation.clone());
        let violated = ends.chain(wheres).find(|relation| {
            let there = relation.under(&at);
            let sides = (there.left.rational_value(), there.right.rational_value());
            let (Some(a), Some(b)) = sides else { return false };
            let literal = Relation::new(Term::number(a), there.rel, Term::number(b));
            literal.literal() == Some(false)
        });
        if let Some(relation) = violated {
            self.error(Code::BadNumbers, span, format!("these values violate `{}`", relation.for_people()));
        }
    }
}

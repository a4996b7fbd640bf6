//! What is stated: assumptions, lemmas, claims and chains.

use crate::diagnostic::Code;
use crate::expression::Name;
use crate::language::tree::{self, Assume, Claim, Clauses, Induction, Lemma, Reasons, Relations};
use crate::source::Span;
use crate::statement::{Case, ItemKind, Origin, Proof, Property, Relation, Says, Standing};

use super::Lowering;
use super::goal::{Draft, DraftFact, DraftItem, Local};
use super::instance::Found;
use super::names::{Entry, Named};

/// What a claim and a proved lemma have in common.
struct Stated<'a> {
    name: &'a tree::Name,
    kind: ItemKind,
    clauses: &'a Clauses,
    relations: &'a Relations,
    reasons: Option<&'a Reasons>,
    induction: Option<&'a Induction>,
    span: Span,
}

impl Lowering {
    pub(super) fn assume(&mut self, assume: &Assume, span: Span) {
        let name = &assume.name;
        if !self.register_fact(name, Entry::Broken) {
            return;
        }
        let Some(local) = self.local(&assume.clauses) else { return };
        let origin = self.clause_origin(span, &assume.clauses);
        let says = match &assume.fact {
            Some(fact) => self.says(fact, &local),
            None => {
                let known = self.names.properties.get(&*name.text).is_some_and(|(_, count)| *count == 0);
                if !known && !self.declare_property(name, 0) {
                    return;
                }
                Some(Says::Property(Property { name: name.text.as_str().into(), arguments: vec![] }))
            }
        };
        let Some(says) = says else { return };
        if self.check_says(&local, &says, span) {
            self.give(name, Standing::Assumption, &local, says, origin);
        }
    }

    pub(super) fn lemma(&mut self, lemma: &Lemma, span: Span) {
        let name = &lemma.name;
        let standing = match (&lemma.clauses.source, &lemma.clauses.argued) {
            (Some(source), _) => Standing::Cited(source.text.clone()),
            (None, Some(place)) => Standing::Argued(place.text.clone()),
            (None, None) => return self.proved_lemma(lemma, span),
        };
        if !self.register_fact(name, Entry::Broken) {
            return;
        }
        if let Some(reasons) = &lemma.reasons {
            self.error(Code::Misplaced, reasons.span, "a cited or argued lemma has no reasons here")
                .hint("remove the brackets, or remove `source` or `argued` to have it proved in the file");
            return;
        }
        let Some(local) = self.local(&lemma.clauses) else { return };
        let origin = self.clause_origin(span, &lemma.clauses);
        let Some(says) = self.says(&lemma.fact, &local) else { return };
        if self.check_says(&local, &says, span) {
            self.give(name, standing, &local, says, origin);
        }
    }

    fn proved_lemma(&mut self, lemma: &Lemma, span: Span) {
        match &lemma.fact {
            tree::Fact::Relations(relations) => self.stated(&Stated {
                name: &lemma.name,
                kind: ItemKind::Lemma,
                clauses: &lemma.clauses,
                relations,
                reasons: lemma.reasons.as_ref(),
                induction: lemma.induction.as_ref(),
                span,
            }),
            tree::Fact::Property(application) => {
                self.register_fact(&lemma.name, Entry::Broken);
                self.error(Code::WrongKind, application.span, "a property cannot be proved here")
                    .hint("use `assume`, or give the lemma a `source` or `argued` text");
            }
        }
    }

    pub(super) fn claim(&mut self, claim: &Claim, span: Span) {
        self.stated(&Stated {
            name: &claim.name,
            kind: ItemKind::Claim,
            clauses: &claim.clauses,
            relations: &claim.relations,
            reasons: claim.reasons.as_ref(),
            induction: claim.induction.as_ref(),
            span,
        });
    }

    /// A claim or proved lemma: one goal for each relation, all with the same reasons.
    fn stated(&mut self, stated: &Stated) {
        let name: Name = stated.name.text.as_str().into();
        if !self.register_fact(stated.name, Entry::Broken) {
            return;
        }
        let Some(local) = self.local(stated.clauses) else { return };
        let scope = local.scope();
        let Some(relations) = self.relations(stated.relations, &scope) else { return };
        let cited = self.cited(stated.reasons, &local, &stated.name.text);
        let cases = self.cases(stated.clauses, &local);
        if !self.check_terms(&local, &relations, stated.span) {
            return;
        }
        let Some((local, relations)) = self.at_numbers(stated.clauses, local, relations, &cited) else {
            return;
        };
        let origin = self.clause_origin(stated.span, stated.clauses);
        let at = stated.clauses.at.as_ref().map(|n| n.text.as_str().into());
        let mut item = DraftItem {
            name: name.clone(),
            kind: stated.kind,
            at,
            origin: origin.clone(),
            goals: vec![],
            facts: vec![],
        };
        if let Some(induction) = stated.induction {
            let [relation] = relations.as_slice() else {
                self.error(Code::BadInduction, induction.span, "an induction proves a single relation");
                return;
            };
            let Some((goals, proof)) =
                self.induct(induction, &name, 1, &local, relation, &cited, &cases, &origin)
            else {
                return;
            };
            item.goals = goals;
            item.facts.push(DraftFact { name: name.clone(), proof, local, states: relations, origin });
        } else {
            let mut found = Vec::new();
            for (i, relation) in relations.iter().enumerate() {
                let Some(one) = self.uses(&cited, &local, relation) else { return };
                item.goals.push(draft(
                    format!("{name}.{}", i + 1),
                    i + 1,
                    &local,
                    relation,
                    &one,
                    &cases,
                    &origin,
                ));
                found.push(one);
            }
            if !self.tell_unmatched(&cited, &found) {
                return;
            }
            let proof = Proof::All(item.goals.iter().map(|g| g.name.clone()).collect());
            item.facts.push(DraftFact { name: name.clone(), proof, local, states: relations, origin });
        }
        let links = item.goals.iter().map(|g| (None, g.name.clone())).collect();
        self.finish(item);
        self.enter(&name, Entry::Item(links));
    }

    /// Registers the name of a fact, which in the kernel's text shares one space of
    /// names with parameters and quantities.
    pub(super) fn register_fact(&mut self, name: &tree::Name, entry: Entry) -> bool {
        if let Some((first, Named::Parameter | Named::Quantity(_))) = self.names.terms.get(&*name.text) {
            let first = self.place(*first);
            self.error(
                Code::DuplicateName,
                name.span,
                format!("`{}` is already a parameter or quantity", name.text),
            )
            .label(first, "declared here");
            return false;
        }
        self.register(name, entry)
    }

    pub(super) fn enter(&mut self, name: &Name, entry: Entry) {
        if let Some((_, known)) = self.names.entries.get_mut(name) {
            *known = entry;
        }
    }

    pub(super) fn clause_origin(&self, span: Span, clauses: &Clauses) -> Origin {
        self.origin(span, clauses.text.as_ref(), clauses.label.as_ref())
    }
}

/// A goal of an item.
pub(super) fn draft(
    name: String,
    link: usize,
    local: &Local,
    relation: &Relation,
    found: &Found,
    cases: &[Case],
    origin: &Origin,
) -> Draft {
    Draft {
        name: name.into(),
        link,
        local: local.clone(),
        relation: relation.clone(),
        uses: found.uses.clone(),
        cases: cases.to_vec(),
        missing: found.missing.clone(),
        origin: origin.clone(),
    }
}

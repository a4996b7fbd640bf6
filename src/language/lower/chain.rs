//! Chains of links.

use crate::diagnostic::Code;
use crate::expression::{Name, Term};
use crate::language::tree::{Chain, Reasons};
use crate::source::Span;
use crate::statement::{Fact, ItemKind, Origin, Proof, Rel, Relation, Says, Standing, Use};

use super::Lowering;
use super::goal::{DraftFact, DraftItem};
use super::instance::Found;
use super::item::draft;
use super::names::Entry;
use super::term::rel;

impl Lowering {
    /// A chain: one goal for each link, each with its own reasons.
    pub(super) fn chain(&mut self, chain: &Chain, span: Span) {
        let name: Name = chain.name.text.as_str().into();
        if !self.register_fact(&chain.name, Entry::Item(vec![])) {
            return;
        }
        let item = self.chain_item(chain, &name, span);
        self.pending.clear();
        match item {
            Some((item, links)) => {
                self.finish(item);
                self.enter(&name, Entry::Item(links));
            }
            None => self.enter(&name, Entry::Broken),
        }
        self.cited_links.clear();
    }

    #[allow(clippy::type_complexity)]
    fn chain_item(
        &mut self,
        chain: &Chain,
        name: &Name,
        span: Span,
    ) -> Option<(DraftItem, Vec<(Option<Name>, Name)>)> {
        let local = self.local(&chain.clauses)?;
        let scope = local.scope();
        let cases = self.cases(&chain.clauses, &local);
        let mut sides = vec![self.term(&chain.first, &scope)];
        sides.extend(chain.links.iter().map(|link| self.term(&link.term, &scope)).collect::<Vec<_>>());
        let sides: Vec<Term> = sides.into_iter().collect::<Option<_>>()?;
        let relations: Vec<Relation> = chain
            .links
            .iter()
            .zip(sides.windows(2))
            .map(|(link, pair)| Relation::new(pair[0].clone(), rel(link.relation.kind), pair[1].clone()))
            .collect();
        for (link, relation) in chain.links.iter().zip(&relations) {
            if !self.check_terms(&local, std::slice::from_ref(relation), link.span) {
                return None;
            }
        }
        // A first look at the reasons, only to see which parameters they speak of.
        let told = self.out.len();
        let all: Vec<_> =
            chain.links.iter().filter_map(|l| l.reasons.as_ref()).flat_map(|r| r.list.clone()).collect();
        let earlier: Vec<_> =
            all.into_iter().filter(|r| r.path.parts.first().is_none_or(|p| *p.text != **name)).collect();
        let reasons = Reasons { list: earlier, span };
        let speaking = self.cited(Some(&reasons), &local, name);
        self.out.truncate(told);
        let (local, relations) = self.at_numbers(&chain.clauses, local, relations, &speaking)?;
        let origin = self.clause_origin(span, &chain.clauses);
        let at = chain.clauses.at.as_ref().map(|n| n.text.as_str().into());
        let mut item = DraftItem {
            name: name.clone(),
            kind: ItemKind::Chain,
            at,
            origin: origin.clone(),
            goals: vec![],
            facts: vec![],
        };
        let mut links: Vec<(Option<Name>, Name)> = Vec::new();
        let mut sound = true;
        for (i, (link, relation)) in chain.links.iter().zip(&relations).enumerate() {
            let own: Option<Name> = link.name.as_ref().map(|n| n.text.as_str().into());
            if let (Some(own), Some(written)) = (&own, &link.name)
                && links.iter().any(|(other, _)| other.as_ref() == Some(own))
            {
                self.error(Code::DuplicateName, written.span, format!("two links are named `{own}`"));
                return None;
            }
            let goal: Name = match &own {
                Some(own) => format!("{name}.{own}").into(),
                None => format!("{name}.{}", i + 1).into(),
            };
            let place = Origin { place: Some(self.place(link.span)), ..origin.clone() };
            let cited = self.cited(link.reasons.as_ref(), &local, name);
            if let Some(induction) = &chain.induction {
                let (mut goals, proof) =
                    self.induct(induction, &goal, i + 1, &local, relation, &cited, &cases, &place)?;
                item.goals.append(&mut goals);
                let fact: Name = format!("{goal}.link").into();
                item.facts.push(DraftFact {
                    name: fact.clone(),
                    proof,
                    local: local.clone(),
                    states: vec![relation.clone()],
                    origin: place.clone(),
                });
                let own_instance = Use {
                    fact,
                    bindings: local
                        .variables
                        .iter()
                        .map(|d| (d.name.clone(), Term::variable(d.name.clone())))
                        .collect(),
                    renamings: vec![],
                    place: place.place,
                };
                let found = Found { uses: vec![own_instance], ..Found::default() };
                item.goals.push(draft(goal.to_string(), i + 1, &local, relation, &found, &[], &place));
            } else {
                match self.uses(&cited, &local, relation) {
                    Some(found) if self.tell_unmatched(&cited, std::slice::from_ref(&found)) => {
                        item.goals.push(draft(
                            goal.to_string(),
                            i + 1,
                            &local,
                            relation,
                            &found,
                            &cases,
                            &place,
                        ));
                    }
                    _ => sound = false,
                }
            }
            // Later links of this chain may cite this one.
            self.pending.push(Fact {
                name: format!("{goal}.link").into(),
                standing: Standing::Proved(Proof::All(vec![goal.clone()])),
                context: local.context(),
                says: Says::Relations(vec![relation.clone()]),
                origin: place,
            });
            links.push((own, goal));
            self.enter(name, Entry::Item(links.clone()));
        }
        if !sound {
            return None;
        }
        if chain.induction.is_none() {
            for fact in self.pending.iter().filter(|f| self.cited_links.contains(&f.name)) {
                let (Standing::Proved(proof), Says::Relations(states)) = (&fact.standing, &fact.says) else {
                    continue;
                };
                item.facts.push(DraftFact {
                    name: fact.name.clone(),
                    proof: proof.clone(),
                    local: local.clone(),
                    states: states.clone(),
                    origin: fact.origin.clone(),
                });
            }
        }
        let all = relations.iter().skip(1).try_fold(relations.first()?.rel, |r: Rel, next| r.then(next.rel));
        let Some(all) = all else {
            self.error(Code::MixedDirections, span, "the relations of the chain do not point the same way");
            return None;
        };
        let whole = Relation::new(relations.first()?.left.clone(), all, relations.last()?.right.clone());
        let proof = Proof::Chain(links.iter().map(|(_, goal)| goal.clone()).collect());
        item.facts.push(DraftFact { name: name.clone(), proof, local, states: vec![whole], origin });
        Some((item, links))
    }
}

//! What is stated: assumptions, lemmas, claims and chains.

use std::collections::BTreeSet;

use crate::diagnostic::Code;
use crate::expression::{Name, Node, Substitution, Term, for_people};
use crate::language::tree::{
    self, Application, Assume, Chain, Claim, Clauses, ExpressionKind, Induction, Lemma, Reasons, Relations,
};
use crate::source::Span;
use crate::statement::{Case, Fact, ItemKind, Origin, Proof, Property, Rel, Relation, Says, Standing};

use super::Lowering;
use super::domain::literal_membership;
use super::goal::{Draft, DraftFact, DraftItem, Local};
use super::names::{Entry, Named};
use super::reason::{Cited, Found};
use super::term::{counted, rel, written};

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
                let own_instance = crate::statement::Use {
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

    /// Registers the name of a fact, which in the kernel's text shares one space of
    /// names with parameters and quantities.
    fn register_fact(&mut self, name: &tree::Name, entry: Entry) -> bool {
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

    fn enter(&mut self, name: &Name, entry: Entry) {
        if let Some((_, known)) = self.names.entries.get_mut(name) {
            *known = entry;
        }
    }

    fn clause_origin(&self, span: Span, clauses: &Clauses) -> Origin {
        self.origin(span, clauses.text.as_ref(), clauses.label.as_ref())
    }

    /// What a statement is said for.
    fn local(&mut self, clauses: &Clauses) -> Option<Local> {
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
                None => {
                    let known: Vec<&str> = self.names.properties.keys().map(|n| &**n).collect();
                    let near = crate::language::words::nearest(&name.text, &known).map(str::to_owned);
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
                    let near = crate::language::words::nearest(&name.text, &known);
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

    fn says(&mut self, fact: &tree::Fact, local: &Local) -> Option<Says> {
        match fact {
            tree::Fact::Relations(relations) => {
                self.relations(relations, &local.scope()).map(Says::Relations)
            }
            tree::Fact::Property(application) => self.application(application).map(Says::Property),
        }
    }

    fn check_says(&mut self, local: &Local, says: &Says, span: Span) -> bool {
        match says {
            Says::Relations(relations) => self.check_terms(local, relations, span),
            Says::Property(_) => true,
        }
    }

    fn cases(&mut self, clauses: &Clauses, local: &Local) -> Vec<Case> {
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
    fn at_numbers(
        &mut self,
        clauses: &Clauses,
        mut local: Local,
        relations: Vec<Relation>,
        cited: &Cited,
    ) -> Option<(Local, Vec<Relation>)> {
        let Some(at) = &clauses.at else { return Some((local, relations)) };
        let Some(numbers) = self.theory.numbers.iter().find(|n| *n.name == *at.text).cloned() else {
            let known: Vec<&str> = self.theory.numbers.iter().map(|n| &*n.name).collect();
            let near =
                crate::language::words::nearest(&at.text, &known).map(|n| format!("perhaps `{n}` is meant"));
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

    /// Tells of arguments of quantities that lie outside their declared domains.
    pub(super) fn check_arguments(&mut self, term: &Term, span: Span) -> bool {
        let mut wrong = Vec::new();
        term.walk(&mut |part| {
            if let Node::Quantity(name, arguments) = part.node()
                && let Some(signature) = self.theory.signature(name)
            {
                for (argument, domain) in arguments.iter().zip(&signature.arguments) {
                    if literal_membership(argument, domain) == Some(false) {
                        wrong.push(format!(
                            "`{}` is outside the declared domain of `{name}`",
                            for_people(argument)
                        ));
                    }
                }
            }
            true
        });
        wrong.sort();
        wrong.dedup();
        let sound = wrong.is_empty();
        for message in wrong {
            self.error(Code::BadArgument, span, message);
        }
        sound
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

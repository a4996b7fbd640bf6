//! The plain form of a dossier: reader and well-formedness, one function per
//! production of `grammar/claim.ebnf`.
//!
//! Names point backwards only: a fact uses parameters and quantities declared
//! before it and goals stated before it, a goal uses facts stated before it. So
//! no statement can rest on itself.

use std::collections::{BTreeMap, BTreeSet};

use super::read::Reader;
use super::rule::Signature;
use super::sequent::{Declaration, Relation};
use super::term::{Limit, Name, Node, Term};
use super::verdict::{Checked, Reason, refuse};

/// What everything else in a dossier is stated with.
#[derive(Clone, Debug, Default)]
pub struct Theory {
    /// The dossier's name.
    pub name: String,
    /// The parameters in order.
    pub parameters: Vec<Declaration>,
    /// The global conditions in order.
    pub wheres: Vec<(Name, Relation)>,
    /// The quantities.
    pub quantities: BTreeMap<Name, Signature>,
    /// The facts in order.
    pub facts: Vec<Fact>,
    /// The goals in order.
    pub goals: Vec<GoalStatement>,
    places: BTreeMap<Name, usize>,
}

/// Where a fact comes from.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Standing {
    /// Taken as given by the dossier.
    Assumption,
    /// Taken from a published source.
    Cited(String),
    /// Proved outside the dossier.
    Argued(String),
    /// Exactly as good as these goals.
    Proved(Proof),
}

/// How goals make a fact.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Proof {
    /// Consecutive relations, composed by transitivity.
    Chain(Vec<Name>),
    /// One goal for each relation stated.
    All(Vec<Name>),
    /// Base and step over an integer variable.
    Induction {
        /// The variable.
        variable: Name,
        /// The goal at its lower end.
        base: Name,
        /// The goal at the next integer.
        step: Name,
    },
}

/// A property with its arguments.
pub type Property = (Name, Vec<Name>);

/// Under which declarations and hypotheses something is stated.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Context {
    /// Parameters it speaks of.
    pub over: BTreeSet<Name>,
    /// Global conditions it may use.
    pub under: BTreeSet<Name>,
    /// Quantities it holds for all of.
    pub schema: Vec<(Name, Signature)>,
    /// Variables it holds for all of.
    pub variables: Vec<Declaration>,
    /// Its own hypotheses.
    pub given: Vec<Relation>,
    /// Properties it needs.
    pub requires: Vec<Property>,
}

/// Something a goal may use.
#[derive(Clone, Debug)]
pub struct Fact {
    /// Its name.
    pub name: Name,
    /// Where it comes from.
    pub standing: Standing,
    /// Its context.
    pub context: Context,
    /// What it states.
    pub states: Vec<Relation>,
    /// Or the property it states.
    pub property: Option<Property>,
}

/// An instance of a fact.
#[derive(Clone, Debug)]
pub struct Use {
    /// The fact.
    pub fact: Name,
    /// A term for every variable of the fact.
    pub bindings: Vec<(Name, Term)>,
    /// A quantity for every quantity of its schema.
    pub renamings: Vec<(Name, Name)>,
}

/// Something to be shown.
#[derive(Clone, Debug)]
pub struct GoalStatement {
    /// Its name.
    pub name: Name,
    /// Its context.
    pub context: Context,
    /// The facts it uses, in order.
    pub uses: Vec<Use>,
    /// The relation to be shown.
    pub relation: Relation,
}

impl Theory {
    /// The fact of that name.
    pub fn fact(&self, name: &str) -> Option<&Fact> {
        self.places.get(name).and_then(|&i| self.facts.get(i)).filter(|f| &*f.name == name)
    }

    /// The goal of that name.
    pub fn goal(&self, name: &str) -> Option<&GoalStatement> {
        self.places.get(name).and_then(|&i| self.goals.get(i)).filter(|g| &*g.name == name)
    }
}

/// Most statements of one dossier.
const MAX_STATEMENTS: usize = 200_000;

/// Reads a plain text and checks that every name is declared before use.
pub fn read(text: &str) -> Checked<Theory> {
    let mut r = Reader::new(text)?;
    r.word("plain")?;
    if r.number()? != num_rational::BigRational::from_integer(1.into()) {
        return refuse(Reason::Syntax, "only version 1 of the plain form is known");
    }
    r.word("of")?;
    let mut reading =
        Reading { theory: Theory { name: r.text()?, ..Theory::default() }, ..Reading::default() };
    r.sign(";")?;
    let mut count = 0;
    while !r.at_end() {
        count += 1;
        if count > MAX_STATEMENTS {
            return refuse(Reason::Limit, format!("more than {MAX_STATEMENTS} statements"));
        }
        reading.statement(&mut r)?;
        r.sign(";")?;
    }
    Ok(reading.theory)
}

#[derive(Default)]
struct Reading {
    theory: Theory,
    names: BTreeSet<Name>,
    fact_at: BTreeSet<Name>,
    goal_at: BTreeSet<Name>,
}

impl Reading {
    fn statement(&mut self, r: &mut Reader) -> Checked {
        if r.takes_word("parameter") {
            let d = r.declaration()?;
            self.new_name(&d.name)?;
            self.ends_known(&self.theory.parameters, std::slice::from_ref(&d), &[])?;
            self.theory.parameters.push(d);
        } else if r.takes_word("where") {
            let name = r.name()?;
            self.new_name(&name)?;
            r.word("states")?;
            let relation = r.relation()?;
            self.relation_known(&self.theory.parameters, &[], &relation)?;
            self.theory.wheres.push((name, relation));
        } else if r.takes_word("quantity") {
            let (name, signature) = self.signature(r)?;
            self.new_name(&name)?;
            self.theory.quantities.insert(name, signature);
        } else if r.takes_word("fact") {
            let fact = self.fact(r)?;
            self.new_name(&fact.name)?;
            self.fact_at.insert(fact.name.clone());
            self.theory.places.insert(fact.name.clone(), self.theory.facts.len());
            self.theory.facts.push(fact);
        } else if r.takes_word("goal") {
            let goal = self.goal(r)?;
            self.new_name(&goal.name)?;
            self.goal_at.insert(goal.name.clone());
            self.theory.places.insert(goal.name.clone(), self.theory.goals.len());
            self.theory.goals.push(goal);
        } else {
            return r.unexpected("a statement");
        }
        Ok(())
    }

    fn new_name(&mut self, name: &Name) -> Checked {
        if self.names.insert(name.clone()) {
            Ok(())
        } else {
            refuse(Reason::Name, format!("`{name}` is declared twice"))
        }
    }

    fn signature(&self, r: &mut Reader) -> Checked<(Name, Signature)> {
        let name = r.name()?;
        r.sign("(")?;
        let domains = if r.takes(")") {
            vec![]
        } else {
            let domains = r.list(Reader::domain)?;
            r.sign(")")?;
            domains
        };
        r.sign(":")?;
        let range = r.domain()?;
        // Ends may use parameters only; a goal that applies the quantity must
        // then speak of them, which `abstract` and `defined` check by themselves.
        for d in domains.iter().chain([&range]) {
            for e in [&d.lower, &d.upper].into_iter().flatten() {
                self.term_known(&self.theory.parameters, &[], &e.term)?;
            }
        }
        Ok((name, (domains, range)))
    }

    fn property(&self, r: &mut Reader, schema: &[(Name, Signature)]) -> Checked<Property> {
        let name = r.name()?;
        r.sign("(")?;
        if r.takes(")") {
            return Ok((name, vec![]));
        }
        let args = r.list(Reader::name)?;
        r.sign(")")?;
        let unknown = args.iter().find(|a| {
            !self.theory.quantities.contains_key(*a)
                && !schema.iter().any(|(n, _)| n == *a)
                && !self.theory.parameters.iter().any(|d| d.name == **a)
        });
        match unknown {
            Some(a) => refuse(Reason::Name, format!("`{a}` is not a declared quantity or parameter")),
            None => Ok((name, args)),
        }
    }

    fn context(&self, r: &mut Reader) -> Checked<Context> {
        let mut c = Context::default();
        if r.takes_word("over") {
            for name in r.list(Reader::name)? {
                if !self.theory.parameters.iter().any(|d| d.name == name) {
                    return refuse(Reason::Name, format!("`{name}` is not a parameter"));
                }
                c.over.insert(name);
            }
        }
        let parameters = self.over(&c);
        for d in &parameters {
            for e in [&d.domain.lower, &d.domain.upper].into_iter().flatten() {
                self.term_known(&parameters, &[], &e.term)?;
            }
        }
        if r.takes_word("under") {
            for name in r.list(Reader::name)? {
                let Some((_, relation)) = self.theory.wheres.iter().find(|(n, _)| *n == name) else {
                    return refuse(Reason::Name, format!("`{name}` is not a global condition"));
                };
                self.relation_known(&parameters, &[], relation)?;
                c.under.insert(name);
            }
        }
        if r.takes_word("schema") {
            c.schema = r.list(|r| self.signature(r))?;
            let ends = c.schema.iter().flat_map(|(_, (domains, range))| domains.iter().chain([range]));
            let mut ends = ends.flat_map(|d| [&d.lower, &d.upper]).flatten();
            if let Some(e) = ends.find(|e| e.term.as_number().is_none()) {
                return refuse(Reason::Condition, format!("the end {} of a schema is not a literal", e.term));
            }
            let names: BTreeSet<&Name> = c.schema.iter().map(|(n, _)| n).collect();
            if names.len() < c.schema.len() {
                return refuse(Reason::Name, "a quantity of a schema is declared twice");
            }
        }
        if r.takes_word("for") {
            c.variables = r.list(Reader::declaration)?;
        }
        self.ends_known(&parameters, &c.variables, &c.schema)?;
        if r.takes_word("given") {
            c.given = r.list(Reader::relation)?;
        }
        let scope = self.scope(&c);
        for g in &c.given {
            self.relation_known(&scope, &c.schema, g)?;
        }
        if r.takes_word("requires") {
            c.requires = r.list(|r| self.property(r, &c.schema))?;
        }
        Ok(c)
    }

    fn fact(&self, r: &mut Reader) -> Checked<Fact> {
        let name = r.name()?;
        r.sign(":")?;
        let standing = if r.takes_word("assumption") {
            Standing::Assumption
        } else if r.takes_word("cited") {
            Standing::Cited(r.text()?)
        } else if r.takes_word("argued") {
            Standing::Argued(r.text()?)
        } else {
            r.word("proved")?;
            Standing::Proved(self.proof(r)?)
        };
        let context = self.context(r)?;
        let mut fact = Fact { name, standing, context, states: vec![], property: None };
        if r.takes_word("property") {
            fact.property = Some(self.property(r, &fact.context.schema)?);
        } else {
            r.word("states")?;
            fact.states = r.list(Reader::relation)?;
            let scope = self.scope(&fact.context);
            for relation in &fact.states {
                self.relation_known(&scope, &fact.context.schema, relation)?;
            }
        }
        Ok(fact)
    }

    fn proof(&self, r: &mut Reader) -> Checked<Proof> {
        let goal = |r: &mut Reader| {
            let name = r.name()?;
            if self.goal_at.contains(&name) {
                Ok(name)
            } else {
                refuse(Reason::Name, format!("`{name}` is not a goal stated before"))
            }
        };
        if r.takes_word("chain") {
            return Ok(Proof::Chain(r.list(goal)?));
        }
        if r.takes_word("all") {
            return Ok(Proof::All(r.list(goal)?));
        }
        r.word("induction")?;
        let variable = r.name()?;
        r.word("base")?;
        let base = goal(r)?;
        r.word("step")?;
        Ok(Proof::Induction { variable, base, step: goal(r)? })
    }

    fn goal(&self, r: &mut Reader) -> Checked<GoalStatement> {
        let name = r.name()?;
        let context = self.context(r)?;
        let scope = self.scope(&context);
        let mut uses = Vec::new();
        while r.takes_word("use") {
            uses.push(self.instance(r, &scope, &context.schema)?);
        }
        r.word("states")?;
        let relation = r.relation()?;
        self.relation_known(&scope, &context.schema, &relation)?;
        Ok(GoalStatement { name, context, uses, relation })
    }

    fn instance(&self, r: &mut Reader, scope: &[Declaration], schema: &[(Name, Signature)]) -> Checked<Use> {
        let fact = r.name()?;
        if !self.fact_at.contains(&fact) {
            return refuse(Reason::Name, format!("`{fact}` is not a fact stated before"));
        }
        let mut found = Use { fact, bindings: vec![], renamings: vec![] };
        if !r.takes("(") {
            return Ok(found);
        }
        if !r.takes(";") {
            found.bindings = r.list(|r| {
                let name = r.name()?;
                r.sign("=")?;
                let term = r.term()?;
                self.term_known(scope, schema, &term)?;
                Ok((name, term))
            })?;
            if r.takes(")") {
                return Ok(found);
            }
            r.sign(";")?;
        }
        found.renamings = r.list(|r| {
            let name = r.name()?;
            r.sign("=")?;
            Ok((name, r.name()?))
        })?;
        r.sign(")")?;
        Ok(found)
    }

    /// The declarations of the parameters a context speaks of, in global order.
    fn over(&self, c: &Context) -> Vec<Declaration> {
        self.theory.parameters.iter().filter(|d| c.over.contains(&d.name)).cloned().collect()
    }

    fn scope(&self, c: &Context) -> Vec<Declaration> {
        let mut scope = self.over(c);
        scope.extend(c.variables.iter().cloned());
        scope
    }

    /// Checks that the new declarations use only names before them, and are new.
    fn ends_known(
        &self,
        before: &[Declaration],
        new: &[Declaration],
        schema: &[(Name, Signature)],
    ) -> Checked {
        let mut scope = before.to_vec();
        for d in new {
            if scope.iter().any(|other| other.name == d.name) {
                return refuse(Reason::Name, format!("`{}` is declared twice", d.name));
            }
            for e in [&d.domain.lower, &d.domain.upper].into_iter().flatten() {
                self.term_known(&scope, schema, &e.term)?;
            }
            scope.push(d.clone());
        }
        Ok(())
    }

    fn relation_known(
        &self,
        scope: &[Declaration],
        schema: &[(Name, Signature)],
        relation: &Relation,
    ) -> Checked {
        self.term_known(scope, schema, &relation.left)?;
        self.term_known(scope, schema, &relation.right)
    }

    fn term_known(&self, scope: &[Declaration], schema: &[(Name, Signature)], term: &Term) -> Checked {
        self.known(&mut scope.iter().map(|d| d.name.clone()).collect(), schema, term)
    }

    fn known(&self, scope: &mut Vec<Name>, schema: &[(Name, Signature)], term: &Term) -> Checked {
        match &**term {
            Node::Variable(x) if !scope.contains(x) => {
                refuse(Reason::Name, format!("`{x}` is not declared here"))
            }
            Node::Series { index, lower, upper, body, .. } => {
                for limit in [lower, upper] {
                    if let Limit::Finite(t) = limit {
                        self.known(scope, schema, t)?;
                    }
                }
                scope.push(index.clone());
                self.known(scope, schema, body)?;
                scope.pop();
                Ok(())
            }
            Node::Quantity(name, args) => {
                let own = schema.iter().find(|(n, _)| n == name).map(|(_, s)| s);
                let Some((domains, _)) = own.or_else(|| self.theory.quantities.get(name)) else {
                    return refuse(Reason::Name, format!("`{name}` is not a declared quantity"));
                };
                if domains.len() != args.len() {
                    return refuse(Reason::Name, format!("`{name}` takes {} arguments", domains.len()));
                }
                args.iter().try_for_each(|a| self.known(scope, schema, a))
            }
            _ => term.children().into_iter().try_for_each(|c| self.known(scope, schema, c)),
        }
    }
}

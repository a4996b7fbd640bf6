//! Witnesses: a point where an obligation fails, or where all it supposes holds.
//!
//! A point gives every variable of the obligation a closed term (a literal for an
//! integer variable) and every quantity an expression in its arguments. Checked
//! are, in this order: that each quantity keeps its declared range for all
//! arguments in its domain; that every fact used is true under this reading, for
//! all values of its variables; that the point lies in every domain and satisfies
//! every hypothesis; and for a failure, that the relation is false there, or the
//! named condition of definedness violated.
//! Forgotten: a point on an open end; values of a quantity at the arguments in
//! sight while a fact about all arguments excludes every such function.

use std::collections::{BTreeMap, BTreeSet};

use num_integer::Integer;
use num_traits::ToPrimitive;

use super::closed::decide;
use super::defined::{Condition, conditions, membership, require_defined, require_well_posed};
use super::instance::{rename_quantities, renamings};
use super::obligation::{Kind, Obligation};
use super::read::Reader;
use super::rule::{Kernel, check as prove};
use super::sequent::{Declaration, Domain, End, Goal, Relation, Sequent, Sort};
use super::step::Step;
use super::term::{Name, Node, Term};
use super::theory::{Fact, Theory};
use super::token::Token;
use super::verdict::{Checked, Reason, Reject, refuse};

/// What a quantity is read as.
pub struct Meaning {
    arguments: Vec<Name>,
    value: Term,
    steps: Vec<Step>,
}

/// A witness as it stands in a certificate.
pub struct Witness {
    point: Vec<(Name, Term)>,
    meanings: BTreeMap<Name, Meaning>,
    facts: BTreeMap<Name, Vec<Step>>,
    undefined: Option<Relation>,
    bits: u32,
}

impl Witness {
    /// Witness
    pub fn read(r: &mut Reader) -> Checked<Witness> {
        r.word("at")?;
        // A variable may be called so.
        let assigned = r.peek_second() == Some(&Token::Sign("="));
        let point = if !assigned && r.takes_word("nothing") {
            vec![]
        } else {
            r.list(|r| {
                let name = r.name()?;
                r.sign("=")?;
                Ok((name, r.term()?))
            })?
        };
        let mut meanings = BTreeMap::new();
        while r.takes_word("with") {
            let name = r.name()?;
            r.sign("(")?;
            let mut arguments = Vec::new();
            if !r.takes(")") {
                arguments = r.list(Reader::name)?;
                r.sign(")")?;
            }
            r.sign("=")?;
            let meaning = Meaning { arguments, value: r.term()?, steps: steps(r)? };
            if meanings.insert(name.clone(), meaning).is_some() {
                return refuse(Reason::Name, format!("`{name}` is given two meanings"));
            }
        }
        let mut facts = BTreeMap::new();
        while r.takes_word("fact") {
            let name = r.name()?;
            let proofs = steps(r)?;
            if facts.insert(name.clone(), proofs).is_some() {
                return refuse(Reason::Name, format!("`{name}` is proved twice"));
            }
        }
        let mut undefined = None;
        if r.takes_word("undefined") {
            r.sign("[")?;
            undefined = Some(r.relation()?);
            r.sign("]")?;
        }
        r.word("bits")?;
        let bits = r.number()?;
        let bits = bits.is_integer().then(|| bits.to_integer().to_u32()).flatten();
        let Some(bits) = bits else { return refuse(Reason::Syntax, "bits is a whole number") };
        Ok(Witness { point, meanings, facts, undefined, bits })
    }

    /// The point and the meanings, for people.
    pub fn describe(&self) -> String {
        let mut words: Vec<String> = self.point.iter().map(|(n, t)| format!("{n} = {t}")).collect();
        words.extend(self.meanings.iter().map(|(n, m)| {
            let args: Vec<&str> = m.arguments.iter().map(|a| &**a).collect();
            if args.is_empty() {
                format!("{n} = {}", m.value)
            } else {
                format!("{n}({}) = {}", args.join(", "), m.value)
            }
        }));
        words.join(", ")
    }

    /// Checks that the obligation fails at this point.
    pub fn check_failure(&self, theory: &Theory, o: &Obligation) -> Checked {
        let reading = Reading::new(self, o)?;
        reading.facts_hold(theory, o)?;
        if o.kind == Kind::Definedness {
            let Some(violated) = &self.undefined else {
                return refuse(Reason::Fields, "a violated condition must be named");
            };
            return reading.undefined(o, violated);
        }
        if self.undefined.is_some() {
            return refuse(Reason::Fields, "definedness is an obligation of its own");
        }
        reading.supposed(&o.sequent)?;
        let Goal::Relation(r) = &o.sequent.goal else {
            return refuse(Reason::Condition, "the goal is not a relation");
        };
        reading.expect(r, false)
    }

    /// Checks that all the obligation supposes holds at this point.
    pub fn check_inhabitant(&self, theory: &Theory, o: &Obligation) -> Checked {
        if self.undefined.is_some() {
            return refuse(Reason::Fields, "an inhabitant violates nothing");
        }
        let reading = Reading::new(self, o)?;
        reading.facts_hold(theory, o)?;
        reading.supposed(&o.sequent)
    }
}

fn steps(r: &mut Reader) -> Checked<Vec<Step>> {
    let mut all = Vec::new();
    while matches!(r.peek(), Some(super::token::Token::Sign("{"))) {
        all.push(r.step()?);
    }
    Ok(all)
}

/// A witness applied to an obligation.
struct Reading<'a> {
    witness: &'a Witness,
    kernel: Kernel,
}

impl<'a> Reading<'a> {
    fn new(witness: &'a Witness, o: &Obligation) -> Checked<Reading<'a>> {
        let mut seen = BTreeSet::new();
        for (name, term) in &witness.point {
            if !seen.insert(name) {
                return refuse(Reason::Name, format!("`{name}` is given twice"));
            }
            if !term.free_variables().is_empty() || has_quantity(term) {
                return refuse(Reason::Condition, format!("`{name}` is not given a closed value"));
            }
        }
        let reading = Reading { witness, kernel: Kernel::new(BTreeMap::new()) };
        for (name, meaning) in &witness.meanings {
            let Some((domains, range)) = o.quantities.get(name) else {
                return refuse(Reason::Name, format!("`{name}` is not a declared quantity"));
            };
            reading.keeps_range(name, meaning, domains, range)?;
        }
        Ok(reading)
    }

    /// For all arguments in their domains the value is defined and in range.
    fn keeps_range(&self, name: &Name, m: &Meaning, domains: &[Domain], range: &Domain) -> Checked {
        let place = format!("the meaning of `{name}`");
        if m.arguments.len() != domains.len() || has_quantity(&m.value) {
            return refuse(Reason::Condition, format!("{place} has the wrong form"));
        }
        // The point is put for its names in the value: an argument must not be one.
        let clash = |a: &Name| self.witness.point.iter().any(|(n, _)| n == a);
        if m.arguments.iter().any(clash) {
            return refuse(Reason::Name, format!("{place} uses a variable of the point for an argument"));
        }
        let mut s = Sequent { variables: vec![], hypotheses: vec![], goal: Goal::Absurd };
        for (a, d) in m.arguments.iter().zip(domains) {
            s = s.with_variable(Declaration { name: a.clone(), domain: self.domain(d) })?;
        }
        let value = self.at_point(&m.value);
        s.require_closed(&value)?;
        if !super::defined::has_sort(&s, &value, range.sort) {
            return refuse(Reason::Condition, format!("{place} is not {} by its shape", range.sort.name()));
        }
        let range = self.domain(range);
        self.prove_all(&s, &membership(&value, &range), &m.steps).map_err(|r| r.within(&place))?;
        let (_, defined) = split_defined(&m.steps);
        require_defined(&s, &[&value], defined, &self.kernel).map_err(|r| r.within(&place))
    }

    /// Every fact used is true under this reading.
    fn facts_hold(&self, theory: &Theory, o: &Obligation) -> Checked {
        let Some(goal) = o.owner.as_ref().and_then(|g| theory.goal(g)) else { return Ok(()) };
        for u in &goal.uses[..o.used] {
            let Some(fact) = theory.fact(&u.fact) else {
                return refuse(Reason::Name, format!("`{}` is not a fact", u.fact));
            };
            let renamed = renamings(fact, u, &o.quantities)?;
            self.fact_holds(fact, &renamed).map_err(|r| r.within(&fact.name))?;
        }
        Ok(())
    }

    fn fact_holds(&self, fact: &Fact, renamed: &BTreeMap<Name, Name>) -> Checked {
        if fact.property.is_some() {
            return Ok(());
        }
        let put = |t: &Term| self.interpret(&rename_quantities(t, renamed), &fact.context.variables);
        let end = |e: &Option<End>| e.as_ref().map(|e| End { term: put(&e.term), open: e.open });
        let mut s = Sequent { variables: vec![], hypotheses: vec![], goal: Goal::Absurd };
        for d in &fact.context.variables {
            let domain =
                Domain { sort: d.domain.sort, lower: end(&d.domain.lower), upper: end(&d.domain.upper) };
            s = s.with_variable(Declaration { name: d.name.clone(), domain })?;
        }
        s.hypotheses = fact.context.given.iter().map(|g| g.map(put)).collect();
        let stated: Vec<Relation> = fact.states.iter().map(|r| r.map(put)).collect();
        let none = vec![];
        let steps = self.witness.facts.get(&fact.name).unwrap_or(&none);
        let (_, defined) = split_defined(steps);
        if s.variables.is_empty() && s.hypotheses.is_empty() {
            return stated.iter().try_for_each(|r| self.expect_closed(r, true));
        }
        for r in &stated {
            require_well_posed(&s.with_goal(r.clone()), defined, &self.kernel)?;
        }
        self.prove_all(&s, &stated, steps)
    }

    fn prove_all(&self, s: &Sequent, relations: &[Relation], steps: &[Step]) -> Checked {
        if s.variables.is_empty() && s.hypotheses.is_empty() {
            return relations.iter().try_for_each(|r| self.expect_closed(r, true));
        }
        let (proofs, _) = split_defined(steps);
        if proofs.len() != relations.len() {
            return refuse(Reason::Fields, format!("{} steps are needed", relations.len()));
        }
        relations
            .iter()
            .zip(proofs)
            .try_for_each(|(r, step)| prove(&s.with_goal(r.clone()), step, &self.kernel))
    }

    /// The point lies in every domain and satisfies every hypothesis.
    fn supposed(&self, s: &Sequent) -> Checked {
        for d in &s.variables {
            let Some((_, value)) = self.witness.point.iter().find(|(n, _)| *n == d.name) else {
                return refuse(Reason::Missing, format!("`{}` is given no value", d.name));
            };
            if d.domain.sort != Sort::Real {
                let whole = value.as_number().filter(|q| q.is_integer());
                let even = whole.is_some_and(|q| q.to_integer().is_even());
                if whole.is_none() || (d.domain.sort == Sort::Even && !even) {
                    return refuse(
                        Reason::Condition,
                        format!("`{}` is not given a literal of its sort", d.name),
                    );
                }
            }
            for r in membership(&Term::variable(&d.name), &d.domain) {
                self.expect(&r, true)?;
            }
        }
        s.hypotheses.iter().try_for_each(|h| self.expect(h, true))
    }

    /// In some piece whose context holds at the point, the named condition is
    /// among those of its terms, and each of its alternatives is violated.
    fn undefined(&self, o: &Obligation, violated: &Relation) -> Checked {
        let mut why = Reject::new(Reason::NotProved, format!("{violated} is no condition here"));
        let kernel = Kernel::new(o.quantities.clone());
        for (s, terms) in &o.pieces {
            for c in terms.iter().flat_map(|t| conditions(s, &kernel, t)) {
                let Condition::OneOf { indices, alternatives, also } = &c else { continue };
                let named = alternatives.iter().flatten().any(|r| r.turned() == violated.turned());
                if !named {
                    continue;
                }
                let mut inner = s.clone();
                inner.variables.extend(indices.iter().cloned());
                let all = self.supposed(&inner).and_then(|()| {
                    alternatives.iter().chain(also).try_for_each(|all| {
                        if all.iter().any(|r| self.expect(r, false).is_ok()) {
                            Ok(())
                        } else {
                            refuse(Reason::NotProved, format!("{violated} is not seen to be violated"))
                        }
                    })
                });
                match all {
                    Ok(()) => return Ok(()),
                    Err(reject) => why = reject,
                }
            }
        }
        Err(why)
    }

    fn expect(&self, relation: &Relation, truth: bool) -> Checked {
        let closed = relation.map(|t| self.interpret(t, &[]));
        self.expect_closed(&closed, truth)
    }

    fn expect_closed(&self, relation: &Relation, truth: bool) -> Checked {
        if let Some(x) =
            relation.left.free_variables().into_iter().chain(relation.right.free_variables()).next()
        {
            return refuse(Reason::Missing, format!("`{x}` is given no value"));
        }
        match decide(relation, self.witness.bits)? {
            Some(found) if found == truth => Ok(()),
            Some(_) => refuse(Reason::NotProved, format!("{relation} is {}", !truth)),
            None => refuse(Reason::NotProved, format!("{relation} is not decided at this precision")),
        }
    }

    /// Puts the point and the meanings; `bound` variables stay.
    fn interpret(&self, term: &Term, bound: &[Declaration]) -> Term {
        self.point_but(&self.meant(term), bound)
    }

    fn meant(&self, term: &Term) -> Term {
        term.rebuild(&mut |t| match &**t {
            Node::Quantity(name, args) => {
                let meaning = self.witness.meanings.get(name)?;
                // The point first: a fact's own variable may carry the name of one of its variables.
                let mut value = self.at_point(&meaning.value);
                for (i, a) in meaning.arguments.iter().enumerate() {
                    value = value.substitute(a, &Term::variable(&format!("#{i}")));
                }
                for (i, a) in args.iter().enumerate() {
                    value = value.substitute(&format!("#{i}"), &self.meant(a));
                }
                Some(value)
            }
            _ => None,
        })
    }

    fn at_point(&self, term: &Term) -> Term {
        self.point_but(term, &[])
    }

    fn point_but(&self, term: &Term, bound: &[Declaration]) -> Term {
        let mut t = term.clone();
        for (name, value) in &self.witness.point {
            if !bound.iter().any(|d| d.name == *name) {
                t = t.substitute(name, value);
            }
        }
        t
    }

    fn domain(&self, d: &Domain) -> Domain {
        let end = |e: &Option<End>| e.as_ref().map(|e| End { term: self.at_point(&e.term), open: e.open });
        Domain { sort: d.sort, lower: end(&d.lower), upper: end(&d.upper) }
    }
}

fn split_defined(steps: &[Step]) -> (&[Step], Option<&Step>) {
    match steps.split_last() {
        Some((last, rest)) if &*last.rule == "defined" => (rest, Some(last)),
        _ => (steps, None),
    }
}

fn has_quantity(term: &Term) -> bool {
    matches!(&**term, Node::Quantity(..)) || term.children().into_iter().any(has_quantity)
}

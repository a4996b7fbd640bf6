//! Interpretations: what the quantities may be so that every fact in use holds
//! and the obligation fails, or all it supposes holds.
//!
//! A quantity without arguments is a number, looked for like any other variable.
//! One with arguments is tried as each bound that a fact gives it (cut off at the
//! ends of its range), as a part of such a bound, as a constant, and as a power or
//! an exponential of its argument; the numbers in these forms are looked for with
//! the rest of the point. What is found counts only with proofs that each
//! quantity keeps its range and that each fact holds for all its variables.

use std::collections::{BTreeMap, BTreeSet};

use crate::enclosure::Function;
use crate::expression::{End, Name, Node, Renaming, Sort, Substitution, Term, has_sort, simplify};
use crate::statement::{
    Conclusion, Condition, Declaration, Domain, Fact, Rel, Relation, Sequent, Signature, Use, conditions,
};

use super::decide::{abstracted, innermost_application, unused_name};
use super::engine::Search;
use super::exact::{is_inside, is_refuted, placed, truth};
use super::method::{WITNESS_BITS, Zeal, refute_by};
use super::proof::Proof;
use super::tight::root;

/// Most choices of forms that are tried for one obligation.
const MOST_CHOICES: usize = 16;

/// What a quantity is read as.
#[derive(Clone, Debug)]
pub struct Meaning {
    /// The quantity.
    pub name: Name,
    /// Names for its arguments.
    pub arguments: Vec<Name>,
    /// Its value, in the arguments alone.
    pub value: Term,
    /// That it keeps its range.
    pub steps: Vec<Proof>,
}

/// A point, a meaning for every quantity, and the proofs that both are allowed.
#[derive(Clone, Debug)]
pub struct Reading {
    /// A closed term for every variable.
    pub point: Vec<Term>,
    /// For every quantity.
    pub meanings: Vec<Meaning>,
    /// For every fact that speaks of all values of a variable.
    pub facts: Vec<(Name, Vec<Proof>)>,
}

/// What may be read.
#[derive(Clone, Copy)]
pub struct Theory<'a> {
    /// The quantities that may occur.
    pub signatures: &'a [Signature],
    /// The facts of the dossier.
    pub facts: &'a [Fact],
    /// The instances in use.
    pub uses: &'a [Use],
}

/// A form for a quantity with arguments.
#[derive(Clone)]
struct Form {
    value: Term,
    /// The numbers to be found.
    open: Vec<Declaration>,
}

/// What each quantity with arguments is read as.
type Forms = BTreeMap<Name, (Vec<Name>, Term)>;

/// A reading under which the sequent fails; for an absurd goal, one under which its
/// context holds; with `violated`, one under which in addition no alternative of
/// these is true.
#[must_use]
pub fn interpret(
    theory: &Theory,
    s: &Sequent,
    violated: &[Vec<Relation>],
    search: &mut Search,
) -> Option<Reading> {
    let mut names = quantities(s);
    violated.iter().flatten().for_each(|r| names.extend(of_relation(r)));
    let taken = taken(theory, s);
    let mut lists: Vec<(Name, Vec<Name>, Vec<Form>)> = Vec::new();
    for name in &names {
        let signature = theory.signatures.iter().find(|q| q.name == *name)?;
        if !signature.arguments.is_empty() {
            let arguments = argument_names(signature.arguments.len(), &taken);
            let forms = forms(theory, s, signature, &arguments, &taken);
            lists.push((name.clone(), arguments, forms));
        }
    }
    let choices = choices(&lists.iter().map(|(_, _, forms)| forms.len()).collect::<Vec<_>>());
    let many = choices.len() as u64;
    for (i, choice) in choices.iter().enumerate() {
        let share = search.left() / (many - i as u64);
        let found = search.within(share, |search| {
            let mut read = Forms::new();
            let mut open = Vec::new();
            for ((name, arguments, forms), place) in lists.iter().zip(choice) {
                read.insert(name.clone(), (arguments.clone(), forms[*place].value.clone()));
                open.extend(forms[*place].open.iter().cloned());
            }
            try_forms(theory, s, violated, &resolved(read)?, &open, search)
        });
        if found.is_some() {
            return found;
        }
    }
    None
}

/// Looks for the numbers that remain once the forms are chosen.
fn try_forms(
    theory: &Theory,
    s: &Sequent,
    violated: &[Vec<Relation>],
    read: &Forms,
    open: &[Declaration],
    search: &mut Search,
) -> Option<Reading> {
    let put = |t: &Term| meant(t, read);
    let mut inner = s.clone();
    for d in &mut inner.variables {
        d.domain = d.domain.map(put);
        if open.iter().any(|o| d.domain.ends().any(|t| t.mentions(&o.name))) {
            return None;
        }
    }
    // Values in sight must lie in their ranges; that all do is proved afterwards.
    let mut hypotheses: Vec<Relation> = s.hypotheses.iter().map(|h| h.map(put)).collect();
    for (name, args) in applications(s) {
        let range = &theory.signatures.iter().find(|q| q.name == name)?.range;
        if !args.is_empty() {
            let value = put(&Term::quantity(name, args));
            hypotheses
                .extend(range.map(put).membership(&value).into_iter().filter(|r| r.literal() != Some(true)));
        }
    }
    inner.hypotheses = hypotheses;
    if let Conclusion::Relation(r) = &s.goal {
        inner.goal = Conclusion::Relation(r.map(put));
    }
    inner.variables.extend(open.iter().cloned());
    let mut violated: Vec<Vec<Relation>> =
        violated.iter().map(|all| all.iter().map(|r| r.map(put)).collect()).collect();
    // Quantities without arguments are numbers.
    let mut numbers: BTreeMap<Name, Name> = BTreeMap::new();
    while let Some(application) = innermost_application(&inner) {
        let Node::Quantity(name, args) = application.node() else { return None };
        let signature = theory.signatures.iter().find(|q| q.name == *name)?;
        if !args.is_empty() || numbers.contains_key(name) {
            return None;
        }
        let fresh = unused_name(&inner, name);
        let variable = Term::variable(fresh.clone());
        let declaration = Declaration { name: fresh.clone(), domain: signature.range.map(put) };
        inner = abstracted(&inner, &application, &declaration);
        for r in violated.iter_mut().flatten() {
            *r = r.map(|t| t.replace(&application, &variable));
        }
        numbers.insert(name.clone(), fresh);
    }
    let test = |point: &[Term]| {
        if violated.is_empty() && inner.relation().is_some() {
            return is_refuted(&inner, point, WITNESS_BITS);
        }
        let at = placed(&inner, point);
        let is_false = |r: &Relation| truth(&r.under(&at), WITNESS_BITS) == Some(false);
        is_inside(&inner, point, WITNESS_BITS) && violated.iter().all(|all| all.iter().any(is_false))
    };
    let share = search.left() / 2;
    let point = search.within(share, |search| {
        let quick = refute_by(&inner, Zeal::Quick, &[], &test, search);
        quick.or_else(|| refute_by(&inner, Zeal::Thorough, &[], &test, search))
    })?;
    let values = placed(&inner, &point);
    let mut whole: Forms = read
        .iter()
        .map(|(name, (arguments, value))| (name.clone(), (arguments.clone(), values.apply(value))))
        .collect();
    for (name, variable) in &numbers {
        whole.insert(name.clone(), (Vec::new(), values.get(variable)?.clone()));
    }
    let whole: Forms =
        whole.iter().map(|(n, (a, v))| (n.clone(), (a.clone(), simplify(&meant(v, &whole))))).collect();
    let at: Substitution =
        s.variables.iter().filter_map(|d| Some((d.name.clone(), values.get(&d.name)?.clone()))).collect();
    justify(theory, s, &at, &whole, search)
}

/// Proves that the meanings keep their ranges and that all facts in use hold.
fn justify(
    theory: &Theory,
    s: &Sequent,
    at: &Substitution,
    read: &Forms,
    search: &mut Search,
) -> Option<Reading> {
    let mut meanings = Vec::new();
    for (name, (arguments, value)) in read {
        let signature = theory.signatures.iter().find(|q| q.name == *name)?;
        let domains = signature.arguments.iter().map(|d| d.map(|t| at.apply(&meant(t, read))));
        let variables: Vec<Declaration> = arguments
            .iter()
            .zip(domains)
            .map(|(name, domain)| Declaration { name: name.clone(), domain })
            .collect();
        let context = Sequent { variables, hypotheses: Vec::new(), goal: Conclusion::Absurd };
        if !has_sort(value, signature.range.sort, &context) {
            return None;
        }
        let range = signature.range.map(|t| at.apply(&meant(t, read)));
        let steps = prove_all(theory, &context, &range.membership(value), &[value], search)?;
        meanings.push(Meaning {
            name: name.clone(),
            arguments: arguments.clone(),
            value: value.clone(),
            steps,
        });
    }
    let mut facts: Vec<(Name, Sequent, Vec<Proof>)> = Vec::new();
    for u in theory.uses {
        let fact = theory.facts.iter().find(|f| f.name == u.fact)?;
        if fact.relations().is_empty() {
            continue;
        }
        let own: BTreeSet<&Name> = fact.context.variables.iter().map(|d| &d.name).collect();
        let outer: Substitution = at
            .iter()
            .filter(|(name, _)| !own.contains(name))
            .map(|(name, term)| (name.clone(), term.clone()))
            .collect();
        let renaming: Renaming = u.renamings.iter().cloned().collect();
        let put = |t: &Term| outer.apply(&meant(&t.rename_quantities(&renaming), read));
        let variables = (fact.context.variables.iter())
            .map(|d| Declaration { name: d.name.clone(), domain: d.domain.map(put) })
            .collect();
        let hypotheses: Vec<Relation> = fact.context.given.iter().map(|h| h.map(put)).collect();
        let stated: Vec<Relation> = fact.relations().iter().map(|r| r.map(put)).collect();
        let context = Sequent { variables, hypotheses, goal: Conclusion::Absurd };
        let key = context.with_goal(stated[0].clone());
        if let Some((_, former, _)) = facts.iter().find(|(name, _, _)| *name == fact.name) {
            // One list of steps serves all instances, so they must say the same.
            if *former != key {
                return None;
            }
            continue;
        }
        let terms: Vec<&Term> = (context.variables.iter().flat_map(|d| d.domain.ends()))
            .chain(context.hypotheses.iter().chain(&stated).flat_map(|r| [&r.left, &r.right]))
            .collect();
        let steps = prove_all(theory, &context, &stated, &terms, search)?;
        facts.push((fact.name.clone(), key, steps));
    }
    let point = s.variables.iter().map(|d| at.get(&d.name).cloned()).collect::<Option<_>>()?;
    let facts = facts.into_iter().filter(|f| !f.2.is_empty()).map(|(name, _, steps)| (name, steps)).collect();
    Some(Reading { point, meanings, facts })
}

/// A step for each relation, and one more for what `terms` need in order to be
/// defined; none for closed relations, which the kernel decides by itself.
fn prove_all(
    theory: &Theory,
    context: &Sequent,
    relations: &[Relation],
    terms: &[&Term],
    search: &mut Search,
) -> Option<Vec<Proof>> {
    if context.variables.is_empty() && context.hypotheses.is_empty() {
        return relations.iter().all(|r| truth(r, WITNESS_BITS) == Some(true)).then(Vec::new);
    }
    let mut steps = Vec::new();
    for r in relations {
        let share = search.left() / 3;
        steps.push(search.within(share, |search| prove_one(&context.with_goal(r.clone()), 2, search))?);
    }
    let signatures = theory.signatures.to_vec();
    let mut defined = Proof::new("defined");
    for condition in terms.iter().flat_map(|t| conditions(context, &signatures, t)) {
        let Condition::OneOf { indices, alternatives, .. } = condition else { return None };
        let mut inner = context.clone();
        inner.variables.extend(indices);
        // What cannot be proved here may still be plain to the kernel.
        let proved = alternatives.iter().find_map(|all| {
            let share = search.left() / 10;
            let one = |r: &Relation, search: &mut Search| {
                search.within(share, |search| search.prove(&inner.with_goal(r.clone()))).ok()
            };
            all.iter().map(|r| Some((r.clone(), one(r, search)?))).collect::<Option<Vec<_>>>()
        });
        for (relation, proof) in proved.into_iter().flatten() {
            defined = defined.with(relation).with(proof);
        }
    }
    if !defined.fields.is_empty() {
        steps.push(defined);
    }
    Some(steps)
}

/// A proof that looks into the `min` and `max` of the forms, `depth` of them inside
/// each other.
fn prove_one(s: &Sequent, depth: u32, search: &mut Search) -> Option<Proof> {
    let r = s.relation()?;
    let weak = matches!(r.rel, Rel::LessEqual | Rel::GreaterEqual | Rel::Equal);
    if weak && simplify(&r.difference()).is_zero() {
        return Some(Proof::new("identity"));
    }
    // The last hypothesis is the case.
    if let Some(last) = s.hypotheses.last()
        && matches!(last.turned().rel, Rel::LessEqual | Rel::Less)
        && (weak || last.turned().rel == r.turned().rel)
        && simplify(&r.difference().subtract(&last.difference())).is_zero()
    {
        let reference = format!("h{}", s.hypotheses.len());
        return Some(Proof::new("linear").with(Term::integer(1)).word(&reference));
    }
    let Some((cut, [a, b])) = (depth > 0).then(|| extreme(r)).flatten() else {
        return search.prove(s).ok();
    };
    let least = matches!(cut.node(), Node::Apply(Function::Min, _));
    let case = |rel: Rel, value: &Term| {
        let put = |t: &Term| t.replace(&cut, value);
        let mut inner = s.with_goal(r.map(put));
        inner.hypotheses = s.hypotheses.iter().map(|h| h.map(put)).collect();
        inner.hypotheses.push(Relation::new(a.clone(), rel, b.clone()));
        inner
    };
    let (below, above) = if least { (&a, &b) } else { (&b, &a) };
    let first = prove_one(&case(Rel::LessEqual, below), depth - 1, search)?;
    let second = prove_one(&case(Rel::Greater, above), depth - 1, search)?;
    Some(Proof::new("unfold").with(cut).with(first).with(second))
}

/// A `min` or `max` of two in a relation, with its arguments.
fn extreme(r: &Relation) -> Option<(Term, [Term; 2])> {
    let mut found = None;
    let mut look = |t: &Term| {
        if let (Node::Apply(Function::Min | Function::Max, args), None) = (t.node(), &found)
            && let [a, b] = &args[..]
        {
            found = Some((t.clone(), [a.clone(), b.clone()]));
        }
        found.is_none() && !matches!(t.node(), Node::Series { .. })
    };
    r.left.walk(&mut look);
    r.right.walk(&mut look);
    found
}

/// Forms for a quantity with arguments, most telling first.
fn forms(
    theory: &Theory,
    s: &Sequent,
    signature: &Signature,
    arguments: &[Name],
    taken: &BTreeSet<Name>,
) -> Vec<Form> {
    let range = &signature.range;
    let fresh = |stem: &str| -> Name {
        let mut name = format!("{stem}_{}", signature.name);
        while taken.contains(name.as_str()) {
            name.push('\'');
        }
        name.into()
    };
    let closed = |value: Term| Form { value, open: Vec::new() };
    let mut all: Vec<Form> = Vec::new();
    let bounds = bounds(theory, s, signature, arguments);
    let equal: Vec<&(Term, bool)> = bounds.iter().filter(|(_, equal)| *equal).collect();
    if !equal.is_empty() {
        return equal.into_iter().map(|(value, _)| closed(value.clone())).collect();
    }
    let constant = Term::variable(fresh("c"));
    let number = |domain: Domain| Declaration { name: fresh("c"), domain };
    let literal = range.ends().all(|t| t.as_number().is_some());
    if range.sort == Sort::Real {
        for (bound, _) in &bounds {
            all.push(closed(bound.clone()));
            if let End::Finite(end) = &range.upper {
                all.push(closed(Term::apply(Function::Min, vec![end.clone(), bound.clone()])));
            }
            if let End::Finite(end) = &range.lower {
                all.push(closed(Term::apply(Function::Max, vec![end.clone(), bound.clone()])));
            }
        }
    }
    all.push(Form { value: constant.clone(), open: vec![number(range.clone())] });
    if range.sort != Sort::Real {
        return all;
    }
    let from_zero = |upper: End| Domain {
        sort: Sort::Real,
        lower: End::Finite(Term::integer(0)),
        lower_open: false,
        upper_open: upper.finite().is_none(),
        upper,
    };
    let unit = from_zero(End::Finite(Term::integer(1)));
    for (bound, _) in &bounds {
        let value = constant.multiply(bound);
        all.push(Form { value, open: vec![number(unit.clone())] });
    }
    if let ([argument], true) = (arguments, literal) {
        let argument = Term::variable(argument.clone());
        let open = vec![number(from_zero(range.upper.clone()))];
        all.push(Form { value: constant.multiply(&argument), open: open.clone() });
        all.push(Form { value: constant.divide(&argument), open: open.clone() });
        let rate = Declaration { name: fresh("b"), domain: Domain::all(Sort::Real) };
        let exponent = Term::variable(rate.name.clone()).multiply(&argument);
        let value = constant.multiply(&Term::apply1(Function::Exp, &exponent));
        all.push(Form { value, open: [open, vec![rate]].concat() });
    }
    all
}

/// What facts in use say about all values of the quantity: a bound in terms of the
/// arguments, and whether it is an equation.
fn bounds(theory: &Theory, s: &Sequent, signature: &Signature, arguments: &[Name]) -> Vec<(Term, bool)> {
    let mut found: Vec<(Term, bool)> = Vec::new();
    for u in theory.uses {
        let Some(fact) = theory.facts.iter().find(|f| f.name == u.fact) else { continue };
        let renaming: Renaming = u.renamings.iter().cloned().collect();
        let own: BTreeSet<&Name> = fact.context.variables.iter().map(|d| &d.name).collect();
        for r in fact.relations() {
            let r = r.map(|t| t.rename_quantities(&renaming));
            let Some(application) = application_to_variables(&r, &signature.name, &own) else { continue };
            let Node::Quantity(_, args) = application.node() else { continue };
            let put: Substitution = (args.iter().filter_map(Term::as_variable).cloned())
                .zip(arguments.iter().map(|a| Term::variable(a.clone())))
                .collect();
            let unknown = Name::from("#");
            let difference =
                r.left.subtract(&r.right).replace(&application, &Term::variable(unknown.clone()));
            let Some(value) = root(&difference, &unknown) else { continue };
            let value = put.apply(&value);
            let known = |x: &Name| arguments.contains(x) || (s.declaration(x).is_some() && !own.contains(x));
            if value.quantities().contains(&signature.name) || !value.free_variables().iter().all(known) {
                continue;
            }
            let bound = (value, r.rel == Rel::Equal);
            if !found.contains(&bound) {
                found.push(bound);
            }
        }
    }
    found
}

/// An application to distinct variables of the fact itself.
fn application_to_variables(r: &Relation, quantity: &Name, own: &BTreeSet<&Name>) -> Option<Term> {
    let mut found = None;
    let mut look = |t: &Term| {
        if let Node::Quantity(name, args) = t.node()
            && name == quantity
            && found.is_none()
        {
            let variables: BTreeSet<&Name> = args.iter().filter_map(Term::as_variable).collect();
            if variables.len() == args.len() && variables.iter().all(|x| own.contains(*x)) {
                found = Some(t.clone());
            }
        }
        true
    };
    r.left.walk(&mut look);
    r.right.walk(&mut look);
    found
}

/// The places in lists of these lengths, early ones first.
fn choices(lengths: &[usize]) -> Vec<Vec<usize>> {
    let mut all = vec![vec![]];
    for &length in lengths {
        let longer: Vec<Vec<usize>> = all
            .iter()
            .flat_map(|c: &Vec<usize>| (0..length).map(|i| [c.clone(), vec![i]].concat()))
            .take(4096)
            .collect();
        all = longer;
    }
    all.sort_by_key(|c| c.iter().sum::<usize>());
    all.truncate(MOST_CHOICES);
    all
}

/// The term with the meanings put for the quantities that have one.
fn meant(term: &Term, read: &Forms) -> Term {
    let inner = term.map_children(&mut |t| meant(t, read));
    match inner.node() {
        Node::Quantity(name, args) => match read.get(name) {
            Some((arguments, value)) => {
                let put: Substitution = arguments.iter().cloned().zip(args.iter().cloned()).collect();
                put.apply(value)
            }
            None => inner,
        },
        _ => inner,
    }
}

/// Forms that mention other quantities, with those put in; nothing if they go
/// round in a circle.
fn resolved(mut read: Forms) -> Option<Forms> {
    for _ in 0..=read.len() {
        let mentions = |t: &Term| t.quantities().iter().any(|q| read.contains_key(q));
        if !read.values().any(|(_, value)| mentions(value)) {
            return Some(read);
        }
        read = read.iter().map(|(n, (a, v))| (n.clone(), (a.clone(), meant(v, &read)))).collect();
    }
    None
}

fn argument_names(count: usize, taken: &BTreeSet<Name>) -> Vec<Name> {
    let mut names: Vec<Name> = Vec::new();
    for stem in ["t", "u", "v", "w", "z"].into_iter().cycle().take(count) {
        let mut name = stem.to_string();
        while taken.contains(name.as_str()) || names.iter().any(|n| **n == *name) {
            name.push('\'');
        }
        names.push(name.into());
    }
    names
}

fn of_relation(r: &Relation) -> BTreeSet<Name> {
    let mut all = r.left.quantities();
    all.extend(r.right.quantities());
    all
}

fn quantities(s: &Sequent) -> BTreeSet<Name> {
    let ends = s.variables.iter().flat_map(|d| d.domain.ends()).flat_map(Term::quantities);
    ends.chain(s.hypotheses.iter().chain(s.relation()).flat_map(of_relation)).collect()
}

/// Applications without applications in their arguments and outside of series.
fn applications(s: &Sequent) -> BTreeSet<(Name, Vec<Term>)> {
    let mut found = BTreeSet::new();
    let mut look = |t: &Term| {
        if let Node::Quantity(name, args) = t.node()
            && args.iter().all(|a| a.quantities().is_empty())
            && t.free_variables().iter().all(|v| s.declaration(v).is_some())
        {
            found.insert((name.clone(), args.clone()));
        }
        true
    };
    for r in s.hypotheses.iter().chain(s.relation()) {
        r.left.walk(&mut look);
        r.right.walk(&mut look);
    }
    found
}

/// All names of variables in sight.
fn taken(theory: &Theory, s: &Sequent) -> BTreeSet<Name> {
    let mut all: BTreeSet<Name> = s.variables.iter().map(|d| d.name.clone()).collect();
    for r in s.hypotheses.iter().chain(s.relation()) {
        all.extend(r.free_variables());
    }
    for u in theory.uses {
        if let Some(fact) = theory.facts.iter().find(|f| f.name == u.fact) {
            all.extend(fact.context.variables.iter().map(|d| d.name.clone()));
        }
    }
    all.extend(theory.signatures.iter().flat_map(|q| q.free_variables().into_iter().chain([q.name.clone()])));
    all
}

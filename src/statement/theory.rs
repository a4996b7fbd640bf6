//! The logic of one dossier: definitions folded, names resolved, instances found.

use std::collections::BTreeSet;
use std::fmt;

use crate::expression::{End, Name, Sort, Term};
use crate::source::Place;

use super::declaration::{Declaration, Domain, Signature};
use super::relation::Relation;

/// Where something comes from in the user's files, for reports.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Origin {
    /// The whole statement, or the link.
    pub place: Option<Place>,
    /// The text for people, for instance `Lemma 3`.
    pub text: Option<String>,
    /// The label in the manuscript.
    pub label: Option<String>,
}

/// A universally quantified variable of the whole dossier; also a constant that
/// is known only to lie in an interval.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Parameter {
    /// Name and domain.
    pub declaration: Declaration,
    /// Whether the user wrote `constant ... in ...`.
    pub is_constant: bool,
    /// Where it is declared.
    pub origin: Origin,
}

/// A condition on parameters that holds throughout the dossier.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Where {
    /// Its name; `where1`, `where2`, ... if the user gave none.
    pub name: Name,
    /// What it says.
    pub relation: Relation,
    /// Where it is written.
    pub origin: Origin,
}

/// A declared quantity.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Quantity {
    /// Name, arguments, range.
    pub signature: Signature,
    /// The names of the arguments as declared.
    pub argument_names: Vec<Name>,
    /// Where it is declared.
    pub origin: Origin,
}

/// A property at quantities; uninterpreted, matched by name and arguments.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Property {
    /// The property.
    pub name: Name,
    /// The quantities it is stated of.
    pub arguments: Vec<Name>,
}

impl fmt::Display for Property {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}({})", self.name, self.arguments.join(", "))
    }
}

/// What a fact or goal is stated for, and under what.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Context {
    /// Parameters in scope, in the order of the dossier.
    pub over: Vec<Name>,
    /// Names of the `where` conditions in force, in the order of the dossier.
    pub under: Vec<Name>,
    /// Quantities for which the statement holds whatever they are.
    pub schema: Vec<Signature>,
    /// Its own variables.
    pub variables: Vec<Declaration>,
    /// Its own hypotheses.
    pub given: Vec<Relation>,
    /// Properties it needs.
    pub requires: Vec<Property>,
}

/// What a fact says.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Says {
    /// Relations, at least one.
    Relations(Vec<Relation>),
    /// A property.
    Property(Property),
}

/// How the goals behind a proved fact give it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Proof {
    /// The goals' relations in order, by transitivity.
    Chain(Vec<Name>),
    /// One goal for each relation stated.
    All(Vec<Name>),
    /// From the lower end of an integer variable upwards.
    Induction {
        /// The variable.
        variable: Name,
        /// The goal at the lower end.
        base: Name,
        /// The goal one further up.
        step: Name,
    },
}

impl Proof {
    /// The goals it rests on.
    #[must_use]
    pub fn goals(&self) -> Vec<&Name> {
        match self {
            Proof::Chain(goals) | Proof::All(goals) => goals.iter().collect(),
            Proof::Induction { base, step, .. } => vec![base, step],
        }
    }
}

/// What a fact rests on.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Standing {
    /// Assumed.
    Assumption,
    /// Published; the text is the source.
    Cited(String),
    /// Proved outside the files; the text says where.
    Argued(String),
    /// Proved here.
    Proved(Proof),
}

/// Something a goal may use.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fact {
    /// Its name.
    pub name: Name,
    /// What it rests on.
    pub standing: Standing,
    /// For what it holds.
    pub context: Context,
    /// What it says.
    pub says: Says,
    /// Where it is written.
    pub origin: Origin,
}

impl Fact {
    /// The relations it states; none for a property.
    #[must_use]
    pub fn relations(&self) -> &[Relation] {
        match &self.says {
            Says::Relations(relations) => relations,
            Says::Property(_) => &[],
        }
    }
}

/// One instance of a fact.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Use {
    /// The fact.
    pub fact: Name,
    /// A term for every variable of the fact, in the fact's order.
    pub bindings: Vec<(Name, Term)>,
    /// A quantity for every quantity of the fact's schema, in its order.
    pub renamings: Vec<(Name, Name)>,
    /// The reason as the user wrote it.
    pub place: Option<Place>,
}

/// A named case of a claim, a hint for the search.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Case {
    /// Its name.
    pub name: Name,
    /// When it applies: all of these hold.
    pub condition: Vec<Relation>,
}

/// One relation to be established, with the facts it may use.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Goal {
    /// Its name: the item's, a dot, and the link's number or name.
    pub name: Name,
    /// The item it belongs to.
    pub item: Name,
    /// Its place in the item, from 1.
    pub link: usize,
    /// For what it is stated.
    pub context: Context,
    /// The instances it may use, in order.
    pub uses: Vec<Use>,
    /// What is to be established.
    pub relation: Relation,
    /// The user's case distinction, if any.
    pub cases: Vec<Case>,
    /// Properties that a used fact requires and nobody supplies. If there is one, the goal fails.
    pub missing: Vec<Property>,
    /// Where it is written.
    pub origin: Origin,
}

/// What the user wrote an item as.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ItemKind {
    /// A chain of links.
    Chain,
    /// A claim.
    Claim,
    /// A lemma that is proved here.
    Lemma,
}

/// A statement that is established by goals.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Item {
    /// Its name.
    pub name: Name,
    /// How it was written.
    pub kind: ItemKind,
    /// Its goals, in order.
    pub goals: Vec<Name>,
    /// The set of numbers it is stated at, if any.
    pub at: Option<Name>,
    /// Whether it comes from a used file.
    pub imported: bool,
    /// Where it is written.
    pub origin: Origin,
}

/// A named set of parameter values.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Numbers {
    /// Its name.
    pub name: Name,
    /// Values, closed terms, in the order of the parameters.
    pub values: Vec<(Name, Term)>,
    /// Where it is written.
    pub origin: Origin,
}

/// The logic of one dossier.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Theory {
    /// The file's name without folders and extension: the first part of every id.
    pub stem: String,
    /// The dossier's title.
    pub title: Option<String>,
    /// Parameters, in order.
    pub parameters: Vec<Parameter>,
    /// Conditions on the parameters, in order.
    pub wheres: Vec<Where>,
    /// Quantities, in order.
    pub quantities: Vec<Quantity>,
    /// Facts, in an order in which each uses earlier ones only.
    pub facts: Vec<Fact>,
    /// Goals, in an order in which each uses facts that rest on earlier ones only.
    pub goals: Vec<Goal>,
    /// Items, in order.
    pub items: Vec<Item>,
    /// Sets of numbers, in order.
    pub numbers: Vec<Numbers>,
    /// Exact constants with their values, in order.
    pub constants: Vec<(Name, Term, Origin)>,
}

impl Theory {
    /// The fact of that name.
    #[must_use]
    pub fn fact(&self, name: &str) -> Option<&Fact> {
        self.facts.iter().find(|f| &*f.name == name)
    }

    /// The goal of that name.
    #[must_use]
    pub fn goal(&self, name: &str) -> Option<&Goal> {
        self.goals.iter().find(|g| &*g.name == name)
    }

    /// The parameter of that name.
    #[must_use]
    pub fn parameter(&self, name: &str) -> Option<&Parameter> {
        self.parameters.iter().find(|p| &*p.declaration.name == name)
    }

    /// The signature of a quantity of the dossier.
    #[must_use]
    pub fn signature(&self, name: &str) -> Option<&Signature> {
        self.quantities.iter().map(|q| &q.signature).find(|s| &*s.name == name)
    }

    /// What a statement about `names` (parameters and quantities) must be stated
    /// over and under: everything that a chain of domains, quantity ranges and
    /// `where` conditions connects with it. The other parameters say nothing about it.
    /// A parameter with an end that mentions another one restricts that one, unless
    /// its domain visibly contains a point whatever the other is.
    #[must_use]
    pub fn reach(&self, names: &BTreeSet<Name>) -> (Vec<Name>, Vec<Name>) {
        let mut reached = names.clone();
        loop {
            let before_names = reached.clone();
            let before = reached.len();
            let mut join = |mut group: BTreeSet<Name>| {
                if group.iter().any(|n| reached.contains(n)) {
                    reached.append(&mut group);
                }
            };
            for p in &self.parameters {
                let d = &p.declaration;
                let mut group = domain_names(&d.domain);
                if group.is_empty() || (!before_names.contains(&d.name) && self.is_inhabited(&d.domain)) {
                    continue;
                }
                group.insert(d.name.clone());
                join(group);
            }
            for w in &self.wheres {
                join(relation_names(&w.relation));
            }
            for q in &self.quantities {
                let s = &q.signature;
                // A quantity needs the parameters of its signature, not the other way round.
                if reached.contains(&s.name) {
                    reached.extend(s.arguments.iter().chain([&s.range]).flat_map(domain_names));
                }
            }
            if reached.len() == before {
                break;
            }
        }
        let over = self.parameters.iter().map(|p| &p.declaration.name).filter(|n| reached.contains(*n));
        let under =
            self.wheres.iter().filter(|w| relation_names(&w.relation).iter().any(|n| reached.contains(n)));
        (over.cloned().collect(), under.map(|w| w.name.clone()).collect())
    }
}

impl Theory {
    /// Whether a domain visibly contains a point for all values of the parameters in
    /// its ends: one end is infinite, or one end is a literal that the other, a
    /// parameter, never crosses.
    fn is_inhabited(&self, domain: &Domain) -> bool {
        let (End::Finite(lower), End::Finite(upper)) = (&domain.lower, &domain.upper) else { return true };
        let of = |t: &Term| t.as_variable().and_then(|x| self.parameter(x)).map(|p| &p.declaration.domain);
        // Between a literal and a parameter beyond it; `strict` if they never meet.
        let strict = match (lower.as_number(), upper.as_number(), of(lower), of(upper)) {
            (Some(a), None, _, Some(q)) => match q.lower.finite().and_then(Term::as_number) {
                Some(end) if end > a => true,
                Some(end) if end == a => q.lower_open,
                _ => return false,
            },
            (None, Some(b), Some(q), _) => match q.upper.finite().and_then(Term::as_number) {
                Some(end) if end < b => true,
                Some(end) if end == b => q.upper_open,
                _ => return false,
            },
            _ => return false,
        };
        let closed = !domain.lower_open && !domain.upper_open;
        match domain.sort {
            Sort::Real => closed || strict,
            // A closed end that is an integer is a point itself.
            Sort::Integer => {
                let whole =
                    |t: &Term| t.as_integer().is_some() || of(t).is_some_and(|q| q.sort.is_discrete());
                closed && (whole(lower) || whole(upper))
            }
            Sort::Even => false,
        }
    }
}

/// The variables and quantities of a term.
pub(super) fn term_names(term: &Term) -> BTreeSet<Name> {
    let mut names = term.free_variables();
    names.extend(term.quantities());
    names
}

fn relation_names(relation: &Relation) -> BTreeSet<Name> {
    let mut names = term_names(&relation.left);
    names.extend(term_names(&relation.right));
    names
}

fn domain_names(domain: &Domain) -> BTreeSet<Name> {
    domain.ends().flat_map(term_names).collect()
}

//! What a theory obliges one to show: for every goal its link, the side
//! conditions of the instances it uses, and the definedness of all of it; for
//! every fact that is taken as given, its definedness; for the parameters, theirs.
//!
//! For a goal `g` with uses 1..n, Gamma_0 is its context and Gamma_i adds what
//! use i concludes. `g.s1`, `g.s2`, .. are the conditions of the instances, each
//! under Gamma_(i-1); `g.d1` the definedness of the context's own part, of the
//! terms put in, and of both sides; `g` itself is Gamma_n |- relation.
//! Conditions decided by literals, by one declared domain, or that are
//! literally a hypothesis or declared end, are not listed.

use std::collections::{BTreeMap, BTreeSet};

use super::defined::{Condition, conditions, is_trivial, require_defined};
use super::instance::{Instance, instantiate};
use super::rule::{Kernel, Signature};
use super::sequent::{Declaration, Goal, Relation, Sequent};
use super::step::Step;
use super::term::{Name, Term};
use super::theory::{Context, Fact, GoalStatement, Property, Standing, Theory};
use super::verdict::{Checked, Reason, refuse};

/// What kind of statement an obligation is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Kind {
    /// The relation of a goal.
    Link,
    /// A condition of an instance.
    Side,
    /// That terms are defined.
    Definedness,
}

/// One closed statement to be shown.
pub struct Obligation {
    /// Its name, such as `cut_tail.1`, `cut_tail.1.s1`, `growth.d1`.
    pub id: String,
    /// What kind of statement it is.
    pub kind: Kind,
    /// The sequent; for definedness, the last context with an absurd goal.
    pub sequent: Sequent,
    /// For definedness: contexts and the terms that must be defined there.
    pub pieces: Vec<(Sequent, Vec<Term>)>,
    /// The quantities in scope.
    pub quantities: BTreeMap<Name, Signature>,
    /// The goal or fact it belongs to; none for the parameters and quantities.
    pub owner: Option<Name>,
    /// How many uses of the goal come before it.
    pub used: usize,
}

impl Obligation {
    /// The statement as the kernel reads it.
    pub fn claim(&self) -> String {
        if self.kind != Kind::Definedness {
            return self.sequent.to_string();
        }
        let kernel = Kernel::new(self.quantities.clone());
        let mut wanted = BTreeSet::new();
        let mut words = Vec::new();
        for (s, terms) in &self.pieces {
            for c in terms.iter().flat_map(|t| conditions(s, &kernel, t)) {
                let text = match &c {
                    Condition::Unshowable(what) => format!("exists: {what}"),
                    _ => c.first().iter().map(ToString::to_string).collect::<Vec<_>>().join(" and "),
                };
                if wanted.insert(text.clone()) {
                    words.push(text);
                }
            }
        }
        let context = Sequent { goal: Goal::Absurd, ..self.sequent.clone() }.to_string();
        let context = context.strip_suffix("absurd").unwrap_or(&context);
        format!("{context}defined, that is {}", words.join(", "))
    }

    /// Checks a definedness obligation with the proofs listed in `step`.
    pub fn check_defined(&self, step: &Step, kernel: &Kernel) -> Checked {
        for (s, terms) in &self.pieces {
            require_defined(s, &terms.iter().collect::<Vec<_>>(), Some(step), kernel)?;
        }
        Ok(())
    }
}

/// All obligations of a theory, in the order of its text; or, for a goal that is
/// not well formed (a missing property, a wrong instance), its name and why.
pub struct Obligations {
    /// The obligations.
    pub list: Vec<Obligation>,
    /// Goals and proved facts that are refused as they stand.
    pub refused: Vec<(Name, super::verdict::Reject)>,
}

/// Derives the obligations.
pub fn obligations(theory: &Theory) -> Obligations {
    let mut all = Obligations { list: vec![], refused: vec![] };
    let domain = domain_pieces(theory);
    all.push_defined("domain.d1", domain, &theory.quantities, None, 0);
    for fact in &theory.facts {
        if !matches!(fact.standing, Standing::Proved(_)) && fact.property.is_none() {
            let quantities = in_scope(theory, &fact.context);
            let id = format!("{}.d1", fact.name);
            all.push_defined(&id, fact_pieces(theory, fact), &quantities, Some(&fact.name), 0);
        }
    }
    for goal in &theory.goals {
        match goal_obligations(theory, goal) {
            Ok((list, pieces)) => {
                let quantities = in_scope(theory, &goal.context);
                all.list.extend(list);
                let id = format!("{}.d1", goal.name);
                all.push_defined(&id, pieces, &quantities, Some(&goal.name), goal.uses.len());
            }
            Err(reject) => all.refused.push((goal.name.clone(), reject)),
        }
    }
    for fact in &theory.facts {
        if let Err(reject) = super::compose::check(theory, fact) {
            all.refused.push((fact.name.clone(), reject));
        }
    }
    all
}

impl Obligations {
    /// Adds a definedness obligation unless nothing is left to show.
    fn push_defined(
        &mut self,
        id: &str,
        pieces: Vec<(Sequent, Vec<Term>)>,
        quantities: &BTreeMap<Name, Signature>,
        owner: Option<&Name>,
        used: usize,
    ) {
        let kernel = Kernel::new(quantities.clone());
        let needed =
            |(s, terms): &(Sequent, Vec<Term>)| terms.iter().any(|t| !conditions(s, &kernel, t).is_empty());
        let pieces: Vec<_> = pieces.into_iter().filter(needed).collect();
        let Some((last, _)) = pieces.last() else { return };
        self.list.push(Obligation {
            id: id.into(),
            kind: Kind::Definedness,
            sequent: Sequent { goal: Goal::Absurd, ..last.clone() },
            pieces,
            quantities: quantities.clone(),
            owner: owner.cloned(),
            used,
        });
    }
}

/// The quantities in scope of a context; its own hide those of the dossier. One whose
/// signature mentions a parameter that the context does not speak of is out of scope:
/// the name may be a variable there.
pub fn in_scope(theory: &Theory, context: &Context) -> BTreeMap<Name, Signature> {
    let spoken_of = |(domains, range): &Signature| {
        domains.iter().chain([range]).all(|d| d.names().is_subset(&context.over))
    };
    let mut all = theory.quantities.clone();
    all.retain(|_, signature| spoken_of(signature));
    all.extend(context.schema.iter().cloned());
    all
}

/// The quantities of the dossier that the fact speaks of.
fn global_quantities(fact: &Fact) -> BTreeSet<Name> {
    let c = &fact.context;
    let ends = c.variables.iter().flat_map(|d| [&d.domain.lower, &d.domain.upper]).flatten();
    let sides = c.given.iter().chain(&fact.states).flat_map(|r| [&r.left, &r.right]);
    let mut found: BTreeSet<Name> = ends.map(|e| &e.term).chain(sides).flat_map(Term::quantities).collect();
    found.extend(c.requires.iter().chain(&fact.property).flat_map(|(_, args)| args.iter().cloned()));
    found.retain(|q| !c.schema.iter().any(|(own, _)| own == q));
    found
}

fn empty() -> Sequent {
    Sequent { variables: vec![], hypotheses: vec![], goal: Goal::Absurd }
}

/// Definedness of declarations, one after the other, starting from `s`.
fn declared(s: &mut Sequent, declarations: &[Declaration], pieces: &mut Vec<(Sequent, Vec<Term>)>) {
    for d in declarations {
        let ends = [&d.domain.lower, &d.domain.upper].into_iter().flatten().map(|e| e.term.clone());
        pieces.push((s.clone(), ends.collect()));
        s.variables.push(d.clone());
    }
}

/// Definedness of hypotheses, one after the other.
fn supposed(s: &mut Sequent, hypotheses: &[Relation], pieces: &mut Vec<(Sequent, Vec<Term>)>) {
    for h in hypotheses {
        pieces.push((s.clone(), vec![h.left.clone(), h.right.clone()]));
        s.hypotheses.push(h.clone());
    }
}

fn domain_pieces(theory: &Theory) -> Vec<(Sequent, Vec<Term>)> {
    let mut pieces = Vec::new();
    let mut s = empty();
    declared(&mut s, &theory.parameters, &mut pieces);
    let wheres: Vec<Relation> = theory.wheres.iter().map(|(_, r)| r.clone()).collect();
    supposed(&mut s, &wheres, &mut pieces);
    for (domains, range) in theory.quantities.values() {
        let ends = domains.iter().chain([range]).flat_map(|d| [&d.lower, &d.upper]).flatten();
        pieces.push((s.clone(), ends.map(|e| e.term.clone()).collect()));
    }
    pieces
}

/// The parameters and global conditions of a context.
pub fn global_part(theory: &Theory, c: &Context) -> Sequent {
    let mut s = empty();
    s.variables = theory.parameters.iter().filter(|d| c.over.contains(&d.name)).cloned().collect();
    s.hypotheses =
        theory.wheres.iter().filter(|(n, _)| c.under.contains(n)).map(|(_, r)| r.clone()).collect();
    s
}

/// The whole context of a fact or goal, without anything used.
pub fn full_context(theory: &Theory, c: &Context) -> Sequent {
    let mut s = global_part(theory, c);
    s.variables.extend(c.variables.iter().cloned());
    s.hypotheses.extend(c.given.iter().cloned());
    s
}

fn own_pieces(theory: &Theory, c: &Context) -> (Sequent, Vec<(Sequent, Vec<Term>)>) {
    let mut pieces = Vec::new();
    let mut s = global_part(theory, c);
    declared(&mut s, &c.variables, &mut pieces);
    supposed(&mut s, &c.given, &mut pieces);
    (s, pieces)
}

fn fact_pieces(theory: &Theory, fact: &Fact) -> Vec<(Sequent, Vec<Term>)> {
    let (mut s, mut pieces) = own_pieces(theory, &fact.context);
    supposed(&mut s, &fact.states, &mut pieces);
    pieces
}

/// The instances a goal uses, each with the context before it.
pub fn instances(theory: &Theory, goal: &GoalStatement) -> Checked<(Vec<(Sequent, Instance)>, Sequent)> {
    let mut s = full_context(theory, &goal.context);
    let quantities = in_scope(theory, &goal.context);
    let mut found: Vec<(Sequent, Instance)> = Vec::new();
    for u in &goal.uses {
        let Some(fact) = theory.fact(&u.fact) else {
            return refuse(Reason::Name, format!("`{}` is not a fact", u.fact));
        };
        if !fact.context.over.is_subset(&goal.context.over)
            || !fact.context.under.is_subset(&goal.context.under)
        {
            let why = format!("`{}` speaks of parameters or conditions that the goal does not", fact.name);
            return refuse(Reason::Condition, why);
        }
        let means_another = global_quantities(fact);
        if let Some((q, _)) = goal.context.schema.iter().find(|(q, _)| means_another.contains(q)) {
            let why = format!("`{q}` of `{}` is hidden by the goal's own `{q}`", fact.name);
            return refuse(Reason::Name, why);
        }
        let instance = instantiate(fact, u, &s, &quantities)?;
        let before = s.clone();
        s.hypotheses.extend(instance.conclusions.iter().cloned());
        found.push((before, instance));
    }
    // A property that depends on something is at hand only after it: two facts that
    // give each other what they need would prove anything.
    let free = |i: &&Instance| i.requires.is_empty() && i.conditions.is_empty();
    let unconditional = found.iter().map(|(_, i)| i).filter(free).filter_map(|i| i.property.as_ref());
    let mut at_hand: Vec<&Property> = goal.context.requires.iter().chain(unconditional).collect();
    for (_, instance) in &found {
        if let Some((name, args)) = instance.requires.iter().find(|p| !at_hand.contains(p)) {
            let args: Vec<&str> = args.iter().map(|a| &**a).collect();
            return refuse(Reason::Condition, format!("missing property {name}({})", args.join(", ")));
        }
        at_hand.extend(&instance.property);
    }
    Ok((found, s))
}

type Pieces = Vec<(Sequent, Vec<Term>)>;

fn goal_obligations(theory: &Theory, goal: &GoalStatement) -> Checked<(Vec<Obligation>, Pieces)> {
    let (instances, last) = instances(theory, goal)?;
    let quantities = in_scope(theory, &goal.context);
    let (_, mut pieces) = own_pieces(theory, &goal.context);
    let mut list = Vec::new();
    let obligation = |id: String, kind, sequent, used| Obligation {
        id,
        kind,
        sequent,
        pieces: vec![],
        quantities: quantities.clone(),
        owner: Some(goal.name.clone()),
        used,
    };
    let mut count = 0;
    for (used, (before, instance)) in instances.iter().enumerate() {
        pieces.push((before.clone(), instance.terms.clone()));
        for condition in &instance.conditions {
            if is_at_hand(before, condition) {
                continue;
            }
            count += 1;
            let id = format!("{}.s{count}", goal.name);
            list.push(obligation(id, Kind::Side, before.with_goal(condition.clone()), used));
        }
    }
    pieces.push((last.clone(), vec![goal.relation.left.clone(), goal.relation.right.clone()]));
    let link = last.with_goal(goal.relation.clone());
    list.push(obligation(goal.name.to_string(), Kind::Link, link, goal.uses.len()));
    Ok((list, pieces))
}

/// Whether a condition is decided by literals or literally at hand.
fn is_at_hand(s: &Sequent, condition: &Relation) -> bool {
    let turned = condition.turned();
    let declared = s.variables.iter().any(|d| {
        let (lower, upper) = s.ends(&d.name);
        lower.as_ref() == Some(&turned) || upper.as_ref() == Some(&turned)
    });
    declared || is_trivial(s, condition) || s.hypotheses.iter().any(|h| h.turned() == turned)
}

//! How goals make a proved fact: transitivity, one by one, or induction.
//!
//! The goals must be stated under the fact's own context, or under less of it
//! (fewer parameters and global conditions). Chain: the goals' relations stand
//! end to end, all in one direction; a stated relation is a stretch of the chain
//! with the strongest relation that transitivity gives, or a weaker one. All: the
//! i-th goal is the i-th relation. Induction over an integer variable without
//! upper end: the base is the statement at the lower end, the step gives the
//! statement at m + 1 from the statement at m; hypotheses and other domains do
//! not mention m.

use super::integer::is_integer;
use super::obligation::full_context;
use super::sequent::{Rel, Relation, Sort};
use super::term::{Name, Term};
use super::theory::{Context, Fact, GoalStatement, Proof, Standing, Theory};
use super::verdict::{Checked, Reason, refuse};

/// Checks that a proved fact follows from the goals it names; others pass.
pub fn check(theory: &Theory, fact: &Fact) -> Checked {
    let Standing::Proved(proof) = &fact.standing else { return Ok(()) };
    if fact.property.is_some() {
        return refuse(Reason::Condition, format!("`{}`: a property is not proved from goals", fact.name));
    }
    match proof {
        Proof::Chain(names) => {
            let goals = under_context(theory, fact, names)?;
            fact.states.iter().try_for_each(|r| stretch(&goals, r, &fact.name))
        }
        Proof::All(names) => {
            let goals = under_context(theory, fact, names)?;
            let same = goals.len() == fact.states.len()
                && goals.iter().zip(&fact.states).all(|(g, r)| g.relation == *r);
            if same {
                Ok(())
            } else {
                refuse(Reason::Condition, format!("`{}` states other relations than its goals", fact.name))
            }
        }
        Proof::Induction { variable, base, step } => induction(theory, fact, variable, base, step),
    }
}

fn under_context<'a>(theory: &'a Theory, fact: &Fact, names: &[Name]) -> Checked<Vec<&'a GoalStatement>> {
    let mut goals = Vec::new();
    for name in names {
        let Some(goal) = theory.goal(name) else {
            return refuse(Reason::Name, format!("`{name}` is not a goal"));
        };
        if !serves(&goal.context, &fact.context) {
            return refuse(
                Reason::Condition,
                format!("`{name}` is stated under another context than `{}`", fact.name),
            );
        }
        goals.push(goal);
    }
    Ok(goals)
}

/// Whether what is shown under `goal` is shown under `fact`.
fn serves(goal: &Context, fact: &Context) -> bool {
    goal.over.is_subset(&fact.over)
        && goal.under.is_subset(&fact.under)
        && goal.schema == fact.schema
        && goal.variables == fact.variables
        && goal.given == fact.given
        && goal.requires == fact.requires
}

/// Whether a relation is a stretch of the chain.
fn stretch(goals: &[&GoalStatement], stated: &Relation, fact: &str) -> Checked {
    for first in 0..goals.len() {
        if goals[first].relation.left != stated.left {
            continue;
        }
        let mut reached = goals[first].relation.clone();
        for next in first.. {
            if reached.right == stated.right && implies(reached.rel, stated.rel) {
                return Ok(());
            }
            let Some(goal) = goals.get(next + 1) else { break };
            if goal.relation.left != reached.right {
                break;
            }
            let Some(rel) = transitive(reached.rel, goal.relation.rel) else { break };
            reached = Relation::new(reached.left, rel, goal.relation.right.clone());
        }
    }
    refuse(Reason::Condition, format!("`{fact}`: {stated} is not a stretch of its chain"))
}

/// `a r b` and `b s c` give `a t c`.
fn transitive(r: Rel, s: Rel) -> Option<Rel> {
    match (r, s) {
        (Rel::Eq, other) | (other, Rel::Eq) => Some(other),
        (Rel::Le, Rel::Le) => Some(Rel::Le),
        (Rel::Le | Rel::Lt, Rel::Le | Rel::Lt) => Some(Rel::Lt),
        (Rel::Ge, Rel::Ge) => Some(Rel::Ge),
        (Rel::Ge | Rel::Gt, Rel::Ge | Rel::Gt) => Some(Rel::Gt),
        _ => None,
    }
}

fn implies(known: Rel, wanted: Rel) -> bool {
    known == wanted
        || matches!(
            (known, wanted),
            (Rel::Lt, Rel::Le | Rel::Ne) | (Rel::Gt, Rel::Ge | Rel::Ne) | (Rel::Eq, Rel::Le | Rel::Ge)
        )
}

fn induction(theory: &Theory, fact: &Fact, variable: &Name, base: &Name, step: &Name) -> Checked {
    let c = &fact.context;
    let wrong = |why: &str| refuse(Reason::Condition, format!("`{}`: {why}", fact.name));
    let [stated] = fact.states.as_slice() else { return wrong("induction states one relation") };
    let Some(d) = c.variables.iter().find(|d| d.name == *variable) else {
        return wrong("the variable of the induction is not its own");
    };
    let (Some(lower), None) = (&d.domain.lower, &d.domain.upper) else {
        return wrong("the variable of an induction has a lower end and no upper end");
    };
    let others: Vec<_> = c.variables.iter().filter(|o| o.name != *variable).cloned().collect();
    let mentioned = c.given.iter().any(|g| g.mentions(variable))
        || others.iter().any(|o| {
            [&o.domain.lower, &o.domain.upper].into_iter().flatten().any(|e| e.term.mentions(variable))
        });
    if mentioned {
        return wrong("a hypothesis or another domain mentions the variable of the induction");
    }
    let whole = is_integer(&full_context(theory, c), &lower.term);
    if d.domain.sort != Sort::Integer || lower.open || !whole {
        return wrong(
            "the induction needs an integer variable with a closed lower end that is an integer by its shape",
        );
    }
    let (Some(base), Some(step)) = (theory.goal(base), theory.goal(step)) else {
        return wrong("base or step is not a goal");
    };
    let base_context = Context { variables: others, ..c.clone() };
    let at = |t: &Term| stated.map(|side| side.substitute(variable, t));
    if !serves(&base.context, &base_context) || base.relation != at(&lower.term) {
        return wrong("the base is not the statement at the lower end");
    }
    let mut step_context = c.clone();
    step_context.given.push(stated.clone());
    let next = Term::variable(variable).add(&Term::integer(1));
    if !serves(&step.context, &step_context) || step.relation != at(&next) {
        return wrong("the step does not lead from the statement to its successor");
    }
    Ok(())
}

//! Other forms of an inequality with the same meaning: squares of both sides, if one
//! is a root, and logarithms, if both are products of powers.

use crate::enclosure::Function;
use crate::expression::{Node, Term};
use crate::search::engine::Stuck;
use crate::search::proof::Proof;
use crate::statement::{Rel, Relation, Sequent};

/// A form: its goal, and what the step to it has to show.
pub struct Form {
    /// The new goal.
    pub goal: Relation,
    /// The word after `both`; none if nothing changes.
    rule: Option<&'static str>,
    conditions: Vec<Relation>,
}

impl Form {
    /// The proof of the old goal from one of the new, `prove` proving the conditions.
    pub fn wrap(
        &self,
        s: &Sequent,
        rest: Proof,
        prove: &mut dyn FnMut(&Sequent) -> Result<Proof, Stuck>,
    ) -> Result<Proof, Stuck> {
        let Some(rule) = self.rule else { return Ok(rest) };
        let mut proof = Proof::new("both").word(rule);
        for c in &self.conditions {
            proof = proof.with(prove(&s.with_goal(c.clone()))?);
        }
        Ok(proof.with(rest))
    }
}

/// The goal as it stands.
pub fn plain(_: &Sequent, goal: &Relation) -> Option<Form> {
    Some(Form { goal: goal.clone(), rule: None, conditions: Vec::new() })
}

/// Both sides squared, if one of them is a root or a multiple of one.
pub fn squares(_: &Sequent, goal: &Relation) -> Option<Form> {
    let (l, r) = (square(&goal.left), square(&goal.right));
    if l.is_none() && r.is_none() {
        return None;
    }
    let two = Term::integer(2);
    let l = l.unwrap_or_else(|| goal.left.power(&two));
    let r = r.unwrap_or_else(|| goal.right.power(&two));
    let condition = Relation::new(goal.right.clone(), Rel::GreaterEqual, Term::integer(0));
    Some(Form { goal: Relation::new(l, goal.rel, r), rule: Some("square"), conditions: vec![condition] })
}

/// The square of a term that is itself a root.
fn square(t: &Term) -> Option<Term> {
    matches!(t.node(), Node::Apply(Function::Sqrt, _)).then(|| t.power(&Term::integer(2)))
}

/// The logarithms of both sides, if powers or exponentials stand in products.
pub fn logarithms(_: &Sequent, goal: &Relation) -> Option<Form> {
    if !(has_power(&goal.left) || has_power(&goal.right)) {
        return None;
    }
    let zero = Term::integer(0);
    let positive = |t: &Term| Relation::new(t.clone(), Rel::Greater, zero.clone());
    let log = |t: &Term| Term::apply1(Function::Log, t);
    Some(Form {
        goal: Relation::new(log(&goal.left), goal.rel, log(&goal.right)),
        rule: Some("log"),
        conditions: vec![positive(&goal.left), positive(&goal.right)],
    })
}

fn has_power(t: &Term) -> bool {
    match t.node() {
        Node::Multiply(a, b) | Node::Divide(a, b) => has_power(a) || has_power(b),
        Node::Power(_, p) => p.as_integer().is_none() || p.as_number().is_none(),
        Node::Apply(Function::Exp | Function::Gamma, _) => true,
        _ => false,
    }
}

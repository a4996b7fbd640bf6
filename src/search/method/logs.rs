//! Logarithms of both sides: positive products of powers and exponentials, whose
//! logarithms are sums that can be combined.

use crate::enclosure::Function;
use crate::expression::{Node, Term};
use crate::statement::{Conclusion, Rel, Relation, Sequent};

use super::super::engine::{Answer, Method, Search, Stuck};
use super::super::proof::Proof;

/// The method.
pub struct Logarithms;

impl Method for Logarithms {
    fn name(&self) -> &'static str {
        "logarithms of both sides"
    }

    fn share(&self) -> u64 {
        30
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let Some(goal) = s.relation().map(Relation::turned) else {
            return Err(Stuck::NotApplicable("no relation"));
        };
        if !matches!(goal.rel, Rel::LessEqual | Rel::Less) {
            return Err(Stuck::NotApplicable("no inequality"));
        }
        if !is_product(&goal.left) || !is_product(&goal.right) {
            return Err(Stuck::NotApplicable("no products on both sides"));
        }
        if !grows(&goal.left) && !grows(&goal.right) {
            return Err(Stuck::NotApplicable("no exponentials or symbolic powers"));
        }
        let step = Proof::new("both").word("log").with(Proof::new("sign")).with(Proof::new("sign"));
        if search.examine(s, &step.clone().with(Proof::open()))? != Answer::Open {
            return Err(Stuck::NotApplicable("sides not seen to be positive"));
        }
        let log = |t: &Term| Term::apply1(Function::Log, t);
        let inner = Sequent { goal: Conclusion::Relation(goal.map(log)), ..s.clone() };
        Ok(step.with(search.prove(&inner)?))
    }
}

/// Whether the term is built by products, quotients, powers and roots from parts of which
/// none is a sum that would hide an exponential.
fn is_product(t: &Term) -> bool {
    match t.node() {
        Node::Multiply(a, b) | Node::Divide(a, b) => is_product(a) && is_product(b),
        Node::Power(a, _) => is_product(a),
        Node::Apply(Function::Sqrt, args) => is_product(&args[0]),
        Node::Add(a, b) | Node::Subtract(a, b) => !grows(a) && !grows(b),
        _ => true,
    }
}

/// Whether an exponential or a power with a symbolic exponent occurs.
fn grows(t: &Term) -> bool {
    let mut found = false;
    t.walk(&mut |t| {
        found |= match t.node() {
            Node::Apply(Function::Exp, _) => true,
            Node::Power(_, p) => p.as_number().is_none(),
            _ => false,
        };
        !found
    });
    found
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::*;

    #[test]
    fn exponentials_against_what_their_exponents_give() {
        let given = "for d in (0, 1], n in [1, infinity), c in (0, infinity), V in (0, infinity) \
                     given n >= 2*(V + c/3)/c^2*log(2/d)";
        proves(&Logarithms, &format!("{given}: exp(-(n*c^2/(2*(V + c/3)))) <= d/2"), "both log");
        leaves(&Logarithms, &[&format!("{given}: exp(-(n*c^2/(2*(V + c/3)))) <= d/3")]);
    }

    #[test]
    fn products_of_symbolic_powers() {
        let given = "for x in [1, infinity), y in [1, infinity), r in [1, infinity)";
        proves(&Logarithms, &format!("{given}: (x*y)^r <= x^(2*r)*y^r"), "both log");
        leaves(&Logarithms, &[&format!("{given}: x^(2*r)*y^r <= (x*y)^r")]);
        // Nothing says that x is positive.
        leaves(&Logarithms, &["for x in [-1, 1], r in [1, 2]: exp(r)*x <= exp(2*r)"]);
    }
}

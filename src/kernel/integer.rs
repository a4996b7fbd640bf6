//! Which terms are integers, or even, wherever they are defined: by shape alone.
//!
//! Statement: if the function says yes, every value of the term is an integer
//! (even integer). Sound by induction on the term: sums, differences, products
//! and natural powers of integers are integers; half an even integer is one.

use num_integer::Integer;
use num_traits::Signed;

use super::number::Function;
use super::sequent::{Sequent, Sort};
use super::term::{Node, SeriesKind, Term};

/// Whether every value of the term is an integer.
pub fn is_integer(s: &Sequent, term: &Term) -> bool {
    match &**term {
        Node::Number(q) => q.is_integer(),
        Node::Constant(_) => false,
        Node::Variable(x) => s.declaration(x).is_some_and(|d| d.domain.sort != Sort::Real),
        Node::Negate(a) => is_integer(s, a),
        Node::Add(a, b) | Node::Subtract(a, b) | Node::Multiply(a, b) => is_integer(s, a) && is_integer(s, b),
        Node::Divide(a, b) => *b == Term::integer(2) && is_even(s, a),
        Node::Power(b, p) => is_integer(s, b) && is_natural(s, p),
        Node::Apply(f, args) => match f {
            Function::Floor | Function::Ceil | Function::Factorial | Function::Binomial => true,
            Function::Abs | Function::Min | Function::Max => args.iter().all(|a| is_integer(s, a)),
            _ => false,
        },
        // The range a quantity is declared with is known to the rule that abstracts it.
        Node::Quantity(..) => false,
        Node::Series { kind, index, body, .. } => {
            // The index is an integer; a declared variable of the same name is hidden by it.
            *kind != SeriesKind::Integral && is_integer(&with_index(s, index), body)
        }
    }
}

/// Whether every value of the term is an even integer.
pub fn is_even(s: &Sequent, term: &Term) -> bool {
    match &**term {
        Node::Number(q) => q.is_integer() && q.to_integer().is_even(),
        Node::Variable(x) => s.declaration(x).is_some_and(|d| d.domain.sort == Sort::Even),
        Node::Negate(a) => is_even(s, a),
        Node::Add(a, b) | Node::Subtract(a, b) => is_even(s, a) && is_even(s, b),
        Node::Multiply(a, b) => (is_even(s, a) && is_integer(s, b)) || (is_integer(s, a) && is_even(s, b)),
        _ => false,
    }
}

/// A literal natural number, or an integer variable with a literal end at 0 or above.
fn is_natural(s: &Sequent, term: &Term) -> bool {
    match &**term {
        Node::Number(q) => q.is_integer() && !q.is_negative(),
        Node::Variable(x) => s.declaration(x).is_some_and(|d| {
            let end = d.domain.lower.as_ref().and_then(|e| e.term.as_number());
            d.domain.sort != Sort::Real && end.is_some_and(|q| !q.is_negative())
        }),
        Node::Add(a, b) | Node::Multiply(a, b) => is_natural(s, a) && is_natural(s, b),
        _ => false,
    }
}

/// The context inside a series: the index is an integer of unknown range.
pub fn with_index(s: &Sequent, index: &str) -> Sequent {
    use super::sequent::{Declaration, Domain};
    let mut inner = s.clone();
    inner.variables.retain(|d| &*d.name != index);
    let domain = Domain { sort: Sort::Integer, lower: None, upper: None };
    inner.variables.push(Declaration { name: index.into(), domain });
    inner
}

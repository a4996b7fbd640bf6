//! Which terms are integers by their shape alone.
//!
//! Source of the rule: sums, products, differences and natural powers of integers
//! are integers, and so are the values of floor, ceil, factorial and binomial.
//! Nothing is evaluated or proved here; "no" only means "not visible".

use num_integer::Integer;
use num_traits::Signed;

use crate::enclosure::Function;

use super::term::{End, Name, Node, SeriesKind, Term};

/// The kind of numbers a variable or a quantity ranges over.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Sort {
    /// Real numbers.
    Real,
    /// Integers.
    Integer,
    /// Even integers.
    Even,
}

impl Sort {
    /// The word of the plain form.
    #[must_use]
    pub const fn name(self) -> &'static str {
        match self {
            Sort::Real => "real",
            Sort::Integer => "integer",
            Sort::Even => "even",
        }
    }

    /// Whether only integers belong to the sort.
    #[must_use]
    pub fn is_discrete(self) -> bool {
        self != Sort::Real
    }
}

/// Tells the sorts of the names in force.
pub trait Sorts {
    /// The sort of a variable; unknown names are real.
    fn of_variable(&self, name: &Name) -> Sort;

    /// The sort of a quantity's values; unknown names are real.
    fn of_quantity(&self, name: &Name) -> Sort {
        let _ = name;
        Sort::Real
    }
}

impl<F: Fn(&Name) -> Sort> Sorts for F {
    fn of_variable(&self, name: &Name) -> Sort {
        self(name)
    }
}

/// Whether the term is visibly an integer wherever it is defined.
#[must_use]
pub fn is_integer(term: &Term, sorts: &dyn Sorts) -> bool {
    integer(term, sorts, &mut Vec::new())
}

/// Whether the term is visibly an even integer wherever it is defined.
#[must_use]
pub fn is_even(term: &Term, sorts: &dyn Sorts) -> bool {
    even(term, sorts, &mut Vec::new())
}

fn integer(term: &Term, sorts: &dyn Sorts, indices: &mut Vec<(Name, bool)>) -> bool {
    match term.node() {
        Node::Number(a) => a.is_integer(),
        Node::Constant(_) => false,
        Node::Variable(name) => match indices.iter().rev().find(|(index, _)| index == name) {
            Some((_, discrete)) => *discrete,
            None => sorts.of_variable(name).is_discrete(),
        },
        Node::Negate(a) => integer(a, sorts, indices),
        Node::Add(a, b) | Node::Subtract(a, b) | Node::Multiply(a, b) => {
            integer(a, sorts, indices) && integer(b, sorts, indices)
        }
        Node::Divide(a, b) => match b.as_integer() {
            Some(n) if *n == 1.into() || *n == (-1).into() => integer(a, sorts, indices),
            Some(n) if *n == 2.into() || *n == (-2).into() => even(a, sorts, indices),
            _ => false,
        },
        Node::Power(a, n) => n.as_integer().is_some_and(Signed::is_positive) && integer(a, sorts, indices),
        Node::Apply(function, args) => match function {
            Function::Floor | Function::Ceil | Function::Factorial | Function::Binomial => true,
            Function::Abs | Function::Min | Function::Max => args.iter().all(|a| integer(a, sorts, indices)),
            _ => false,
        },
        Node::Quantity(name, _) => sorts.of_quantity(name).is_discrete(),
        Node::Series { kind: SeriesKind::Integral, .. } => false,
        Node::Series { index, lower, upper, body, .. } => {
            if !matches!((lower, upper), (End::Finite(_), End::Finite(_))) {
                return false;
            }
            indices.push((index.clone(), true));
            let answer = integer(body, sorts, indices);
            indices.pop();
            answer
        }
    }
}

fn even(term: &Term, sorts: &dyn Sorts, indices: &mut Vec<(Name, bool)>) -> bool {
    match term.node() {
        Node::Number(a) => a.is_integer() && a.numer().is_even(),
        Node::Variable(name) => {
            !indices.iter().any(|(index, _)| index == name) && sorts.of_variable(name) == Sort::Even
        }
        Node::Negate(a) => even(a, sorts, indices),
        Node::Add(a, b) | Node::Subtract(a, b) => even(a, sorts, indices) && even(b, sorts, indices),
        Node::Multiply(a, b) => {
            (even(a, sorts, indices) && integer(b, sorts, indices))
                || (integer(a, sorts, indices) && even(b, sorts, indices))
        }
        Node::Power(a, n) => n.as_integer().is_some_and(Signed::is_positive) && even(a, sorts, indices),
        Node::Quantity(name, _) => sorts.of_quantity(name) == Sort::Even,
        _ => false,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::sample::term;

    #[test]
    fn shapes() {
        let sorts = |name: &Name| match &**name {
            "n" | "k" => Sort::Integer,
            "s" => Sort::Even,
            _ => Sort::Real,
        };
        for text in [
            "3",
            "n + k*n - 2",
            "n^3",
            "floor(x)",
            "2*ceil(x/2) + 1",
            "factorial(n)",
            "binomial(n, k)",
            "s/2",
            "n*s/2",
            "(s + 4)/2",
            "sum(j = 1 .. n, j^2)",
            "max(n, k)",
            "-n",
            "s^2/2",
        ] {
            assert!(is_integer(&term(text), &sorts), "{text}");
        }
        for text in [
            "1/2",
            "x",
            "n/2",
            "n^k",
            "n^-1",
            "n^0",
            "exp(n)",
            "(s + 1)/2",
            "sum(s = 1 .. n, s)/2",
            "s/4",
            "integral(t = 0 .. n, t)",
        ] {
            assert!(!is_integer(&term(text), &sorts), "{text}");
        }
        assert!(is_even(&term("2*n + s"), &sorts));
        assert!(is_even(&term("2*ceil(x/2)"), &sorts));
        assert!(!is_even(&term("n + s"), &sorts));
        assert!(!is_even(&term("2*x"), &sorts));
    }
}

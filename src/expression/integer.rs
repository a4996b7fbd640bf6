//! Which terms are integers by their shape alone.
//!
//! Source of the rule: sums, products, differences and natural powers of integers
//! are integers, and so are the values of floor, ceil, factorial and binomial. The kernel has the
//! same rule; where the two differ, an obligation is lost to the search.
//! Nothing is evaluated or proved here; "no" only means "not visible".

use num_integer::Integer;
use num_traits::Signed;

use crate::enclosure::Function;

use super::term::{Name, Node, SeriesKind, Term};

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

    /// Whether the variable has a literal lower end at 0 or above.
    fn is_non_negative(&self, name: &Name) -> bool;
}

/// Whether the term is visibly an integer wherever it is defined.
#[must_use]
pub fn is_integer(term: &Term, sorts: &dyn Sorts) -> bool {
    match term.node() {
        Node::Number(a) => a.is_integer(),
        Node::Constant(_) => false,
        Node::Variable(name) => sorts.of_variable(name).is_discrete(),
        Node::Negate(a) => is_integer(a, sorts),
        Node::Add(a, b) | Node::Subtract(a, b) | Node::Multiply(a, b) => {
            is_integer(a, sorts) && is_integer(b, sorts)
        }
        Node::Divide(a, b) => b.as_integer().is_some_and(|n| *n == 2.into()) && is_even(a, sorts),
        Node::Power(a, n) => is_integer(a, sorts) && is_natural(n, sorts),
        Node::Apply(function, args) => match function {
            Function::Floor | Function::Ceil | Function::Factorial | Function::Binomial => true,
            Function::Abs | Function::Min | Function::Max => args.iter().all(|a| is_integer(a, sorts)),
            _ => false,
        },
        Node::Quantity(..) => false,
        Node::Series { kind, index, body, .. } => {
            *kind != SeriesKind::Integral && is_integer(body, &WithIndex { index, outer: sorts })
        }
    }
}

/// Whether the term is visibly an even integer wherever it is defined.
#[must_use]
pub fn is_even(term: &Term, sorts: &dyn Sorts) -> bool {
    match term.node() {
        Node::Number(a) => a.is_integer() && a.numer().is_even(),
        Node::Variable(name) => sorts.of_variable(name) == Sort::Even,
        Node::Negate(a) => is_even(a, sorts),
        Node::Add(a, b) | Node::Subtract(a, b) => is_even(a, sorts) && is_even(b, sorts),
        Node::Multiply(a, b) => {
            (is_even(a, sorts) && is_integer(b, sorts)) || (is_integer(a, sorts) && is_even(b, sorts))
        }
        _ => false,
    }
}

/// Whether the term has the sort by its shape.
#[must_use]
pub fn has_sort(term: &Term, sort: Sort, sorts: &dyn Sorts) -> bool {
    match sort {
        Sort::Real => true,
        Sort::Integer => is_integer(term, sorts),
        Sort::Even => is_even(term, sorts),
    }
}

/// A literal natural number, an integer variable from 0 on, or a sum or product of such.
fn is_natural(term: &Term, sorts: &dyn Sorts) -> bool {
    match term.node() {
        Node::Number(a) => a.is_integer() && !a.is_negative(),
        Node::Variable(name) => sorts.of_variable(name).is_discrete() && sorts.is_non_negative(name),
        Node::Add(a, b) | Node::Multiply(a, b) => is_natural(a, sorts) && is_natural(b, sorts),
        _ => false,
    }
}

/// The names inside a series: the index is an integer of unknown range.
struct WithIndex<'a> {
    index: &'a Name,
    outer: &'a dyn Sorts,
}

impl Sorts for WithIndex<'_> {
    fn of_variable(&self, name: &Name) -> Sort {
        if name == self.index { Sort::Integer } else { self.outer.of_variable(name) }
    }

    fn is_non_negative(&self, name: &Name) -> bool {
        name != self.index && self.outer.is_non_negative(name)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::sample::term;

    #[test]
    fn shapes() {
        struct Names;
        impl Sorts for Names {
            fn of_variable(&self, name: &Name) -> Sort {
                match &**name {
                    "n" | "k" => Sort::Integer,
                    "s" => Sort::Even,
                    _ => Sort::Real,
                }
            }
            fn is_non_negative(&self, name: &Name) -> bool {
                &**name == "k"
            }
        }
        let sorts = Names;
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
            "s*s/2",
            "2^k",
            "n^(2*k + 1)",
        ] {
            assert!(is_integer(&term(text), &sorts), "{text}");
        }
        for text in [
            "1/2",
            "x",
            "n/2",
            "k^n",
            "n^-1",
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

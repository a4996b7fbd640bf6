//! What a term needs in order to be defined, as conditions to be shown.
//!
//! `a/b` needs `b != 0`; `log` a positive argument; `b^p` a positive base, or an
//! integer exponent with a non-zero base or a positive exponent, or a base `>= 0`
//! with a positive exponent (so `0^0` is undefined); a quantity an argument in its
//! declared domain; and so on. The kernel has its own copy of this list.

use num_traits::Signed;

use crate::expression::Function;
use crate::expression::{End, Name, Node, SeriesKind, Sort, Term, has_sort, is_integer};

use super::declaration::{Declaration, Domain, Signature};
use super::relation::{Rel, Relation};
use super::sequent::Sequent;

/// One thing a term needs in order to be defined.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Condition {
    /// At least one of these conjunctions holds for all values of the indices.
    OneOf {
        /// The indices of the enclosing series, outermost first.
        indices: Vec<Declaration>,
        /// Alternatives, each a conjunction; the usual one first.
        alternatives: Vec<Vec<Relation>>,
        /// Further alternatives that no proof may use and a witness must violate as well.
        also: Vec<Vec<Relation>>,
    },
    /// A term in an integer position is not an integer by its shape.
    NotOfSort {
        /// The term.
        term: Term,
        /// What it would have to be.
        sort: Sort,
    },
    /// Something that no relation expresses, said in words.
    Unshowable(String),
}

/// Where the signatures of quantities are found.
pub trait Signatures {
    /// The signature of a quantity, if it is declared.
    fn signature(&self, quantity: &str) -> Option<&Signature>;
}

impl Signatures for Vec<Signature> {
    fn signature(&self, quantity: &str) -> Option<&Signature> {
        self.iter().find(|s| &*s.name == quantity)
    }
}

/// All conditions of a term that are decided neither by literals nor by the
/// declared domain of one variable, inner parts first, without repetition.
#[must_use]
pub fn conditions(s: &Sequent, quantities: &dyn Signatures, term: &Term) -> Vec<Condition> {
    let mut collector =
        Collector { context: s.clone(), outer: s.variables.len(), quantities, found: Vec::new() };
    collector.collect(term);
    collector.found
}

struct Collector<'a> {
    /// The sequent, with the indices of the enclosing series declared last.
    context: Sequent,
    /// How many variables the sequent has without them.
    outer: usize,
    quantities: &'a dyn Signatures,
    found: Vec<Condition>,
}

impl Collector<'_> {
    fn add(&mut self, alternatives: Vec<Vec<Relation>>) {
        self.add_but(alternatives, Vec::new());
    }

    fn add_but(&mut self, alternatives: Vec<Vec<Relation>>, also: Vec<Vec<Relation>>) {
        let settled = |all: &Vec<Relation>| all.iter().all(|r| is_trivial(&self.context, r));
        if alternatives.iter().any(settled) {
            return;
        }
        let condition =
            Condition::OneOf { indices: self.context.variables[self.outer..].to_vec(), alternatives, also };
        if !self.found.contains(&condition) {
            self.found.push(condition);
        }
    }

    fn add_one(&mut self, left: &Term, rel: Rel, right: i64) {
        self.add(vec![vec![Relation::new(left.clone(), rel, Term::integer(right))]]);
    }

    fn refuse(&mut self, why: String) {
        self.found.push(Condition::Unshowable(why));
    }

    fn refuse_sort(&mut self, term: &Term, sort: Sort) {
        self.found.push(Condition::NotOfSort { term: term.clone(), sort });
    }

    fn collect(&mut self, term: &Term) {
        if let Node::Series { kind, index, lower, upper, body } = term.node() {
            return self.series(*kind, index, lower, upper, body);
        }
        term.each_child(&mut |t| self.collect(t));
        match term.node() {
            Node::Divide(_, b) => self.add(nonzero(b)),
            Node::Power(b, p) => self.power(b, p),
            Node::Apply(function, args) => self.call(*function, args),
            Node::Quantity(name, args) => self.quantity(name, args),
            _ => {}
        }
    }

    fn power(&mut self, b: &Term, p: &Term) {
        let zero = || Term::integer(0);
        let positive_base = vec![Relation::new(b.clone(), Rel::Greater, zero())];
        let base_from_zero = Relation::new(b.clone(), Rel::GreaterEqual, zero());
        match p.as_number() {
            Some(q) if q.is_integer() && q.is_positive() => {}
            Some(q) if q.is_integer() => self.add(nonzero(b)),
            Some(q) if q.is_positive() => self.add(vec![vec![base_from_zero], positive_base]),
            Some(_) => self.add(vec![positive_base]),
            None => {
                let positive_exponent = Relation::new(p.clone(), Rel::Greater, zero());
                let mut ways = vec![positive_base];
                let mut also = Vec::new();
                if is_integer(p, &self.context) {
                    ways.extend(nonzero(b));
                    ways.push(vec![positive_exponent.clone()]);
                } else {
                    // An exponent may be an integer by its value alone.
                    let whole = whole(p, Rel::Equal);
                    also.push(vec![whole.clone(), Relation::new(b.clone(), Rel::NotEqual, zero())]);
                    also.push(vec![whole, positive_exponent.clone()]);
                }
                ways.push(vec![base_from_zero, positive_exponent]);
                self.add_but(ways, also);
            }
        }
    }

    fn call(&mut self, function: Function, args: &[Term]) {
        let Some(a) = args.first() else { return };
        match function {
            Function::Log | Function::Log2 => self.add_one(a, Rel::Greater, 0),
            // Undefined at 0, -1, -2, .. only; proofs know them for positive arguments.
            Function::Gamma | Function::Lgamma | Function::Digamma | Function::Trigamma => {
                let positive = Relation::new(a.clone(), Rel::Greater, Term::integer(0));
                self.add_but(vec![vec![positive]], vec![vec![whole(a, Rel::Less)]]);
            }
            Function::Sqrt => self.add_one(a, Rel::GreaterEqual, 0),
            Function::Asin | Function::Acos => {
                self.add_one(a, Rel::GreaterEqual, -1);
                self.add_one(a, Rel::LessEqual, 1);
            }
            Function::Acosh => self.add_one(a, Rel::GreaterEqual, 1),
            Function::Atanh => {
                self.add_one(a, Rel::Greater, -1);
                self.add_one(a, Rel::Less, 1);
            }
            Function::Tan => self.add(nonzero(&Term::apply1(Function::Cos, a))),
            Function::Factorial | Function::Binomial | Function::Chebyshev => {
                let counts = if function == Function::Binomial { args } else { &args[..1] };
                if let Some(n) = counts.iter().find(|n| !is_integer(n, &self.context)) {
                    return self.refuse_sort(n, Sort::Integer);
                }
                for n in counts {
                    self.add_one(n, Rel::GreaterEqual, 0);
                }
            }
            _ => {}
        }
    }

    fn quantity(&mut self, name: &Name, args: &[Term]) {
        let Some(signature) = self.quantities.signature(name) else {
            return self.refuse(format!("`{name}` is not a declared quantity"));
        };
        if signature.arguments.len() != args.len() {
            return self.refuse(format!("`{name}` takes {} arguments", signature.arguments.len()));
        }
        let pairs = || args.iter().zip(&signature.arguments);
        if let Some((a, d)) = pairs().find(|(a, d)| !has_sort(a, d.sort, &self.context)) {
            return self.refuse_sort(a, d.sort);
        }
        let relations: Vec<Relation> = pairs().flat_map(|(a, d)| d.membership(a)).collect();
        for r in relations {
            self.add(vec![vec![r]]);
        }
    }

    fn series(&mut self, kind: SeriesKind, index: &Name, lower: &End, upper: &End, body: &Term) {
        let (End::Finite(a), End::Finite(b)) = (lower, upper) else {
            return self.refuse("a series with an infinite limit".into());
        };
        self.collect(a);
        self.collect(b);
        if kind == SeriesKind::Integral {
            return self.refuse("an integral".into());
        }
        if let Some(end) = [a, b].into_iter().find(|end| !is_integer(end, &self.context)) {
            return self.refuse_sort(end, Sort::Integer);
        }
        let domain = Domain {
            sort: Sort::Integer,
            lower: lower.clone(),
            lower_open: false,
            upper: upper.clone(),
            upper_open: false,
        };
        // The index may hide a variable of the same name; the condition would be
        // ambiguous, so it is renamed apart.
        let mut fresh = index.to_string();
        while self.context.declaration(&fresh).is_some() {
            fresh.push('\'');
        }
        let body = body.with(index, &Term::variable(fresh.as_str()));
        self.context.variables.push(Declaration { name: fresh.into(), domain });
        self.collect(&body);
        self.context.variables.pop();
    }
}

/// `floor(t)` against `t`: `=` says that `t` is an integer, `<` that it is none.
fn whole(t: &Term, rel: Rel) -> Relation {
    Relation::new(Term::apply1(Function::Floor, t), rel, t.clone())
}

fn nonzero(t: &Term) -> Vec<Vec<Relation>> {
    [Rel::NotEqual, Rel::Greater, Rel::Less]
        .map(|rel| vec![Relation::new(t.clone(), rel, Term::integer(0))])
        .to_vec()
}

/// Whether a relation is true by its two literals, or by the literal ends of the
/// one variable that it compares with a literal.
#[must_use]
pub fn is_trivial(s: &Sequent, relation: &Relation) -> bool {
    if let Some(truth) = relation.literal() {
        return truth;
    }
    let r = relation.turned();
    let (variable, literal, variable_right) = match (r.left.node(), r.right.node()) {
        (Node::Variable(x), Node::Number(q)) => (x, q, false),
        (Node::Number(q), Node::Variable(x)) => (x, q, true),
        _ => return false,
    };
    let Some(d) = s.declaration(variable).map(|d| &d.domain) else { return false };
    let above = |strict: bool| {
        let end = d.lower.finite().and_then(Term::as_number);
        end.is_some_and(|end| end > literal || (end == literal && (!strict || d.lower_open)))
    };
    let below = |strict: bool| {
        let end = d.upper.finite().and_then(Term::as_number);
        end.is_some_and(|end| end < literal || (end == literal && (!strict || d.upper_open)))
    };
    match (r.rel, variable_right) {
        (Rel::LessEqual, true) => above(false),
        (Rel::Less, true) => above(true),
        (Rel::LessEqual, false) => below(false),
        (Rel::Less, false) => below(true),
        (Rel::NotEqual, _) => above(true) || below(true),
        _ => false,
    }
}

/// Whether a relation needs no proof of its own: it is trivial, or it stands in the
/// context word for word.
#[must_use]
pub fn has_at_hand(s: &Sequent, relation: &Relation) -> bool {
    let turned = relation.turned();
    is_trivial(s, relation)
        || s.hypotheses.iter().any(|h| h.turned() == turned)
        || [&turned.left, &turned.right].into_iter().any(|t| {
            let declaration = t.as_variable().and_then(|x| s.declaration(x));
            declaration.is_some_and(|d| d.ends().iter().any(|e| e.turned() == turned))
        })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::sample::term;
    use crate::statement::Conclusion;

    fn declared(name: &str, sort: Sort, lower: i64, lower_open: bool) -> Declaration {
        let lower = End::Finite(Term::integer(lower));
        Declaration { name: name.into(), domain: Domain { lower, lower_open, ..Domain::all(sort) } }
    }

    fn check(text: &str, expected: &[&str]) {
        let s = Sequent {
            variables: vec![
                declared("x", Sort::Real, 0, true),
                declared("y", Sort::Real, -1, false),
                declared("n", Sort::Integer, 0, false),
            ],
            hypotheses: vec![],
            goal: Conclusion::Absurd,
        };
        let q = Signature {
            name: "q".into(),
            arguments: vec![declared("", Sort::Real, 1, false).domain],
            range: Domain::all(Sort::Real),
        };
        let said: Vec<String> = conditions(&s, &vec![q], &term(text))
            .into_iter()
            .map(|c| match c {
                Condition::OneOf { indices, alternatives, .. } => {
                    let ways: Vec<String> = alternatives
                        .iter()
                        .map(|all| all.iter().map(ToString::to_string).collect::<Vec<_>>().join(" and "))
                        .collect();
                    let indices: String = indices.iter().map(|d| format!(" for {d}")).collect();
                    ways.join(" or ") + &indices
                }
                Condition::NotOfSort { term, sort } => format!("{term} is not {}", sort.name()),
                Condition::Unshowable(why) => why,
            })
            .collect();
        assert_eq!(said, expected, "{text}");
    }

    #[test]
    fn conditions_of_terms() {
        check("log(x)/x + 1/3 + x^y + x^(-1)", &[]);
        check("1/(y + 2) + 1/(y + 2)", &["y + 2 != 0 or y + 2 > 0 or y + 2 < 0"]);
        check("y^2 + sqrt(y)", &["y >= 0"]);
        check("y^n", &["y > 0 or y != 0 or y > 0 or y < 0 or n > 0 or y >= 0 and n > 0"]);
        check("y^x", &["y > 0 or y >= 0 and x > 0"]);
        check("acos(y)", &["y <= 1"]);
        check("q(x) + q(2) + q(0)", &["x >= 1", "0 >= 1"]);
        check("factorial(n) + factorial(x)", &["x is not integer"]);
        check("binomial(n, 3 - n)", &["3 - n >= 0"]);
        check("sum(k = 1 .. n, 1/k)", &[]);
        check("sum(k = 0 .. n, 1/k)", &["k != 0 or k > 0 or k < 0 for k : integer in [0, n]"]);
        check("sum(n = 1 .. n, sqrt(y*n))", &["y*n' >= 0 for n' : integer in [1, n]"]);
        check("sum(k = 1 .. inf, k)", &["a series with an infinite limit"]);
    }
}

//! First-order matching of a fact's terms against the terms of a goal.
//!
//! A pattern is a term of the fact; its own variables and the quantities of its
//! schema may stand for anything. Everything else must agree: by structure, or,
//! once all its variables are bound, after collecting like terms.

use std::collections::BTreeMap;

use crate::expression::{End, Name, Node, SeriesKind, Substitution, Term, simplify};
use crate::statement::Relation;

/// What the variables and the schema's quantities of a fact stand for, as far as known.
#[derive(Debug, Clone, Default, PartialEq, Eq, PartialOrd, Ord)]
pub(super) struct Binding {
    pub terms: BTreeMap<Name, Term>,
    pub quantities: BTreeMap<Name, Name>,
}

/// Largest terms whose like terms are collected for a comparison.
const MAX_SIMPLIFIED: u32 = 400;

/// What may be bound.
pub(super) struct Pattern<'a> {
    pub variables: &'a [Name],
    pub schema: &'a [Name],
}

impl Pattern<'_> {
    fn is_open(&self, term: &Term, binding: &Binding) -> bool {
        self.variables.iter().any(|v| !binding.terms.contains_key(v) && term.mentions(v))
            || term
                .quantities()
                .iter()
                .any(|q| self.schema.contains(q) && !binding.quantities.contains_key(q))
    }

    /// Whether the term has a part that may be bound at all.
    pub fn is_open_at_all(&self, term: &Term) -> bool {
        self.is_open(term, &Binding::default())
    }

    /// The term with everything put in that is bound.
    pub fn instance(&self, term: &Term, binding: &Binding) -> Term {
        let values: Substitution = binding.terms.iter().map(|(x, t)| (x.clone(), t.clone())).collect();
        values.apply(&term.rename_quantities(&binding.quantities))
    }

    /// Extends the binding so that the pattern's instance is the target; false (with
    /// the binding in an unspecified state) if that is impossible.
    pub fn matches(&self, pattern: &Term, target: &Term, binding: &mut Binding) -> bool {
        if !self.is_open(pattern, binding) {
            let instance = self.instance(pattern, binding);
            let small = instance.size().max(target.size()) <= MAX_SIMPLIFIED;
            return instance == *target || (small && simplify(&instance) == simplify(target));
        }
        match (pattern.node(), target.node()) {
            (Node::Variable(x), _) => {
                // Open and a variable: it is one of the fact's own and not bound yet.
                binding.terms.insert(x.clone(), target.clone());
                true
            }
            (Node::Negate(a), Node::Negate(b)) => self.matches(a, b, binding),
            (Node::Add(a, b), Node::Add(c, d)) | (Node::Multiply(a, b), Node::Multiply(c, d)) => {
                let before = binding.clone();
                if self.matches(a, c, binding) && self.matches(b, d, binding) {
                    return true;
                }
                *binding = before;
                self.matches(a, d, binding) && self.matches(b, c, binding)
            }
            (Node::Subtract(a, b), Node::Subtract(c, d))
            | (Node::Divide(a, b), Node::Divide(c, d))
            | (Node::Power(a, b), Node::Power(c, d)) => {
                self.matches(a, c, binding) && self.matches(b, d, binding)
            }
            (Node::Apply(f, args), Node::Apply(g, others)) => {
                f == g && args.len() == others.len() && self.all_match(args, others, binding)
            }
            (Node::Quantity(p, args), Node::Quantity(q, others)) => {
                if args.len() != others.len() {
                    return false;
                }
                if self.schema.contains(p) {
                    if binding.quantities.get(p).is_some_and(|known| known != q) {
                        return false;
                    }
                    binding.quantities.insert(p.clone(), q.clone());
                } else if p != q {
                    return false;
                }
                self.all_match(args, others, binding)
            }
            (
                Node::Series { kind, index, lower, upper, body },
                Node::Series { kind: kind2, index: index2, lower: lower2, upper: upper2, body: body2 },
            ) => {
                let outside: Vec<Name> = binding.terms.keys().cloned().collect();
                *kind == *kind2
                    && self.ends_match(lower, lower2, binding)
                    && self.ends_match(upper, upper2, binding)
                    && self.matches(body, &body2.with(index2, &Term::variable(index.clone())), binding)
                    // What was bound inside must make sense outside.
                    && binding.terms.iter().all(|(x, t)| outside.contains(x) || !t.mentions(index))
            }
            _ => false,
        }
    }

    fn all_match(&self, patterns: &[Term], targets: &[Term], binding: &mut Binding) -> bool {
        patterns.iter().zip(targets).all(|(p, t)| self.matches(p, t, binding))
    }

    fn ends_match(&self, pattern: &End, target: &End, binding: &mut Binding) -> bool {
        match (pattern, target) {
            (End::Finite(p), End::Finite(t)) => self.matches(p, t, binding),
            (p, t) => p == t,
        }
    }
}

/// The terms a fact may be matched against: every part of the goal's terms that
/// does not stand under a series whose index it mentions, without repetition,
/// in the order of writing.
#[derive(Debug, Default, Clone)]
pub(super) struct Targets {
    parts: Vec<Term>,
    known: std::collections::BTreeSet<Term>,
    simple: std::collections::BTreeSet<Term>,
}

/// Most parts that are looked at for one goal.
const MAX_PARTS: usize = 4000;

impl Targets {
    pub fn add(&mut self, relation: &Relation) {
        for side in [&relation.left, &relation.right] {
            self.add_term(side, &mut Vec::new());
            if side.size() <= MAX_SIMPLIFIED {
                self.simple.insert(simplify(side));
            }
        }
    }

    fn add_term(&mut self, term: &Term, indices: &mut Vec<Name>) {
        if self.parts.len() >= MAX_PARTS {
            return;
        }
        if !indices.iter().any(|i| term.mentions(i)) && self.known.insert(term.clone()) {
            self.parts.push(term.clone());
            let telling = matches!(term.node(), Node::Quantity(..) | Node::Apply(..) | Node::Series { .. });
            if telling && term.size() <= MAX_SIMPLIFIED {
                self.simple.insert(simplify(term));
            }
        }
        match term.node() {
            Node::Series { index, lower, upper, body, .. } => {
                for end in [lower, upper] {
                    if let End::Finite(t) = end {
                        self.add_term(t, indices);
                    }
                }
                indices.push(index.clone());
                self.add_term(body, indices);
                indices.pop();
            }
            _ => term.each_child(&mut |t| self.add_term(t, indices)),
        }
    }

    pub fn iter(&self) -> impl Iterator<Item = &Term> {
        self.parts.iter()
    }

    /// Whether the term, like terms collected, occurs.
    pub fn contains(&self, term: &Term) -> bool {
        self.known.contains(term) || (term.size() <= MAX_SIMPLIFIED && self.simple.contains(&simplify(term)))
    }
}

/// The parts of a fact by which its instance can be recognised.
#[derive(Debug, Default)]
pub(super) struct Anchors {
    /// Whole sides that are more than a variable or a number.
    pub sides: Vec<Term>,
    /// Applications of quantities.
    pub quantities: Vec<Term>,
    /// Applications of functions and series.
    pub functions: Vec<Term>,
}

impl Anchors {
    /// Collects the anchors of relations, those that mention something of `pattern`.
    pub fn of(relations: &[Relation], pattern: &Pattern) -> Anchors {
        let mut anchors = Anchors::default();
        let push = |list: &mut Vec<Term>, t: &Term| {
            if !list.contains(t) {
                list.push(t.clone());
            }
        };
        for side in relations.iter().flat_map(|r| [&r.left, &r.right]) {
            if side.as_variable().is_none() && pattern.is_open_at_all(side) {
                push(&mut anchors.sides, side);
            }
            let mut bound = Vec::new();
            each_free_part(side, &mut bound, &mut |part| {
                if !pattern.is_open_at_all(part) {
                    return;
                }
                match part.node() {
                    Node::Quantity(..) => push(&mut anchors.quantities, part),
                    Node::Apply(..) => push(&mut anchors.functions, part),
                    Node::Series {
                        kind: SeriesKind::Sum | SeriesKind::Product | SeriesKind::Integral,
                        ..
                    } => {
                        push(&mut anchors.functions, part);
                    }
                    _ => {}
                }
            });
        }
        anchors
    }
}

/// Calls `f` with every part that mentions no index of a series around it.
fn each_free_part(term: &Term, bound: &mut Vec<Name>, f: &mut dyn FnMut(&Term)) {
    if !bound.iter().any(|i| term.mentions(i)) {
        f(term);
    }
    if let Node::Series { index, .. } = term.node() {
        bound.push(index.clone());
        term.each_child(&mut |t| each_free_part(t, bound, f));
        bound.pop();
    } else {
        term.each_child(&mut |t| each_free_part(t, bound, f));
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::sample::term;

    fn check(pattern: &str, target: &str, expected: Option<&str>) {
        let variables: Vec<Name> = vec!["x".into(), "y".into()];
        let schema: Vec<Name> = vec!["q".into()];
        let names = Pattern { variables: &variables, schema: &schema };
        let mut binding = Binding::default();
        let found = names.matches(&term(pattern), &term(target), &mut binding).then(|| {
            let terms = binding.terms.iter().map(|(x, t)| format!("{x} = {t}"));
            let quantities = binding.quantities.iter().map(|(p, q)| format!("{p} = {q}"));
            terms.chain(quantities).collect::<Vec<_>>().join("; ")
        });
        assert_eq!(found.as_deref(), expected, "{pattern} against {target}");
    }

    #[test]
    fn matching() {
        check("log(x)", "log(a + 1)", Some("x = a + 1"));
        check("x*exp(-x)", "n^2*exp(-n^2)", Some("x = n^2"));
        check("x*exp(-x)", "n*exp(-m)", None);
        check("exp(x)*y", "b*exp(a)", Some("x = a; y = b"));
        check("q(x)/y", "weight(3)/2", Some("x = 3; y = 2; q = weight"));
        check("q(x)/(y + 1)", "weight(3)/(z + 1)", Some("x = 3; y = z; q = weight"));
        check("q(x) + q(y)", "f(1) + g(2)", None);
        check("sum(k = 0 .. x, y^k)", "sum(j = 0 .. n, a^j)", Some("x = n; y = a"));
        check("sum(k = 0 .. x, y)", "sum(j = 0 .. n, j)", None);
        check("p(x, x + 1)", "p(m - 1, m)", Some("x = m - 1"));
    }

    #[test]
    fn targets_leave_out_what_depends_on_an_index() {
        let mut targets = Targets::default();
        targets.add(&Relation::new(
            term("sum(k = 1 .. n, f(k) + f(n))"),
            crate::statement::Rel::Less,
            term("1"),
        ));
        let parts: Vec<String> = targets.iter().map(ToString::to_string).collect();
        assert_eq!(parts, ["sum(k = 1 .. n, f(k) + f(n))", "1", "n", "f(n)"]);
        assert!(targets.contains(&term("f(n + 1 - 1)")));
    }
}

//! Putting terms in the place of variables, and names in the place of quantities.

use std::collections::{BTreeMap, BTreeSet};

use super::term::{End, Name, Node, Term};

/// New names for quantities.
pub type Renaming = BTreeMap<Name, Name>;

/// A simultaneous substitution of terms for variables.
#[derive(Clone, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub struct Substitution(BTreeMap<Name, Term>);

impl Substitution {
    /// The substitution that changes nothing.
    #[must_use]
    pub fn new() -> Substitution {
        Substitution::default()
    }

    /// Maps `name` to `term`; an earlier image of the name is replaced.
    pub fn insert(&mut self, name: impl Into<Name>, term: Term) {
        self.0.insert(name.into(), term);
    }

    /// What stands for the name, if anything.
    #[must_use]
    pub fn get(&self, name: &str) -> Option<&Term> {
        self.0.get(name)
    }

    /// Whether it changes nothing.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    /// The pairs in the order of the names.
    pub fn iter(&self) -> impl Iterator<Item = (&Name, &Term)> {
        self.0.iter()
    }

    /// The term with all replacements made at once. The index of a series is
    /// renamed where it would catch a variable of a replacement.
    #[must_use]
    pub fn apply(&self, term: &Term) -> Term {
        if self.is_empty() {
            return term.clone();
        }
        match term.node() {
            Node::Variable(name) => self.get(name).unwrap_or(term).clone(),
            Node::Series { kind, index, lower, upper, body } => {
                let (lower2, upper2) = (self.apply_end(lower), self.apply_end(upper));
                let (index2, body2) = self.apply_under(index, body);
                let same = |a: &End, b: &End| match (a, b) {
                    (End::Finite(a), End::Finite(b)) => a.same_tree(b),
                    (a, b) => a == b,
                };
                if body2.same_tree(body) && same(&lower2, lower) && same(&upper2, upper) {
                    term.clone()
                } else {
                    Term::series(*kind, index2, lower2, upper2, body2)
                }
            }
            _ => term.map_children(&mut |t| self.apply(t)),
        }
    }

    /// An end with all replacements made.
    #[must_use]
    pub fn apply_end(&self, end: &End) -> End {
        end.map(|t| self.apply(t))
    }

    fn apply_under(&self, index: &Name, body: &Term) -> (Name, Term) {
        let free = body.free_variables();
        let mut inner: BTreeMap<Name, Term> = self
            .0
            .iter()
            .filter(|(name, _)| *name != index && free.contains(*name))
            .map(|(name, term)| (name.clone(), term.clone()))
            .collect();
        if inner.is_empty() {
            return (index.clone(), body.clone());
        }
        let mut taken: BTreeSet<Name> = inner.values().flat_map(Term::free_variables).collect();
        let mut index2 = index.clone();
        if taken.contains(index) {
            taken.extend(free);
            index2 = fresh_name(index, |name| taken.contains(name));
            inner.insert(index.clone(), Term::variable(index2.clone()));
        }
        (index2, Substitution(inner).apply(body))
    }
}

impl FromIterator<(Name, Term)> for Substitution {
    fn from_iter<I: IntoIterator<Item = (Name, Term)>>(pairs: I) -> Self {
        Substitution(pairs.into_iter().collect())
    }
}

/// The first of `name'`, `name''`, ... that is not taken.
#[must_use]
pub fn fresh_name(name: &str, taken: impl Fn(&str) -> bool) -> Name {
    let mut candidate = format!("{name}'");
    while taken(&candidate) {
        candidate.push('\'');
    }
    candidate.into()
}

impl Term {
    /// The term with `replacement` for the free occurrences of one variable.
    #[must_use]
    pub fn with(&self, name: &str, replacement: &Term) -> Term {
        let mut substitution = Substitution::new();
        substitution.insert(name, replacement.clone());
        substitution.apply(self)
    }

    /// The term with its quantities renamed.
    #[must_use]
    pub fn rename_quantities(&self, names: &Renaming) -> Term {
        if names.is_empty() {
            return self.clone();
        }
        let inner = self.map_children(&mut |t| t.rename_quantities(names));
        match inner.node() {
            Node::Quantity(name, args) => match names.get(name) {
                Some(new) if new != name => Term::quantity(new.clone(), args.clone()),
                _ => inner,
            },
            _ => inner,
        }
    }

    /// The term with every occurrence of the subterm `old` replaced by `new`,
    /// outermost first. Occurrences in which an index of a series is free stay.
    #[must_use]
    pub fn replace(&self, old: &Term, new: &Term) -> Term {
        if self == old {
            return new.clone();
        }
        if self.size() <= old.size() {
            return self.clone();
        }
        match self.node() {
            Node::Series { kind, index, lower, upper, body }
                if old.mentions(index) || new.mentions(index) =>
            {
                let (lower, upper) = (lower.map(|t| t.replace(old, new)), upper.map(|t| t.replace(old, new)));
                Term::series(*kind, index.clone(), lower, upper, body.clone())
            }
            _ => self.map_children(&mut |t| t.replace(old, new)),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::sample::term;

    #[test]
    fn substitution_is_simultaneous() {
        let swap: Substitution = [("x".into(), term("y")), ("y".into(), term("x"))].into_iter().collect();
        assert_eq!(swap.apply(&term("x - 2*y")), term("y - 2*x"));
    }

    #[test]
    fn the_index_of_a_series_never_catches_a_variable() {
        let t = term("sum(k = 0 .. n, x^k)");
        assert_eq!(t.with("x", &term("k + 1")).to_string(), "sum(k' = 0 .. n, (k + 1)^k')");
        assert_eq!(t.with("n", &term("k")).to_string(), "sum(k = 0 .. k, x^k)");
        assert_eq!(t.with("k", &term("7")), t);
        assert_eq!(
            term("sum(k = 0 .. n, x^k*k')").with("x", &term("k")).to_string(),
            "sum(k'' = 0 .. n, k^k''*k')"
        );
    }

    #[test]
    fn unchanged_parts_are_shared() {
        let t = term("exp(x) + sum(k = 1 .. n, k)");
        assert!(t.with("z", &term("1")).same_tree(&t));
    }

    #[test]
    fn quantities_are_renamed_everywhere() {
        let names: Renaming = [("tail".into(), "weight".into())].into_iter().collect();
        assert_eq!(
            term("tail(tail(x)) + mean()").rename_quantities(&names),
            term("weight(weight(x)) + mean()")
        );
    }

    #[test]
    fn replacement_of_a_subterm_respects_indices() {
        assert_eq!(term("exp(x + 1)*(x + 1)").replace(&term("x + 1"), &term("u")), term("exp(u)*u"));
        let t = term("sum(x = 1 .. n, x + 1)");
        assert_eq!(t.replace(&term("x + 1"), &term("u")), t);
    }
}

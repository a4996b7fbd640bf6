//! `{series last (S) {a <= b} {rest} {defined}?}` and its kin: append an equation for
//! the sum or product `S`, written `sum(k = a .. b, t)` here.             (R9, R38)
//!
//! ```text
//! {series last (S) {a <= b} ..}        S = sum(k = a .. b - 1, t) + t at k = b
//! {series first (S) {a <= b}? ..}      S = t at k = a + sum(k = a + 1 .. b, t)
//! {series empty (S) {b < a} ..}        S = 0
//! {series join (S) (m) {a <= m + 1} {m <= b}? ..}
//!                                      S = sum(k = a .. m, t) + sum(k = m + 1 .. b, t)
//! {series shift (S) (m) ..}            S = sum(k = a + m .. b + m, t at k - m)
//! ```
//! For products `*` stands for `+` and 1 for 0. `m` is an integer by its shape. If b
//! is infinite, the conditions about it fall away. S and m must be defined on Gamma.
//! Sound: a finite sum may be taken apart anywhere between its ends (with empty
//! parts), and so may a convergent one; the parts are defined where S is.
//! Forgotten: the last term split off an empty sum: `sum(k = 1 .. 0, 1/k)` would
//! be `sum(k = 1 .. -1, 1/k) + 1/0`.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_defined;
use crate::kernel::integer::is_integer;
use crate::kernel::sequent::{Rel, Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::{Limit, Name, Node, SeriesKind, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

/// A sum or product taken apart.
pub(super) struct Parts<'a> {
    pub kind: SeriesKind,
    pub index: &'a Name,
    pub lower: &'a Term,
    /// None if infinite.
    pub upper: Option<&'a Term>,
    pub body: &'a Term,
}

impl<'a> Parts<'a> {
    /// The parts of a term that is a sum or product with a finite lower limit.
    pub fn of(term: &'a Term) -> Checked<Parts<'a>> {
        match &**term {
            Node::Series {
                kind: kind @ (SeriesKind::Sum | SeriesKind::Product),
                index,
                lower: Limit::Finite(a),
                upper,
                body,
            } if *upper != Limit::Below => {
                let upper = if let Limit::Finite(b) = upper { Some(b) } else { None };
                Ok(Parts { kind: *kind, index, lower: a, upper, body })
            }
            _ => refuse(Reason::Condition, format!("{term} is no sum or product from a first term on")),
        }
    }

    /// The same with other limits.
    pub fn between(&self, lower: &Term, upper: Option<&Term>) -> Term {
        let upper = upper.map_or(Limit::Above, |b| Limit::Finite(b.clone()));
        let (index, body) = (self.index.clone(), self.body.clone());
        Node::Series { kind: self.kind, index, lower: Limit::Finite(lower.clone()), upper, body }.into()
    }

    /// The body at a value of the index.
    pub fn at(&self, value: &Term) -> Term {
        self.body.substitute(self.index, value)
    }
}

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let way = fields.word()?;
    let series = fields.term()?;
    let p = Parts::of(series)?;
    let (a, b) = (p.lower, p.upper);
    let one = Term::integer(1);
    let together = |x: Term, y: Term| if p.kind == SeriesKind::Sum { x.add(&y) } else { x.multiply(&y) };
    let mut conditions = Vec::new();
    let mut extra = Vec::new();
    let equal = match (&**way, b) {
        ("last", Some(b)) => {
            conditions.push(Relation::new(a.clone(), Rel::Le, b.clone()));
            together(p.between(a, Some(&b.subtract(&one))), p.at(b))
        }
        ("first", _) => {
            conditions.extend(b.map(|b| Relation::new(a.clone(), Rel::Le, b.clone())));
            together(p.at(a), p.between(&a.add(&one), b))
        }
        ("empty", Some(b)) => {
            conditions.push(Relation::new(b.clone(), Rel::Lt, a.clone()));
            Term::integer(i64::from(p.kind == SeriesKind::Product))
        }
        ("join", _) => {
            let m = fields.term()?;
            extra.push(m);
            conditions.push(Relation::new(a.clone(), Rel::Le, m.add(&one)));
            conditions.extend(b.map(|b| Relation::new(m.clone(), Rel::Le, b.clone())));
            together(p.between(a, Some(m)), p.between(&m.add(&one), b))
        }
        ("shift", _) => {
            let m = fields.term()?;
            extra.push(m);
            if m.mentions(p.index) {
                return refuse(Reason::Name, format!("{m} mentions the index"));
            }
            let moved = p.at(&Term::variable(p.index).subtract(m));
            let upper = b.map(|b| b.add(m));
            Parts { body: &moved, ..p }.between(&a.add(m), upper.as_ref())
        }
        _ => return refuse(Reason::Fields, format!("`{way}` is no way to take a series apart")),
    };
    let mut proofs = Vec::new();
    for _ in &conditions {
        proofs.push(fields.step()?);
    }
    let rest = fields.step()?;
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    if let Some(m) = extra.iter().find(|m| !is_integer(s, m)) {
        return refuse(Reason::Condition, format!("{m} is not an integer by its shape"));
    }
    extra.push(series);
    require_defined(s, &extra, defined, k)?;
    for (condition, proof) in conditions.into_iter().zip(proofs) {
        prove(&s.with_goal(condition), proof, k)?;
    }
    prove(&s.with_hypothesis(Relation::new(series.clone(), Rel::Eq, equal)), rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent, verdict};
    use crate::kernel::verdict::Reason;

    #[test]
    fn taken_apart() {
        let s = sequent(&["n : integer in [0, inf)"], &[], "sum(k = 1 .. n + 1, k) >= sum(k = 1 .. n, k)");
        accepted(&s, "{series last (sum(k = 1 .. n + 1, k)) {sign} {linear (-1) h1 [0 <= n + 1] {sign}}}");
        let s = sequent(&["n : integer in [1, inf)"], &[], "sum(k = 1 .. n, k) - sum(k = 2 .. n, k) = 1");
        accepted(&s, "{series first (sum(k = 1 .. n, k)) {sign} {linear (1) h1}}");
        let s = sequent(&["n : integer in [2, inf)"], &[], "product(k = n .. 1, k) = 1");
        accepted(&s, "{series empty (product(k = n .. 1, k)) {sign} {linear (1) h1}}");
        let s = sequent(
            &["n : integer in [2, inf)"],
            &[],
            "sum(k = 1 .. n, 1/k) = sum(k = 1 .. 2, 1/k) + sum(k = 2 .. n - 1, 1/(k + 1))",
        );
        accepted(
            &s,
            "{series join (sum(k = 1 .. n, 1/k)) (2) {sign} {sign} \
             {series shift (sum(k = 3 .. n, 1/k)) (-1) {linear (1) h1 (1) h2}}}",
        );
    }

    #[test]
    fn refused_parts() {
        // sum(k = 1 .. 0, 1/k) has no last term.
        let s = sequent(&["n : integer in [0, 5]"], &[], "sum(k = 1 .. n, 1/k) >= 1");
        assert!(verdict(&s, "{series last (sum(k = 1 .. n, 1/k)) {sign} {linear}}").is_err());
        assert!(verdict(&s, "{series first (sum(k = 1 .. n, 1/k)) {sign} {linear}}").is_err());
        assert!(verdict(&s, "{series empty (sum(k = 1 .. n, 1/k)) {sign} {linear}}").is_err());
        // Parts beyond the ends.
        assert!(verdict(&s, "{series join (sum(k = 1 .. n, 1/k)) (4) {sign} {sign} {linear}}").is_err());
        assert!(verdict(&s, "{series join (sum(k = 1 .. n, 1/k)) (-1) {sign} {sign} {linear}}").is_err());
        refused(&s, "{series join (sum(k = 1 .. n, 1/k)) (1/2) {sign} {sign} {linear}}", Reason::Condition);
        refused(&s, "{series shift (sum(k = 1 .. n, 1/k)) (1/2) {linear}}", Reason::Condition);
        // The sum must be defined.
        refused(&s, "{series shift (sum(k = 0 .. n, 1/k)) (1) {linear}}", Reason::Undefined);
        refused(&s, "{series shift (n) (1) {linear}}", Reason::Condition);
    }
}

//! Domains and the variables that range over them.

use num_integer::Integer;
use num_rational::BigRational;
use num_traits::{One, Signed};

use crate::diagnostic::Code;
use crate::expression::{End, Sort, Term};
use crate::language::tree::{self, Interval, SortKind};
use crate::source::Span;
use crate::statement::{Declaration, Domain};

use super::Lowering;
use super::names::Variables;

pub(super) fn sort(kind: SortKind) -> Sort {
    match kind {
        SortKind::Real => Sort::Real,
        SortKind::Integer => Sort::Integer,
        SortKind::EvenInteger => Sort::Even,
    }
}

impl Lowering {
    /// Declares the variables of a clause in order, after `outer` ones.
    pub(super) fn variables(
        &mut self,
        variables: &[tree::Variable],
        outer: &[Declaration],
    ) -> Option<Vec<Declaration>> {
        let mut declared: Vec<Declaration> = Vec::new();
        let mut sound = true;
        for variable in variables {
            let names = outer.iter().chain(&declared).map(|d| d.name.clone());
            let scope = Variables::of(names);
            let new = self.require_new_variable(&variable.name, &scope);
            let domain = self.domain(variable.sort_kind(), variable.domain.as_ref(), variable.span, &scope);
            match (new, domain) {
                (Some(()), Some(domain)) => {
                    declared.push(Declaration { name: variable.name.text.as_str().into(), domain });
                }
                _ => sound = false,
            }
        }
        sound.then_some(declared)
    }

    /// A written domain; all numbers of the sort if nothing is written.
    pub(super) fn domain(
        &mut self,
        kind: SortKind,
        interval: Option<&Interval>,
        span: Span,
        scope: &Variables,
    ) -> Option<Domain> {
        let sort = sort(kind);
        let Some(interval) = interval else { return Some(Domain::all(sort)) };
        let (lower, upper) = (self.end(&interval.lower, scope), self.end(&interval.upper, scope));
        let (lower, upper) = (lower?, upper?);
        if matches!(lower, End::PlusInfinity) || matches!(upper, End::MinusInfinity) {
            self.error(Code::BadDomain, interval.span, "the ends stand in the wrong order")
                .hint("write the lower end first, for instance `(-infinity, 0]`");
            return None;
        }
        let domain = Domain {
            sort,
            lower_open: interval.lower_open || lower == End::MinusInfinity,
            upper_open: interval.upper_open || upper == End::PlusInfinity,
            lower,
            upper,
        };
        if is_empty(&domain) {
            let kind = if sort == Sort::Real { "number" } else { "number of its sort" };
            self.error(Code::BadDomain, span, format!("the domain contains no {kind}"))
                .hint("nothing could fail for a variable without values, so this is refused");
            return None;
        }
        Some(domain)
    }
}

/// Whether literal ends leave nothing between them.
fn is_empty(domain: &Domain) -> bool {
    let value = |end: &End| end.finite().and_then(Term::rational_value);
    let (Some(lower), Some(upper)) = (value(&domain.lower), value(&domain.upper)) else { return false };
    match domain.sort {
        Sort::Real => lower > upper || (lower == upper && (domain.lower_open || domain.upper_open)),
        Sort::Integer | Sort::Even => {
            let step = if domain.sort == Sort::Even { 2 } else { 1 };
            let step = BigRational::from_integer(step.into());
            let first = (&lower / &step).ceil() * &step;
            let first = if domain.lower_open && first == lower { first + &step } else { first };
            first > upper || (domain.upper_open && first == upper)
        }
    }
}

/// Whether a closed literal value lies in a domain with literal ends; none if this
/// cannot be told from literals.
pub(super) fn literal_membership(value: &Term, domain: &Domain) -> Option<bool> {
    let value = value.rational_value()?;
    let outside = |end: &End, open: bool, sign: i32| {
        let end = end.finite().and_then(Term::rational_value)?;
        let room = if sign > 0 { &value - end } else { end - &value };
        Some(room.is_negative() || (open && !room.is_positive()))
    };
    let ends = [(&domain.lower, domain.lower_open, 1), (&domain.upper, domain.upper_open, -1)];
    if ends.iter().any(|(end, open, sign)| outside(end, *open, *sign) == Some(true)) {
        return Some(false);
    }
    let fits = match domain.sort {
        Sort::Real => true,
        Sort::Integer => value.denom().is_one(),
        Sort::Even => value.denom().is_one() && value.numer().is_even(),
    };
    if !fits {
        return Some(false);
    }
    ends.iter()
        .all(|(end, open, sign)| end.finite().is_none() || outside(end, *open, *sign).is_some())
        .then_some(true)
}

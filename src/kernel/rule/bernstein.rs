//! `{bernstein x y ..}`
//!
//! Goal `l <= r` (or `<`) where the numerator of `r - l` is a polynomial in the named
//! variables, whose ends are numbers, and the denominator is plainly `>= 0`. Put
//! `x = (a + b w)/(1 + w)` for a variable between a and b and multiply by the power of
//! `1 + w` that clears it; `x = a + w` or `x = b - w` for one with a single end. Then
//! every coefficient of the w is plainly `>= 0`. A strict goal also needs plainly
//! `> 0` at the corners (lowest or highest power of each w) that belong to the
//! domain, and the denominator plainly `> 0`.
//! Sound: w runs over [0, inf), and up to positive factors the coefficients are those
//! in the Bernstein basis of the box (R29, R30). At the end b, where w is infinite,
//! the value is the highest coefficient. At any point, the product of the basis is
//! `> 0` at one of the corners of the smallest face that contains the point.
//! Forgotten: conversion on a smaller box; a strict goal with a zero at a corner.

use std::collections::BTreeMap;

use num_rational::BigRational;
use num_traits::{One, Zero};

use super::Kernel;
use crate::kernel::normal::{normal_in, poly_term, polynomial_in, product_term};
use crate::kernel::polynomial::Poly;
use crate::kernel::sequent::{Domain, End, Rel, Sequent};
use crate::kernel::sign::sign_of;
use crate::kernel::step::Fields;
use crate::kernel::term::Name;
use crate::kernel::verdict::{Checked, Reason, refuse};

/// Most coefficients.
const MAX_COEFFICIENTS: usize = 20_000;

/// Coefficients by the powers of the variables.
type Table = BTreeMap<Vec<usize>, Poly>;

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let goal = s.relation()?;
    let strict = match goal.rel {
        Rel::Le => false,
        Rel::Lt => true,
        _ => return refuse(Reason::Condition, "the goal is no inequality"),
    };
    let mut names: Vec<Name> = Vec::new();
    while let Some(name) = fields.optional_word() {
        if names.contains(name) {
            return refuse(Reason::Name, format!("`{name}` twice"));
        }
        names.push(name.clone());
    }
    fields.end()?;
    let q = normal_in(s, &goal.difference())?;
    let under = sign_of(s, &product_term(&BigRational::one(), &q.denominator));
    if !under.is_non_negative() || (strict && !under.is_positive()) {
        return refuse(Reason::Condition, "the sign of the denominator is not settled");
    }
    let mut table = Table::from([(vec![], q.numerator)]);
    let mut corners: Vec<Vec<usize>> = vec![vec![]];
    for name in &names {
        let Some(d) = s.declaration(name) else {
            return refuse(Reason::Name, format!("`{name}` is not declared"));
        };
        let (next, powers) = converted(&table, name, &d.domain, k)?;
        table = next;
        corners =
            corners.iter().flat_map(|c| powers.iter().map(|p| [c.as_slice(), &[*p]].concat())).collect();
    }
    for (powers, c) in &table {
        let sign = sign_of(s, &poly_term(c));
        if !sign.is_non_negative() {
            return refuse(Reason::NotProved, format!("the coefficient {} has no sign", poly_term(c)));
        }
        if sign.is_positive() {
            corners.retain(|c| c != powers);
        }
    }
    if strict && !corners.is_empty() {
        return refuse(Reason::NotProved, "the goal is strict and a corner is not positive");
    }
    Ok(())
}

/// The table with one variable more, and the powers of its corners.
fn converted(table: &Table, name: &Name, domain: &Domain, k: &Kernel) -> Checked<(Table, Vec<usize>)> {
    let mut lists = Vec::new();
    let mut degree = 0;
    for (powers, p) in table {
        let Some(list) = polynomial_in(p, name) else {
            return refuse(Reason::Condition, format!("no polynomial in `{name}`"));
        };
        degree = degree.max(list.len().saturating_sub(1));
        lists.push((powers, list));
    }
    if table.len() * (degree + 1) > MAX_COEFFICIENTS {
        return refuse(Reason::Limit, format!("more than {MAX_COEFFICIENTS} coefficients"));
    }
    let (rows, corners) = rows(degree, &domain.lower, &domain.upper, k)?;
    let mut next = Table::new();
    for (powers, list) in lists {
        for place in 0..=degree {
            let mut sum = Poly::default();
            for (c, row) in list.iter().zip(&rows) {
                k.spend(1 + c.len() as u64)?;
                if !row[place].is_zero() {
                    sum = sum.plus(&c.scaled(&row[place]));
                }
            }
            next.insert([powers.as_slice(), &[place]].concat(), sum);
        }
    }
    Ok((next, corners))
}

/// What becomes of `x^i`, for each i up to the degree, in powers of w; and the powers
/// that are corners of the domain.
fn rows(
    degree: usize,
    lower: &Option<End>,
    upper: &Option<End>,
    k: &Kernel,
) -> Checked<(Vec<Vec<BigRational>>, Vec<usize>)> {
    let number = |e: &Option<End>| match e {
        None => Ok(None),
        Some(e) => match e.term.as_number() {
            Some(q) => Ok(Some(q.clone())),
            None => refuse(Reason::Condition, format!("the end {} is no number", e.term)),
        },
    };
    let one = BigRational::one();
    // x = top / bottom, both linear in w.
    let (top, bottom) = match (number(lower)?, number(upper)?) {
        (Some(a), Some(b)) if a <= b => ([a, b], [one.clone(), one]),
        (Some(_), Some(_)) => return refuse(Reason::Condition, "the range is empty"),
        (Some(a), None) => ([a, one.clone()], [one, BigRational::zero()]),
        (None, Some(b)) => ([b, -one.clone()], [one, BigRational::zero()]),
        (None, None) if degree == 0 => ([BigRational::zero(), one.clone()], [one, BigRational::zero()]),
        (None, None) => return refuse(Reason::Condition, "a variable without ends"),
    };
    let times = |p: &[BigRational], q: &[BigRational; 2]| -> Vec<BigRational> {
        let mut product = vec![BigRational::zero(); p.len() + 1];
        for (i, c) in p.iter().enumerate() {
            product[i] += c * &q[0];
            product[i + 1] += c * &q[1];
        }
        product
    };
    let mut rows = Vec::new();
    for i in 0..=degree {
        k.spend((degree * degree) as u64)?;
        let start = vec![BigRational::one()];
        let row = (0..degree).fold(start, |p, j| times(&p, if j < i { &top } else { &bottom }));
        rows.push(row);
    }
    let closed = |e: &Option<End>| e.as_ref().is_some_and(|e| !e.open);
    // For a variable with the upper end alone, the power 0 is that end.
    let (first, last) = match (lower, upper) {
        (None, Some(_)) => (true, false),
        (Some(_), None) => (true, false),
        _ => (closed(lower) || !closed(upper), closed(upper)),
    };
    let corners = [(first, 0), (last, degree)];
    Ok((rows, corners.into_iter().filter(|(is, _)| *is).map(|(_, p)| p).collect()))
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn coefficients() {
        accepted("for all x : real in [0, 1], y : real in [0, 1]: x*y >= x + y - 1", "{bernstein x y}");
        accepted("for all x : real in [0, 2]: x^3 - 3*x + 9/2 > 0", "{bernstein x}");
        accepted("for all x : real in [1, inf), y : real in (-inf, 0]: x^2 - x*y >= 1", "{bernstein x y}");
        accepted("for all x : real in (0, 1]: x > 0", "{bernstein x}");
        accepted("for all x : real in [0, 1), y : real in [0, 1): 1 - x*y > 0", "{bernstein x y}");
        accepted(
            "for all x : real in [0, 1], p : real in (-inf, inf): x*exp(p) + (1 - x)*2^p > 0",
            "{bernstein x}",
        );
        accepted("for all x : real in [0, 1], y : real in [0, 1]: (2 - x*y)/(1 + x) > 0", "{bernstein x y}");
    }

    #[test]
    fn refused() {
        // The box is what is declared.
        rejected("for all x : real in [0, 1.1], y : real in [0, 1.1]: x*y >= x + y - 1", "{bernstein x y}");
        rejected("for all x : real in [-1/9, 1]: x >= 0", "{bernstein x}");
        rejected("for all x : real in (-inf, inf): x^2 >= 0", "{bernstein x}");
        rejected("for all x : real in [0, inf): x^2 - x + 1 >= 0", "{bernstein x}");
        // Zeros at corners of the domain.
        rejected("for all x : real in [0, 1]: x > 0", "{bernstein x}");
        rejected("for all x : real in [0, 1]: 1 - x > 0", "{bernstein x}");
        rejected("for all x : real in [0, inf): x > 0", "{bernstein x}");
        rejected("for all x : real in [0, 1], y : real in [0, 1): 1 - x*y + x - x^2 > y", "{bernstein x y}");
        // Denominators, other variables without a sign, ends that are no numbers.
        rejected("for all x : real in [0, 1], y : real in [-1, 1]: x*y >= 0", "{bernstein x}");
        rejected("for all x : real in [-1, 1] with x != 0: (x + 1)/x >= 0", "{bernstein x}");
        rejected("for all x : real in [0, pi]: x >= 0", "{bernstein x}");
        rejected("for all x : real in [0, 1]: x >= 0", "{bernstein x x}");
        rejected("for all x : real in [0, 1]: exp(x) >= x - 1", "{bernstein x}");
        rejected("for all x : real in [1, 0]: x >= 7", "{bernstein x}");
    }
}

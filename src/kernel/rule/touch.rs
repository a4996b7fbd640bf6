//! `{touch BITS (p1) (p2) ..}`, a closed term for each variable in the order declared
//!
//! Goal `l <= r` or `l < r`, all declared ends closed terms. On the smallest box that
//! holds the domain and the point P, `F = r - l` is twice continuously differentiable
//! and its matrix of second derivatives positive definite, by enclosures with BITS
//! bits (variables on which F does not depend left out). At P, `F >= 0` (`> 0` for a
//! strict goal), and each derivative of F is 0, or `>= 0` where P is at the lower
//! end of that variable, or `<= 0` where it is at the upper end.
//! Sound: F is convex on a convex set, so `F(x) >= F(P) + F'(P)(x - P)`, and no summand of
//! the last product is negative on the domain (R25). Elimination by intervals
//! encloses that of every matrix in them, and positive pivots make it definite.
//! Forgotten: a zero or a critical point that is one only numerically; a box that
//! does not hold the segment from P; a derivative that points outward at a face.

use super::Kernel;
use super::boxes::MAX_BITS;
use crate::kernel::defined::{require_defined, settled};
use crate::kernel::differentiate::differentiate;
use crate::kernel::evaluate::{Order, Program, constant};
use crate::kernel::number::Interval;
use crate::kernel::sequent::{End, Rel, Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::{Name, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let goal = s.relation()?;
    if !matches!(goal.rel, Rel::Le | Rel::Lt) {
        return refuse(Reason::Condition, "the goal is no inequality");
    }
    let bits = fields.count(MAX_BITS)?.max(16) as u32;
    let mut point = Vec::new();
    for d in &s.variables {
        let p = fields.term()?;
        if !p.free_variables().is_empty() {
            return refuse(Reason::Condition, format!("the value {p} of `{}` is not closed", d.name));
        }
        point.push(p);
    }
    fields.end()?;
    let difference = goal.difference();
    let names: Vec<Name> = s.variables.iter().map(|d| d.name.clone()).collect();
    let mut ranges = Vec::new();
    for (d, p) in s.variables.iter().zip(&point) {
        let end = |e: &Option<End>, low: bool| -> Checked<Interval> {
            match e {
                Some(e) if e.term.free_variables().is_empty() => constant(&e.term, bits),
                Some(e) => refuse(Reason::Condition, format!("the end {} is not closed", e.term)),
                None => {
                    let zero = Interval::zero();
                    let far = if low { (None, zero.upper().cloned()) } else { (zero.lower().cloned(), None) };
                    Interval::new(far.0, far.1).map_or_else(|| refuse(Reason::Limit, "an end"), Ok)
                }
            }
        };
        let hull = end(&d.domain.lower, true)?.hull(&end(&d.domain.upper, false)?);
        require_defined(s, &[p], None, k)?;
        ranges.push(hull.hull(&constant(p, bits)?));
    }
    let program = Program::new(std::slice::from_ref(&difference), &names, bits)?;
    k.spend(program.length() as u64 * (1 + names.len() * names.len()) as u64 * (1 + u64::from(bits) / 64))?;
    let jet = program.run(&ranges, Order::Bend)?.swap_remove(0);
    let used: Vec<usize> = (0..names.len()).filter(|&i| difference.mentions(&names[i])).collect();
    let entry = |i: usize, j: usize| jet.dd(i, j).cloned().unwrap_or_else(Interval::zero);
    let matrix: Vec<Vec<Interval>> =
        used.iter().map(|&i| used.iter().map(|&j| entry(i, j)).collect()).collect();
    require_definite(&matrix, bits)?;

    let at = |t: &Term| names.iter().zip(&point).fold(t.clone(), |t, (x, p)| t.substitute(x, p));
    let zero = Term::zero();
    let holds = |left: &Term, rel, right: &Term| settled(s, &Relation::new(left.clone(), rel, right.clone()));
    let value = at(&difference);
    if !(holds(&zero, goal.rel, &value) || (goal.rel == Rel::Le && k.equal(s, &value, &zero)?)) {
        return refuse(Reason::NotProved, format!("{value} is not {} 0", goal.rel.name()));
    }
    for &i in &used {
        let slope = differentiate(&difference, &names[i])?;
        let conditions: Vec<Relation> = slope.conditions.iter().map(|c| c.map(at)).collect();
        if let Some(c) = conditions.iter().find(|c| !settled(s, c)) {
            return refuse(Reason::Condition, format!("{c} is not settled"));
        }
        let slope = at(&slope.term);
        require_defined(s, &[&slope], None, k)?;
        let is_at = |e: &Option<End>| e.as_ref().is_some_and(|e| e.term == *point[i]);
        let domain = &s.variables[i].domain;
        let inward = (is_at(&domain.lower) && holds(&zero, Rel::Le, &slope))
            || (is_at(&domain.upper) && holds(&slope, Rel::Le, &zero));
        if !inward && !k.equal(s, &slope, &zero)? {
            return refuse(Reason::NotProved, format!("the derivative {slope} by `{}` is not 0", names[i]));
        }
    }
    Ok(())
}

/// Gaussian elimination of a symmetric matrix with positive pivots.
fn require_definite(matrix: &[Vec<Interval>], bits: u32) -> Checked {
    let Some((first, others)) = matrix.split_first() else { return Ok(()) };
    if !first[0].is_certainly_positive() {
        return refuse(Reason::NotProved, "the second derivatives are not seen to be positive definite");
    }
    let mut rest = Vec::new();
    for row in others {
        let ratio = row[0].div(&first[0], bits).map_err(crate::kernel::evaluate::refused)?;
        let less = |(x, y): (&Interval, &Interval)| x.sub(&ratio.mul(y, bits), bits);
        rest.push(row.iter().zip(first).skip(1).map(less).collect());
    }
    require_definite(&rest, bits)
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn touching() {
        accepted(
            "for all x : real in [-1/8, 1/8], y : real in [-1/8, 1/8]: exp(x + y) + x^2 >= 1 + x + y - y^2",
            "{touch 64 (0) (0)}",
        );
        accepted("for all x : real in [1, 2]: x^2 - 2*sqrt(2)*x + 2 >= 0", "{touch 64 (sqrt(2))}");
        accepted(
            "for all x : real in [0, 2], y : real in [0, 1]: x^2 - x*y + y^2 + x >= 0",
            "{touch 64 (0) (0)}",
        );
        accepted(
            "for all x : real in [0, 1], y : real in [3, 4]: (x - 1/2)^2 + 1 > 0",
            "{touch 64 (1/2) (3)}",
        );
    }

    #[test]
    fn refused() {
        // No zero, no critical point.
        rejected("for all x : real in [1, 2]: x^2 - 2*sqrt(2)*x + 2 >= 1/10^30", "{touch 64 (sqrt(2))}");
        rejected("for all x : real in [1, 2]: x^2 - 2*sqrt(2)*x + 2 >= 0", "{touch 64 (1.414213562373095)}");
        rejected("for all x : real in [0, 2]: x^2 - x >= 0", "{touch 64 (0)}");
        rejected("for all x : real in [-1, 0]: x^2 + x >= 0", "{touch 64 (0)}");
        rejected("for all x : real in [-1, 2]: x^2 + x >= 0", "{touch 64 (0)}");
        rejected("for all x : real in [1, 2]: (x - 1)^2 > 0", "{touch 64 (1)}");
        // Not convex on the whole segment (trap 23 among them).
        rejected("for all x : real in [-1, 1]: x - sin(x) >= 0", "{touch 64 (0)}");
        rejected("for all x : real in [2, 3]: x^2*(x - 5/2)^2 >= 1/100", "{touch 64 (0)}");
        rejected(
            "for all x : real in [-1, 1], y : real in [-1, 1]: x^2 + y^2 + 3*x*y >= 0",
            "{touch 64 (0) (0)}",
        );
        rejected("for all x : real in [-1, 1]: abs(x) >= 0", "{touch 64 (0)}");
        // The point and the ends are closed.
        rejected("for all x : real in [0, 1], y : real in [0, x]: x^2 + y^2 >= 0", "{touch 64 (0) (0)}");
        rejected("for all x : real in [0, 1]: x^2 >= 0", "{touch 64 (x)}");
        rejected("for all x : real in [0, 1]: x = x", "{touch 64 (0)}");
    }
}

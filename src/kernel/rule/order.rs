//! `{order full|first x y .. {rest}}`
//!
//! Two or more real variables, named in the order of their declarations, with the
//! same domain, whose ends are closed terms. The goal and each hypothesis are
//! by normal form unchanged when neighbours among them are swapped (`full`), or
//! when all are moved round, x to y to .. to x (`first`). The rest may assume
//! `x <= y <= ..` (`full`), or that x is the least (`first`): the lower ends of the
//! later variables become the one before them, or x.
//! Sound: some permutation of the group takes any point of Gamma to one in that
//! order, again in Gamma, where the goal says the same (R7). The ends that are
//! replaced follow from the first variable's.
//! Forgotten: a full order under cyclic symmetry only; domains that differ; a quantity
//! whose range depends on one of the variables.

use super::{Kernel, check as prove};
use crate::kernel::sequent::{End, Relation, Sequent, Sort};
use crate::kernel::step::Fields;
use crate::kernel::term::{Name, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let full = match &**fields.word()? {
        "full" => true,
        "first" => false,
        other => return refuse(Reason::Fields, format!("`{other}` is neither full nor first")),
    };
    let mut names: Vec<Name> = Vec::new();
    let mut last = None;
    while let Some(name) = fields.optional_word() {
        let place = s.variables.iter().position(|d| d.name == *name);
        if place.is_none() || place <= last {
            return refuse(Reason::Name, format!("`{name}` is not declared after the ones before"));
        }
        (last, names) = (place, [names, vec![name.clone()]].concat());
    }
    let rest = fields.step()?;
    fields.end()?;
    names.iter().try_for_each(|name| k.require_unmoved(s, name))?;
    let domain = |name: &Name| s.declaration(name).map(|d| &d.domain);
    let Some(common) = names.first().and_then(domain) else {
        return refuse(Reason::Fields, "expected variables");
    };
    let closed =
        [&common.lower, &common.upper].into_iter().flatten().all(|e| e.term.free_variables().is_empty());
    if names.len() < 2 || common.sort != Sort::Real || !closed {
        return refuse(Reason::Condition, "two real variables with closed ends are needed");
    }
    if names.iter().any(|n| domain(n) != Some(common)) {
        return refuse(Reason::Condition, "the variables have different domains");
    }
    let ends = s.variables.iter().flat_map(|d| [&d.domain.lower, &d.domain.upper]).flatten();
    if let Some(e) = ends.into_iter().find(|e| names.iter().any(|n| e.term.mentions(n))) {
        return refuse(Reason::Condition, format!("the end {} depends on the variables", e.term));
    }
    let pairs = names.windows(2).map(|pair| vec![(&pair[0], &pair[1]), (&pair[1], &pair[0])]);
    let round = names.iter().zip(names.iter().cycle().skip(1)).collect();
    let moves: Vec<Vec<(&Name, &Name)>> = if full { pairs.collect() } else { vec![round] };
    let goal = s.relation()?;
    for relation in s.hypotheses.iter().chain([&goal]) {
        for permutation in &moves {
            k.spend(100)?;
            let before = relation.difference();
            if !k.equal(s, &before, &moved(relation, permutation))? {
                return refuse(Reason::Condition, format!("{relation} is not symmetric"));
            }
        }
    }
    let mut new = s.clone();
    for (i, name) in names.iter().enumerate().skip(1) {
        let before = if full { &names[i - 1] } else { &names[0] };
        for d in new.variables.iter_mut().filter(|d| d.name == *name) {
            d.domain.lower = Some(End { term: Term::variable(before), open: false });
        }
    }
    prove(&new, rest, k)
}

/// The difference of a relation with variables put for one another at once.
fn moved(relation: &Relation, permutation: &[(&Name, &Name)]) -> Term {
    // Names that no text can contain stand in between.
    let hidden = |name: &Name| Name::from(format!("'{name}"));
    let apart = permutation
        .iter()
        .fold(relation.difference(), |t, (from, _)| t.substitute(from, &Term::variable(&hidden(from))));
    permutation.iter().fold(apart, |t, (from, to)| t.substitute(&hidden(from), &Term::variable(to)))
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    const THREE: &str = "for all x : real in [0, inf), y : real in [0, inf), z : real in [0, inf)";

    #[test]
    fn orders() {
        accepted(
            &format!("{THREE}: x*(x - y)*(x - z) + y*(y - x)*(y - z) + z*(z - x)*(z - y) >= 0"),
            "{order full x y z {shift x lo y lo z lo}}",
        );
        accepted(
            &format!("{THREE}: x^2*y + y^2*z + z^2*x >= 3*x*y*z"),
            "{order first x y z {squares (1) {square (1) (y - x) lo.z} {square (3/4*x) (z - x)}
              {square (x) (y - x - (z - x)/2)}}}",
        );
        accepted(
            &format!("{THREE} with x + y + z <= 1: x^2 + y^2 + z^2 >= x*y + y*z + z*x"),
            "{order full x y z {squares (2) {square (1) (x - y)} {square (1) (y - z)} {square (1) (z - x)}}}",
        );
    }

    #[test]
    fn refused() {
        // Trap 30: true in one order only.
        let cyclic = format!("{THREE}: x^2*z + y^2*x + z^2*y >= x^2*y + y^2*z + z^2*x");
        rejected(&cyclic, "{order full x y z {shift x lo y lo z lo}}");
        rejected(&cyclic, "{order first x y z {shift x lo y lo z lo}}");
        let two = "for all x : real in [0, 1], y : real in [0, 2]: (x - y)^2 >= 0";
        rejected(two, "{order full x y {sign}}");
        rejected("for all x : real in [0, 1], y : real in [0, 1]: y >= x", "{order full x y {sign}}");
        // A hypothesis that is not symmetric, an end that moves, a wrong order of names.
        rejected(
            "for all x : real in [0, 1], y : real in [0, 1] with x >= y: (x - y)^2 <= 0",
            "{order full x y {linear (y - x) h1 {sign}}}",
        );
        rejected(
            "for all x : real in [0, 1], y : real in [0, 1], z : real in [x, 1]: x + y + z - z >= x + y",
            "{order full x y {sign}}",
        );
        rejected("for all x : real in [0, 1], y : real in [0, 1]: x + y >= 0", "{order full y x {sign}}");
        rejected("for all x : real in [0, 1], y : real in [0, 1]: x + y >= 0", "{order full x {sign}}");
        rejected(
            "for all n : integer in [0, 1], m : integer in [0, 1]: n + m >= 0",
            "{order full n m {sign}}",
        );
    }
}

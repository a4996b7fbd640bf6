//! Values of the terms along chains at a named set of numbers.

use std::collections::BTreeSet;

use crate::enclosure::{BigInterval, Bits, Definedness};
use crate::expression::{Ranges, Substitution, Term, enclose, for_people};
use crate::report::{self, Audit, Value, Values};

use super::case::{Case, wanted};

/// Significant digits shown.
const DIGITS: usize = 8;

/// Adds the values of every item of a dossier that `names` mean, or of all.
pub fn add(audit: &mut Audit, case: &Case, numbers: &str, names: &BTreeSet<String>) {
    let theory = &case.loaded.theory;
    let Some(set) = theory.numbers.iter().find(|set| &*set.name == numbers) else { return };
    let mut at = Substitution::new();
    for (name, value) in &set.values {
        at.insert(name.clone(), value.clone());
    }
    for item in theory.items.iter().filter(|item| !item.imported && wanted(&item.name, names)) {
        let goals: Vec<_> = item.goals.iter().filter_map(|name| theory.goal(name)).collect();
        // An induction has goals of another shape than what was written.
        let texts = case.written.get(&*item.name).filter(|texts| texts.len() == goals.len());
        let mut terms = Vec::new();
        let mut last: Option<&Term> = None;
        for (place, goal) in goals.iter().enumerate() {
            let text = texts.and_then(|texts| texts.get(place));
            let left = text.map_or_else(|| for_people(&goal.relation.left), |text| text.left.clone());
            let right = text.map_or_else(|| for_people(&goal.relation.right), |text| text.right.clone());
            if last != Some(&goal.relation.left) {
                terms.push(value(left, &goal.relation.left, &at));
            }
            terms.push(value(format!("{} {right}", goal.relation.rel.sign()), &goal.relation.right, &at));
            last = Some(&goal.relation.right);
        }
        audit.values.push(Values {
            item: format!("{}.{}", theory.stem, item.name),
            dossier: case.loaded.name.clone(),
            numbers: numbers.to_string(),
            terms,
        });
    }
}

fn value(text: String, term: &Term, at: &Substitution) -> report::Term {
    let mut defined = Definedness::Continuous;
    let found = enclose::<BigInterval>(&at.apply(term), &Ranges::default(), Bits::new(256), &mut defined);
    let (value, why_not) = match found {
        Err(why) => (None, Some(why.to_string())),
        Ok(_) if !defined.is_everywhere() => (None, Some("it is not shown to be defined there".to_string())),
        Ok(found) => match found.to_decimals(DIGITS) {
            Some((at_least, at_most)) => (Some(Value { at_least, at_most }), None),
            None => (None, Some("it has no value there".to_string())),
        },
    };
    report::Term { term: text, value, why_not }
}

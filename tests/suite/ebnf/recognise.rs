//! Earley's recogniser (J. Earley, An efficient context-free parsing algorithm,
//! CACM 13, 1970), with the usual repair for rules that derive nothing: a
//! completed empty rule advances every item that waits for it, also later ones.

use std::collections::BTreeSet;

use super::{Grammar, Symbol};

#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
struct Item {
    rule: usize,
    alternative: usize,
    dot: usize,
    origin: usize,
}

/// Whether `tokens` is a sentence; `matches` says which tokens a terminal stands for.
pub fn recognises<T>(grammar: &Grammar, tokens: &[T], matches: impl Fn(&Symbol, &T) -> bool) -> bool {
    let nullable = nullable(grammar);
    let mut sets: Vec<BTreeSet<Item>> = vec![BTreeSet::new(); tokens.len() + 1];
    let mut waiting = Vec::new();
    add_rule(grammar, 0, 0, &mut sets[0], &mut waiting);
    for at in 0..=tokens.len() {
        if at > 0 {
            waiting = sets[at].iter().copied().collect();
        }
        while let Some(item) = waiting.pop() {
            let body = &grammar.rules[item.rule].alternatives[item.alternative];
            let advanced = Item { dot: item.dot + 1, ..item };
            match body.get(item.dot) {
                None => {
                    let parents: Vec<Item> = sets[item.origin]
                        .iter()
                        .filter(|parent| next(grammar, parent) == Some(&Symbol::Rule(item.rule)))
                        .map(|parent| Item { dot: parent.dot + 1, ..*parent })
                        .collect();
                    for parent in parents {
                        if sets[at].insert(parent) {
                            waiting.push(parent);
                        }
                    }
                }
                Some(Symbol::Rule(rule)) => {
                    add_rule(grammar, *rule, at, &mut sets[at], &mut waiting);
                    if nullable[*rule] && sets[at].insert(advanced) {
                        waiting.push(advanced);
                    }
                }
                Some(terminal) => {
                    if at < tokens.len() && matches(terminal, &tokens[at]) {
                        sets[at + 1].insert(advanced);
                    }
                }
            }
        }
    }
    sets[tokens.len()].iter().any(|item| item.rule == 0 && item.origin == 0 && next(grammar, item).is_none())
}

fn next<'g>(grammar: &'g Grammar, item: &Item) -> Option<&'g Symbol> {
    grammar.rules[item.rule].alternatives[item.alternative].get(item.dot)
}

fn add_rule(
    grammar: &Grammar,
    rule: usize,
    origin: usize,
    set: &mut BTreeSet<Item>,
    waiting: &mut Vec<Item>,
) {
    for alternative in 0..grammar.rules[rule].alternatives.len() {
        let item = Item { rule, alternative, dot: 0, origin };
        if set.insert(item) {
            waiting.push(item);
        }
    }
}

fn nullable(grammar: &Grammar) -> Vec<bool> {
    let mut nullable = vec![false; grammar.rules.len()];
    loop {
        let before = nullable.clone();
        for (index, rule) in grammar.rules.iter().enumerate() {
            nullable[index] |= rule
                .alternatives
                .iter()
                .any(|one| one.iter().all(|symbol| matches!(symbol, Symbol::Rule(rule) if before[*rule])));
        }
        if nullable == before {
            return nullable;
        }
    }
}

#[test]
fn recognises_balanced_and_ambiguous_sentences() {
    let grammar = super::read("s ::= e  e ::= e '+' e | '(' e? ')' | 'x' o*  o ::= 'y'?");
    let check = |text: &str| {
        let tokens: Vec<String> = text.chars().map(String::from).collect();
        recognises(
            &grammar,
            &tokens,
            |symbol, token| matches!(symbol, Symbol::Literal(text) if text == token),
        )
    };
    for text in ["x", "x+x+x", "(x+())", "xyyy", "((()))"] {
        assert!(check(text), "{text}");
    }
    for text in ["", "+", "x+", "(x", "xyx", "x)"] {
        assert!(!check(text), "{text}");
    }
}

//! Sentences of a grammar by random expansion.

use super::{Grammar, Random, Symbol};

/// Expands rules at random; below a given depth, along the shortest way out.
pub struct Generator<'g> {
    grammar: &'g Grammar,
    /// Height of the lowest derivation of each rule.
    heights: Vec<usize>,
}

impl<'g> Generator<'g> {
    pub fn new(grammar: &'g Grammar) -> Generator<'g> {
        let mut heights = vec![usize::MAX; grammar.rules.len()];
        for _ in 0..=grammar.rules.len() {
            for (index, rule) in grammar.rules.iter().enumerate() {
                let best = rule.alternatives.iter().map(|one| height(one, &heights)).min();
                heights[index] = best.unwrap_or(usize::MAX).min(heights[index]);
            }
        }
        for (rule, height) in grammar.rules.iter().zip(&heights) {
            assert_ne!(*height, usize::MAX, "rule {} derives nothing", rule.name);
        }
        Generator { grammar, heights }
    }

    /// The terminals of a random sentence.
    pub fn sentence(&self, random: &mut Random, depth: usize) -> Vec<Symbol> {
        let mut out = Vec::new();
        self.expand(0, random, depth, &mut out);
        out
    }

    fn expand(&self, rule: usize, random: &mut Random, depth: usize, out: &mut Vec<Symbol>) {
        let alternatives = &self.grammar.rules[rule].alternatives;
        let chosen = if depth == 0 {
            alternatives.iter().min_by_key(|one| height(one, &self.heights)).unwrap()
        } else {
            random.pick(alternatives)
        };
        for symbol in chosen {
            match symbol {
                Symbol::Rule(next) => self.expand(*next, random, depth.saturating_sub(1), out),
                terminal => out.push(terminal.clone()),
            }
        }
    }
}

fn height(alternative: &[Symbol], heights: &[usize]) -> usize {
    let below = alternative.iter().map(|symbol| match symbol {
        Symbol::Rule(index) => heights[*index],
        _ => 0,
    });
    below.max().unwrap_or(0).saturating_add(1)
}

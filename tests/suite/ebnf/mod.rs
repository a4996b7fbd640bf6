//! Grammars in the EBNF notation of the W3C (XML 1.0, section 6): read from a
//! file, used to generate sentences and, independently of our readers, to decide
//! whether a sequence of tokens is a sentence.

mod generate;
mod random;
mod read;
mod recognise;

pub use generate::Generator;
pub use random::Random;
pub use read::read;
pub use recognise::recognises;

/// A symbol of a plain production.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord)]
pub enum Symbol {
    /// A quoted text.
    Literal(String),
    /// A name in capitals: a token.
    Token(String),
    /// A rule, by index.
    Rule(usize),
}

/// A rule with its alternatives. Repetitions and groups have rules of their own.
#[derive(Debug, Clone)]
pub struct Rule {
    pub name: String,
    pub alternatives: Vec<Vec<Symbol>>,
}

/// A grammar; the first rule is the start.
#[derive(Debug, Clone)]
pub struct Grammar {
    pub rules: Vec<Rule>,
    /// How many rules have names in the file; helpers follow.
    pub named: usize,
}

impl Grammar {
    /// All literals.
    pub fn literals(&self) -> Vec<String> {
        let symbols = self.rules.iter().flat_map(|rule| rule.alternatives.iter().flatten());
        let mut list: Vec<String> = symbols
            .filter_map(|symbol| match symbol {
                Symbol::Literal(text) => Some(text.clone()),
                _ => None,
            })
            .collect();
        list.sort();
        list.dedup();
        list
    }
}

//! Reading EBNF. Rules whose names are in capitals describe tokens; they are
//! skipped, since tokens are the terminals here.

use super::{Grammar, Rule, Symbol};

#[derive(Debug, Clone, PartialEq, Eq)]
enum Token {
    Name(String),
    Literal(String),
    Class,
    Sign(char),
    Defines,
}

/// The syntactic rules of a grammar.
///
/// # Panics
/// If the text is not EBNF or a rule is missing: then the test has failed.
pub fn read(text: &str) -> Grammar {
    let tokens = tokenize(text);
    let starts: Vec<usize> =
        (1..tokens.len()).filter(|at| tokens[*at] == Token::Defines).map(|at| at - 1).collect();
    let mut bodies = Vec::new();
    for (index, start) in starts.iter().enumerate() {
        let end = starts.get(index + 1).copied().unwrap_or(tokens.len());
        let Token::Name(name) = &tokens[*start] else { panic!("`::=` follows no name") };
        if name.chars().any(|c| c.is_ascii_lowercase()) {
            bodies.push((name.clone(), &tokens[start + 2..end]));
        }
    }
    let names: Vec<String> = bodies.iter().map(|(name, _)| name.clone()).collect();
    for (index, name) in names.iter().enumerate() {
        assert!(!names[..index].contains(name), "rule {name} is defined twice");
    }
    let empty = |name: &String| Rule { name: name.clone(), alternatives: Vec::new() };
    let mut grammar = Grammar { rules: names.iter().map(empty).collect(), named: names.len() };
    for (index, (name, body)) in bodies.iter().enumerate() {
        let mut reader = Reader { tokens: body, at: 0, names: &names, grammar: &mut grammar };
        let alternatives = reader.alternatives();
        assert_eq!(reader.at, body.len(), "rule {name} is not read to its end");
        grammar.rules[index].alternatives = alternatives;
    }
    grammar
}

fn tokenize(text: &str) -> Vec<Token> {
    let mut tokens = Vec::new();
    let mut rest = text.trim_start();
    while let Some(c) = rest.chars().next() {
        let until = |from: usize, end: &str| {
            let length = rest[from..].find(end).expect("a quote, class or comment is not closed");
            from + length
        };
        let length = if rest.starts_with("/*") {
            until(2, "*/") + 2
        } else if rest.starts_with("::=") {
            tokens.push(Token::Defines);
            3
        } else if c == '\'' || c == '"' {
            let end = until(1, &c.to_string());
            tokens.push(Token::Literal(rest[1..end].to_string()));
            end + 1
        } else if c == '[' {
            tokens.push(Token::Class);
            until(1, "]") + 1
        } else if c == '#' {
            tokens.push(Token::Class);
            rest.find(|c: char| !c.is_alphanumeric() && c != '#').unwrap_or(rest.len())
        } else if c.is_alphabetic() {
            let end = rest.find(|c: char| !c.is_alphanumeric() && c != '_').unwrap_or(rest.len());
            tokens.push(Token::Name(rest[..end].to_string()));
            end
        } else {
            assert!("()|?*+-".contains(c), "unexpected `{c}` in a grammar");
            tokens.push(Token::Sign(c));
            c.len_utf8()
        };
        rest = rest[length..].trim_start();
    }
    tokens
}

struct Reader<'a> {
    tokens: &'a [Token],
    at: usize,
    names: &'a [String],
    grammar: &'a mut Grammar,
}

impl Reader<'_> {
    fn accept(&mut self, sign: char) -> bool {
        let found = self.tokens.get(self.at) == Some(&Token::Sign(sign));
        self.at += usize::from(found);
        found
    }

    fn alternatives(&mut self) -> Vec<Vec<Symbol>> {
        let mut list = vec![self.sequence()];
        while self.accept('|') {
            list.push(self.sequence());
        }
        list
    }

    fn sequence(&mut self) -> Vec<Symbol> {
        let mut list = Vec::new();
        while let Some(symbol) = self.item() {
            list.push(self.repeated(symbol));
        }
        list
    }

    fn item(&mut self) -> Option<Symbol> {
        if self.accept('(') {
            let inside = self.alternatives();
            assert!(self.accept(')'), "a group is not closed");
            return Some(self.helper(inside));
        }
        let symbol = match self.tokens.get(self.at)? {
            Token::Literal(text) => Symbol::Literal(text.clone()),
            Token::Name(name) => match self.names.iter().position(|other| other == name) {
                Some(index) => Symbol::Rule(index),
                None => {
                    assert!(name.chars().all(|c| !c.is_lowercase()), "rule {name} is missing");
                    Symbol::Token(name.clone())
                }
            },
            _ => return None,
        };
        self.at += 1;
        Some(symbol)
    }

    fn repeated(&mut self, symbol: Symbol) -> Symbol {
        if self.accept('?') {
            self.helper(vec![vec![], vec![symbol]])
        } else if self.accept('*') {
            self.list(vec![], symbol)
        } else if self.accept('+') {
            self.list(vec![symbol.clone()], symbol)
        } else {
            symbol
        }
    }

    /// A list that starts with `base` and goes on with `item`s.
    fn list(&mut self, base: Vec<Symbol>, item: Symbol) -> Symbol {
        let index = self.grammar.rules.len();
        let more = vec![Symbol::Rule(index), item];
        self.helper(vec![base, more])
    }

    fn helper(&mut self, alternatives: Vec<Vec<Symbol>>) -> Symbol {
        let index = self.grammar.rules.len();
        self.grammar.rules.push(Rule { name: format!("#{index}"), alternatives });
        Symbol::Rule(index)
    }
}

#[test]
fn reads_repetitions_and_groups() {
    let grammar = read("s ::= 'a' (T | b)* /* note */ b ::= 'x'+ 'y'? T ::= [0-9] - #x39 ']'");
    assert_eq!(grammar.named, 2);
    assert_eq!(grammar.literals(), ["a", "x", "y"]);
}

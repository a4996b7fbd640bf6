//! `grammar/language.ebnf` and the reader describe the same language.
//!
//! Two roads that share nothing but the EBNF file: sentences generated from it
//! must be read, and on mutated sentences the reader and an Earley recogniser
//! must agree.

use boundwright::diagnostic::{Code, Diagnostic};
use boundwright::language::{format, parse, words};
use boundwright::source::SourceFile;

use crate::ebnf::{Generator, Grammar, Random, Symbol, read, recognises};
use crate::language::bare;

fn grammar() -> Grammar {
    read(include_str!("../../grammar/language.ebnf"))
}

/// A terminal of a sentence.
#[derive(Debug, Clone, PartialEq, Eq)]
enum Token {
    Word(String),
    Number(String),
    Text(String),
    Sign(String),
    End,
    Begin,
    Finish,
}

const NAMES: &[&str] = &[
    "x", "y", "mu", "γ", "E0'", "weight", "constant", "claim", "from", "on", "real", "even", "Λ_1", "pi",
    "e", "∞", "lemma", "integer",
];
const NUMBERS: &[&str] = &["0", "12", "0.0625", "1.5e-3", "1.506e12", "7E+2"];
const WHOLES: &[&str] = &["0", "2", "31"];
const TEXTS: &[&str] = &["\"\"", "\"a doc\"", "\"eq:cut\"", "\"§ 2, (γ) [x] # no comment\""];

fn token(symbol: &Symbol, random: &mut Random) -> Token {
    let pick = |list: &[&str], random: &mut Random| random.pick(list).to_string();
    match symbol {
        Symbol::Literal(text) => literal(text),
        Symbol::Token(name) => match name.as_str() {
            "NAME" => Token::Word(pick(NAMES, random)),
            "NUMBER" => Token::Number(pick(NUMBERS, random)),
            "WHOLE" => Token::Number(pick(WHOLES, random)),
            "TEXT" => Token::Text(pick(TEXTS, random)),
            "END" => Token::End,
            "BEGIN" => Token::Begin,
            "FINISH" => Token::Finish,
            other => panic!("the token {other} is unknown to this test"),
        },
        Symbol::Rule(_) => unreachable!("sentences hold terminals only"),
    }
}

fn literal(text: &str) -> Token {
    if text.starts_with(|c: char| c.is_alphabetic()) {
        Token::Word(text.to_string())
    } else {
        Token::Sign(text.to_string())
    }
}

fn matches(symbol: &Symbol, token: &Token) -> bool {
    match (symbol, token) {
        (Symbol::Literal(text), Token::Word(word) | Token::Sign(word)) => text == word,
        (Symbol::Token(name), Token::Word(word)) => name == "NAME" && !words::is_reserved(word),
        (Symbol::Token(name), Token::Number(digits)) => {
            let whole = digits.bytes().all(|byte| byte.is_ascii_digit());
            name == "NUMBER" || name == "WHOLE" && whole
        }
        (Symbol::Token(name), Token::Text(_)) => name == "TEXT",
        (Symbol::Token(name), Token::End) => name == "END",
        (Symbol::Token(name), Token::Begin) => name == "BEGIN",
        (Symbol::Token(name), Token::Finish) => name == "FINISH",
        _ => false,
    }
}

/// Writes a sentence with its layout; now and then a statement goes on in a
/// deeper line, perhaps after a comment.
fn write(tokens: &[Token], random: &mut Random) -> String {
    let mut out = String::new();
    let mut indent = 0;
    let mut fresh = true;
    for token in tokens {
        let text = match token {
            Token::Word(text) | Token::Number(text) | Token::Text(text) | Token::Sign(text) => text,
            Token::End => {
                fresh = true;
                continue;
            }
            Token::Begin => {
                indent += 1 + random.below(4);
                indent = indent.next_multiple_of(4);
                fresh = true;
                continue;
            }
            Token::Finish => {
                indent = indent.saturating_sub(4);
                fresh = true;
                continue;
            }
        };
        if fresh {
            if !out.is_empty() {
                out.push_str(if random.once_in(6) { "\n\n" } else { "\n" });
            }
            if random.once_in(20) {
                out.push_str("  # above\n");
            }
            out.push_str(&" ".repeat(indent));
        } else if random.once_in(25) {
            let breaks = ["\n", " # beside\n", "\r\n", "\n  # between\n"];
            out.push_str(breaks[random.below(breaks.len())]);
            out.push_str(&" ".repeat(indent + 1 + random.below(9)));
        } else {
            out.push(' ');
        }
        fresh = false;
        out.push_str(text);
    }
    out.push('\n');
    out
}

/// Rules of the reader that the grammar file states in words only.
fn beyond_grammar(diagnostics: &[Diagnostic]) -> bool {
    diagnostics
        .iter()
        .any(|one| matches!(one.code, Code::RepeatedClause | Code::MixedDirections | Code::TooDeep))
}

#[test]
fn words_of_the_grammar_are_those_of_the_reader() {
    let found: Vec<String> = grammar()
        .literals()
        .into_iter()
        .filter(|text| text.starts_with(|c: char| c.is_ascii_lowercase()))
        .collect();
    let unreserved = ["real", "integer", "even", "on", "from"];
    let mut known: Vec<&str> =
        [words::STATEMENT_WORDS, words::CLAUSE_WORDS, words::FOLD_WORDS, &unreserved].concat();
    known.sort_unstable();
    known.dedup();
    assert_eq!(found, known);
}

#[test]
fn every_rule_is_used() {
    let grammar = grammar();
    let mut reached = vec![false; grammar.rules.len()];
    let mut waiting = vec![0];
    while let Some(rule) = waiting.pop() {
        if !std::mem::replace(&mut reached[rule], true) {
            for symbol in grammar.rules[rule].alternatives.iter().flatten() {
                if let Symbol::Rule(next) = symbol {
                    waiting.push(*next);
                }
            }
        }
    }
    for (rule, reached) in grammar.rules.iter().zip(reached) {
        assert!(reached, "rule {} cannot be reached", rule.name);
    }
}

#[test]
fn generated_sentences_are_read_and_printed() {
    let grammar = grammar();
    let generator = Generator::new(&grammar);
    let mut random = Random::new(7);
    let mut read_fully = 0;
    for round in 0..6000 {
        let symbols = generator.sentence(&mut random, 12 + round % 14);
        if symbols.len() > 400 {
            continue;
        }
        let tokens: Vec<Token> = symbols.iter().map(|one| token(one, &mut random)).collect();
        let text = write(&tokens, &mut random);
        let parsed = parse(&SourceFile::alone("a.obl", text.as_str()));
        if beyond_grammar(&parsed.diagnostics) {
            continue;
        }
        assert!(!parsed.has_errors(), "{text}\n{:?}", parsed.diagnostics);
        assert!(recognises(&grammar, &tokens, matches), "the recogniser refuses\n{text}");
        read_fully += 1;
        let once = format(&text, &parsed.value);
        let again = parse(&SourceFile::alone("a.obl", once.as_str()));
        assert!(!again.has_errors(), "{text}\nprinted as\n{once}\n{:?}", again.diagnostics);
        assert_eq!(bare(&parsed.value), bare(&again.value), "{text}\nprinted as\n{once}");
        assert_eq!(format(&once, &again.value), once, "first printed from\n{text}");
        let count = |tree: &boundwright::language::tree::Tree| tree.comments.len();
        assert_eq!(count(&parsed.value), count(&again.value), "{text}\nprinted as\n{once}");
    }
    assert!(read_fully > 2000, "only {read_fully} sentences were read");
}

#[test]
fn reader_and_recogniser_agree_on_mutated_sentences() {
    let grammar = grammar();
    let generator = Generator::new(&grammar);
    let mut random = Random::new(11);
    let vocabulary = vocabulary(&grammar);
    let mut tally = Tally::default();
    for round in 0..12_000 {
        let symbols = generator.sentence(&mut random, 8 + round % 14);
        if symbols.len() > 60 {
            continue;
        }
        let tokens: Vec<Token> = symbols.iter().map(|one| token(one, &mut random)).collect();
        tally.compare(&grammar, tokens, &vocabulary, &mut random);
    }
    let (accepted, refused) = (tally.accepted, tally.refused);
    assert!(accepted > 200 && refused > 2000, "{accepted} accepted, {refused} refused");
}

#[test]
fn reader_and_recogniser_agree_on_a_mutated_corpus() {
    let grammar = grammar();
    let vocabulary = vocabulary(&grammar);
    let mut random = Random::new(13);
    let mut tally = Tally::default();
    let text = include_str!("../cases/language/good/everything.obl");
    for statement in top_statements(text) {
        assert!(recognises(&grammar, &statement, matches), "{statement:?}");
        for _ in 0..60 {
            tally.compare(&grammar, statement.clone(), &vocabulary, &mut random);
        }
    }
    let (accepted, refused) = (tally.accepted, tally.refused);
    assert!(accepted > 100 && refused > 1000, "{accepted} accepted, {refused} refused");
}

/// How often the two roads agreed, and on what.
#[derive(Default)]
struct Tally {
    accepted: usize,
    refused: usize,
}

impl Tally {
    /// Mutates a sentence and asks both.
    fn compare(
        &mut self,
        grammar: &Grammar,
        mut tokens: Vec<Token>,
        vocabulary: &[Token],
        random: &mut Random,
    ) {
        for _ in 0..1 + random.below(2) {
            mutate(&mut tokens, vocabulary, random);
        }
        let text = write(&tokens, random);
        let parsed = parse(&SourceFile::alone("a.obl", text.as_str()));
        if beyond_grammar(&parsed.diagnostics) {
            return;
        }
        let recognised = recognises(grammar, &tokens, matches);
        assert_eq!(!parsed.has_errors(), recognised, "{text}\n{:?}", parsed.diagnostics);
        if recognised { self.accepted += 1 } else { self.refused += 1 }
    }
}

/// What a mutation may put into a sentence.
fn vocabulary(grammar: &Grammar) -> Vec<Token> {
    grammar
        .literals()
        .iter()
        .map(|text| literal(text))
        .chain([
            Token::Word("x".into()),
            Token::Word("claim".into()),
            Token::Number("2".into()),
            Token::Number("0.5".into()),
            Token::Text("\"t\"".into()),
        ])
        .collect()
}

/// The statements in the first column of a sound file, each as a sentence.
/// This is a second, simpler way from text to tokens; it trusts the file.
fn top_statements(text: &str) -> Vec<Vec<Token>> {
    let mut list: Vec<Vec<Token>> = Vec::new();
    // The columns of the statements around the current line, outermost first.
    let mut columns: Vec<usize> = Vec::new();
    for line in text.lines() {
        let column = line.len() - line.trim_start().len();
        let tokens = line_tokens(line);
        if tokens.is_empty() {
            continue;
        }
        if column == 0 {
            close(&mut list, &mut columns, 0);
            list.push(tokens);
            columns.push(0);
            continue;
        }
        let statement = list.last_mut().expect("the first statement is not indented");
        let opened = statement.last() == Some(&Token::Sign(":".into()))
            && last_statement(statement).first() == Some(&Token::Word("for".into()));
        if opened {
            statement.push(Token::Begin);
            columns.push(column);
        } else if column <= columns[columns.len() - 1] {
            close(&mut list, &mut columns, column);
        }
        list.last_mut().expect("there is a statement").extend(tokens);
    }
    close(&mut list, &mut columns, 0);
    list
}

/// Ends the current statement and the blocks deeper than `column`.
fn close(list: &mut [Vec<Token>], columns: &mut Vec<usize>, column: usize) {
    let Some(statement) = list.last_mut() else { return };
    statement.push(Token::End);
    while columns.last().is_some_and(|last| *last > column) {
        columns.pop();
        statement.push(Token::Finish);
    }
    if column == 0 {
        columns.clear();
    }
}

/// The tokens after the last layout token.
fn last_statement(tokens: &[Token]) -> &[Token] {
    let layout = |token: &Token| matches!(token, Token::End | Token::Begin | Token::Finish);
    let from = tokens.iter().rposition(layout).map_or(0, |at| at + 1);
    &tokens[from..]
}

/// The tokens of one line of a sound file.
fn line_tokens(line: &str) -> Vec<Token> {
    let mut list = Vec::new();
    let mut rest = line.trim_start();
    while let Some(c) = rest.chars().next().filter(|c| *c != '#') {
        let run = |keep: fn(char) -> bool| rest.find(|c| !keep(c)).unwrap_or(rest.len());
        let length = if c == '"' {
            rest[1..].find('"').expect("a text is closed") + 2
        } else if c.is_ascii_digit() {
            let plain = run(|c| c.is_ascii_digit() || c == '.' || c == 'e');
            rest[..plain].find("..").unwrap_or(plain)
        } else if c.is_alphabetic() {
            run(|c| c.is_alphanumeric() || c == '_' || c == '\'')
        } else if ["<=", ">=", ".."].iter().any(|sign| rest.starts_with(sign)) {
            2
        } else {
            c.len_utf8()
        };
        let text = rest[..length].to_string();
        list.push(match c {
            '"' => Token::Text(text),
            c if c.is_ascii_digit() => Token::Number(text),
            c if c.is_alphabetic() => Token::Word(text),
            _ => Token::Sign(text),
        });
        rest = rest[length..].trim_start();
    }
    list
}

/// Changes one token. The layout stays, except that two statements may be joined.
fn mutate(tokens: &mut Vec<Token>, vocabulary: &[Token], random: &mut Random) {
    let layout = |token: Option<&Token>| {
        token.is_none_or(|token| matches!(token, Token::End | Token::Begin | Token::Finish))
    };
    if tokens.is_empty() {
        return;
    }
    let at = random.below(tokens.len());
    if layout(tokens.get(at)) {
        // An END before another layout token, or at the end, shows nowhere in the text.
        if tokens[at] == Token::End && !layout(tokens.get(at + 1)) {
            tokens.remove(at);
        }
        return;
    }
    match random.below(4) {
        // A statement that vanishes altogether leaves an END that shows nowhere.
        0 if !(layout(at.checked_sub(1).and_then(|before| tokens.get(before)))
            && layout(tokens.get(at + 1))) =>
        {
            tokens.remove(at);
        }
        1 => tokens[at] = random.pick(vocabulary).clone(),
        2 => tokens.insert(at, random.pick(vocabulary).clone()),
        _ if !layout(tokens.get(at + 1)) => tokens.swap(at, at + 1),
        _ => {}
    }
}

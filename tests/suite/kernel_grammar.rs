//! `grammar/claim.ebnf` and `grammar/certificate.ebnf` describe what the kernel reads.
//!
//! Two roads that share nothing but the EBNF files: sentences generated from them
//! must be read, and on mutated sentences the kernel's reader and an Earley
//! recogniser must agree. Only refusals for syntax count: the reader also refuses
//! names that are not declared, at once, and then says nothing about the rest.

use boundwright::kernel::audit::Docket;
use boundwright::kernel::read::{declaration, relation, step, term};
use boundwright::kernel::verdict::{Checked, Reason};

use crate::ebnf::{Generator, Grammar, Random, Symbol, read, recognises};

/// Both files as one grammar that starts with `rule`.
fn grammar(rule: &str) -> Grammar {
    let (claim, certificate) =
        (include_str!("../../grammar/claim.ebnf"), include_str!("../../grammar/certificate.ebnf"));
    read(&format!("Start ::= {rule}\n{certificate}\n{claim}"))
}

/// The names a variable or a quantity cannot have.
const RESERVED: &[&str] = &["pi", "e", "euler", "inf", "sum", "product", "integral"];
const VARIABLES: &[&str] = &["x", "y", "q", "k.1", "γ", "a'", "gamma", "over", "states", "nothing", "fails"];
const NAMES: &[&str] = &["x", "q", "f", "g", "w", "mean.2", "e", "sum", "fact", "at"];
const NUMBERS: &[&str] = &["0", "1", "12", "0.0625"];
const TEXTS: &[&str] = &["\"\"", "\"Markov 1884, (1)\""];

/// A token for a terminal.
fn token(symbol: &Symbol, random: &mut Random) -> String {
    let list = match symbol {
        Symbol::Literal(text) => return text.clone(),
        Symbol::Token(name) => match name.as_str() {
            "NAME" => NAMES,
            "VARIABLE" => VARIABLES,
            "NUMBER" => NUMBERS,
            "WHOLE" => &["0", "64"],
            "TEXT" => TEXTS,
            other => panic!("the token {other} is unknown to this test"),
        },
        Symbol::Rule(_) => unreachable!("sentences hold terminals only"),
    };
    random.pick(list).to_string()
}

fn matches(symbol: &Symbol, token: &String) -> bool {
    let first = token.chars().next().expect("no token is empty");
    let word = first.is_alphabetic() || first == '_';
    match symbol {
        Symbol::Literal(text) => text == token,
        Symbol::Token(name) => match name.as_str() {
            "NAME" => word,
            "VARIABLE" => word && !RESERVED.contains(&token.as_str()),
            "NUMBER" => first.is_ascii_digit(),
            "WHOLE" => token.bytes().all(|byte| byte.is_ascii_digit()),
            "TEXT" => first == '"',
            other => panic!("the token {other} is unknown to this test"),
        },
        Symbol::Rule(_) => false,
    }
}

/// What the reader says of the syntax; nothing where it stopped for another reason.
fn syntax<T>(read: &Checked<T>) -> Option<bool> {
    match read {
        Ok(_) => Some(true),
        Err(reject) if reject.reason == Reason::Syntax => Some(false),
        Err(_) => None,
    }
}

/// The tokens of a text: a second, simpler way, which trusts that they are sound.
fn tokens(text: &str) -> Vec<String> {
    let mut list = Vec::new();
    let mut rest = text.trim_start();
    while let Some(c) = rest.chars().next() {
        let run = |keep: &dyn Fn(char) -> bool| rest.find(|c| !keep(c)).unwrap_or(rest.len());
        let length = if c == '"' {
            rest[1..].find('"').expect("a text is closed") + 2
        } else if c.is_ascii_digit() {
            let plain = run(&|c| c.is_ascii_digit() || c == '.');
            rest[..plain].find("..").unwrap_or(plain)
        } else if c.is_alphabetic() || c == '_' {
            run(&|c| c.is_alphanumeric() || "._'".contains(c))
        } else if ["<=", ">=", "!=", ".."].iter().any(|sign| rest.starts_with(sign)) {
            2
        } else {
            c.len_utf8()
        };
        list.push(rest[..length].to_string());
        rest = rest[length..].trim_start();
    }
    list
}

/// Changes one token of a sentence.
fn mutate(tokens: &mut Vec<String>, vocabulary: &[String], random: &mut Random) {
    if tokens.is_empty() {
        return;
    }
    let at = random.below(tokens.len());
    match random.below(4) {
        0 => drop(tokens.remove(at)),
        1 => tokens[at] = random.pick(vocabulary).clone(),
        2 => tokens.insert(at, random.pick(vocabulary).clone()),
        _ if at + 1 < tokens.len() => tokens.swap(at, at + 1),
        _ => {}
    }
}

/// What a mutation may put into a sentence.
fn vocabulary(grammar: &Grammar) -> Vec<String> {
    let more = ["x", "q", "inf", "2", "0.5", "\"t\""].map(String::from);
    grammar.literals().into_iter().chain(more).collect()
}

/// How often the two roads agreed, and on what.
#[derive(Default)]
struct Tally {
    accepted: usize,
    refused: usize,
}

impl Tally {
    fn compare(&mut self, grammar: &Grammar, tokens: &[String], said: Option<bool>) {
        let Some(said) = said else { return };
        assert_eq!(said, recognises(grammar, tokens, matches), "{}", tokens.join(" "));
        if said { self.accepted += 1 } else { self.refused += 1 }
    }
}

/// Generates sentences of `rule`, all of which must be read, and compares on mutations.
fn agree_on<T>(rule: &str, reader: fn(&str) -> Checked<T>) {
    let grammar = grammar(rule);
    let generator = Generator::new(&grammar);
    let vocabulary = vocabulary(&grammar);
    let mut random = Random::new(17);
    let (mut read_fully, mut tally) = (0, Tally::default());
    for round in 0..3000 {
        let symbols = generator.sentence(&mut random, 10 + round % 14);
        if symbols.len() > 80 {
            continue;
        }
        let mut tokens: Vec<String> = symbols.iter().map(|one| token(one, &mut random)).collect();
        let said = syntax(&reader(&tokens.join(" ")));
        assert_ne!(said, Some(false), "{rule}: {}", tokens.join(" "));
        read_fully += usize::from(said == Some(true));
        for _ in 0..1 + random.below(2) {
            mutate(&mut tokens, &vocabulary, &mut random);
        }
        let said = syntax(&reader(&tokens.join(" ")));
        tally.compare(&grammar, &tokens, said);
    }
    let Tally { accepted, refused } = tally;
    let enough = read_fully > 500 && accepted > 100 && refused > 500;
    assert!(enough, "{rule}: {read_fully} read, {accepted} accepted, {refused} refused");
}

#[test]
fn terms_relations_declarations_and_steps() {
    agree_on("Term", term);
    agree_on("Relation", relation);
    agree_on("Declaration", declaration);
    agree_on("Step", step);
}

/// Names for the statements that follow.
const PRELUDE: &str = r#"plain 1 of "t"; parameter x : real in [0, 1]; parameter y : integer in (-inf, inf);
    where w states x <= y; quantity q() : real in [0, 1];
    fact f : assumption for k : real in [0, 1] states k <= k; goal g over x states x <= 1;"#;

#[test]
fn statements_of_a_plain_form() {
    let grammar = grammar("Statement*");
    let generator = Generator::new(&grammar);
    let vocabulary = vocabulary(&grammar);
    let mut random = Random::new(19);
    let (mut read_fully, mut tally) = (0, Tally::default());
    let reader = |tokens: &[String]| syntax(&Docket::open(&format!("{PRELUDE}{}", tokens.join(" "))));
    for round in 0..6000 {
        let symbols = generator.sentence(&mut random, 4 + round % 14);
        if symbols.len() > 60 {
            continue;
        }
        let mut tokens: Vec<String> = symbols.iter().map(|one| token(one, &mut random)).collect();
        let said = reader(&tokens);
        assert_ne!(said, Some(false), "{}", tokens.join(" "));
        read_fully += usize::from(said == Some(true));
        mutate(&mut tokens, &vocabulary, &mut random);
        tally.compare(&grammar, &tokens, reader(&tokens));
    }
    let Tally { accepted, refused } = tally;
    let enough = read_fully > 200 && accepted > 100 && refused > 500;
    assert!(enough, "{read_fully} read, {accepted} accepted, {refused} refused");
}

/// The statements of the plain forms of all dossiers, each mutated behind those before it.
#[test]
fn statements_of_the_dossiers() {
    let grammar = grammar("Statement*");
    let vocabulary = vocabulary(&grammar);
    let mut random = Random::new(23);
    let mut tally = Tally::default();
    for plain in crate::dossiers::plain_forms() {
        let all = tokens(&plain);
        assert!(recognises(&self::grammar("Plain"), &all, matches), "{plain}");
        let mut ends = statement_ends(&all);
        ends.truncate(40);
        for pair in ends.windows(2) {
            let before = all[..pair[0]].join(" ");
            for _ in 0..6 {
                let mut statement = all[pair[0]..pair[1]].to_vec();
                mutate(&mut statement, &vocabulary, &mut random);
                let said = syntax(&Docket::open(&format!("{before} {}", statement.join(" "))));
                tally.compare(&grammar, &statement, said);
            }
        }
    }
    let Tally { accepted, refused } = tally;
    assert!(accepted > 100 && refused > 300, "{accepted} accepted, {refused} refused");
}

/// Where the statements of a plain form end; a semicolon inside an instance ends none.
fn statement_ends(tokens: &[String]) -> Vec<usize> {
    let mut depth = 0;
    let mut ends = Vec::new();
    for (at, token) in tokens.iter().enumerate() {
        match token.as_str() {
            // Ends of domains may be mixed, as in `(0, 1]`.
            "(" | "[" => depth += 1,
            ")" | "]" => depth -= 1,
            ";" if depth == 0 => ends.push(at + 1),
            _ => {}
        }
    }
    ends
}

/// Reads a certificate for the only obligation of a small plain form. The steps are
/// of no use there, so a text that is read is refused later, for what it says.
fn certificate(text: &str) -> Option<bool> {
    let plain = "plain 1 of \"t\"; parameter x : real in [0, 1]; goal g over x states x <= 1;";
    let docket = Docket::open(plain).expect("a sound plain form");
    let decision = docket.decide(0, &[text]);
    match decision.rejected.first().map(|reject| reject.reason) {
        Some(Reason::Syntax) => Some(false),
        Some(Reason::Name | Reason::Limit) => None,
        _ => Some(true),
    }
}

/// Lets a certificate speak of the obligation that [`certificate`] asks about.
fn readdressed(mut tokens: Vec<String>) -> Vec<String> {
    if let Some(name) = tokens.get_mut(3).filter(|name| matches(&Symbol::Token("NAME".into()), name)) {
        *name = "g".into();
    }
    tokens
}

#[test]
fn whole_certificates() {
    let grammar = grammar("Certificate");
    let generator = Generator::new(&grammar);
    let vocabulary = vocabulary(&grammar);
    let mut random = Random::new(29);
    let (mut read_fully, mut tally) = (0, Tally::default());
    for round in 0..4000 {
        let symbols = generator.sentence(&mut random, 6 + round % 14);
        if symbols.len() > 80 {
            continue;
        }
        let tokens = symbols.iter().map(|one| token(one, &mut random)).collect();
        let mut tokens = readdressed(tokens);
        let said = certificate(&tokens.join(" "));
        assert_ne!(said, Some(false), "{}", tokens.join(" "));
        read_fully += usize::from(said == Some(true));
        mutate(&mut tokens, &vocabulary, &mut random);
        let tokens = readdressed(tokens);
        tally.compare(&grammar, &tokens, certificate(&tokens.join(" ")));
    }
    let Tally { accepted, refused } = tally;
    let enough = read_fully > 500 && accepted > 150 && refused > 500;
    assert!(enough, "{read_fully} read, {accepted} accepted, {refused} refused");
}

#[cfg(feature = "mpfr")]
#[test]
fn certificates_that_the_search_writes() {
    let grammar = grammar("Certificate");
    let vocabulary = vocabulary(&grammar);
    let mut random = Random::new(31);
    let mut tally = Tally::default();
    for text in crate::dossiers::certificates() {
        let all = tokens(&text);
        assert!(recognises(&grammar, &all, matches), "{text}");
        let all = readdressed(all);
        if all.len() > 600 {
            continue;
        }
        for _ in 0..40 {
            let mut tokens = all.clone();
            mutate(&mut tokens, &vocabulary, &mut random);
            let tokens = readdressed(tokens);
            tally.compare(&grammar, &tokens, certificate(&tokens.join(" ")));
        }
    }
    let Tally { accepted, refused } = tally;
    assert!(accepted > 20 && refused > 100, "{accepted} accepted, {refused} refused");
}

//! Words of the kernel's texts.

use std::sync::Arc;

use num_bigint::BigInt;
use num_rational::BigRational;

use super::term::Name;
use super::verdict::{Checked, Reason, refuse};

/// A token.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Token {
    /// A name or keyword.
    Name(Name),
    /// An exact number.
    Number(BigRational),
    /// A text in quotes.
    Text(Arc<str>),
    /// A sign: one of `Signs`.
    Sign(&'static str),
}

/// Longest text the kernel reads, in bytes.
pub const MAX_TEXT: usize = 64 << 20;

// Longer signs first.
const SIGNS: [&str; 23] = [
    "<=", ">=", "!=", "..", "<", ">", "=", "+", "-", "*", "/", "^", "(", ")", "[", "]", "{", "}", ",", ";",
    ":", "&", "|",
];

fn starts_name(c: char) -> bool {
    c.is_ascii_alphabetic() || c == '_' || c as u32 == 0xAA || (c as u32 >= 0xB5 && !c.is_whitespace())
}

/// Splits a text into tokens, each with the byte it starts at.
pub fn tokens(text: &str) -> Checked<Vec<(usize, Token)>> {
    if text.len() > MAX_TEXT {
        return refuse(Reason::Limit, format!("the text is longer than {MAX_TEXT} bytes"));
    }
    let bytes = text.as_bytes();
    let mut found = Vec::new();
    let mut at = 0;
    while at < bytes.len() {
        let Some(c) = text[at..].chars().next() else { break };
        let start = at;
        if c.is_ascii_whitespace() {
            at += 1;
        } else if c.is_ascii_digit() {
            at += digits(&bytes[at..]);
            // `1..3` is a range, `1.3` a number.
            if bytes.get(at) == Some(&b'.') && bytes.get(at + 1).is_some_and(u8::is_ascii_digit) {
                at += 1 + digits(&bytes[at + 1..]);
            }
            found.push((start, Token::Number(number(&text[start..at])?)));
        } else if c == '"' {
            let Some(length) = text[at + 1..].find('"') else {
                return refuse(Reason::Syntax, format!("the text at byte {start} does not end"));
            };
            let inner = &text[at + 1..at + 1 + length];
            if inner.chars().any(|c| c.is_control()) {
                return refuse(Reason::Syntax, format!("control character in the text at byte {start}"));
            }
            found.push((start, Token::Text(inner.into())));
            at += length + 2;
        } else if starts_name(c) {
            at += name_length(&text[at..]);
            found.push((start, Token::Name(text[start..at].into())));
        } else if let Some(sign) = SIGNS.iter().find(|s| text[at..].starts_with(**s)) {
            at += sign.len();
            found.push((start, Token::Sign(sign)));
        } else {
            return refuse(Reason::Syntax, format!("unexpected {c:?} at byte {start}"));
        }
    }
    Ok(found)
}

/// Most digits of one number.
const MAX_DIGITS: usize = 20_000;

/// The exact value of `12` or `0.125`.
fn number(text: &str) -> Checked<BigRational> {
    if text.len() > MAX_DIGITS {
        return refuse(Reason::Limit, format!("a number has more than {MAX_DIGITS} digits"));
    }
    let (whole, fraction) = text.split_once('.').unwrap_or((text, ""));
    let Some(digits) = BigInt::parse_bytes(format!("{whole}{fraction}").as_bytes(), 10) else {
        return refuse(Reason::Syntax, format!("`{text}` is not a number"));
    };
    Ok(BigRational::new(digits, BigInt::from(10).pow(fraction.len() as u32)))
}

fn digits(bytes: &[u8]) -> usize {
    bytes.iter().take_while(|b| b.is_ascii_digit()).count()
}

/// Length of the name at the start: a dot belongs to it only between two parts.
fn name_length(text: &str) -> usize {
    let mut length = 0;
    let mut chars = text.chars().peekable();
    while let Some(c) = chars.next() {
        let inside = starts_name(c) || (length > 0 && (c.is_ascii_digit() || c == '\''));
        let dot = c == '.' && chars.peek().is_some_and(|n| starts_name(*n) || n.is_ascii_digit());
        if !(inside || dot) {
            break;
        }
        length += c.len_utf8();
    }
    length
}

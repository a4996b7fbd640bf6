//! Text to tokens.
//!
//! Every token knows whether it is the first of its line and how far that line
//! is indented; the parser finds the ends of statements from that. Characters
//! that mean nothing are reported here and become [`TokenKind::Wrong`], at
//! which the parser gives up the statement without a second message. Signs of
//! other notations whose meaning is plain (`==`, `**`) are reported and
//! replaced, so that reading goes on.

use nom::branch::alt;
use nom::bytes::complete::{tag, take_while};
use nom::character::complete::{digit1, one_of, satisfy};
use nom::combinator::{opt, recognize, value};
use nom::sequence::preceded;
use nom::{IResult, Parser};
use unicode_normalization::UnicodeNormalization;

use super::problems::Problems;
use super::tree::{Comment, MAX_DIGITS};
use crate::diagnostic::{Code, is_unsafe};
use crate::source::Span;

/// Signs of the language.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Sign {
    Plus,
    Minus,
    Times,
    Over,
    Caret,
    Factorial,
    Root,
    Less,
    LessEqual,
    Equal,
    GreaterEqual,
    Greater,
    Open,
    Close,
    OpenBracket,
    CloseBracket,
    Comma,
    Semicolon,
    Colon,
    Dot,
    Range,
    Bar,
}

/// What a token is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum TokenKind {
    /// A name or a word of the language.
    Word,
    /// A number.
    Number,
    /// A quoted text, with its quotes.
    Text,
    /// A sign.
    Sign(Sign),
    /// Something already reported.
    Wrong,
    /// The end of the file.
    End,
}

/// A token with its place and the layout of its line.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Token {
    /// What it is.
    pub kind: TokenKind,
    /// Where it stands.
    pub span: Span,
    /// Whether it is the first of its line.
    pub first: bool,
    /// How far its line is indented; a tab leads to the next multiple of eight.
    pub indent: u32,
}

/// The tokens of a file; the last one is [`TokenKind::End`].
pub struct Tokens {
    pub list: Vec<Token>,
    pub comments: Vec<Comment>,
}

/// Splits `text`, reporting what is wrong with its characters.
pub fn tokenize(text: &str, problems: &mut Problems) -> Tokens {
    report_unsafe(text, problems);
    let mut scanner = Scanner { text, at: 0, first: true, indent: 0, list: Vec::new() };
    let mut comments = Vec::new();
    if text.starts_with('\u{feff}') {
        scanner.at = '\u{feff}'.len_utf8();
    }
    scanner.measure_indent();
    while scanner.at < text.len() {
        scanner.step(problems, &mut comments);
    }
    let end = text.len() as u32;
    let last = Token { kind: TokenKind::End, span: Span::empty(end), first: true, indent: 0 };
    scanner.list.push(last);
    Tokens { list: scanner.list, comments }
}

/// Characters that could make a text look different from what it says are
/// refused everywhere; the scanner then treats them as blanks.
fn report_unsafe(text: &str, problems: &mut Problems) {
    let mut chars = text.char_indices().peekable();
    while let Some((at, c)) = chars.next() {
        let allowed = match c {
            '\n' => true,
            '\r' => chars.peek().is_some_and(|(_, next)| *next == '\n'),
            '\u{feff}' => at == 0,
            c => !is_unsafe(c),
        };
        if !allowed {
            let span = Span::new(at as u32, (at + c.len_utf8()) as u32);
            let message = format!("the character U+{:04X} is not allowed in a dossier", c as u32);
            let hint = "delete it, or retype this part of the line".to_string();
            problems.push(problems.error(Code::ControlCharacter, span, message).hint(hint));
        }
    }
}

struct Scanner<'t> {
    text: &'t str,
    at: usize,
    first: bool,
    indent: u32,
    list: Vec<Token>,
}

impl<'t> Scanner<'t> {
    /// At the start of a line: how far it is indented. Does not move.
    fn measure_indent(&mut self) {
        self.first = true;
        let mut width = 0;
        for c in self.text[self.at..].chars() {
            match c {
                '\t' => width = (width / 8 + 1) * 8,
                c if is_blank(c) => width += 1,
                _ => break,
            }
        }
        self.indent = width;
    }

    fn step(&mut self, problems: &mut Problems, comments: &mut Vec<Comment>) {
        let rest = &self.text[self.at..];
        let c = rest.chars().next().unwrap_or('\n');
        if c == '\n' {
            self.at += 1;
            self.measure_indent();
        } else if is_blank(c) || is_unsafe(c) {
            self.at += c.len_utf8();
        } else if c == '#' {
            let line = rest.find('\n').map_or(rest, |end| &rest[..end]).trim_end();
            let span = self.span(line.len());
            comments.push(Comment { span, text: line.to_string() });
            self.at += line.len();
        } else {
            let (kind, length) = self.token(rest, c, problems);
            let span = self.span(length);
            self.list.push(Token { kind, span, first: self.first, indent: self.indent });
            self.first = false;
            self.at += length;
        }
    }

    fn span(&self, length: usize) -> Span {
        Span::new(self.at as u32, (self.at + length) as u32)
    }

    /// The token at the start of `rest`, which starts with `c`: its kind and length in bytes.
    fn token(&self, rest: &'t str, c: char, problems: &mut Problems) -> (TokenKind, usize) {
        if c.is_ascii_digit() {
            return self.number(rest, problems);
        }
        if c == '"' {
            return self.text(rest, problems);
        }
        if let Ok((after, ())) = word(rest) {
            return (TokenKind::Word, rest.len() - after.len());
        }
        if c == '.' && rest[1..].starts_with(|c: char| c.is_ascii_digit()) && !self.after_name() {
            let length = 1 + rest[1..].bytes().take_while(u8::is_ascii_digit).count();
            let message = format!("`{}` lacks a digit before the point", shorten(&rest[..length]));
            let error = problems.error(Code::MalformedNumber, self.span(length), message);
            problems.push(error.hint(format!("write `0{}`", shorten(&rest[..length]))));
            return (TokenKind::Number, length);
        }
        if let Ok((after, (sign, advice))) = foreign(rest) {
            let length = rest.len() - after.len();
            let message = format!("`{}` is not a sign of the language", &rest[..length]);
            let error = problems.error(Code::ForeignOperator, self.span(length), message);
            problems.push(error.hint(advice));
            return (sign.map_or(TokenKind::Wrong, TokenKind::Sign), length);
        }
        if let Ok((after, sign)) = sign(rest) {
            return (TokenKind::Sign(sign), rest.len() - after.len());
        }
        let length = c.len_utf8();
        let message = format!("the character `{c}` (U+{:04X}) has no meaning here", c as u32);
        let mut error = problems.error(Code::StrayCharacter, self.span(length), message);
        if let Some(advice) = advice_for(c) {
            error = error.hint(advice);
        }
        problems.push(error);
        (TokenKind::Wrong, length)
    }

    /// Whether a path may go on here: the last token ends exactly here and is a
    /// name, or a number that is itself part of a path.
    fn after_name(&self) -> bool {
        match self.list.as_slice() {
            [.., dot, last] if last.kind == TokenKind::Number => {
                dot.kind == TokenKind::Sign(Sign::Dot) && last.span.end as usize == self.at
            }
            [.., last] => last.kind == TokenKind::Word && last.span.end as usize == self.at,
            [] => false,
        }
    }

    /// Whether the last token is a dot that ends exactly here.
    fn after_dot(&self) -> bool {
        self.list.last().is_some_and(|token| {
            token.kind == TokenKind::Sign(Sign::Dot) && token.span.end as usize == self.at
        })
    }

    fn number(&self, rest: &'t str, problems: &mut Problems) -> (TokenKind, usize) {
        let scanned = if self.after_dot() { recognize(digit1).parse(rest) } else { number(rest) };
        let (after, digits) = scanned.unwrap_or((&rest[1..], &rest[..1]));
        let length = digits.len();
        let span = self.span(length);
        let mut letters = after.chars();
        let malformed = match letters.next() {
            Some('.') if letters.next() != Some('.') && !self.after_dot() => {
                Some("a decimal point needs digits on both sides".to_string())
            }
            Some('_') => Some("digits are written without separators".to_string()),
            _ => None,
        };
        if let Some(advice) = malformed {
            let message = "the number is not written completely";
            let error = problems.error(Code::MalformedNumber, span, message);
            problems.push(error.hint(advice));
            return (TokenKind::Wrong, length + 1);
        }
        if is_too_long(digits) {
            let message = format!("the number has more than {MAX_DIGITS} digits or too large a power of ten");
            let error = problems.error(Code::NumberTooLong, span, message);
            problems.push(error.hint("write it as a power, for instance `10^(10^6)`"));
            return (TokenKind::Wrong, length);
        }
        (TokenKind::Number, length)
    }

    fn text(&self, rest: &'t str, problems: &mut Problems) -> (TokenKind, usize) {
        let line = rest.find('\n').map_or(rest, |end| &rest[..end]);
        let line = line.strip_suffix('\r').unwrap_or(line);
        if let Ok((after, ())) = text(line) {
            return (TokenKind::Text, line.len() - after.len());
        }
        let length = line.trim_end().len();
        let error = problems
            .error(Code::UnclosedText, self.span(length), "the text has no closing quote in its line")
            .hint("close it with `\"`");
        problems.push(error);
        (TokenKind::Wrong, length)
    }
}

fn is_blank(c: char) -> bool {
    c != '\n' && c.is_whitespace()
}

fn shorten(text: &str) -> String {
    if text.len() <= 20 { text.to_string() } else { format!("{}…", &text[..20]) }
}

fn is_too_long(number: &str) -> bool {
    let (mantissa, power) = number.split_once(['e', 'E']).unwrap_or((number, "0"));
    let size = power.parse::<i64>().map_or(u64::MAX, i64::unsigned_abs);
    mantissa.len() > MAX_DIGITS || size > MAX_DIGITS as u64
}

/// The normal form of a word: NFC, ASCII primes, ASCII names of constants.
pub fn normalize(word: &str) -> String {
    match word {
        "π" => "pi".to_string(),
        "∞" => "infinity".to_string(),
        word if word.is_ascii() => word.to_string(),
        word => word.nfc().map(|c| if c == '′' { '\'' } else { c }).collect(),
    }
}

type Scan<'t, T> = IResult<&'t str, T, ()>;

/// A name: a letter or `_`, then letters, digits, marks and `_`, then primes; or `∞`.
fn word(input: &str) -> Scan<'_, ()> {
    let letter = satisfy(|c| c == '_' || unicode_ident::is_xid_start(c));
    let more = take_while(unicode_ident::is_xid_continue);
    let primes = take_while(|c| c == '\'' || c == '′');
    alt((value((), (letter, more, primes)), value((), tag("∞")))).parse(input)
}

/// Digits, perhaps a fraction, perhaps a power of ten.
fn number(input: &str) -> Scan<'_, &str> {
    let fraction = preceded(tag("."), digit1);
    let power = (one_of("eE"), opt(one_of("+-")), digit1);
    recognize((digit1, opt(fraction), opt(power))).parse(input)
}

/// A text between quotes, in a line.
fn text(line: &str) -> Scan<'_, ()> {
    value((), (tag("\""), take_while(|c| c != '"'), tag("\""))).parse(line)
}

fn sign(input: &str) -> Scan<'_, Sign> {
    let compared = alt((
        value(Sign::LessEqual, alt((tag("<="), tag("≤"), tag("⩽")))),
        value(Sign::GreaterEqual, alt((tag(">="), tag("≥"), tag("⩾")))),
        value(Sign::Less, tag("<")),
        value(Sign::Greater, tag(">")),
        value(Sign::Equal, tag("=")),
    ));
    let computed = alt((
        value(Sign::Plus, tag("+")),
        value(Sign::Minus, alt((tag("-"), tag("−")))),
        value(Sign::Times, alt((tag("*"), tag("·"), tag("×"), tag("⋅")))),
        value(Sign::Over, tag("/")),
        value(Sign::Caret, tag("^")),
        value(Sign::Factorial, tag("!")),
        value(Sign::Root, tag("√")),
    ));
    let punctuation = alt((
        value(Sign::Open, tag("(")),
        value(Sign::Close, tag(")")),
        value(Sign::OpenBracket, tag("[")),
        value(Sign::CloseBracket, tag("]")),
        value(Sign::Comma, tag(",")),
        value(Sign::Semicolon, tag(";")),
        value(Sign::Colon, tag(":")),
        value(Sign::Range, tag("..")),
        value(Sign::Dot, tag(".")),
        value(Sign::Bar, tag("|")),
    ));
    alt((compared, computed, punctuation)).parse(input)
}

/// Signs of other notations: the sign meant, if that is plain, and what to write.
fn foreign(input: &str) -> Scan<'_, (Option<Sign>, &'static str)> {
    let meant = |written: &'static str, sign, advice: &'static str| value((sign, advice), tag(written));
    alt((
        meant("==", Some(Sign::Equal), "equality is written `=`"),
        meant("=<", Some(Sign::LessEqual), "at most is written `<=`"),
        meant(
            "=>",
            Some(Sign::GreaterEqual),
            "at least is written `>=`; an implication is written with `given`",
        ),
        meant("**", Some(Sign::Caret), "a power is written `^`"),
        meant(":=", Some(Sign::Equal), "a definition is written `define name = term`"),
        meant(
            "!=",
            None,
            "a chain has no `not equal`; a factorial before `=` is written with a blank, `n! =`",
        ),
        meant("<>", None, "a chain has no `not equal`"),
        meant("≠", None, "a chain has no `not equal`"),
        meant("≪", None, "write an explicit bound, for instance `a <= b/100`"),
        meant("≫", None, "write an explicit bound, for instance `a >= 100*b`"),
        meant("–", Some(Sign::Minus), "this is a dash; minus is written `-`"),
        meant("—", Some(Sign::Minus), "this is a dash; minus is written `-`"),
        meant("÷", Some(Sign::Over), "division is written `/`"),
        meant("∗", Some(Sign::Times), "multiplication is written `*`"),
        meant("∕", Some(Sign::Over), "division is written `/`"),
        meant("&&", None, "conditions are separated by commas"),
        meant("||", None, "an absolute value is written `abs(x)`"),
    ))
    .parse(input)
}

/// What to write instead of a character that means nothing.
fn advice_for(c: char) -> Option<String> {
    let advice = match c {
        '{' | '}' => "terms are grouped with `(` and `)`; an index is part of the name, as in `x_1`",
        '\\' => "names are written without a backslash: `gamma`, or the letter itself",
        '$' | '%' | '&' | '@' | '~' | '`' | '?' => "delete it; a comment starts with `#`",
        '\'' => "a prime follows the name directly: `x'`",
        '“' | '”' | '„' | '«' | '»' => "texts stand between straight quotes `\"`",
        '‘' | '’' => "a prime is written `'`, directly after the name",
        '∑' => "a sum is written `sum(k = a .. b, f)`",
        '∏' => "a product is written `product(k = a .. b, f)`",
        '∫' => "an integral is written `integral(t = a .. b, f)`",
        '∈' => "membership is written `in`",
        '∆' => "this is the increment sign; the Greek letter is `Δ` (U+0394)",
        '∂' => "derivatives have no sign in the language",
        '⌈' | '⌉' => "rounding up is written `ceil(x)`",
        '⌊' | '⌋' => "rounding down is written `floor(x)`",
        '‖' | '∥' => "a norm is a quantity with a name; an absolute value is written `abs(x)`",
        '±' | '∓' => "write both bounds, for instance `constant c in [2.1, 2.2]`",
        '→' | '⇒' | '⟹' => "an implication is written with `given`",
        '≈' | '≃' | '∼' | '≲' | '≳' | '≡' | '∝' => {
            "relations are `<=`, `<`, `=`, `>` and `>=`, with explicit constants"
        }
        '⁰' | '¹' | '²' | '³' | '⁴'..='⁹' => {
            let digit = c.to_string().nfkc().collect::<String>();
            return Some(format!("a power is written `^{digit}`"));
        }
        '⁻' | '⁺' => "a power is written with `^`, as in `x^(-1)`",
        '₀'..='₉' => {
            let digit = c.to_string().nfkc().collect::<String>();
            return Some(format!("an index is part of the name, as in `x_{digit}`"));
        }
        '½' | '¼' | '¾' => "fractions are written with `/`",
        _ => return None,
    };
    Some(advice.to_string())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::FileId;

    fn kinds(text: &str) -> Vec<TokenKind> {
        let mut problems = Problems::new(FileId(0));
        let tokens = tokenize(text, &mut problems);
        assert_eq!(problems.into_list(), [], "{text}");
        tokens.list.into_iter().map(|token| token.kind).collect()
    }

    fn codes(text: &str) -> Vec<Code> {
        let mut problems = Problems::new(FileId(0));
        tokenize(text, &mut problems);
        problems.into_list().into_iter().map(|one| one.code).collect()
    }

    #[test]
    fn both_spellings_give_the_same_tokens() {
        assert_eq!(kinds("a <= b >= c * d - e"), kinds("a ≤ b ≥ c · d − e"));
        assert_eq!(kinds("a * b"), kinds("a × b"));
        assert_eq!(normalize("π"), "pi");
        assert_eq!(normalize("∞"), "infinity");
        assert_eq!(normalize("E0′"), "E0'");
        assert_eq!(normalize("\u{2126}"), "Ω");
    }

    #[test]
    fn numbers_and_ranges() {
        use TokenKind::*;
        assert_eq!(kinds("1..n"), [Number, Sign(self::Sign::Range), Word, End]);
        assert_eq!(kinds("1.5e-3"), [Number, End]);
        assert_eq!(kinds("cut.2"), [Word, Sign(self::Sign::Dot), Number, End]);
        assert_eq!(codes("cut.2.31"), []);
        assert_eq!(codes("5."), [Code::MalformedNumber]);
        assert_eq!(codes("x .5"), [Code::MalformedNumber]);
        assert_eq!(codes("1_000"), [Code::MalformedNumber]);
        assert_eq!(codes("1e99999999999999999999"), [Code::NumberTooLong]);
        assert_eq!(codes("1e4096"), []);
        assert_eq!(codes(&"7".repeat(MAX_DIGITS)), []);
        assert_eq!(codes(&"7".repeat(MAX_DIGITS + 1)), [Code::NumberTooLong]);
    }

    #[test]
    fn layout_is_recorded() {
        let mut problems = Problems::new(FileId(0));
        let tokens = tokenize("\u{feff}a b\r\n\tc\n  # only\n   d", &mut problems).list;
        let layout: Vec<_> = tokens.iter().map(|token| (token.first, token.indent)).collect();
        assert_eq!(layout, [(true, 0), (false, 0), (true, 8), (true, 3), (true, 0)]);
    }

    #[test]
    fn dangerous_characters_are_refused_everywhere() {
        for text in ["a\u{202e}b", "# \u{2066}", "\"\u{7}\"", "a\rb", "x\u{200b}", "a\0"] {
            assert_eq!(codes(text), [Code::ControlCharacter], "{text:?}");
        }
    }

    #[test]
    fn foreign_signs_are_named() {
        for text in ["==", "=<", "**", "!=", "≠", ":="] {
            assert_eq!(codes(text), [Code::ForeignOperator], "{text}");
        }
        assert_eq!(codes("x²"), [Code::StrayCharacter]);
        assert_eq!(codes("\"open"), [Code::UnclosedText]);
    }
}

//! Walking over the tokens of a file: looking, taking, failing, recovering.
//!
//! A statement ends before the next line that is not indented deeper than its
//! first word; past that point [`Parser::peek`] shows the end. The functions of
//! `grammar/` are methods of [`Parser`], one for each rule of the grammar.

use super::problems::Problems;
use super::token::{Sign, Token, TokenKind, normalize};
use super::tree::{MAX_DEPTH, Name, Text};
use super::words;
use crate::diagnostic::{Code, Diagnostic};
use crate::source::Span;

/// Why a rule could not be read.
#[derive(Debug)]
pub enum Failure {
    /// The reason is already in the list.
    Told,
    /// The reason.
    Tell(Box<Diagnostic>),
}

impl From<Diagnostic> for Failure {
    fn from(diagnostic: Diagnostic) -> Failure {
        Failure::Tell(Box::new(diagnostic))
    }
}

/// The result of a rule.
pub type Read<T> = Result<T, Failure>;

/// Reads one file.
pub struct Parser<'t> {
    text: &'t str,
    tokens: &'t [Token],
    at: usize,
    /// First token of the current statement, and the indentation of its line.
    start: usize,
    column: u32,
    depth: usize,
    /// What was wrong so far.
    pub problems: Problems,
}

impl<'t> Parser<'t> {
    /// Before the first token. `tokens` must end with [`TokenKind::End`].
    pub fn new(text: &'t str, tokens: &'t [Token], problems: Problems) -> Parser<'t> {
        Parser { text, tokens, at: 0, start: 0, column: 0, depth: 0, problems }
    }

    // Looking.

    /// The next token, even if it belongs to the next statement.
    pub fn token(&self) -> Token {
        self.token_at(self.at)
    }

    fn token_at(&self, index: usize) -> Token {
        self.tokens[index.min(self.tokens.len() - 1)]
    }

    fn kind_at(&self, index: usize) -> TokenKind {
        let token = self.token_at(index);
        let ends = token.first && token.indent <= self.column && index > self.start;
        if ends { TokenKind::End } else { token.kind }
    }

    /// The kind of the next token of this statement.
    pub fn peek(&self) -> TokenKind {
        self.kind_at(self.at)
    }

    /// The kind of the token after the next one.
    pub fn peek_second(&self) -> TokenKind {
        self.kind_at(self.at + 1)
    }

    /// Whether the next token is this sign.
    pub fn sees(&self, sign: Sign) -> bool {
        self.peek() == TokenKind::Sign(sign)
    }

    /// Whether the next token is this word.
    pub fn sees_word(&self, word: &str) -> bool {
        self.peek_word() == Some(word)
    }

    /// The next token, if it is a word.
    pub fn peek_word(&self) -> Option<&'t str> {
        (self.peek() == TokenKind::Word).then(|| self.slice(self.token().span))
    }

    /// Whether the statement is used up.
    pub fn at_end(&self) -> bool {
        self.peek() == TokenKind::End
    }

    /// The text under `span`.
    pub fn slice(&self, span: Span) -> &'t str {
        &self.text[span.range()]
    }

    /// The index of the next token, for [`Parser::since`].
    pub fn here(&self) -> usize {
        self.at
    }

    /// From the token with this index to the last one taken.
    pub fn since(&self, index: usize) -> Span {
        let first = self.token_at(index).span;
        if self.at > index { first.to(self.last_span()) } else { Span::empty(first.start) }
    }

    /// The last token taken.
    pub fn last_span(&self) -> Span {
        match self.at {
            0 => Span::empty(0),
            at => self.token_at(at - 1).span,
        }
    }

    // Taking.

    /// Takes the next token.
    pub fn take(&mut self) -> Token {
        let token = self.token();
        if token.kind != TokenKind::End {
            self.at += 1;
        }
        token
    }

    /// Takes the next token if it is this sign.
    pub fn accept(&mut self, sign: Sign) -> Option<Token> {
        self.sees(sign).then(|| self.take())
    }

    /// Takes the next token if it is this word.
    pub fn accept_word(&mut self, word: &str) -> Option<Token> {
        self.sees_word(word).then(|| self.take())
    }

    /// Takes this sign; `what` says in a message what it is for.
    pub fn expect(&mut self, sign: Sign, what: &str) -> Read<Token> {
        self.accept(sign).ok_or_else(|| self.expected(what))
    }

    /// Takes the sign that closes `open`.
    pub fn close(&mut self, open: Token, sign: Sign, what: &str) -> Read<Token> {
        if let Some(token) = self.accept(sign) {
            return Ok(token);
        }
        if self.peek() == TokenKind::Wrong {
            return Err(Failure::Told);
        }
        let opened = self.problems.place(open.span);
        if self.at_end() {
            let written = self.slice(open.span);
            let message = format!("`{written}` is never closed");
            let end = self.problems.place(Span::empty(self.last_span().end));
            let error = self.problems.error(Code::Unclosed, open.span, message);
            return Err(error
                .label(end, format!("{what} expected here at the latest"))
                .hint("a statement goes on only in lines that are indented deeper than its first word")
                .into());
        }
        match self.expected(what) {
            Failure::Tell(error) => Err((*error).label(opened, "opened here").into()),
            told => Err(told),
        }
    }

    /// Takes a text in quotes.
    pub fn text(&mut self, what: &str) -> Read<Text> {
        if self.peek() != TokenKind::Text {
            return Err(self.expected(what));
        }
        let span = self.take().span;
        let inside = Span::new(span.start + 1, span.end - 1);
        Ok(Text { text: self.slice(inside).to_string(), span })
    }

    /// Takes a name; `what` says what it is the name of.
    pub fn name(&mut self, what: &str) -> Read<Name> {
        let Some(word) = self.peek_word() else {
            return Err(self.expected(what));
        };
        let span = self.token().span;
        if words::is_reserved(word) {
            let message = format!("`{word}` is a word of the language, so it cannot be {what}");
            let error = self.problems.error(Code::Reserved, span, message);
            let hint = format!("`{word}` must not be a name; choose another one, for instance `{word}_1`");
            return Err(error.hint(hint).into());
        }
        self.take();
        Ok(Name { text: normalize(word), span })
    }

    // Failing.

    /// The failure "expected …, found …" at the next token.
    pub fn expected(&self, what: &str) -> Failure {
        let token = self.token();
        match self.peek() {
            TokenKind::Wrong => Failure::Told,
            TokenKind::End => self.ended(what),
            _ => {
                let found = shown(self.slice(token.span));
                let message = format!("expected {what}, found {found}");
                let mut error = self.problems.error(Code::Unexpected, token.span, message);
                if let Some(hint) = self.hint_for(token) {
                    error = error.hint(hint);
                }
                error.into()
            }
        }
    }

    /// The statement ends too early; the next line may have been meant to continue it.
    fn ended(&self, what: &str) -> Failure {
        let next = self.token();
        let stray = match next.kind {
            TokenKind::End => false,
            TokenKind::Word => !words::seems_to_start_statement(self.slice(next.span)),
            _ => true,
        };
        if stray {
            let message = "this line is not indented, so it does not continue the statement above";
            let error = self.problems.error(Code::NotIndented, next.span, message);
            let begun = self.problems.place(self.token_at(self.start).span);
            return error
                .label(begun, format!("this statement still needs {what}"))
                .hint("indent the line deeper than the first word of the statement")
                .into();
        }
        let at = Span::empty(self.last_span().end);
        let message = format!("the statement ends where {what} is expected");
        self.problems.error(Code::Unexpected, at, message).into()
    }

    fn hint_for(&self, token: Token) -> Option<String> {
        let written = self.slice(token.span);
        if token.kind == TokenKind::Word && token.first && words::starts_statement(written) {
            let column = self.column + 1;
            return Some(format!("a new statement starts in column {column}; this line is indented deeper"));
        }
        match token.kind {
            TokenKind::Word => words::nearest(written, words::CLAUSE_WORDS)
                .filter(|near| *near != written)
                .map(|near| format!("perhaps `{near}` was meant")),
            TokenKind::Sign(Sign::Bar) => Some("an absolute value is written `abs(x)`".to_string()),
            _ => None,
        }
    }

    /// Counts one more level of nesting while `rule` is read.
    pub fn nested<T>(&mut self, rule: impl FnOnce(&mut Self) -> Read<T>) -> Read<T> {
        if self.depth >= MAX_DEPTH {
            let message = format!("the nesting is deeper than {MAX_DEPTH} levels");
            let error = self.problems.error(Code::TooDeep, self.token().span, message);
            return Err(error.hint("give parts of it names with `define`").into());
        }
        self.depth += 1;
        let result = rule(self);
        self.depth -= 1;
        result
    }

    // Statements and recovery.

    /// Begins a statement at the next token.
    pub fn begin_statement(&mut self) {
        self.start = self.at;
        self.column = self.token().indent;
    }

    /// The blanks before the first token of a line.
    pub fn indentation(&self, token: Token) -> &'t str {
        let before = &self.text[..token.span.start as usize];
        let line = before.rfind('\n').map_or(0, |end| end + 1);
        before[line..].trim_start_matches('\u{feff}')
    }

    /// All lines of the statement from token `start` to the last one taken must be
    /// indented like its first line and then more; otherwise it would depend on
    /// the width of a tab which of them is deeper.
    pub fn check_tabs(&mut self, start: usize) -> Read<()> {
        let outer = self.indentation(self.token_at(start));
        let tokens = self.tokens;
        for token in &tokens[start + 1..self.at.max(start + 1)] {
            if token.first && !self.indentation(*token).starts_with(outer) {
                return Err(self.mixed_tabs(*token));
            }
        }
        Ok(())
    }

    /// The failure that tabs and blanks are mixed before `token`.
    pub fn mixed_tabs(&self, token: Token) -> Failure {
        let message = "the line is indented with another mixture of tabs and blanks than the lines around it";
        let error = self.problems.error(Code::BadIndentation, token.span, message);
        error.hint("indent all lines of a block with blanks, or all with tabs").into()
    }

    /// Puts a failure into the list.
    pub fn tell(&mut self, failure: Failure) {
        if let Failure::Tell(error) = failure {
            self.problems.push(*error);
        }
    }

    /// Goes on to the next statement that starts with a word of its own. Lines
    /// in between were meant to belong to the failed one more often than not.
    pub fn skip_statement(&mut self) {
        let column = self.column;
        if self.at == self.start {
            self.take();
        }
        loop {
            let token = self.token();
            let boundary = token.first && token.indent <= column;
            if !boundary && token.kind != TokenKind::End {
                self.at += 1;
                continue;
            }
            let resumes = token.indent < column
                || token.kind == TokenKind::Word && words::seems_to_start_statement(self.slice(token.span));
            if token.kind == TokenKind::End || resumes {
                return;
            }
            self.at += 1;
        }
    }

    /// After a failed block header: goes on to its first statement, if there is
    /// one, or to the next statement after the block.
    pub fn skip_header(&mut self) {
        loop {
            let token = self.token();
            let begins = token.kind == TokenKind::Word && words::starts_statement(self.slice(token.span));
            let boundary = token.first && (token.indent <= self.column || begins);
            if token.kind == TokenKind::End || boundary && self.at > self.start {
                return;
            }
            self.at += 1;
        }
    }
}

/// A token as a message shows it.
fn shown(token: &str) -> String {
    if token.chars().count() <= 40 {
        return format!("`{token}`");
    }
    let start: String = token.chars().take(40).collect();
    format!("`{start}…`")
}

//! For tests: reads a term written in the plain syntax. Unknown calls are quantities.

use num_bigint::BigInt;
use num_rational::BigRational;

use crate::enclosure::Function;

use super::term::{Constant, End, SeriesKind, Term};

/// The term written as `text`; panics if it is not one.
pub(crate) fn term(text: &str) -> Term {
    let mut reader = Reader { tokens: tokens(text), next: 0 };
    let term = reader.sum();
    assert_eq!(reader.next, reader.tokens.len(), "trailing text in `{text}`");
    term
}

fn tokens(text: &str) -> Vec<String> {
    let mut tokens = Vec::new();
    let mut rest = text.trim_start();
    while let Some(first) = rest.chars().next() {
        let length = if first.is_alphabetic() {
            rest.find(|c: char| !(c.is_alphanumeric() || "_'.".contains(c))).unwrap_or(rest.len())
        } else if first.is_ascii_digit() {
            let whole = rest.find(|c: char| !c.is_ascii_digit()).unwrap_or(rest.len());
            let part = rest[whole..].strip_prefix('.').map_or(0, |p| {
                let n = p.find(|c: char| !c.is_ascii_digit()).unwrap_or(p.len());
                if n == 0 { 0 } else { n + 1 }
            });
            whole + part
        } else if rest.starts_with("..") {
            2
        } else {
            first.len_utf8()
        };
        tokens.push(rest[..length].to_owned());
        rest = rest[length..].trim_start();
    }
    tokens
}

struct Reader {
    tokens: Vec<String>,
    next: usize,
}

impl Reader {
    fn peek(&self) -> &str {
        self.tokens.get(self.next).map_or("", String::as_str)
    }

    fn take(&mut self) -> String {
        self.next += 1;
        self.tokens[self.next - 1].clone()
    }

    fn skip(&mut self, token: &str) -> bool {
        let found = self.peek() == token;
        self.next += usize::from(found);
        found
    }

    fn expect(&mut self, token: &str) {
        assert!(self.skip(token), "expected `{token}` at {} of {:?}", self.next, self.tokens);
    }

    fn sum(&mut self) -> Term {
        let mut left = if self.skip("-") { self.product().negate() } else { self.product() };
        loop {
            if self.skip("+") {
                left = left.add(&self.product());
            } else if self.skip("-") {
                left = left.subtract(&self.product());
            } else {
                return left;
            }
        }
    }

    fn product(&mut self) -> Term {
        let mut left = self.power();
        loop {
            if self.skip("*") {
                left = left.multiply(&self.power());
            } else if self.skip("/") {
                left = left.divide(&self.power());
            } else {
                return left;
            }
        }
    }

    fn power(&mut self) -> Term {
        let base = self.atom();
        if !self.skip("^") {
            return base;
        }
        let exponent = if self.skip("-") { self.power().negate() } else { self.power() };
        base.power(&exponent)
    }

    fn end(&mut self) -> End {
        let start = self.next;
        let minus = self.skip("-");
        if self.skip("inf") {
            return if minus { End::MinusInfinity } else { End::PlusInfinity };
        }
        self.next = start;
        End::Finite(self.sum())
    }

    fn atom(&mut self) -> Term {
        let token = self.take();
        let first = token.chars().next().expect("a token is never empty");
        if token == "(" {
            let inner = self.sum();
            self.expect(")");
            return inner;
        }
        if first.is_ascii_digit() {
            let (whole, part) = token.split_once('.').unwrap_or((&token, ""));
            let digits: BigInt = format!("{whole}{part}").parse().expect("digits");
            let scale = BigInt::from(10).pow(u32::try_from(part.len()).expect("short"));
            return Term::number(BigRational::new(digits, scale));
        }
        assert!(first.is_alphabetic(), "unexpected `{token}`");
        for kind in [SeriesKind::Sum, SeriesKind::Product, SeriesKind::Integral] {
            if token == kind.name() {
                self.expect("(");
                let index = self.take();
                self.expect("=");
                let lower = self.end();
                self.expect("..");
                let upper = self.end();
                self.expect(",");
                let body = self.sum();
                self.expect(")");
                return Term::series(kind, index, lower, upper, body);
            }
        }
        if self.skip("(") {
            let mut args = Vec::new();
            while !self.skip(")") {
                args.push(self.sum());
                if !self.skip(",") {
                    self.expect(")");
                    break;
                }
            }
            return match Function::from_name(&token) {
                Some(function) => Term::apply(function, args),
                None => Term::quantity(token, args),
            };
        }
        for constant in [Constant::Pi, Constant::E, Constant::Euler] {
            if token == constant.name() {
                return Term::constant(constant);
            }
        }
        Term::variable(token)
    }
}

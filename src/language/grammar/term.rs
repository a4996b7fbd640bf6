//! Terms: an operator-precedence loop over operands.

use crate::diagnostic::Code;
use crate::language::parser::{Failure, Parser, Read};
use crate::language::token::{Sign, Token, TokenKind, normalize};
use crate::language::tree::{
    Binding, Call, Expression, ExpressionKind, Fold, FoldKind, Name, Number, Path, ProductOperator,
    SumOperator,
};
use crate::language::words;
use crate::source::Span;

/// How tightly an operator binds; a loop with floor `f` takes operators from `f` up.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Level {
    Sum,
    Product,
    Power,
}

#[derive(Debug, Clone, Copy)]
enum Infix {
    Sum(SumOperator),
    Product(ProductOperator),
    Power,
}

impl Infix {
    fn of(kind: TokenKind) -> Option<Infix> {
        match kind {
            TokenKind::Sign(Sign::Plus) => Some(Infix::Sum(SumOperator::Plus)),
            TokenKind::Sign(Sign::Minus) => Some(Infix::Sum(SumOperator::Minus)),
            TokenKind::Sign(Sign::Times) => Some(Infix::Product(ProductOperator::Times)),
            TokenKind::Sign(Sign::Over) => Some(Infix::Product(ProductOperator::Over)),
            TokenKind::Sign(Sign::Caret) => Some(Infix::Power),
            _ => None,
        }
    }

    fn level(self) -> Level {
        match self {
            Infix::Sum(_) => Level::Sum,
            Infix::Product(_) => Level::Product,
            Infix::Power => Level::Power,
        }
    }
}

impl Parser<'_> {
    /// `term`: a whole term, not followed by anything it would be multiplied with.
    pub fn term(&mut self) -> Read<Expression> {
        let term = self.operators(Level::Sum)?;
        self.refuse_juxtaposition(&term)?;
        Ok(term)
    }

    /// `term`, `product` and `signed`: operands joined by operators of level
    /// `floor` or tighter. Sums and products become flat lists.
    fn operators(&mut self, floor: Level) -> Read<Expression> {
        let start = self.here();
        let mut left = self.signed()?;
        while let Some(infix) = Infix::of(self.peek()).filter(|infix| infix.level() >= floor) {
            self.take();
            left = match infix {
                Infix::Power => {
                    let exponent = self.nested(|parser| parser.operators(Level::Power))?;
                    let kind = ExpressionKind::Power(Box::new(left), Box::new(exponent));
                    Expression { kind, span: self.since(start) }
                }
                Infix::Product(operator) => {
                    let right = self.operators(Level::Power)?;
                    let span = self.since(start);
                    join_product(left, operator, right, span)
                }
                Infix::Sum(operator) => {
                    let right = self.operators(Level::Product)?;
                    let span = self.since(start);
                    join_sum(left, operator, right, span)
                }
            };
        }
        Ok(left)
    }

    /// A sign before an operand takes the powers after it along: `-x^2` is `-(x^2)`.
    fn signed(&mut self) -> Read<Expression> {
        let start = self.here();
        if self.accept(Sign::Minus).is_none() {
            return self.postfix();
        }
        let operand = self.nested(|parser| parser.operators(Level::Power))?;
        let kind = ExpressionKind::Negative(Box::new(operand));
        Ok(Expression { kind, span: self.since(start) })
    }

    /// `postfix`: an operand, perhaps after a root sign or before a factorial sign.
    fn postfix(&mut self) -> Read<Expression> {
        let start = self.here();
        if let Some(root) = self.accept(Sign::Root) {
            return self.root(root);
        }
        let operand = self.atom()?;
        if self.accept(Sign::Factorial).is_none() {
            return Ok(operand);
        }
        if self.sees(Sign::Factorial) {
            let message = "`!!` can mean the double factorial or the factorial of a factorial";
            return Err(self.ambiguous(message, "write `(n!)!` if that is meant"));
        }
        let kind = ExpressionKind::Factorial(Box::new(operand));
        Ok(Expression { kind, span: self.since(start) })
    }

    /// `√x` is `sqrt(x)`, and `√(x)` too. Where the bar would end is unclear
    /// before `^` and `!`, so those need parentheses.
    fn root(&mut self, root: Token) -> Read<Expression> {
        if self.sees(Sign::Root) {
            return Err(self.ambiguous("a root sign directly before another one", "write `√(√x)`"));
        }
        let start = self.here() - 1;
        let operand = self.nested(Self::atom)?;
        if self.sees(Sign::Caret) || self.sees(Sign::Factorial) {
            let message = "it is unclear what the root is taken of";
            return Err(self.ambiguous(message, "write `√(x^2)` or `(√x)^2`"));
        }
        let argument = match operand.kind {
            ExpressionKind::Group(inside) => *inside,
            kind => Expression { kind, span: operand.span },
        };
        let function = single("sqrt", root.span);
        let call = Call { function, arguments: vec![argument], named: Vec::new() };
        Ok(Expression { kind: ExpressionKind::Call(call), span: self.since(start) })
    }

    fn ambiguous(&self, message: &str, advice: &str) -> Failure {
        let error = self.problems.error(Code::AmbiguousNotation, self.token().span, message);
        error.hint(advice).into()
    }

    /// `atom`: a number, a name, a call, a fold, or a term in parentheses.
    fn atom(&mut self) -> Read<Expression> {
        let start = self.here();
        let kind = match self.peek() {
            TokenKind::Number => {
                let span = self.take().span;
                ExpressionKind::Number(Number { text: self.slice(span).to_string() })
            }
            TokenKind::Sign(Sign::Open) => {
                let open = self.take();
                let inside = self.nested(Self::term)?;
                self.close(open, Sign::Close, "`)`")?;
                ExpressionKind::Group(Box::new(inside))
            }
            TokenKind::Word => return self.named_atom(),
            _ => return Err(self.no_term()),
        };
        Ok(Expression { kind, span: self.since(start) })
    }

    fn no_term(&self) -> Failure {
        let hint = match self.peek() {
            TokenKind::Sign(Sign::Plus) => "a plus before a term is left out",
            TokenKind::Sign(Sign::OpenBracket) => "terms are grouped with `(` and `)`",
            _ => return self.expected("a term"),
        };
        match self.expected("a term") {
            Failure::Tell(error) => (*error).hint(hint).into(),
            told => told,
        }
    }

    fn named_atom(&mut self) -> Read<Expression> {
        let start = self.here();
        let word = self.peek_word().unwrap_or_default();
        let fold = match word {
            "sum" => Some(FoldKind::Sum),
            "product" => Some(FoldKind::Product),
            "integral" => Some(FoldKind::Integral),
            _ => None,
        };
        let kind = match fold {
            Some(kind) => ExpressionKind::Fold(Box::new(self.fold(kind)?)),
            None => {
                if words::is_reserved(word) {
                    return Err(self.expected("a term"));
                }
                let path = self.path("a term")?;
                match self.accept(Sign::Open) {
                    None => ExpressionKind::Name(path),
                    Some(open) => ExpressionKind::Call(self.call(path, open)?),
                }
            }
        };
        Ok(Expression { kind, span: self.since(start) })
    }

    /// `path`: names joined by dots.
    pub fn path(&mut self, what: &str) -> Read<Path> {
        let start = self.here();
        let mut parts = vec![self.name(what)?];
        while self.accept(Sign::Dot).is_some() {
            parts.push(self.name("a name after the dot")?);
        }
        Ok(Path { parts, span: self.since(start) })
    }

    /// `call`, after its opening parenthesis: arguments by position, then by name.
    fn call(&mut self, function: Path, open: Token) -> Read<Call> {
        let mut arguments = Vec::new();
        let mut named = Vec::new();
        if self.sees(Sign::Close) {
            let span = open.span.to(self.token().span);
            let error = self.problems.error(Code::Unexpected, span, "there are no arguments");
            return Err(error.hint("a quantity without arguments is written without parentheses").into());
        }
        loop {
            let by_name =
                self.peek() == TokenKind::Word && self.peek_second() == TokenKind::Sign(Sign::Equal);
            if by_name {
                named.push(self.nested(Self::binding)?);
            } else if named.is_empty() {
                arguments.push(self.nested(Self::term)?);
            } else {
                return Err(self.expected("an argument by name, as in `k = 3`"));
            }
            if self.accept(Sign::Comma).is_none() {
                break;
            }
        }
        self.close(open, Sign::Close, "`,` or `)`")?;
        Ok(Call { function, arguments, named })
    }

    /// `binding`: `k = cutoff(s)`
    pub fn binding(&mut self) -> Read<Binding> {
        let start = self.here();
        let name = self.name("a name")?;
        self.expect(Sign::Equal, "`=`")?;
        let value = self.term()?;
        Ok(Binding { name, value, span: self.since(start) })
    }

    /// `fold`: `sum(k = a .. b, f)` and its kin.
    fn fold(&mut self, kind: FoldKind) -> Read<Fold> {
        let word = self.take();
        let form = format!("`(`, as in `{}(k = a .. b, f)`", kind.word());
        let Some(open) = self.accept(Sign::Open) else {
            return match self.expected(&form) {
                Failure::Tell(error) => {
                    let place = self.problems.place(word.span);
                    Err((*error).label(place, "a word of the language, never a name").into())
                }
                told => Err(told),
            };
        };
        self.nested(|parser| {
            let variable = parser.name("a variable")?;
            parser.expect(Sign::Equal, "`=`")?;
            let from = parser.term()?;
            parser.expect(Sign::Range, "`..`")?;
            let to = parser.term()?;
            parser.expect(Sign::Comma, "`,`")?;
            let body = parser.term()?;
            parser.close(open, Sign::Close, "`)`")?;
            Ok(Fold { kind, variable, from, to, body })
        })
    }

    /// There is no implicit multiplication.
    fn refuse_juxtaposition(&self, left: &Expression) -> Read<()> {
        let next = self.token();
        let follows = match self.peek() {
            TokenKind::Number | TokenKind::Sign(Sign::Open) | TokenKind::Sign(Sign::Root) => true,
            TokenKind::Word => !words::CLAUSE_WORDS.contains(&self.slice(next.span)),
            _ => false,
        };
        if !follows {
            return Ok(());
        }
        let written = self.slice(next.span);
        let before = self.last_span();
        let span = Span::empty(before.end);
        let error =
            self.problems.error(Code::ImplicitProduct, span, "an operator is missing between two terms");
        let left_side = match self.slice(before) {
            ")" => "(…)",
            short if short.len() <= 20 => short,
            _ => "…",
        };
        let right_side = match written {
            "(" => "(…)",
            short if short.len() <= 20 => short,
            _ => "…",
        };
        let advice = format!("a product is written with `*`: `{left_side}*{right_side}`");
        let mut error = error.hint(advice);
        if next.first {
            error = error
                .label(self.problems.place(left.span), "this term goes on in the next line")
                .hint("if the body of the statement starts there, it needs a `:` before it");
        }
        if next.kind == TokenKind::Word {
            if let Some(near) = words::nearest(written, words::CLAUSE_WORDS) {
                error = error.hint(format!("or perhaps `{near}` was meant"));
            } else if next.first && words::starts_statement(written) {
                error = error.hint("or, if a new statement starts here, it is indented too deep");
            }
        }
        Err(error.into())
    }
}

/// A path of one part that was not written as such.
fn single(name: &str, span: Span) -> Path {
    Path { parts: vec![Name { text: normalize(name), span }], span }
}

fn join_sum(left: Expression, operator: SumOperator, right: Expression, span: Span) -> Expression {
    let kind = match left.kind {
        ExpressionKind::Sum(first, mut rest) => {
            rest.push((operator, right));
            ExpressionKind::Sum(first, rest)
        }
        kind => {
            let first = Expression { kind, span: left.span };
            ExpressionKind::Sum(Box::new(first), vec![(operator, right)])
        }
    };
    Expression { kind, span }
}

fn join_product(left: Expression, operator: ProductOperator, right: Expression, span: Span) -> Expression {
    let kind = match left.kind {
        ExpressionKind::Product(first, mut rest) => {
            rest.push((operator, right));
            ExpressionKind::Product(first, rest)
        }
        kind => {
            let first = Expression { kind, span: left.span };
            ExpressionKind::Product(Box::new(first), vec![(operator, right)])
        }
    };
    Expression { kind, span }
}

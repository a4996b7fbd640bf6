//! Reader for the terms and steps that both texts of the kernel share: one
//! function per production of `grammar/claim.ebnf` and `grammar/certificate.ebnf`.

use num_rational::BigRational;

use super::number::{Arity, Function};
use super::sequent::{Declaration, Domain, End, Goal, Rel, Relation, Sequent, Sort};
use super::step::{Field, Step};
use super::term::{Constant, Limit, Name, Node, SeriesKind, Term};
use super::token::{Token, tokens};
use super::verdict::{Checked, Reason, refuse};

/// Deepest nesting of parentheses and steps.
pub const MAX_NESTING: usize = 400;
/// Deepest term, counting chains such as `a + b + c + ...`.
pub const MAX_DEPTH: usize = 1500;

/// A text being read.
pub struct Reader {
    tokens: Vec<(usize, Token)>,
    at: usize,
    nesting: usize,
    /// How deep the term is that was read last, chains such as `a + b + c` included.
    depth: usize,
}

impl Reader {
    /// Starts at the beginning of `text`.
    pub fn new(text: &str) -> Checked<Reader> {
        Ok(Reader { tokens: tokens(text)?, at: 0, nesting: 0, depth: 0 })
    }

    /// The token ahead.
    pub fn peek(&self) -> Option<&Token> {
        self.tokens.get(self.at).map(|(_, t)| t)
    }

    /// The token after the one ahead.
    pub fn peek_second(&self) -> Option<&Token> {
        self.tokens.get(self.at + 1).map(|(_, t)| t)
    }

    /// A syntax refusal at the present place.
    pub fn unexpected<T>(&self, wanted: &str) -> Checked<T> {
        let place = match self.tokens.get(self.at) {
            None => "the end".to_string(),
            Some((byte, token)) => match token {
                Token::Name(n) => format!("`{n}` at byte {byte}"),
                Token::Number(_) => format!("the number at byte {byte}"),
                Token::Text(_) => format!("the text at byte {byte}"),
                Token::Sign(s) => format!("`{s}` at byte {byte}"),
            },
        };
        refuse(Reason::Syntax, format!("expected {wanted}, found {place}"))
    }

    /// Whether everything is read.
    pub fn at_end(&self) -> bool {
        self.at >= self.tokens.len()
    }

    /// Whether the sign is ahead; if so it is read.
    pub fn takes(&mut self, sign: &str) -> bool {
        let found = matches!(self.peek(), Some(Token::Sign(s)) if *s == sign);
        self.at += usize::from(found);
        found
    }

    /// Whether the word is ahead; if so it is read.
    pub fn takes_word(&mut self, word: &str) -> bool {
        let found = self.sees_word(word);
        self.at += usize::from(found);
        found
    }

    /// Whether the word is ahead.
    pub fn sees_word(&self, word: &str) -> bool {
        matches!(self.peek(), Some(Token::Name(n)) if &**n == word)
    }

    /// Reads a sign that must stand here.
    pub fn sign(&mut self, sign: &str) -> Checked {
        if self.takes(sign) { Ok(()) } else { self.unexpected(&format!("`{sign}`")) }
    }

    /// Reads a word that must stand here.
    pub fn word(&mut self, word: &str) -> Checked {
        if self.takes_word(word) { Ok(()) } else { self.unexpected(&format!("`{word}`")) }
    }

    /// Reads a name.
    pub fn name(&mut self) -> Checked<Name> {
        let Some(Token::Name(n)) = self.peek() else { return self.unexpected("a name") };
        let n = n.clone();
        self.at += 1;
        Ok(n)
    }

    /// Reads the name of a variable. A function's name is read as that function only
    /// before a parenthesis, where no variable can stand, so `gamma` may be both.
    fn variable(&mut self) -> Checked<Name> {
        match self.peek() {
            Some(Token::Name(n)) if RESERVED.contains(&&**n) => self.unexpected("a variable"),
            _ => self.name(),
        }
    }

    /// Reads a text in quotes.
    pub fn text(&mut self) -> Checked<String> {
        let Some(Token::Text(t)) = self.peek() else { return self.unexpected("a text in quotes") };
        let t = t.to_string();
        self.at += 1;
        Ok(t)
    }

    /// Reads a number.
    pub fn number(&mut self) -> Checked<BigRational> {
        let Some(Token::Number(q)) = self.peek() else { return self.unexpected("a number") };
        let q = q.clone();
        self.at += 1;
        Ok(q)
    }

    /// Reads one or more things with commas between them.
    pub fn list<T>(&mut self, mut one: impl FnMut(&mut Reader) -> Checked<T>) -> Checked<Vec<T>> {
        let mut all = vec![one(self)?];
        while self.takes(",") {
            all.push(one(self)?);
        }
        Ok(all)
    }

    fn nested<T>(&mut self, inner: impl FnOnce(&mut Reader) -> Checked<T>) -> Checked<T> {
        if self.nesting >= MAX_NESTING {
            return refuse(Reason::Limit, format!("nested deeper than {MAX_NESTING}"));
        }
        self.nesting += 1;
        let read = inner(self);
        self.nesting -= 1;
        read
    }

    /// Term
    pub fn term(&mut self) -> Checked<Term> {
        self.nested(|r| {
            let negative = r.takes("-");
            let first = r.product()?;
            let mut sum = if negative { first.negate() } else { first };
            loop {
                let plus = r.takes("+");
                if !plus && !r.takes("-") {
                    return Ok(sum);
                }
                let depth = r.depth;
                let next = r.product()?;
                r.above(depth)?;
                sum = if plus { sum.add(&next) } else { sum.subtract(&next) };
            }
        })
    }

    /// Product
    fn product(&mut self) -> Checked<Term> {
        let mut product = self.power()?;
        loop {
            let times = self.takes("*");
            if !times && !self.takes("/") {
                return Ok(product);
            }
            let depth = self.depth;
            let next = self.power()?;
            self.above(depth)?;
            product = if times { product.multiply(&next) } else { product.divide(&next) };
        }
    }

    /// Power
    fn power(&mut self) -> Checked<Term> {
        self.nested(|r| {
            let base = r.atom()?;
            if !r.takes("^") {
                return Ok(base);
            }
            let depth = r.depth;
            let negative = r.takes("-");
            let exponent = r.power()?;
            r.above(depth)?;
            Ok(base.power(&if negative { exponent.negate() } else { exponent }))
        })
    }

    /// Notes that a node stands above the term read last and one of the given depth.
    fn above(&mut self, depth: usize) -> Checked {
        self.depth = self.depth.max(depth) + 1;
        if self.depth > MAX_DEPTH {
            return refuse(Reason::Limit, format!("a term deeper than {MAX_DEPTH}"));
        }
        Ok(())
    }

    /// Atom
    fn atom(&mut self) -> Checked<Term> {
        self.depth = 0;
        match self.peek() {
            Some(Token::Number(_)) => Ok(Term::number(self.number()?)),
            Some(Token::Sign("(")) => {
                self.at += 1;
                let inner = self.term()?;
                self.sign(")")?;
                Ok(inner)
            }
            Some(Token::Name(name)) => {
                let name = name.clone();
                self.at += 1;
                match &*name {
                    "pi" => Ok(Node::Constant(Constant::Pi).into()),
                    "e" => Ok(Node::Constant(Constant::E).into()),
                    "euler" => Ok(Node::Constant(Constant::Euler).into()),
                    "sum" => self.series(SeriesKind::Sum),
                    "product" => self.series(SeriesKind::Product),
                    "integral" => self.series(SeriesKind::Integral),
                    "inf" => {
                        self.at -= 1;
                        self.unexpected("a term")
                    }
                    _ if self.takes("(") => self.call(name),
                    _ => Ok(Node::Variable(name).into()),
                }
            }
            _ => self.unexpected("a term"),
        }
    }

    /// Call, after its opening parenthesis
    fn call(&mut self, name: Name) -> Checked<Term> {
        let mut depth = 0;
        let args = if self.takes(")") {
            vec![]
        } else {
            let args = self.list(|r| {
                let arg = r.term();
                depth = depth.max(r.depth);
                arg
            })?;
            self.sign(")")?;
            args
        };
        self.above(depth)?;
        let Some(function) = Function::from_name(&name) else {
            return Ok(Node::Quantity(name, args).into());
        };
        let arity: Arity = function.arity();
        if !arity.accepts(args.len()) {
            return refuse(Reason::Name, format!("`{name}` does not take {} arguments", args.len()));
        }
        Ok(Node::Apply(function, args).into())
    }

    /// Series, after its word
    fn series(&mut self, kind: SeriesKind) -> Checked<Term> {
        self.sign("(")?;
        let index = self.variable()?;
        self.sign("=")?;
        let lower = self.limit()?;
        let depth = self.depth;
        self.sign("..")?;
        let upper = self.limit()?;
        let depth = depth.max(self.depth);
        self.sign(",")?;
        let body = self.term()?;
        self.above(depth)?;
        self.sign(")")?;
        Ok(Node::Series { kind, index, lower, upper, body }.into())
    }

    /// End
    fn limit(&mut self) -> Checked<Limit> {
        if self.takes_word("inf") {
            return Ok(Limit::Above);
        }
        let below = matches!(self.peek(), Some(Token::Sign("-")))
            && matches!(self.peek_second(), Some(Token::Name(n)) if &**n == "inf");
        if below {
            self.at += 2;
            return Ok(Limit::Below);
        }
        Ok(Limit::Finite(self.term()?))
    }

    /// Relation
    pub fn relation(&mut self) -> Checked<Relation> {
        let left = self.term()?;
        let rel =
            [Rel::Le, Rel::Ge, Rel::Ne, Rel::Lt, Rel::Gt, Rel::Eq].into_iter().find(|r| self.takes(r.name()));
        let Some(rel) = rel else { return self.unexpected("a relation sign") };
        Ok(Relation::new(left, rel, self.term()?))
    }

    /// Domain
    pub fn domain(&mut self) -> Checked<Domain> {
        let word = self.name()?;
        let Some(sort) = [Sort::Real, Sort::Integer, Sort::Even].into_iter().find(|s| s.name() == &*word)
        else {
            return refuse(Reason::Syntax, format!("`{word}` is not a sort"));
        };
        self.word("in")?;
        let lower_open = !self.takes("[");
        if lower_open {
            self.sign("(")?;
        }
        let lower = self.limit()?;
        self.sign(",")?;
        let upper = self.limit()?;
        let upper_open = !self.takes("]");
        if upper_open {
            self.sign(")")?;
        }
        let lower = match lower {
            Limit::Finite(term) => Some(End { term, open: lower_open }),
            Limit::Below if lower_open => None,
            _ => return refuse(Reason::Syntax, "the lower end of a domain is finite or an open -inf"),
        };
        let upper = match upper {
            Limit::Finite(term) => Some(End { term, open: upper_open }),
            Limit::Above if upper_open => None,
            _ => return refuse(Reason::Syntax, "the upper end of a domain is finite or an open inf"),
        };
        Ok(Domain { sort, lower, upper })
    }

    /// Declaration
    pub fn declaration(&mut self) -> Checked<Declaration> {
        let name = self.variable()?;
        self.sign(":")?;
        Ok(Declaration { name, domain: self.domain()? })
    }

    /// Sequent, as it is printed
    fn sequent(&mut self) -> Checked<Sequent> {
        let mut s = Sequent { variables: vec![], hypotheses: vec![], goal: Goal::Absurd };
        let led = self.takes_word("for");
        if led {
            self.word("all")?;
            s.variables = self.list(Reader::declaration)?;
        }
        let with = self.takes_word("with");
        if with {
            s.hypotheses = self.list(Reader::relation)?;
        }
        if led || with {
            self.sign(":")?;
        }
        if !self.takes_word("absurd") {
            s.goal = Goal::Relation(self.relation()?);
        }
        Ok(s)
    }

    /// Step
    pub fn step(&mut self) -> Checked<Step> {
        self.sign("{")?;
        self.nested(|r| {
            let rule = r.name()?;
            let mut fields = Vec::new();
            while !r.takes("}") {
                fields.push(r.field()?);
            }
            Ok(Step { rule, fields })
        })
    }

    /// Field
    fn field(&mut self) -> Checked<Field> {
        Ok(match self.peek() {
            Some(Token::Sign("{")) => Field::Step(self.step()?),
            Some(Token::Sign("[")) => {
                self.at += 1;
                let relation = self.relation()?;
                self.sign("]")?;
                Field::Relation(relation)
            }
            Some(Token::Sign("(")) => {
                self.at += 1;
                let declares = matches!(self.peek(), Some(Token::Name(_)))
                    && matches!(self.peek_second(), Some(Token::Sign(":")));
                let field = if declares {
                    Field::Declaration(self.declaration()?)
                } else {
                    Field::Term(self.term()?)
                };
                self.sign(")")?;
                field
            }
            Some(Token::Number(_)) => Field::Number(self.number()?),
            Some(Token::Text(_)) => Field::Text(self.text()?),
            Some(Token::Name(_)) => Field::Word(self.name()?),
            _ => return self.unexpected("a field or `}`"),
        })
    }
}

/// Names no variable may have.
const RESERVED: [&str; 7] = ["pi", "e", "euler", "inf", "sum", "product", "integral"];

/// Reads a whole text as one term.
pub fn term(text: &str) -> Checked<Term> {
    whole(text, Reader::term)
}

/// Reads a whole text as one relation.
pub fn relation(text: &str) -> Checked<Relation> {
    whole(text, Reader::relation)
}

/// Reads a whole text as one sequent.
pub fn sequent(text: &str) -> Checked<Sequent> {
    whole(text, Reader::sequent)
}

/// Reads a whole text as one step.
pub fn step(text: &str) -> Checked<Step> {
    whole(text, Reader::step)
}

/// Reads a whole text as one declaration.
pub fn declaration(text: &str) -> Checked<Declaration> {
    whole(text, Reader::declaration)
}

fn whole<T>(text: &str, read: impl FnOnce(&mut Reader) -> Checked<T>) -> Checked<T> {
    let mut reader = Reader::new(text)?;
    let found = read(&mut reader)?;
    if reader.at_end() { Ok(found) } else { reader.unexpected("the end") }
}

#[cfg(test)]
mod tests {
    use super::super::verdict::Reason;
    use super::*;

    #[test]
    fn refuses_with_a_named_reason() {
        let reason = |text: &str| term(text).expect_err(text).reason;
        for text in ["", "x +", "(x", "x y", "2x", "x <= y", "x ? y", "\"a\"", "sum(k = 1, k)", "1..2"] {
            assert_eq!(reason(text), Reason::Syntax, "{text}");
        }
        for text in ["inf", "pi(1)", "sum + 1", "sum(e = 1 .. 2, e)"] {
            assert_eq!(reason(text), Reason::Syntax, "{text}");
        }
        assert_eq!(reason("exp()"), Reason::Name);
        assert_eq!(reason("min(1)"), Reason::Name);
        assert_eq!(reason(&"(".repeat(10_000)), Reason::Limit);
        assert_eq!(reason(&"2^".repeat(10_000)), Reason::Limit);
        assert_eq!(reason(&format!("x{}", "+x".repeat(10_000))), Reason::Limit);
        assert_eq!(reason(&"9".repeat(30_000)), Reason::Limit);
        // Chains inside each other add up.
        let chains = |levels: usize| {
            (0..levels).fold("x".into(), |t: String, _| format!("f({t}{})", "+x*y/2".repeat(100)))
        };
        assert_eq!(reason(&chains(20)), Reason::Limit);
        assert!(term(&chains(10)).is_ok());
        assert!(step(&"{cut ".repeat(10_000)).is_err_and(|r| r.reason == Reason::Limit));
        assert_eq!(declaration("pi : real in [0, 1]").unwrap_err().reason, Reason::Syntax);
        assert_eq!(declaration("x : real in [-inf, 1]").unwrap_err().reason, Reason::Syntax);
        assert!(step("{cut [x <= 1] {sign} {sign}} trailing").is_err());
        // A tower costs nothing to read: nothing is evaluated.
        assert!(term("10^10^10^10").is_ok());
    }
}

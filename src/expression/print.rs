//! Terms as text: the kernel's plain syntax (`Display`) and a form for people.

use std::fmt::{self, Display, Formatter, Write};

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed};

use crate::enclosure::Function;

use super::term::{End, Node, Term};

/// How tightly a place binds: what stands there needs parentheses if it binds less.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Binding {
    Sum,
    Product,
    Power,
    Atom,
}

#[derive(Clone, Copy, PartialEq, Eq)]
enum Style {
    Plain,
    People,
}

/// The syntax of `grammar/claim.ebnf` with the fewest parentheses. Reading it back
/// gives the same term.
impl Display for Term {
    fn fmt(&self, f: &mut Formatter<'_>) -> fmt::Result {
        write_term(f, self, Style::Plain)
    }
}

impl fmt::Debug for Term {
    fn fmt(&self, f: &mut Formatter<'_>) -> fmt::Result {
        write!(f, "`{self}`")
    }
}

impl Display for End {
    fn fmt(&self, f: &mut Formatter<'_>) -> fmt::Result {
        write_end(f, self, Style::Plain)
    }
}

/// The term as people type it: short decimals instead of fractions, `n!`,
/// quantities without arguments bare.
#[must_use]
pub fn for_people(term: &Term) -> String {
    let mut text = String::new();
    // Writing into a String cannot fail.
    let _ = write_term(&mut text, term, Style::People);
    text
}

fn binding(term: &Term, style: Style) -> Binding {
    match term.node() {
        Node::Number(a) if a.is_negative() => Binding::Sum,
        Node::Number(a) if a.is_integer() || (style == Style::People && decimal(a).is_some()) => {
            Binding::Atom
        }
        Node::Number(_) | Node::Multiply(..) | Node::Divide(..) => Binding::Product,
        Node::Negate(_) | Node::Add(..) | Node::Subtract(..) => Binding::Sum,
        Node::Power(..) => Binding::Power,
        _ => Binding::Atom,
    }
}

fn write_at(f: &mut dyn Write, term: &Term, least: Binding, style: Style) -> fmt::Result {
    if binding(term, style) >= least {
        write_term(f, term, style)
    } else {
        f.write_char('(')?;
        write_term(f, term, style)?;
        f.write_char(')')
    }
}

fn write_term(f: &mut dyn Write, term: &Term, style: Style) -> fmt::Result {
    match term.node() {
        Node::Number(a) => write_number(f, a, style),
        Node::Constant(c) => f.write_str(c.name()),
        Node::Variable(name) => f.write_str(name),
        Node::Negate(a) => {
            f.write_char('-')?;
            write_at(f, a, Binding::Product, style)
        }
        Node::Add(a, b) => write_two(f, a, " + ", b, Binding::Sum, Binding::Product, style),
        Node::Subtract(a, b) => write_two(f, a, " - ", b, Binding::Sum, Binding::Product, style),
        Node::Multiply(a, b) => write_two(f, a, "*", b, Binding::Product, Binding::Power, style),
        Node::Divide(a, b) => write_two(f, a, "/", b, Binding::Product, Binding::Power, style),
        Node::Power(a, b) => {
            write_at(f, a, Binding::Atom, style)?;
            f.write_char('^')?;
            write_at(f, b, Binding::Power, style)
        }
        Node::Apply(Function::Factorial, args) if style == Style::People && args.len() == 1 => {
            write_at(f, &args[0], Binding::Atom, style)?;
            f.write_char('!')
        }
        Node::Apply(function, args) => write_call(f, function.name(), args, style),
        Node::Quantity(name, args) if args.is_empty() && style == Style::People => f.write_str(name),
        Node::Quantity(name, args) => write_call(f, name, args, style),
        Node::Series { kind, index, lower, upper, body } => {
            write!(f, "{}({index} = ", kind.name())?;
            write_end(f, lower, style)?;
            f.write_str(" .. ")?;
            write_end(f, upper, style)?;
            f.write_str(", ")?;
            write_term(f, body, style)?;
            f.write_char(')')
        }
    }
}

fn write_two(
    f: &mut dyn Write,
    a: &Term,
    sign: &str,
    b: &Term,
    left: Binding,
    right: Binding,
    style: Style,
) -> fmt::Result {
    write_at(f, a, left, style)?;
    f.write_str(sign)?;
    write_at(f, b, right, style)
}

fn write_call(f: &mut dyn Write, name: &str, args: &[Term], style: Style) -> fmt::Result {
    write!(f, "{name}(")?;
    for (i, arg) in args.iter().enumerate() {
        if i > 0 {
            f.write_str(", ")?;
        }
        write_term(f, arg, style)?;
    }
    f.write_char(')')
}

fn write_end(f: &mut dyn Write, end: &End, style: Style) -> fmt::Result {
    let infinity = match style {
        Style::Plain => "inf",
        Style::People => "infinity",
    };
    match end {
        End::MinusInfinity => write!(f, "-{infinity}"),
        End::Finite(t) => write_term(f, t, style),
        End::PlusInfinity => f.write_str(infinity),
    }
}

fn write_number(f: &mut dyn Write, a: &BigRational, style: Style) -> fmt::Result {
    if let (Style::People, Some(text)) = (style, decimal(a)) {
        return f.write_str(&text);
    }
    if a.is_integer() { write!(f, "{}", a.numer()) } else { write!(f, "{}/{}", a.numer(), a.denom()) }
}

/// The exact decimal, if it has at most eight digits after the point.
fn decimal(a: &BigRational) -> Option<String> {
    const DIGITS: usize = 8;
    if a.denom().is_one() {
        return Some(a.numer().to_string());
    }
    let mut scale = BigInt::one();
    for digits in 1..=DIGITS {
        scale *= 10;
        let scaled = a * &scale;
        if scaled.is_integer() {
            let text = format!("{:0>width$}", scaled.numer().abs(), width = digits + 1);
            let (whole, part) = text.split_at(text.len() - digits);
            let sign = if a.is_negative() { "-" } else { "" };
            return Some(format!("{sign}{whole}.{part}"));
        }
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::sample::term;

    #[test]
    fn the_fewest_parentheses() {
        for text in [
            "a - (b - c)",
            "a - b - c",
            "a/(b/c)",
            "a/b/c",
            "a*(b*c)",
            "-x^2",
            "(-x)^2",
            "x^y^z",
            "(x^y)^z",
            "x^(-2)",
            "x^(-y^z)",
            "x^(-1/2)",
            "x^(1/2)",
            "(-3)*x",
            "-3*x",
            "a + (-3)",
            "a*(1/2)",
            "1/2*a",
            "(1/2)^x",
            "a + b*c",
            "(a + b)*c",
            "-(a + b)",
            "a - (-b)",
            "min(a, b, -c)",
            "mean()",
            "q(x + 1)^2",
            "sum(k = 0 .. inf, x^k/factorial(k))",
            "integral(t = -inf .. inf, exp(-t^2))",
            "x^(a*b)",
            "x^(-a*b)",
            "-(-x)",
            "2^10",
            "(-2)^2",
            "-2^2",
            "x' + pi*e*euler",
        ] {
            let t = term(text);
            assert_eq!(t.to_string(), text);
            assert_eq!(term(&t.to_string()), t);
        }
    }

    #[test]
    fn the_form_for_people() {
        let check = |text: &str, expected: &str| assert_eq!(for_people(&term(text)), expected);
        check("0.0625*x^0.5", "0.0625*x^0.5");
        check("x/3 + 1/3", "x/3 + 1/3");
        check("factorial(n + 1)*mean()", "(n + 1)!*mean");
        check("-0.5*x + (-1.25)", "-0.5*x + (-1.25)");
        check("sum(k = 1 .. inf, k)", "sum(k = 1 .. infinity, k)");
    }
}

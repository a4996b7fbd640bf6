//! The syntax tree: what was written, with the place of every node.
//!
//! The tree follows `grammar/language.ebnf` and nothing more: names are not
//! resolved, numbers keep their digits. Sums, products and relations are flat
//! lists, so the depth of a tree never exceeds [`MAX_DEPTH`] nested constructs
//! and plain recursion over it is safe. A statement that could not be read
//! completely is absent; its diagnostics stand beside the tree.

use crate::source::Span;

/// Deepest nesting of constructs (parentheses, arguments, exponents, signs, blocks).
pub const MAX_DEPTH: usize = 200;

/// Most digits one number may have; its power of ten has the same limit in value.
pub const MAX_DIGITS: usize = 4096;

/// A whole file.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Tree {
    /// Statements in order. A `dossier` statement, if there is one, comes first.
    pub statements: Vec<Statement>,
    /// All comments in order, for the formatter.
    pub comments: Vec<Comment>,
}

/// `# text` up to the end of its line.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Comment {
    /// From `#` to the end of the text.
    pub span: Span,
    /// The text with its `#`, trailing blanks removed.
    pub text: String,
}

/// One name, normalised to NFC; `′` is kept as `'`, `π` as `pi`, `∞` as `infinity`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Name {
    /// The normalised text.
    pub text: String,
    /// Where it stands.
    pub span: Span,
}

/// A name with optional qualifiers: `markov`, `tails.markov`, `cut_tail.second`, `cut_tail.2`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Path {
    /// At least one part. Only a reason may have parts that are whole numbers.
    pub parts: Vec<Name>,
    /// The whole path.
    pub span: Span,
}

/// A quoted text. There are no escapes; `text` is what stands between the quotes.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Text {
    /// Between the quotes.
    pub text: String,
    /// With the quotes.
    pub span: Span,
}

/// One statement.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Statement {
    /// What it says.
    pub kind: StatementKind,
    /// From its keyword to its last token.
    pub span: Span,
}

/// The statements of the language.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum StatementKind {
    /// `dossier "title"`
    Dossier(Text),
    /// `use "path" as alias`
    Use(Use),
    /// `parameter x : real in [0, 1] "doc"`
    Parameter(Parameter),
    /// `where mu <= 10*s, h: x < y`
    Where(Vec<Condition>),
    /// `quantity weight(cutoff : real in (0, infinity)) : real in [0, 1] "doc"`
    Quantity(Quantity),
    /// `property upper_tail(tail, mean) "doc"`
    Property(Property),
    /// `assume name "doc" clauses: fact`, or a bare property without a colon
    Assume(Assume),
    /// `lemma name clauses: fact [reasons]`
    Lemma(Lemma),
    /// `define cutoff(s) = term`
    Define(Define),
    /// `constant C = 0.5` or `constant c in [1, 2]`
    Constant(Constant),
    /// `chain name clauses` first term, links
    Chain(Chain),
    /// `claim name clauses: relations [reasons] induction`
    Claim(Claim),
    /// `numbers bench: mu = 3/2, s = 12`
    Numbers(Numbers),
    /// `for eps in (0, 1/8]:` and indented statements
    Block(Block),
}

/// `use "path" as alias`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Use {
    /// Path relative to this file.
    pub path: Text,
    /// The qualifier of its names.
    pub alias: Name,
}

/// What may stand after a declaration: a text for people and a label of the manuscript.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Remark {
    /// Text for people.
    pub text: Option<Text>,
    /// Label in the manuscript.
    pub label: Option<Text>,
}

/// The kind of numbers a variable ranges over.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum SortKind {
    /// `real`
    Real,
    /// `integer`
    Integer,
    /// `even integer`
    EvenInteger,
}

/// A written sort.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Sort {
    /// Which.
    pub kind: SortKind,
    /// Where it is written.
    pub span: Span,
}

/// An interval, for instance `(0, infinity)` or `[a, b)`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Interval {
    /// Whether the lower end is left out, `(`.
    pub lower_open: bool,
    /// Lower end; may be minus the name `infinity`.
    pub lower: Expression,
    /// Upper end; may be the name `infinity`.
    pub upper: Expression,
    /// Whether the upper end is left out, `)`.
    pub upper_open: bool,
    /// With its brackets.
    pub span: Span,
}

/// A variable with its domain: `x : real in [0, 1]`; without a sort it is real.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Variable {
    /// Its name.
    pub name: Name,
    /// The written sort; `None` means real.
    pub sort: Option<Sort>,
    /// The domain. Only arguments of a quantity may lack it.
    pub domain: Option<Interval>,
    /// From the name to the domain.
    pub span: Span,
}

impl Variable {
    /// The sort, where none written means real.
    pub fn sort_kind(&self) -> SortKind {
        self.sort.map_or(SortKind::Real, |sort| sort.kind)
    }
}

/// `parameter x : real in [0, 1] "doc"`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Parameter {
    /// Name, sort and domain; the domain is always there.
    pub variable: Variable,
    /// Text and label.
    pub remark: Remark,
}

/// `quantity norm(k : real in [1, infinity)) : real in [0, infinity) "doc"`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Quantity {
    /// Its name.
    pub name: Name,
    /// Its arguments; empty for a plain quantity.
    pub arguments: Vec<Variable>,
    /// The sort of its values.
    pub sort: Sort,
    /// The range of its values; `None` means all values of the sort.
    pub range: Option<Interval>,
    /// Text and label.
    pub remark: Remark,
}

/// `property upper_tail(tail, mean) "doc"`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Property {
    /// Its name.
    pub name: Name,
    /// Names of its arguments, for the reader.
    pub arguments: Vec<Name>,
    /// Text and label.
    pub remark: Remark,
}

/// `label: relations`, or the relations alone.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Condition {
    /// The name under which it may be cited.
    pub name: Option<Name>,
    /// What it says.
    pub relations: Relations,
    /// The whole condition.
    pub span: Span,
}

/// Relation signs.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum RelationKind {
    /// `<`
    Less,
    /// `<=`
    LessEqual,
    /// `=`
    Equal,
    /// `>=`
    GreaterEqual,
    /// `>`
    Greater,
}

impl RelationKind {
    /// The ASCII sign.
    pub fn sign(self) -> &'static str {
        match self {
            RelationKind::Less => "<",
            RelationKind::LessEqual => "<=",
            RelationKind::Equal => "=",
            RelationKind::GreaterEqual => ">=",
            RelationKind::Greater => ">",
        }
    }
}

/// A written relation sign.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Relation {
    /// Which.
    pub kind: RelationKind,
    /// Where.
    pub span: Span,
}

/// `a <= b < c`: a first term and at least one relation; all point the same way.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Relations {
    /// The leftmost term.
    pub first: Expression,
    /// Each sign with the term at its right; never empty.
    pub rest: Vec<(Relation, Expression)>,
    /// The whole chain.
    pub span: Span,
}

/// A property applied to terms: `tails.upper_tail(weight, mean)`, `unique_ground_state`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Application {
    /// The property.
    pub property: Path,
    /// What it is applied to; a quantity with arguments is passed by its name.
    pub arguments: Vec<Expression>,
    /// The whole application.
    pub span: Span,
}

/// The body of an assumption or a lemma.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Fact {
    /// Relations between terms.
    Relations(Relations),
    /// A property.
    Property(Application),
}

/// One of the cases of a `cases` clause: `zero: x = 0`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Case {
    /// Its name.
    pub name: Name,
    /// When it applies.
    pub condition: Relations,
    /// The whole case.
    pub span: Span,
}

/// What may stand between a statement's name and its body. A clause that is
/// not written is empty.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Clauses {
    /// Text for people: `"Lemma 3"`.
    pub text: Option<Text>,
    /// `label "eq:cut"`: label in the manuscript.
    pub label: Option<Text>,
    /// `source "…"`: lemmas only.
    pub source: Option<Text>,
    /// `argued "…"`: lemmas only.
    pub argued: Option<Text>,
    /// `at bench`: a set of numbers; claims and chains only.
    pub at: Option<Name>,
    /// `for x in [0, 1], y in (0, x)`; every variable has a domain.
    pub variables: Vec<Variable>,
    /// `given x <= 1/2, h: y > 0`
    pub given: Vec<Condition>,
    /// `requires upper_tail(tail, mean)`
    pub requires: Vec<Application>,
    /// `cases zero: x = 0 | positive: x > 0`; claims, chains and lemmas only.
    pub cases: Vec<Case>,
}

/// `assume name clauses: fact`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Assume {
    /// The name of the assumption.
    pub name: Name,
    /// Clauses.
    pub clauses: Clauses,
    /// What is assumed; `None` for a bare property, which has the assumption's name.
    pub fact: Option<Fact>,
}

/// How a lemma is supported.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Standing {
    /// `source "…"`: published.
    Cited,
    /// `argued "…"`: proved outside the file.
    Argued,
    /// Neither: proved here.
    Proved,
}

/// `lemma name clauses: fact [reasons] induction`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Lemma {
    /// Its name.
    pub name: Name,
    /// Clauses; `source` and `argued` exclude each other.
    pub clauses: Clauses,
    /// What it says.
    pub fact: Fact,
    /// Facts its proof may use.
    pub reasons: Option<Reasons>,
    /// Proof by induction.
    pub induction: Option<Induction>,
}

impl Lemma {
    /// How it is supported, by its clauses.
    pub fn standing(&self) -> Standing {
        if self.clauses.source.is_some() {
            Standing::Cited
        } else if self.clauses.argued.is_some() {
            Standing::Argued
        } else {
            Standing::Proved
        }
    }
}

/// `define cutoff(s) = term`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Define {
    /// Its name.
    pub name: Name,
    /// Names of its arguments.
    pub arguments: Vec<Name>,
    /// What it stands for.
    pub value: Expression,
    /// Text and label.
    pub remark: Remark,
}

/// What is known of a constant.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum ConstantValue {
    /// `= term`
    Exact(Expression),
    /// `in [2.1, 2.2]`
    Within(Interval),
}

/// `constant C = 0.0625 label "eq:c"`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Constant {
    /// Its name.
    pub name: Name,
    /// Its value or interval.
    pub value: ConstantValue,
    /// Text and label.
    pub remark: Remark,
}

/// `chain name clauses` first term, links
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Chain {
    /// Its name.
    pub name: Name,
    /// Clauses.
    pub clauses: Clauses,
    /// The leftmost term.
    pub first: Expression,
    /// The links; never empty.
    pub links: Vec<Link>,
    /// Proof of every link by induction.
    pub induction: Option<Induction>,
}

/// `as second: <= term [reasons]`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Link {
    /// Its own name.
    pub name: Option<Name>,
    /// Relation to the term before.
    pub relation: Relation,
    /// The new term.
    pub term: Expression,
    /// The facts it may use; `None` if no brackets are written.
    pub reasons: Option<Reasons>,
    /// The whole link.
    pub span: Span,
}

/// `[growth(k = cutoff(s)), tails.markov]`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Reasons {
    /// In order; `[]` is allowed and empty.
    pub list: Vec<Reason>,
    /// With the brackets.
    pub span: Span,
}

/// One fact, perhaps with the instance to use: `tails.markov(c = x; tail = weight)`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Reason {
    /// The fact; a last part that is a number or a link's name means one link.
    pub path: Path,
    /// Values for its variables.
    pub values: Vec<Binding>,
    /// Quantities or properties put in place of those it is stated for.
    pub replacements: Vec<Replacement>,
    /// The whole reason.
    pub span: Span,
}

/// `k = cutoff(s)`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Binding {
    /// The variable.
    pub name: Name,
    /// Its value.
    pub value: Expression,
    /// The whole binding.
    pub span: Span,
}

/// `tail = weight`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Replacement {
    /// The name in the fact.
    pub name: Name,
    /// What stands for it.
    pub by: Path,
    /// The whole replacement.
    pub span: Span,
}

/// `claim name clauses: relations [reasons] induction`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Claim {
    /// Its name.
    pub name: Name,
    /// Clauses.
    pub clauses: Clauses,
    /// What is claimed.
    pub relations: Relations,
    /// The facts it may use; `None` if no brackets are written.
    pub reasons: Option<Reasons>,
    /// Proof by induction.
    pub induction: Option<Induction>,
}

/// `induction on m from a`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Induction {
    /// The variable.
    pub variable: Name,
    /// Where it starts.
    pub from: Expression,
    /// The whole clause.
    pub span: Span,
}

/// `numbers bench "doc": mu = 3/2, s = 12`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Numbers {
    /// The name of the set.
    pub name: Name,
    /// Text and label.
    pub remark: Remark,
    /// The values; never empty.
    pub values: Vec<Binding>,
}

/// `for eps in (0, 1/8]:` and indented statements
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Block {
    /// Its variables; never empty, each with a domain.
    pub variables: Vec<Variable>,
    /// The statements inside. Never `dossier` or `use`.
    pub statements: Vec<Statement>,
}

/// A term.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Expression {
    /// What it is.
    pub kind: ExpressionKind,
    /// Where it stands.
    pub span: Span,
}

/// Sign of an item of a sum.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum SumOperator {
    /// `+`
    Plus,
    /// `-`
    Minus,
}

/// How an item joins a product.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum ProductOperator {
    /// `*`
    Times,
    /// `/`
    Over,
}

/// `sum`, `product` or `integral`.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum FoldKind {
    /// `sum(k = a .. b, f)`
    Sum,
    /// `product(k = a .. b, f)`
    Product,
    /// `integral(t = a .. b, f)`
    Integral,
}

impl FoldKind {
    /// The word that starts it.
    pub fn word(self) -> &'static str {
        match self {
            FoldKind::Sum => "sum",
            FoldKind::Product => "product",
            FoldKind::Integral => "integral",
        }
    }
}

/// The forms of terms.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum ExpressionKind {
    /// An exact decimal.
    Number(Number),
    /// `mu`, `tails.norm`, `pi`, `infinity`
    Name(Path),
    /// `f(a, b)`, `T(eps = 1/16)`; never without arguments. `√x` is `sqrt(x)`.
    Call(Call),
    /// `sum(k = a .. b, f)`
    Fold(Box<Fold>),
    /// Parentheses as written.
    Group(Box<Expression>),
    /// `n!`
    Factorial(Box<Expression>),
    /// `-x`
    Negative(Box<Expression>),
    /// Base and exponent.
    Power(Box<Expression>, Box<Expression>),
    /// A first item and at least one more, joined by `*` and `/` from left to right.
    Product(Box<Expression>, Vec<(ProductOperator, Expression)>),
    /// A first item and at least one more, joined by `+` and `-` from left to right.
    Sum(Box<Expression>, Vec<(SumOperator, Expression)>),
}

/// A number as written: digits, perhaps a fraction, perhaps a power of ten.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Number {
    /// As written, for instance `1.5e-3`; always plain ASCII.
    pub text: String,
}

impl Number {
    /// The exact value as a whole number in decimal digits (no leading zeros,
    /// `0` for zero) times a power of ten.
    pub fn parts(&self) -> (String, i64) {
        let (mantissa, power) = match self.text.split_once(['e', 'E']) {
            Some((mantissa, power)) => (mantissa, power.parse().unwrap_or(0)),
            None => (self.text.as_str(), 0),
        };
        let (whole, fraction) = mantissa.split_once('.').unwrap_or((mantissa, ""));
        let digits = format!("{whole}{fraction}");
        let digits = digits.trim_start_matches('0');
        let digits = if digits.is_empty() { "0" } else { digits };
        (digits.to_string(), power - fraction.len() as i64)
    }
}

/// `f(a, b)`, `T(eps = 1/16)`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Call {
    /// What is applied.
    pub function: Path,
    /// Arguments by position.
    pub arguments: Vec<Expression>,
    /// Arguments by name; they follow those by position.
    pub named: Vec<Binding>,
}

/// `sum(k = a .. b, f)`
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Fold {
    /// Which.
    pub kind: FoldKind,
    /// The bound variable.
    pub variable: Name,
    /// Lower limit.
    pub from: Expression,
    /// Upper limit.
    pub to: Expression,
    /// What is folded.
    pub body: Expression,
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn number_parts_are_exact() {
        let parts = |text: &str| Number { text: text.into() }.parts();
        assert_eq!(parts("25"), ("25".into(), 0));
        assert_eq!(parts("0.0625"), ("625".into(), -4));
        assert_eq!(parts("1.5e-3"), ("15".into(), -4));
        assert_eq!(parts("1.506e12"), ("1506".into(), 9));
        assert_eq!(parts("00.0E+7"), ("0".into(), 6));
    }
}

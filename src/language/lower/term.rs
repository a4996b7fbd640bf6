//! Terms: names resolved, definitions folded.

use num_bigint::BigInt;
use num_rational::BigRational;

use crate::diagnostic::Code;
use crate::expression::{Arity, Function};
use crate::expression::{Constant, End, Name, SeriesKind, Substitution, Term};
use crate::language::tree::{
    self, Call, Expression, ExpressionKind, Fold, FoldKind, Path, ProductOperator, SumOperator,
};
use crate::language::words;
use crate::source::Span;
use crate::statement::{Rel, Relation};

use super::Lowering;
use super::names::{Definition, Named, Variables};

/// Most levels of a folded term. The kernel reads a little more.
const MAX_DEPTH: u32 = 1000;
/// Deepest nesting of parentheses, arguments and exponents in the text of a folded
/// term; the kernel's reader allows about ten more.
const MAX_NESTING: u32 = 180;
/// Most nodes of a folded term, counted as it is written out.
const MAX_SIZE: u32 = 50_000;
/// Most nodes that folding may produce in one file.
pub(super) const TOTAL_SIZE: u64 = 40_000_000;

impl Lowering {
    /// The term that an expression means with these variables in force; none if it
    /// has an error, which is told.
    pub(super) fn term(&mut self, e: &Expression, scope: &Variables) -> Option<Term> {
        let term = match &e.kind {
            ExpressionKind::Number(number) => number_value(number),
            ExpressionKind::Name(path) => self.name_term(path, scope)?,
            ExpressionKind::Call(call) => self.call(call, e.span, scope)?,
            ExpressionKind::Fold(fold) => self.fold(fold, scope)?,
            ExpressionKind::Group(inner) => self.term(inner, scope)?,
            ExpressionKind::Factorial(inner) => Term::apply1(Function::Factorial, &self.term(inner, scope)?),
            ExpressionKind::Negative(inner) => self.term(inner, scope)?.negate(),
            ExpressionKind::Power(base, exponent) => {
                let (base, exponent) = (self.term(base, scope), self.term(exponent, scope));
                base?.power(&exponent?)
            }
            ExpressionKind::Product(first, rest) => {
                let mut product = self.term(first, scope);
                for (operator, item) in rest {
                    let item = self.term(item, scope);
                    product = match (product, item, operator) {
                        (Some(a), Some(b), ProductOperator::Times) => Some(a.multiply(&b)),
                        (Some(a), Some(b), ProductOperator::Over) => Some(a.divide(&b)),
                        _ => None,
                    };
                    product = self.within_limits(product, e.span);
                }
                product?
            }
            ExpressionKind::Sum(first, rest) => {
                let mut sum = self.term(first, scope);
                for (operator, item) in rest {
                    let item = self.term(item, scope);
                    sum = match (sum, item, operator) {
                        (Some(a), Some(b), SumOperator::Plus) => Some(a.add(&b)),
                        (Some(a), Some(b), SumOperator::Minus) => Some(a.subtract(&b)),
                        _ => None,
                    };
                    sum = self.within_limits(sum, e.span);
                }
                sum?
            }
        };
        self.within_limits(Some(term), e.span)
    }

    /// Refuses a term that later recursion could not bear.
    fn within_limits(&mut self, term: Option<Term>, span: Span) -> Option<Term> {
        let term = term?;
        if term.depth() <= MAX_DEPTH && term.size() <= MAX_SIZE && term.nesting() <= MAX_NESTING {
            return Some(term);
        }
        self.error(Code::TooLarge, span, "the term is too large once its definitions are written out")
            .hint(format!("at most {MAX_SIZE} parts, {MAX_DEPTH} summands or factors in a row and {MAX_NESTING} nested parentheses are possible"));
        None
    }

    fn name_term(&mut self, path: &Path, scope: &Variables) -> Option<Term> {
        if let [name] = path.parts.as_slice() {
            if scope.contains(&name.text) {
                return Some(Term::variable(name.text.as_str()));
            }
            if self.names.terms.contains_key(&*name.text) {
                return self.named(name, &[], &[], path.span, scope);
            }
            match name.text.as_str() {
                "pi" => return Some(Term::constant(Constant::Pi)),
                "e" => return Some(Term::constant(Constant::E)),
                "infinity" => {
                    self.error(Code::WrongKind, path.span, "`infinity` is not a number")
                        .hint("it may stand as an end of a domain or of a sum");
                    return None;
                }
                _ => {}
            }
            if Function::from_name(&name.text).is_some() {
                self.error(
                    Code::WrongArity,
                    path.span,
                    format!("the function `{}` needs its arguments", name.text),
                )
                .hint(format!("write `{}(...)`", name.text));
                return None;
            }
            self.unknown_name(name, scope);
            return None;
        }
        self.foreign_term(path, &[], &[], path.span, scope)
    }

    fn call(&mut self, call: &Call, span: Span, scope: &Variables) -> Option<Term> {
        let [name] = call.function.parts.as_slice() else {
            return self.foreign_term(&call.function, &call.arguments, &call.named, span, scope);
        };
        let named = self.names.terms.get(&*name.text).map(|(_, named)| named.clone());
        if matches!(named, Some(Named::Quantity(_) | Named::Definition(_) | Named::Broken)) {
            return self.named(name, &call.arguments, &call.named, span, scope);
        }
        if let Some(function) = Function::from_name(&name.text) {
            return self.function(function, call, span, scope);
        }
        if named.is_some() || scope.contains(&name.text) {
            self.error(
                Code::WrongKind,
                name.span,
                format!("`{}` is a number and takes no arguments", name.text),
            )
            .hint(format!("for a product write `{}*(...)`", name.text));
        } else {
            self.unknown_name(name, scope);
        }
        None
    }

    fn function(&mut self, function: Function, call: &Call, span: Span, scope: &Variables) -> Option<Term> {
        if let Some(binding) = call.named.first() {
            self.error(
                Code::BadArgument,
                binding.span,
                format!("`{}` takes no named arguments", function.name()),
            );
            return None;
        }
        let arguments: Vec<Option<Term>> = call.arguments.iter().map(|a| self.term(a, scope)).collect();
        if !function.arity().admits(arguments.len()) {
            let wanted = match function.arity() {
                Arity::Exactly(n) => format!("{n}"),
                Arity::AtLeast(n) => format!("{n} or more"),
            };
            let message =
                format!("`{}` takes {}, not {}", function.name(), counted(&wanted), arguments.len());
            self.error(Code::WrongArity, span, message);
            return None;
        }
        Some(Term::apply(function, arguments.into_iter().collect::<Option<_>>()?))
    }

    /// A quantity, parameter, constant or definition of this file.
    fn named(
        &mut self,
        name: &tree::Name,
        arguments: &[Expression],
        named: &[tree::Binding],
        span: Span,
        scope: &Variables,
    ) -> Option<Term> {
        let meaning = self.names.terms.get(&*name.text)?.1.clone();
        match meaning {
            Named::Broken => None,
            Named::Parameter => Some(Term::variable(name.text.as_str())),
            Named::Quantity(arity) => {
                if let Some(binding) = named.first() {
                    self.error(Code::BadArgument, binding.span, "a quantity takes its arguments by position");
                    return None;
                }
                let terms: Vec<Option<Term>> = arguments.iter().map(|a| self.term(a, scope)).collect();
                if terms.len() != arity {
                    self.wrong_count(&name.text, arity, terms.len(), span);
                    return None;
                }
                let terms: Vec<Term> = terms.into_iter().collect::<Option<_>>()?;
                let mut sound = true;
                for (at, (term, written)) in terms.iter().zip(arguments).enumerate() {
                    if let Some((message, hint)) = self.outside(&name.text, at, term) {
                        self.error(Code::BadArgument, written.span, message).hint(hint);
                        sound = false;
                    }
                }
                sound.then(|| Term::quantity(name.text.as_str(), terms))
            }
            Named::Definition(definition) => {
                self.unfold(&name.text, &definition, arguments, named, span, scope)
            }
        }
    }

    /// What a definition stands for at these arguments.
    fn unfold(
        &mut self,
        name: &str,
        definition: &Definition,
        arguments: &[Expression],
        named: &[tree::Binding],
        span: Span,
        scope: &Variables,
    ) -> Option<Term> {
        let mut values = Substitution::new();
        let mut sound = true;
        if arguments.len() > definition.arguments.len() {
            self.wrong_count(name, definition.arguments.len(), arguments.len(), span);
            return None;
        }
        for (argument, value) in definition.arguments.iter().zip(arguments) {
            match self.term(value, scope) {
                Some(value) => values.insert(argument.clone(), value),
                None => sound = false,
            }
        }
        for binding in named {
            let target = &binding.name;
            let known = definition.arguments.iter().chain(&definition.outer).any(|a| **a == *target.text);
            if !known {
                let all: Vec<String> =
                    definition.arguments.iter().chain(&definition.outer).map(|a| format!("`{a}`")).collect();
                let has = if all.is_empty() { "none".into() } else { all.join(", ") };
                self.error(
                    Code::BadArgument,
                    target.span,
                    format!("`{name}` has no argument `{}`", target.text),
                )
                .hint(format!("its arguments: {has}"));
                sound = false;
            } else if values.get(&target.text).is_some() {
                self.error(Code::BadArgument, target.span, format!("`{}` is given twice", target.text));
                sound = false;
            } else {
                match self.term(&binding.value, scope) {
                    Some(value) => values.insert(target.text.as_str(), value),
                    None => sound = false,
                }
            }
        }
        for argument in &definition.arguments {
            if sound && values.get(argument).is_none() {
                self.wrong_count(name, definition.arguments.len(), arguments.len(), span);
                return None;
            }
        }
        for variable in &definition.outer {
            let here = scope.contains(variable)
                || matches!(self.names.terms.get(variable), Some((_, Named::Parameter)));
            if sound && values.get(variable).is_none() && !here && definition.body.mentions(variable) {
                let message = format!("`{name}` depends on `{variable}`, which has no value here");
                self.error(Code::WrongArity, span, message).hint(format!("write `{name}({variable} = ...)`"));
                return None;
            }
        }
        if !sound {
            return None;
        }
        self.budget = self.budget.saturating_sub(u64::from(definition.body.size()));
        if self.budget == 0 {
            self.error(Code::TooLarge, span, "the file is too large once its definitions are written out");
            return None;
        }
        self.within_limits(Some(values.apply(&definition.body)), span)
    }

    /// A definition or constant of a used file.
    fn foreign_term(
        &mut self,
        path: &Path,
        arguments: &[Expression],
        named: &[tree::Binding],
        span: Span,
        scope: &Variables,
    ) -> Option<Term> {
        let written = written(path);
        let [alias, name] = path.parts.as_slice() else {
            self.error(Code::UnknownName, path.span, format!("there is no term `{written}`"));
            return None;
        };
        let Some((_, module)) = self.names.aliases.get(&*alias.text) else {
            let known: Vec<&str> = self.names.aliases.keys().map(|n| &**n).collect();
            let hint = words::nearest(&alias.text, &known).map(|n| format!("perhaps `{n}` is meant"));
            let told =
                self.error(Code::UnknownName, alias.span, format!("`{}` is not a used file", alias.text));
            if let Some(hint) = hint {
                let _ = told.hint(hint);
            }
            return None;
        };
        let module = module.clone()?;
        match module.names.terms.get(&*name.text) {
            Some((_, Named::Definition(definition))) if definition.body.quantities().is_empty() => {
                let mut definition = Definition::clone(definition);
                // The parameters of the other file are given like block variables.
                let free = definition.body.free_variables();
                let parameters = module.theory.parameters.iter().map(|p| &p.declaration.name);
                let more: Vec<Name> = parameters
                    .filter(|p| free.contains(*p) && !definition.arguments.contains(*p))
                    .cloned()
                    .collect();
                definition.outer.extend(more);
                self.unfold(&written, &definition, arguments, named, span, scope)
            }
            Some((_, Named::Broken)) => None,
            Some(_) => {
                self.error(Code::WrongKind, path.span, format!("`{written}` cannot be used in a term here"))
                    .hint("of a used file only definitions and constants without quantities can be used in terms");
                None
            }
            None => {
                let known: Vec<&str> = module.names.terms.keys().map(|n| &**n).collect();
                let hint = words::nearest(&name.text, &known)
                    .map(|n| format!("perhaps `{}.{n}` is meant", alias.text));
                let told = self.error(Code::UnknownName, name.span, format!("`{written}` is not declared"));
                if let Some(hint) = hint {
                    let _ = told.hint(hint);
                }
                None
            }
        }
    }

    fn wrong_count(&mut self, name: &str, wanted: usize, found: usize, span: Span) {
        let wanted = if wanted == 0 { "no".to_string() } else { wanted.to_string() };
        let message = format!("`{name}` takes {}, not {found}", counted(&wanted));
        self.error(Code::WrongArity, span, message);
    }

    fn fold(&mut self, fold: &Fold, scope: &Variables) -> Option<Term> {
        let kind = match fold.kind {
            FoldKind::Sum => SeriesKind::Sum,
            FoldKind::Product => SeriesKind::Product,
            FoldKind::Integral => SeriesKind::Integral,
        };
        let (lower, upper) = (self.end(&fold.from, scope), self.end(&fold.to, scope));
        self.require_new_variable(&fold.variable, scope)?;
        let index: Name = fold.variable.text.as_str().into();
        let body = self.term(&fold.body, &scope.with(index.clone()));
        let (lower, upper) = (lower?, upper?);
        if matches!(lower, End::PlusInfinity) || matches!(upper, End::MinusInfinity) {
            let message = "the lower end is `infinity` or the upper one `-infinity`";
            self.error(Code::BadDomain, fold.from.span.to(fold.to.span), message);
            return None;
        }
        if kind != SeriesKind::Integral && matches!(lower, End::MinusInfinity) {
            self.error(Code::BadDomain, fold.from.span, "a sum or product starts at a number")
                .hint("count downwards from the upper end instead");
            return None;
        }
        Some(Term::series(kind, index, lower, upper, body?))
    }

    /// An end of a domain or of a series; `infinity` and `-infinity` are allowed.
    pub(super) fn end(&mut self, e: &Expression, scope: &Variables) -> Option<End> {
        match infinity(e) {
            Some(true) => Some(End::PlusInfinity),
            Some(false) => Some(End::MinusInfinity),
            None => self.term(e, scope).map(End::Finite),
        }
    }

    /// Refuses a bound variable that hides another name.
    pub(super) fn require_new_variable(&mut self, name: &tree::Name, scope: &Variables) -> Option<()> {
        if is_fixed(&name.text) {
            self.error(Code::Reserved, name.span, format!("`{}` has a fixed meaning", name.text));
            return None;
        }
        if let Some((span, _)) = self.names.terms.get(&*name.text) {
            let place = self.place(*span);
            self.error(Code::DuplicateName, name.span, format!("`{}` is already declared", name.text))
                .label(place, "declared here")
                .hint("a bound variable may not hide another name; choose a new one");
            return None;
        }
        if scope.contains(&name.text) {
            self.error(Code::DuplicateName, name.span, format!("`{}` is already a variable here", name.text))
                .hint("a bound variable may not hide another one; choose a new name");
            return None;
        }
        Some(())
    }

    fn unknown_name(&mut self, name: &tree::Name, scope: &Variables) {
        let text = name.text.as_str();
        if let Some(circle) = self.circle(text) {
            self.error(
                Code::CircularDefinition,
                name.span,
                format!("the definitions depend on each other: {circle}"),
            )
            .hint("one of them must be chosen without the others");
            return;
        }
        if let Some(later) = self.ahead.get(text) {
            let place = self.place(*later);
            self.error(Code::UnknownName, name.span, format!("`{text}` is declared only later"))
                .label(place, "declared here")
                .hint("move the declaration up");
            return;
        }
        let functions = Function::ALL.map(Function::name);
        let mut known: Vec<&str> = scope.iter().map(|n| &**n).collect();
        known.extend(self.names.terms.keys().map(|n| &**n));
        known.extend(functions);
        known.extend(["pi", "infinity"]);
        let hint = match words::nearest(text, &known) {
            Some(near) => format!("perhaps `{near}` is meant"),
            None => "declare it above as a parameter, quantity, constant or definition".into(),
        };
        self.error(Code::UnknownName, name.span, format!("`{text}` is not declared")).hint(hint);
    }

    /// The relations of a chain of relations, in order.
    pub(super) fn relations(
        &mut self,
        relations: &tree::Relations,
        scope: &Variables,
    ) -> Option<Vec<Relation>> {
        let mut left = self.term(&relations.first, scope);
        let mut all = Some(Vec::new());
        for (relation, right) in &relations.rest {
            let right = self.term(right, scope);
            all = match (all, &left, &right) {
                (Some(mut all), Some(a), Some(b)) => {
                    all.push(Relation::new(a.clone(), rel(relation.kind), b.clone()));
                    Some(all)
                }
                _ => None,
            };
            left = right;
        }
        all
    }
}

pub(super) fn rel(kind: tree::RelationKind) -> Rel {
    match kind {
        tree::RelationKind::Less => Rel::Less,
        tree::RelationKind::LessEqual => Rel::LessEqual,
        tree::RelationKind::Equal => Rel::Equal,
        tree::RelationKind::GreaterEqual => Rel::GreaterEqual,
        tree::RelationKind::Greater => Rel::Greater,
    }
}

/// Names that cannot be declared: constants of the language, and two words of the
/// kernel's text that would be taken for something else there.
pub(super) fn is_fixed(name: &str) -> bool {
    matches!(name, "pi" | "e" | "infinity" | "inf" | "euler")
}

pub(super) fn written(path: &Path) -> String {
    path.parts.iter().map(|p| p.text.as_str()).collect::<Vec<_>>().join(".")
}

pub(super) fn counted(wanted: &str) -> String {
    if wanted == "1" { "1 argument".into() } else { format!("{wanted} arguments") }
}

/// Whether the expression is `infinity` (true) or `-infinity` (false).
fn infinity(e: &Expression) -> Option<bool> {
    match &e.kind {
        ExpressionKind::Name(path) => match path.parts.as_slice() {
            [name] if name.text == "infinity" => Some(true),
            _ => None,
        },
        ExpressionKind::Group(inner) => infinity(inner),
        ExpressionKind::Negative(inner) => infinity(inner).map(|positive| !positive),
        _ => None,
    }
}

fn number_value(number: &tree::Number) -> Term {
    let (digits, power) = number.parts();
    let digits: BigInt = digits.parse().unwrap_or_default();
    // The reader limits the power; the bound here keeps a stray one harmless.
    let scale = BigInt::from(10).pow(u32::try_from(power.unsigned_abs().min(20_000)).unwrap_or(0));
    Term::number(if power < 0 {
        BigRational::new(digits, scale)
    } else {
        BigRational::from_integer(digits * scale)
    })
}

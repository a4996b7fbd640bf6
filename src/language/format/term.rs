//! Printing terms and the small parts made of them.

use super::flow::Flow;
use crate::language::tree::*;

impl Flow {
    /// A name.
    pub fn name(&mut self, name: &Name) {
        self.put(&name.text, name.span.start);
    }

    /// A path.
    pub fn path(&mut self, path: &Path) {
        let parts: Vec<&str> = path.parts.iter().map(|part| part.text.as_str()).collect();
        self.put(&parts.join("."), path.span.start);
    }

    /// A text in quotes.
    pub fn text(&mut self, text: &Text) {
        self.put("\"", text.span.start);
        self.put(&text.text, text.span.start);
        self.put("\"", text.span.start);
    }

    /// A list, its items separated by commas.
    pub fn list<T>(&mut self, items: &[T], item: impl Fn(&mut Flow, &T)) {
        for (index, one) in items.iter().enumerate() {
            if index > 0 {
                self.put(",", 0);
                self.gap(0, 1);
            }
            self.deeper(1, |flow| item(flow, one));
        }
    }

    /// A term. Sums are spaced, products and powers are tight.
    pub fn term(&mut self, term: &Expression) {
        let at = term.span.start;
        match &term.kind {
            ExpressionKind::Number(number) => self.put(&number.text, at),
            ExpressionKind::Name(path) => self.path(path),
            ExpressionKind::Call(call) => {
                self.path(&call.function);
                self.put("(", at);
                self.deeper(2, |flow| {
                    flow.list(&call.arguments, Flow::term);
                    if !call.arguments.is_empty() && !call.named.is_empty() {
                        flow.put(",", at);
                        flow.gap(0, 1);
                    }
                    flow.list(&call.named, Flow::binding);
                });
                self.put(")", at);
            }
            ExpressionKind::Fold(fold) => self.fold(fold, at),
            ExpressionKind::Group(inside) => {
                self.put("(", at);
                self.deeper(2, |flow| flow.term(inside));
                self.put(")", at);
            }
            ExpressionKind::Factorial(operand) => {
                self.term(operand);
                self.put("!", at);
            }
            ExpressionKind::Negative(operand) => {
                self.put("-", at);
                self.deeper(2, |flow| flow.term(operand));
            }
            ExpressionKind::Power(base, exponent) => {
                self.deeper(2, |flow| flow.term(base));
                self.put("^", at);
                self.deeper(2, |flow| flow.term(exponent));
            }
            ExpressionKind::Product(first, rest) => {
                self.deeper(2, |flow| flow.term(first));
                for (operator, factor) in rest {
                    self.gap(1, 0);
                    let sign = if *operator == ProductOperator::Times { "*" } else { "/" };
                    self.put(sign, factor.span.start);
                    self.deeper(2, |flow| flow.term(factor));
                }
            }
            ExpressionKind::Sum(first, rest) => {
                self.deeper(1, |flow| flow.term(first));
                for (operator, item) in rest {
                    self.gap(0, 1);
                    let sign = if *operator == SumOperator::Plus { "+ " } else { "- " };
                    self.put(sign, item.span.start);
                    self.deeper(1, |flow| flow.term(item));
                }
            }
        }
    }

    fn fold(&mut self, fold: &Fold, at: u32) {
        self.put(fold.kind.word(), at);
        self.put("(", at);
        self.deeper(2, |flow| {
            flow.name(&fold.variable);
            flow.put(" = ", at);
            flow.deeper(1, |flow| flow.term(&fold.from));
            flow.put(" .. ", at);
            flow.deeper(1, |flow| flow.term(&fold.to));
            flow.put(",", at);
            flow.gap(0, 1);
            flow.deeper(1, |flow| flow.term(&fold.body));
        });
        self.put(")", at);
    }

    /// `k = cutoff(s)`
    pub fn binding(&mut self, binding: &Binding) {
        self.name(&binding.name);
        self.put(" = ", binding.span.start);
        self.deeper(1, |flow| flow.term(&binding.value));
    }

    /// `[1, infinity)`
    pub fn interval(&mut self, interval: &Interval) {
        let at = interval.span.start;
        self.put(if interval.lower_open { "(" } else { "[" }, at);
        self.deeper(2, |flow| {
            flow.term(&interval.lower);
            flow.put(",", at);
            flow.gap(0, 1);
            flow.term(&interval.upper);
        });
        self.put(if interval.upper_open { ")" } else { "]" }, at);
    }

    /// `x : real in [0, 1]`
    pub fn variable(&mut self, variable: &Variable) {
        self.name(&variable.name);
        if let Some(sort) = variable.sort {
            self.put(" : ", sort.span.start);
            self.sort(sort);
        }
        if let Some(domain) = &variable.domain {
            self.put(" in ", domain.span.start);
            self.interval(domain);
        }
    }

    /// `even integer`
    pub fn sort(&mut self, sort: Sort) {
        let word = match sort.kind {
            SortKind::Real => "real",
            SortKind::Integer => "integer",
            SortKind::EvenInteger => "even integer",
        };
        self.put(word, sort.span.start);
    }

    /// `a <= b < c`
    pub fn relations(&mut self, relations: &Relations) {
        self.deeper(1, |flow| flow.term(&relations.first));
        for (relation, term) in &relations.rest {
            self.gap(0, 1);
            self.put(relation.kind.sign(), relation.span.start);
            self.put(" ", relation.span.start);
            self.deeper(1, |flow| flow.term(term));
        }
    }

    /// `h: x >= 0`
    pub fn condition(&mut self, condition: &Condition) {
        if let Some(name) = &condition.name {
            self.name(name);
            self.put(": ", name.span.start);
        }
        self.relations(&condition.relations);
    }

    /// `zero: x = 0`
    pub fn case(&mut self, case: &Case) {
        self.name(&case.name);
        self.put(": ", case.span.start);
        self.relations(&case.condition);
    }

    /// `upper_tail(weight, mean)`
    pub fn application(&mut self, application: &Application) {
        self.path(&application.property);
        if !application.arguments.is_empty() {
            self.put("(", application.span.start);
            self.deeper(2, |flow| flow.list(&application.arguments, Flow::term));
            self.put(")", application.span.start);
        }
    }

    /// Relations or a property.
    pub fn fact(&mut self, fact: &Fact) {
        match fact {
            Fact::Relations(relations) => self.relations(relations),
            Fact::Property(application) => self.application(application),
        }
    }

    /// `[growth(k = cutoff(s)), tails.markov]`
    pub fn reasons(&mut self, reasons: &Reasons) {
        self.put("[", reasons.span.start);
        self.deeper(1, |flow| flow.list(&reasons.list, Flow::reason));
        self.put("]", reasons.span.start);
    }

    fn reason(&mut self, reason: &Reason) {
        let at = reason.span.start;
        self.path(&reason.path);
        if reason.values.is_empty() && reason.replacements.is_empty() {
            return;
        }
        self.put("(", at);
        self.deeper(2, |flow| {
            flow.list(&reason.values, Flow::binding);
            if !reason.replacements.is_empty() {
                flow.put("; ", at);
                flow.list(&reason.replacements, |flow, one| {
                    flow.name(&one.name);
                    flow.put(" = ", one.span.start);
                    flow.path(&one.by);
                });
            }
        });
        self.put(")", at);
    }

    /// `induction on m from a`
    pub fn induction(&mut self, induction: &Induction) {
        self.put("induction on ", induction.span.start);
        self.name(&induction.variable);
        self.put(" from ", induction.span.start);
        self.deeper(1, |flow| flow.term(&induction.from));
    }
}

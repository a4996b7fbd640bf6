//! Printing statements as lines.

use super::flow::{Flow, Line, WIDTH};
use crate::language::tree::*;
use crate::source::Span;

/// The lines of one statement, without the statements inside a block.
#[derive(Debug)]
pub struct Printed {
    /// Its lines.
    pub lines: Vec<Line>,
    /// What it was printed from; of a block, the header.
    pub span: Span,
}

/// Prints statements in order, those of a block after its header.
pub fn print(statements: &[Statement], indent: usize, out: &mut Vec<Printed>) {
    for statement in statements {
        let lines = lines(statement, indent);
        let mut span = statement.span;
        if let StatementKind::Block(block) = &statement.kind {
            if let Some(last) = block.variables.last() {
                span = Span::new(span.start, last.span.end);
            }
            out.push(Printed { lines, span });
            print(&block.statements, indent + 4, out);
        } else {
            out.push(Printed { lines, span });
        }
    }
}

fn lines(statement: &Statement, indent: usize) -> Vec<Line> {
    let at = statement.span.start;
    let mut flow = Flow::new();
    match &statement.kind {
        StatementKind::Dossier(title) => {
            flow.put("dossier ", at);
            flow.text(title);
        }
        StatementKind::Use(one) => {
            flow.put("use ", at);
            flow.text(&one.path);
            flow.put(" as ", at);
            flow.name(&one.alias);
        }
        StatementKind::Parameter(one) => {
            flow.put("parameter ", at);
            flow.deeper(1, |flow| flow.variable(&one.variable));
            flow.remark(&one.remark);
        }
        StatementKind::Where(conditions) => {
            flow.put("where ", at);
            flow.deeper(1, |flow| flow.list(conditions, Flow::condition));
        }
        StatementKind::Quantity(one) => quantity(&mut flow, one, at),
        StatementKind::Property(one) => {
            flow.put("property ", at);
            flow.name(&one.name);
            flow.argument_names(&one.arguments);
            flow.remark(&one.remark);
        }
        StatementKind::Define(one) => {
            flow.put("define ", at);
            flow.name(&one.name);
            flow.argument_names(&one.arguments);
            flow.put(" =", one.value.span.start);
            flow.gap(1, 1);
            flow.deeper(2, |flow| flow.term(&one.value));
            flow.remark(&one.remark);
        }
        StatementKind::Constant(one) => {
            flow.put("constant ", at);
            flow.name(&one.name);
            match &one.value {
                ConstantValue::Exact(value) => {
                    flow.put(" = ", value.span.start);
                    flow.deeper(2, |flow| flow.term(value));
                }
                ConstantValue::Within(interval) => {
                    flow.put(" in ", interval.span.start);
                    flow.deeper(1, |flow| flow.interval(interval));
                }
            }
            flow.remark(&one.remark);
        }
        StatementKind::Numbers(one) => {
            flow.put("numbers ", at);
            flow.name(&one.name);
            flow.tight_remark(&one.remark);
            flow.put(":", at);
            flow.gap(0, 1);
            flow.deeper(1, |flow| flow.list(&one.values, Flow::binding));
        }
        StatementKind::Block(one) => {
            flow.put("for ", at);
            flow.deeper(1, |flow| flow.list(&one.variables, Flow::variable));
            flow.put(":", at);
        }
        StatementKind::Assume(one) => {
            flow.put("assume ", at);
            flow.name(&one.name);
            let broken = flow.clauses(&one.clauses);
            if let Some(fact) = &one.fact {
                flow.colon(broken, fact_start(fact));
                flow.deeper(1, |flow| flow.fact(fact));
            }
        }
        StatementKind::Lemma(one) => {
            flow.put("lemma ", at);
            flow.name(&one.name);
            let broken = flow.clauses(&one.clauses);
            flow.colon(broken, fact_start(&one.fact));
            flow.deeper(2, |flow| flow.fact(&one.fact));
            flow.support(&one.reasons, &one.induction);
        }
        StatementKind::Claim(one) => {
            flow.put("claim ", at);
            flow.name(&one.name);
            let broken = flow.clauses(&one.clauses);
            flow.colon(broken, one.relations.span.start);
            flow.deeper(2, |flow| flow.relations(&one.relations));
            flow.support(&one.reasons, &one.induction);
        }
        StatementKind::Chain(one) => return chain(one, at, indent),
    }
    flow.parts(indent)
}

fn fact_start(fact: &Fact) -> u32 {
    match fact {
        Fact::Relations(relations) => relations.span.start,
        Fact::Property(application) => application.span.start,
    }
}

fn quantity(flow: &mut Flow, one: &Quantity, at: u32) {
    flow.put("quantity ", at);
    flow.name(&one.name);
    if !one.arguments.is_empty() {
        flow.put("(", at);
        flow.deeper(1, |flow| flow.list(&one.arguments, Flow::variable));
        flow.put(")", at);
    }
    flow.put(" : ", one.sort.span.start);
    flow.sort(one.sort);
    if let Some(range) = &one.range {
        flow.put(" in ", range.span.start);
        flow.deeper(1, |flow| flow.interval(range));
    }
    flow.remark(&one.remark);
}

/// First term and links on lines of their own, reasons in one column.
fn chain(one: &Chain, at: u32, indent: usize) -> Vec<Line> {
    let mut head = Flow::new();
    head.put("chain ", at);
    head.name(&one.name);
    head.clauses(&one.clauses);
    let clauses = &one.clauses;
    if !(clauses.given.is_empty() && clauses.requires.is_empty() && clauses.cases.is_empty()) {
        head.put(":", at);
    }
    let mut lines = head.parts(indent);
    let mut first = Flow::new();
    first.term(&one.first);
    lines.extend(first.lines(indent + 4, indent + 8));
    let signs = one.links.iter().map(|link| link.relation.kind.sign().len()).max().unwrap_or(2);
    let links: Vec<Vec<Line>> = one.links.iter().map(|link| link_lines(link, signs, indent)).collect();
    let end = |lines: &[Line]| lines.last().map_or(0, |line| line.indent + line.text.chars().count());
    let column = one
        .links
        .iter()
        .zip(&links)
        .filter(|(link, lines)| link.reasons.is_some() && end(lines) <= indent + 60)
        .map(|(_, lines)| end(lines) + 2)
        .max()
        .unwrap_or(0);
    for (link, mut written) in one.links.iter().zip(links) {
        if let Some(reasons) = &link.reasons {
            let mut flow = Flow::new();
            flow.reasons(reasons);
            let here = end(&written);
            let blanks = column.saturating_sub(here).max(2);
            match written.last_mut() {
                Some(last) if here + blanks + flow.width() <= WIDTH => {
                    last.text.push_str(&" ".repeat(blanks));
                    last.text.push_str(&flow.joined());
                }
                _ => written.extend(flow.lines(indent + 10, indent + 11)),
            }
        }
        lines.extend(written);
    }
    if let Some(induction) = &one.induction {
        let mut flow = Flow::new();
        flow.induction(induction);
        lines.extend(flow.lines(indent + 6, indent + 10));
    }
    lines
}

fn link_lines(link: &Link, signs: usize, indent: usize) -> Vec<Line> {
    let mut flow = Flow::new();
    let sign = link.relation.kind.sign();
    match &link.name {
        Some(name) => {
            flow.put("as ", link.span.start);
            flow.name(name);
            flow.put(": ", link.span.start);
            flow.put(sign, link.relation.span.start);
        }
        None => flow.put(&format!("{sign:signs$}"), link.span.start),
    }
    flow.put(" ", link.relation.span.start);
    flow.term(&link.term);
    flow.lines(indent + 6, indent + 10)
}

impl Flow {
    fn argument_names(&mut self, names: &[Name]) {
        if let Some(first) = names.first() {
            self.put("(", first.span.start);
            self.deeper(2, |flow| flow.list(names, Flow::name));
            self.put(")", first.span.start);
        }
    }

    /// Text and label after a declaration.
    fn remark(&mut self, remark: &Remark) {
        if let Some(text) = &remark.text {
            self.gap(0, 2);
            self.text(text);
        }
        if let Some(label) = &remark.label {
            self.gap(0, 2);
            self.put("label ", label.span.start);
            self.text(label);
        }
    }

    /// Text and label before a colon.
    fn tight_remark(&mut self, remark: &Remark) {
        if let Some(text) = &remark.text {
            self.put(" ", text.span.start);
            self.text(text);
        }
        if let Some(label) = &remark.label {
            self.put(" label ", label.span.start);
            self.text(label);
        }
    }

    /// All clauses; whether some of them stand on lines of their own if the
    /// statement does not fit on one line.
    fn clauses(&mut self, clauses: &Clauses) -> bool {
        let texts = [
            ("", &clauses.text),
            ("label ", &clauses.label),
            ("source ", &clauses.source),
            ("argued ", &clauses.argued),
        ];
        for (word, text) in texts {
            if let Some(text) = text {
                self.gap(1, 1);
                self.put(word, text.span.start);
                self.text(text);
            }
        }
        if let Some(at) = &clauses.at {
            self.put(" at ", at.span.start);
            self.name(at);
        }
        if let Some(first) = clauses.variables.first() {
            self.gap(0, 1);
            self.put("for ", first.span.start);
            self.deeper(1, |flow| flow.list(&clauses.variables, Flow::variable));
        }
        if let Some(first) = clauses.given.first() {
            self.gap(0, 1);
            self.put("given ", first.span.start);
            self.deeper(1, |flow| flow.list(&clauses.given, Flow::condition));
        }
        if let Some(first) = clauses.requires.first() {
            self.gap(0, 1);
            self.put("requires ", first.span.start);
            self.deeper(1, |flow| flow.list(&clauses.requires, Flow::application));
        }
        if let Some(first) = clauses.cases.first() {
            self.gap(0, 1);
            self.put("cases ", first.span.start);
            for (index, case) in clauses.cases.iter().enumerate() {
                if index > 0 {
                    self.gap(1, 1);
                    self.put("| ", case.span.start);
                }
                self.deeper(2, |flow| flow.case(case));
            }
        }
        let broken =
            [clauses.variables.len(), clauses.given.len(), clauses.requires.len(), clauses.cases.len()];
        broken.iter().any(|count| *count > 0)
    }

    /// The colon before a body: after the head, or, below clauses, before the body.
    fn colon(&mut self, broken: bool, start: u32) {
        if broken {
            self.gap(0, 0);
            self.put(": ", start);
        } else {
            self.put(":", start);
            self.gap(0, 1);
        }
    }

    fn support(&mut self, reasons: &Option<Reasons>, induction: &Option<Induction>) {
        if let Some(reasons) = reasons {
            self.gap(1, 2);
            self.deeper(2, |flow| flow.reasons(reasons));
        }
        if let Some(induction) = induction {
            self.gap(1, 2);
            self.deeper(2, |flow| flow.induction(induction));
        }
    }
}

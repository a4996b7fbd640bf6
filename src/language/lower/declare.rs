//! Statements that introduce names.

use std::rc::Rc;

use crate::diagnostic::Code;
use crate::expression::Name;
use crate::language::tree::{
    self, Condition, ConstantValue, Define, Expression, ExpressionKind, Statement, StatementKind,
};
use crate::source::Span;
use crate::statement::{Declaration, Parameter, Quantity, Signature, Where};

use super::names::{Definition, Entry, Named, Variables};
use super::term::is_fixed;
use super::{Files, Lowering};

/// What a statement declares: its name, and whether it is a name in terms.
fn declared(statement: &Statement) -> Option<(&tree::Name, bool)> {
    Some(match &statement.kind {
        StatementKind::Parameter(p) => (&p.variable.name, true),
        StatementKind::Quantity(q) => (&q.name, true),
        StatementKind::Define(d) => (&d.name, true),
        StatementKind::Constant(c) => (&c.name, true),
        StatementKind::Assume(a) => (&a.name, false),
        StatementKind::Lemma(l) => (&l.name, false),
        StatementKind::Chain(c) => (&c.name, false),
        StatementKind::Claim(c) => (&c.name, false),
        _ => return None,
    })
}

impl Lowering {
    /// Notes what the file declares, and what its definitions refer to.
    pub(super) fn look_ahead(&mut self, statements: &[Statement]) {
        for statement in statements {
            if let Some((name, in_terms)) = declared(statement) {
                let list = if in_terms { &mut self.ahead } else { &mut self.ahead_facts };
                list.entry(name.text.clone()).or_insert(name.span);
            }
            match &statement.kind {
                StatementKind::Define(define) => {
                    let mut used = Vec::new();
                    names_in(&define.value, &mut used);
                    used.retain(|name| !define.arguments.iter().any(|a| a.text == *name));
                    self.definition_uses.entry(define.name.text.clone()).or_insert(used);
                }
                StatementKind::Block(block) => self.look_ahead(&block.statements),
                _ => {}
            }
        }
    }

    /// Counts the names of statements that could not be read as broken, so that their
    /// uses are not reported on top of the mistake itself. The names are guessed from
    /// the lines that start like a declaration.
    pub(super) fn break_unread(&mut self, text: &str) {
        for (line, start) in lines_with_starts(text) {
            let mut words = line.split_whitespace();
            let (Some(keyword), Some(second)) = (words.next(), words.next()) else { continue };
            let in_terms = match keyword {
                "parameter" | "quantity" | "define" | "constant" => true,
                "assume" | "lemma" | "chain" | "claim" | "property" => false,
                _ => continue,
            };
            let end = second
                .find(|c: char| !(c.is_alphanumeric() || c == '_' || c == '\''))
                .unwrap_or(second.len());
            let name: Name = second[..end].into();
            let known = self.ahead.contains_key(&*name) || self.ahead_facts.contains_key(&*name);
            if name.is_empty() || known || self.names.properties.contains_key(&name) {
                continue;
            }
            let span = Span::empty(start);
            if in_terms {
                self.names.terms.entry(name).or_insert((span, Named::Broken));
            } else {
                self.names.entries.entry(name).or_insert((span, Entry::Broken));
            }
        }
    }

    /// The circle of definitions that `name` is on, as words, if there is one.
    pub(super) fn circle(&self, name: &str) -> Option<String> {
        let mut path = vec![name];
        let mut seen = std::collections::BTreeSet::new();
        self.find_circle(name, &mut path, &mut seen).then(|| {
            let names: Vec<String> = path.iter().map(|n| format!("`{n}`")).collect();
            names.join(" uses ")
        })
    }

    fn find_circle<'a>(
        &'a self,
        goal: &str,
        path: &mut Vec<&'a str>,
        seen: &mut std::collections::BTreeSet<&'a str>,
    ) -> bool {
        let Some(uses) = path.last().and_then(|last| self.definition_uses.get_key_value(*last)) else {
            return false;
        };
        for next in uses.1 {
            // A long circle is not worth a deep search.
            if path.len() > 100 {
                return false;
            }
            if next == goal {
                path.push(next);
                return true;
            }
            if seen.insert(next) {
                path.push(next);
                if self.find_circle(goal, path, seen) {
                    return true;
                }
                path.pop();
            }
        }
        false
    }

    /// Counts every name that the statements would declare as broken.
    pub(super) fn break_all(&mut self, statements: &[Statement]) {
        for statement in statements {
            match declared(statement) {
                Some((name, true)) => {
                    self.names.terms.entry(name.text.as_str().into()).or_insert((name.span, Named::Broken));
                }
                Some((name, false)) => {
                    self.names.entries.entry(name.text.as_str().into()).or_insert((name.span, Entry::Broken));
                }
                None => {}
            }
            if let StatementKind::Block(block) = &statement.kind {
                self.break_all(&block.statements);
            }
        }
    }

    /// Gives a name in terms its meaning; false if it is taken.
    fn declare(&mut self, name: &tree::Name, meaning: Named) -> bool {
        if is_fixed(&name.text) {
            self.error(Code::Reserved, name.span, format!("`{}` has a fixed meaning", name.text))
                .hint("choose another name");
            return false;
        }
        let taken = self.names.terms.get(&*name.text).map(|(span, _)| *span);
        let alias = self.names.aliases.get(&*name.text).map(|(span, _)| *span);
        // In the kernel's text parameters, quantities and facts share one space of names.
        let shared = matches!(meaning, Named::Parameter | Named::Quantity(_));
        let fact = self.names.entries.get(&*name.text).filter(|_| shared).map(|(span, _)| *span);
        if let Some(first) = taken.or(alias).or(fact) {
            let first = self.place(first);
            self.error(Code::DuplicateName, name.span, format!("`{}` is already declared", name.text))
                .label(first, "first declared here");
            return false;
        }
        if self.block.iter().any(|d| *d.name == *name.text) {
            self.error(Code::DuplicateName, name.span, format!("`{}` is a variable of the block", name.text));
            return false;
        }
        self.names.terms.insert(name.text.as_str().into(), (name.span, meaning));
        true
    }

    fn block_scope(&self) -> Variables {
        Variables::of(self.block.iter().map(|d| d.name.clone()))
    }

    pub(super) fn use_file(&mut self, using: &tree::Use, files: &mut Files) {
        let alias = &using.alias;
        let module = match files.used(&self.path, &using.path.text) {
            Ok(module) => Some(module),
            Err((code, message)) => {
                self.error(code, using.path.span, message);
                None
            }
        };
        let taken = self.names.terms.get(&*alias.text).map(|(s, _)| *s);
        let taken = taken.or(self.names.entries.get(&*alias.text).map(|(s, _)| *s));
        let taken = taken.or(self.names.aliases.get(&*alias.text).map(|(s, _)| *s));
        if let Some(first) = taken {
            let first = self.place(first);
            self.error(Code::DuplicateName, alias.span, format!("`{}` is already a name", alias.text))
                .label(first, "first used here");
            return;
        }
        let name: Name = alias.text.as_str().into();
        if let Some(module) = &module {
            self.names.prefixes.entry(module.file).or_insert_with(|| name.clone());
        }
        self.names.aliases.insert(name, (alias.span, module));
    }

    pub(super) fn parameter(&mut self, parameter: &tree::Parameter, span: Span) {
        if !self.block.is_empty() {
            return self.only_outside_blocks(span);
        }
        let variable = &parameter.variable;
        let domain =
            self.domain(variable.sort_kind(), variable.domain.as_ref(), variable.span, &Variables::default());
        let meaning = if domain.is_some() { Named::Parameter } else { Named::Broken };
        if let (true, Some(domain)) = (self.declare(&variable.name, meaning), domain) {
            let origin = self.remark(span, &parameter.remark);
            let declaration = Declaration { name: variable.name.text.as_str().into(), domain };
            self.theory.parameters.push(Parameter { declaration, is_constant: false, origin });
        }
    }

    pub(super) fn constant(&mut self, constant: &tree::Constant, span: Span) {
        let origin = self.remark(span, &constant.remark);
        let name: Name = constant.name.text.as_str().into();
        match &constant.value {
            ConstantValue::Exact(value) => {
                let scope = self.block_scope();
                let Some(body) = self.term(value, &scope) else {
                    self.declare(&constant.name, Named::Broken);
                    return;
                };
                if !body.free_variables().is_empty() || !body.quantities().is_empty() {
                    self.declare(&constant.name, Named::Broken);
                    self.error(Code::WrongKind, value.span, "a constant depends on nothing")
                        .hint("use `define` for an abbreviation of a term with parameters or quantities");
                    return;
                }
                let definition = Definition { arguments: vec![], outer: vec![], body: body.clone() };
                if self.declare(&constant.name, Named::Definition(Rc::new(definition))) {
                    self.theory.constants.push((name, body, origin));
                }
            }
            ConstantValue::Within(interval) => {
                if !self.block.is_empty() {
                    return self.only_outside_blocks(span);
                }
                let scope = Variables::default();
                let domain = self.domain(tree::SortKind::Real, Some(interval), interval.span, &scope);
                let meaning = if domain.is_some() { Named::Parameter } else { Named::Broken };
                if let (true, Some(domain)) = (self.declare(&constant.name, meaning), domain) {
                    let declaration = Declaration { name, domain };
                    self.theory.parameters.push(Parameter { declaration, is_constant: true, origin });
                }
            }
        }
    }

    pub(super) fn quantity(&mut self, quantity: &tree::Quantity, span: Span) {
        if !self.block.is_empty() {
            return self.only_outside_blocks(span);
        }
        let nothing = Variables::default();
        let arguments: Vec<_> = quantity
            .arguments
            .iter()
            .map(|a| self.domain(a.sort_kind(), a.domain.as_ref(), a.span, &nothing))
            .collect();
        let range = self.domain(quantity.sort.kind, quantity.range.as_ref(), quantity.sort.span, &nothing);
        let signature = match (arguments.into_iter().collect::<Option<Vec<_>>>(), range) {
            (Some(arguments), Some(range)) => {
                Some(Signature { name: quantity.name.text.as_str().into(), arguments, range })
            }
            _ => None,
        };
        let meaning = match &signature {
            Some(signature) => Named::Quantity(signature.arguments.len()),
            None => Named::Broken,
        };
        // In the kernel's text a call of a function is read as that function.
        if crate::expression::Function::from_name(&quantity.name.text).is_some() {
            self.error(
                Code::Reserved,
                quantity.name.span,
                format!("`{}` is a function of the language", quantity.name.text),
            )
            .hint("choose another name for the quantity");
            return;
        }
        if let (true, Some(signature)) = (self.declare(&quantity.name, meaning), signature) {
            let argument_names = quantity.arguments.iter().map(|a| a.name.text.as_str().into()).collect();
            let origin = self.remark(span, &quantity.remark);
            self.theory.quantities.push(Quantity { signature, argument_names, origin });
        }
    }

    pub(super) fn property(&mut self, property: &tree::Property, span: Span) {
        if !self.block.is_empty() {
            return self.only_outside_blocks(span);
        }
        self.declare_property(&property.name, property.arguments.len());
    }

    pub(super) fn declare_property(&mut self, name: &tree::Name, arguments: usize) -> bool {
        if let Some((first, _)) = self.names.properties.get(&*name.text) {
            let first = self.place(*first);
            self.error(
                Code::DuplicateName,
                name.span,
                format!("the property `{}` is already declared", name.text),
            )
            .label(first, "first declared here");
            return false;
        }
        self.names.properties.insert(name.text.as_str().into(), (name.span, arguments));
        true
    }

    pub(super) fn define(&mut self, define: &Define) {
        let arguments: Vec<Name> = define.arguments.iter().map(|a| a.text.as_str().into()).collect();
        let mut sound = true;
        for (i, argument) in define.arguments.iter().enumerate() {
            if is_fixed(&argument.text) {
                self.error(Code::Reserved, argument.span, format!("`{}` has a fixed meaning", argument.text));
                sound = false;
            } else if arguments[..i].contains(&arguments[i]) {
                let message = format!("the argument `{}` is named twice", argument.text);
                self.error(Code::DuplicateName, argument.span, message);
                sound = false;
            } else if self.block.iter().any(|d| d.name == arguments[i]) {
                let message = format!("`{}` is a variable of the block", argument.text);
                self.error(Code::DuplicateName, argument.span, message);
                sound = false;
            }
        }
        let outer: Vec<Name> = self.block.iter().map(|d| d.name.clone()).collect();
        let scope = Variables::of(outer.iter().chain(&arguments).cloned());
        // Told here, because inside its own text the name is not declared yet.
        let circle = self.circle(&define.name.text).filter(|_| {
            self.definition_uses.get(&define.name.text).is_some_and(|used| used.contains(&define.name.text))
        });
        let body = match circle {
            Some(circle) => {
                self.error(
                    Code::CircularDefinition,
                    define.name.span,
                    format!("the definition depends on itself: {circle}"),
                );
                None
            }
            None => self.term(&define.value, &scope),
        };
        let meaning = match body {
            Some(body) if sound => {
                self.mentioned.extend(body.free_variables());
                self.mentioned.extend(body.quantities());
                Named::Definition(Rc::new(Definition { arguments, outer, body }))
            }
            _ => Named::Broken,
        };
        self.declare(&define.name, meaning);
    }

    /// `where` conditions: of the whole dossier, or of the block they stand in.
    pub(super) fn conditions(&mut self, conditions: &[Condition]) {
        for condition in conditions {
            let scope = self.block_scope();
            let relations = self.relations(&condition.relations, &scope);
            let entry = if relations.is_some() { Entry::Condition } else { Entry::Broken };
            if let Some(name) = &condition.name
                && !self.register_fact(name, entry)
            {
                continue;
            }
            let Some(relations) = relations else { continue };
            let about_quantities = relations
                .iter()
                .any(|r| !(r.left.quantities().is_empty() && r.right.quantities().is_empty()));
            if about_quantities {
                self.error(Code::WrongKind, condition.span, "a `where` condition is about parameters only")
                    .hint("what is known about a quantity is stated with `assume`");
                continue;
            }
            let label: Option<Name> = condition.name.as_ref().map(|n| n.text.as_str().into());
            if !self.block.is_empty() {
                self.block_given.extend(relations.into_iter().map(|r| (label.clone(), r)));
                continue;
            }
            let several = relations.len() > 1;
            for (i, relation) in relations.into_iter().enumerate() {
                let name: Name = match &label {
                    Some(label) if several => format!("{label}.{}", i + 1).into(),
                    Some(label) => label.clone(),
                    None => self.fresh_condition_name(),
                };
                let origin = self.origin(condition.span, None, None);
                self.theory.wheres.push(Where { name, relation, origin });
            }
        }
    }

    fn fresh_condition_name(&self) -> Name {
        let taken = |name: &str| {
            self.ahead.contains_key(name)
                || self.ahead_facts.contains_key(name)
                || self.theory.wheres.iter().any(|w| &*w.name == name)
        };
        let mut n = self.theory.wheres.len() + 1;
        while taken(&format!("where{n}")) {
            n += 1;
        }
        format!("where{n}").into()
    }
}

/// The lines of a text with the places where they start.
fn lines_with_starts(text: &str) -> impl Iterator<Item = (&str, u32)> {
    let mut start = 0u32;
    text.split('\n').map(move |line| {
        let here = start;
        start = start.saturating_add(u32::try_from(line.len() + 1).unwrap_or(u32::MAX));
        (line, here)
    })
}

/// The unqualified names an expression mentions.
fn names_in(e: &Expression, found: &mut Vec<String>) {
    let mut note = |path: &tree::Path| {
        if let [name] = path.parts.as_slice()
            && !found.contains(&name.text)
        {
            found.push(name.text.clone());
        }
    };
    match &e.kind {
        ExpressionKind::Number(_) => {}
        ExpressionKind::Name(path) => note(path),
        ExpressionKind::Call(call) => {
            note(&call.function);
            call.arguments.iter().for_each(|a| names_in(a, found));
            call.named.iter().for_each(|b| names_in(&b.value, found));
        }
        ExpressionKind::Fold(fold) => {
            [&fold.from, &fold.to, &fold.body].into_iter().for_each(|p| names_in(p, found))
        }
        ExpressionKind::Group(a) | ExpressionKind::Factorial(a) | ExpressionKind::Negative(a) => {
            names_in(a, found)
        }
        ExpressionKind::Power(a, b) => {
            names_in(a, found);
            names_in(b, found);
        }
        ExpressionKind::Product(a, rest) => {
            names_in(a, found);
            rest.iter().for_each(|(_, b)| names_in(b, found));
        }
        ExpressionKind::Sum(a, rest) => {
            names_in(a, found);
            rest.iter().for_each(|(_, b)| names_in(b, found));
        }
    }
}

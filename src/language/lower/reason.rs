//! Reasons: the facts a statement names, and the instances it writes out.
//!
//! Reasons point backwards only. A named hypothesis may be cited, though it holds
//! anyway; a link is cited as `chain.2` or `chain.name`; a fact of a used file is
//! brought in when it is first cited.

use crate::diagnostic::Code;
use crate::expression::Name;
use crate::language::tree::{Path, Reason, Reasons};
use crate::language::words;
use crate::source::Span;
use crate::statement::{Fact, Proof, Says, Standing};

use super::Lowering;
use super::goal::Local;
use super::matching::Binding;
use super::names::{Entry, Module, Named};
use super::term::written;

/// The reasons of a statement, their facts found and their written instances read.
#[derive(Default)]
pub(super) struct Cited {
    pub(super) list: Vec<CitedFact>,
    pub(super) sound: bool,
}

/// A fact with what is written about its instance.
pub(super) struct CitedFact {
    pub fact: Fact,
    pub written: Binding,
    pub span: Span,
    /// The reason's path as written.
    pub text: String,
}

impl Cited {
    pub fn is_empty(&self) -> bool {
        self.list.is_empty()
    }

    /// The parameters that the facts speak of.
    pub fn parameters(&self) -> impl Iterator<Item = Name> {
        self.list.iter().flat_map(|c| c.fact.context.over.iter().cloned())
    }
}

impl Lowering {
    /// Finds the facts behind reasons; `own` is the item that is being stated.
    pub(super) fn cited(&mut self, reasons: Option<&Reasons>, local: &Local, own: &str) -> Cited {
        let mut cited = Cited { list: Vec::new(), sound: true };
        let mut seen: Vec<&Reason> = Vec::new();
        for reason in reasons.map_or(&[][..], |r| &r.list) {
            let again = seen.iter().any(|r| {
                written(&r.path) == written(&reason.path)
                    && r.values.is_empty()
                    && reason.values.is_empty()
                    && r.replacements.is_empty()
                    && reason.replacements.is_empty()
            });
            if again {
                self.warning(
                    Code::UnusedReason,
                    reason.span,
                    format!("`{}` is named twice", written(&reason.path)),
                );
                continue;
            }
            seen.push(reason);
            match self.cite(&reason.path, local, own) {
                Some(Some(fact)) => match self.written_instance(reason, &fact, local) {
                    Some(binding) => cited.list.push(CitedFact {
                        fact,
                        written: binding,
                        span: reason.span,
                        text: written(&reason.path),
                    }),
                    None => cited.sound = false,
                },
                // A condition that holds anyway.
                Some(None) => {
                    if let Some(first) = reason.values.first() {
                        let message =
                            format!("`{}` is a condition and has no variables", written(&reason.path));
                        self.error(Code::BadArgument, first.span, message);
                        cited.sound = false;
                    }
                }
                None => cited.sound = false,
            }
        }
        cited
    }

    /// The fact a path names; `Some(None)` if it is a condition that holds throughout.
    fn cite(&mut self, path: &Path, local: &Local, own: &str) -> Option<Option<Fact>> {
        let text = written(path);
        match path.parts.as_slice() {
            [name] => {
                if local.given.iter().any(|(label, _)| label.as_deref() == Some(name.text.as_str())) {
                    return Some(None);
                }
                if name.text == own {
                    self.error(Code::ForwardReason, path.span, "a statement cannot be its own reason")
                        .hint(format!("an earlier link is cited as `{own}.1`"));
                    return None;
                }
                match self.names.entries.get(&*name.text).map(|(_, entry)| entry.clone()) {
                    Some(Entry::Fact | Entry::Item(_)) => self.find_fact(&name.text).map(Some),
                    Some(Entry::Condition) if self.is_in_force(&name.text) => Some(None),
                    Some(Entry::Condition) => {
                        self.error(
                            Code::BadReason,
                            path.span,
                            format!("`{text}` holds only inside its block"),
                        );
                        None
                    }
                    Some(Entry::Broken) => None,
                    None => {
                        self.unknown_fact(name.text.as_str(), path.span, local);
                        None
                    }
                }
            }
            [first, second] => {
                if let Some((_, module)) = self.names.aliases.get(&*first.text) {
                    let module = module.clone()?;
                    return match module.names.entries.get(&*second.text) {
                        Some((_, Entry::Fact | Entry::Item(_))) => {
                            let name = self.import_fact(&module, &second.text, path.span)?;
                            self.find_fact(&name).map(Some)
                        }
                        Some((_, Entry::Broken)) => None,
                        Some((_, Entry::Condition)) => {
                            self.error(
                                Code::BadReason,
                                path.span,
                                format!("`{text}` is a condition of the other file"),
                            )
                            .hint("it comes with every fact of that file as a hypothesis");
                            None
                        }
                        None => {
                            let known: Vec<&str> = module.names.entries.keys().map(|n| &**n).collect();
                            let near =
                                words::nearest(&second.text, &known).map(|n| format!("{}.{n}", first.text));
                            self.no_such_fact(&text, second.span, near);
                            None
                        }
                    };
                }
                let links = match self.names.entries.get(&*first.text) {
                    Some((_, Entry::Item(links))) => links.clone(),
                    Some((_, Entry::Broken)) => return None,
                    Some(_) => {
                        self.error(Code::BadReason, path.span, format!("`{}` has no links", first.text));
                        return None;
                    }
                    None => {
                        self.unknown_fact(first.text.as_str(), first.span, local);
                        return None;
                    }
                };
                match link(&links, &second.text) {
                    Some(goal) => self.link_fact(&goal).map(Some),
                    None if *first.text == *own => {
                        self.error(
                            Code::ForwardReason,
                            path.span,
                            format!("`{text}` is not an earlier link"),
                        );
                        None
                    }
                    None => {
                        self.no_such_link(&text, path.span, &links);
                        None
                    }
                }
            }
            [first, second, third] => {
                let module: Option<std::rc::Rc<Module>> = match self.names.aliases.get(&*first.text) {
                    Some((_, module)) => module.clone(),
                    None => {
                        self.no_such_fact(&text, path.span, None);
                        return None;
                    }
                };
                let module = module?;
                let Some((_, Entry::Item(links))) = module.names.entries.get(&*second.text) else {
                    self.no_such_fact(&text, path.span, None);
                    return None;
                };
                let Some(goal) = link(links, &third.text) else {
                    self.no_such_link(&text, path.span, links);
                    return None;
                };
                let name = self.import_link(&module, &second.text, &goal, path.span)?;
                self.find_fact(&name).map(Some)
            }
            _ => {
                self.no_such_fact(&text, path.span, None);
                None
            }
        }
    }

    /// Whether a condition holds in the whole file.
    fn is_in_force(&self, name: &str) -> bool {
        let first = format!("{name}.1");
        self.theory.wheres.iter().any(|w| *w.name == *name || *w.name == *first)
    }

    fn find_fact(&self, name: &str) -> Option<Fact> {
        self.theory.fact(name).or_else(|| self.pending.iter().find(|f| &*f.name == name)).cloned()
    }

    /// The fact that a single goal establishes, made when it is first cited.
    fn link_fact(&mut self, goal: &Name) -> Option<Fact> {
        let name: Name = format!("{goal}.link").into();
        if let Some(fact) = self.find_fact(&name) {
            self.cited_links.insert(name);
            return Some(fact);
        }
        let goal = self.theory.goal(goal)?;
        let fact = Fact {
            name,
            standing: Standing::Proved(Proof::All(vec![goal.name.clone()])),
            context: goal.context.clone(),
            says: Says::Relations(vec![goal.relation.clone()]),
            origin: goal.origin.clone(),
        };
        self.theory.facts.push(fact.clone());
        Some(fact)
    }

    fn unknown_fact(&mut self, name: &str, span: Span, local: &Local) {
        if let Some(later) = self.ahead_facts.get(name) {
            let place = self.place(*later);
            self.error(Code::ForwardReason, span, format!("`{name}` is stated only later"))
                .label(place, "stated here")
                .hint("reasons point backwards only; move the statement up");
            return;
        }
        let mut known: Vec<&str> = self.names.entries.keys().map(|n| &**n).collect();
        known.extend(local.given.iter().filter_map(|(label, _)| label.as_deref()));
        let near = words::nearest(name, &known).map(str::to_owned);
        if near.is_none() && self.names.terms.contains_key(name) {
            self.error(Code::BadReason, span, format!("`{name}` is not a fact"))
                .hint("definitions, domains and constants are used without being named");
            return;
        }
        self.no_such_fact(name, span, near);
    }

    fn no_such_fact(&mut self, name: &str, span: Span, near: Option<String>) {
        let hint = match near {
            Some(near) => format!("perhaps `{near}` is meant"),
            None => {
                "a reason is an earlier assumption, lemma, chain, link or claim, or a named hypothesis".into()
            }
        };
        self.error(Code::BadReason, span, format!("there is no fact `{name}`")).hint(hint);
    }

    fn no_such_link(&mut self, name: &str, span: Span, links: &[(Option<Name>, Name)]) {
        let mut named: Vec<String> =
            links.iter().filter_map(|(n, _)| n.as_ref()).map(|n| format!("`{n}`")).collect();
        named.insert(0, format!("1 to {}", links.len()));
        self.error(Code::BadReason, span, format!("there is no link `{name}`"))
            .hint(format!("its links: {}", named.join(", ")));
    }

    /// What the user wrote in parentheses after a reason.
    fn written_instance(&mut self, reason: &Reason, fact: &Fact, local: &Local) -> Option<Binding> {
        let mut binding = Binding::default();
        let mut sound = true;
        for value in &reason.values {
            let name = &value.name;
            let known = fact.context.variables.iter().any(|d| *d.name == *name.text);
            if !known || binding.terms.contains_key(&*name.text) {
                let all: Vec<String> =
                    fact.context.variables.iter().map(|d| format!("`{}`", d.name)).collect();
                let message = if known {
                    format!("`{}` is given twice", name.text)
                } else {
                    format!("`{}` is not a variable of `{}`", name.text, written(&reason.path))
                };
                let has = if all.is_empty() {
                    "it has none".into()
                } else {
                    format!("its variables: {}", all.join(", "))
                };
                self.error(Code::BadArgument, name.span, message).hint(has);
                sound = false;
                continue;
            }
            match self.term(&value.value, &local.scope()) {
                Some(term) => {
                    binding.terms.insert(name.text.as_str().into(), term);
                }
                None => sound = false,
            }
        }
        for replacement in &reason.replacements {
            let name = &replacement.name;
            let known = fact.context.schema.iter().any(|s| *s.name == *name.text);
            if !known || binding.quantities.contains_key(&*name.text) {
                let all: Vec<String> = fact.context.schema.iter().map(|s| format!("`{}`", s.name)).collect();
                let message =
                    format!("`{}` is not a quantity that `{}` leaves open", name.text, written(&reason.path));
                let has = if all.is_empty() {
                    "it leaves none open".into()
                } else {
                    format!("open: {}", all.join(", "))
                };
                self.error(Code::BadArgument, name.span, message).hint(has);
                sound = false;
                continue;
            }
            let by = written(&replacement.by);
            match self.names.terms.get(&*by) {
                Some((_, Named::Quantity(_))) => {
                    binding.quantities.insert(name.text.as_str().into(), by.as_str().into());
                }
                Some((_, Named::Broken)) => sound = false,
                _ => {
                    self.error(Code::BadArgument, replacement.by.span, format!("`{by}` is not a quantity"));
                    sound = false;
                }
            }
        }
        sound.then_some(binding)
    }
}

fn link(links: &[(Option<Name>, Name)], wanted: &str) -> Option<Name> {
    if let Ok(number) = wanted.parse::<usize>() {
        return links.get(number.wrapping_sub(1)).map(|(_, goal)| goal.clone());
    }
    links.iter().find(|(name, _)| name.as_deref() == Some(wanted)).map(|(_, goal)| goal.clone())
}

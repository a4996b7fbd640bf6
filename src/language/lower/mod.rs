//! Syntax tree to statements: names, kinds, meaning.
//!
//! Contract: turns what was read into a [`Theory`] in which definitions are folded,
//! every name is resolved and every instance of a cited fact is written out, and
//! into diagnostics where that is impossible. It decides no inequality beyond
//! comparing literal numbers. Every mistake is told once: what depends on a broken
//! statement is left out in silence.
//! Start with `lower` below; `term.rs` folds terms, `item.rs` and `chain.rs` lower
//! what is stated, `reason.rs` finds the facts named as reasons, `instance.rs` and
//! `matching.rs` their instances, `import.rs` brings in facts of used files.

mod chain;
mod clause;
mod declare;
mod domain;
mod goal;
mod import;
mod induction;
mod instance;
mod item;
mod matching;
mod names;
mod numbers;
mod reason;
mod term;
mod unused;

use std::collections::{BTreeMap, BTreeSet};
use std::rc::Rc;

use crate::diagnostic::{Code, Diagnostic};
use crate::expression::{Name, Term};
use crate::source::{FileId, Library, Place, Sources, Span};
use crate::statement::{Declaration, Fact, Origin, Relation, Theory};

use super::tree::{self, Statement, StatementKind};
use names::{Entry, Module, Names, Variables};

/// A lowered dossier.
#[derive(Debug, Clone)]
pub struct Lowered {
    /// What it claims; complete only if no diagnostic is an error.
    pub theory: Theory,
    /// What is wrong or doubtful, in the file itself and in the files it uses.
    pub diagnostics: Vec<Diagnostic>,
}

impl Lowered {
    /// Whether there is an error among the diagnostics.
    #[must_use]
    pub fn has_errors(&self) -> bool {
        self.diagnostics.iter().any(Diagnostic::is_error)
    }
}

/// Reads and lowers a file, with all files it uses.
#[must_use]
pub fn lower(sources: &mut Sources, library: &dyn Library, file: FileId) -> Lowered {
    let mut files =
        Files { sources, files: library, done: BTreeMap::new(), open: Vec::new(), errors: Vec::new() };
    let (module, mut diagnostics) = files.module(file);
    diagnostics.append(&mut files.errors);
    Lowered { theory: module.theory.clone(), diagnostics }
}

/// Lowers a single term over the given variables, for instance from a command line.
///
/// # Errors
/// The diagnostics, if the term uses an unknown name or is malformed.
pub fn lower_term(
    file: FileId,
    term: &tree::Expression,
    variables: &[Declaration],
) -> Result<Term, Vec<Diagnostic>> {
    let mut lowering = Lowering::new(file, String::new());
    let scope = Variables::of(variables.iter().map(|d| d.name.clone()));
    match lowering.term(term, &scope) {
        Some(term) if lowering.out.is_empty() => Ok(term),
        _ => Err(lowering.out),
    }
}

/// Lowers a list of variables with domains; later ones may use earlier ones.
///
/// # Errors
/// The diagnostics, if a domain is malformed or empty.
pub fn lower_variables(
    file: FileId,
    variables: &[tree::Variable],
) -> Result<Vec<Declaration>, Vec<Diagnostic>> {
    let mut lowering = Lowering::new(file, String::new());
    match lowering.variables(variables, &[]) {
        Some(declarations) if lowering.out.is_empty() => Ok(declarations),
        _ => Err(lowering.out),
    }
}

/// Longest chain of files of which each uses the next.
const MAX_USE_DEPTH: usize = 64;

/// All files of one run: each is lowered once.
struct Files<'a> {
    sources: &'a mut Sources,
    files: &'a dyn Library,
    done: BTreeMap<FileId, Rc<Module>>,
    /// The files being lowered, outermost first.
    open: Vec<FileId>,
    /// Errors of used files.
    errors: Vec<Diagnostic>,
}

impl Files<'_> {
    fn module(&mut self, file: FileId) -> (Rc<Module>, Vec<Diagnostic>) {
        let Some(source) = self.sources.get(file) else {
            let missing = Diagnostic::placeless(Code::UnreadableFile, "the file was never read");
            return (Rc::new(Module::empty(file)), vec![missing]);
        };
        let parsed = super::parse(source);
        let text = if parsed.has_errors() { source.text().to_owned() } else { String::new() };
        let mut lowering = Lowering::new(file, source.stem().to_owned());
        lowering.out = parsed.diagnostics;
        lowering.path = source.name().to_owned();
        self.open.push(file);
        lowering.look_ahead(&parsed.value.statements);
        lowering.break_unread(&text);
        lowering.tree(&parsed.value, self);
        self.open.pop();
        let mut diagnostics = std::mem::take(&mut lowering.out);
        diagnostics.sort_by_key(|d| d.place.map(|p| (p.file, p.span.start)));
        let module = Rc::new(lowering.into_module());
        self.done.insert(file, module.clone());
        (module, diagnostics)
    }

    /// A used file, or why it cannot be had.
    fn used(&mut self, from: &str, target: &str) -> Result<Rc<Module>, (Code, String)> {
        let name = crate::source::resolve(from, target).map_err(|e| (Code::BadPath, e.to_string()))?;
        let file = self
            .sources
            .load(self.files, &name)
            .map_err(|e| (Code::UnreadableFile, format!("`{name}`: {e}")))?;
        if let Some(at) = self.open.iter().position(|f| *f == file) {
            let names = self.open[at..].iter().chain([&file]).filter_map(|f| self.sources.get(*f));
            let circle: Vec<String> = names.map(|s| format!("`{}`", s.name())).collect();
            return Err((
                Code::CircularUse,
                format!("files use each other in a circle: {}", circle.join(" uses ")),
            ));
        }
        if self.open.len() >= MAX_USE_DEPTH {
            return Err((Code::TooLarge, format!("files use one another more than {MAX_USE_DEPTH} deep")));
        }
        if let Some(module) = self.done.get(&file) {
            return Ok(module.clone());
        }
        let (module, diagnostics) = self.module(file);
        self.errors.extend(diagnostics.into_iter().filter(Diagnostic::is_error));
        Ok(module)
    }
}

/// The state while one file is lowered.
struct Lowering {
    file: FileId,
    path: String,
    out: Vec<Diagnostic>,
    names: Names,
    theory: Theory,
    /// Variables of the enclosing blocks.
    block: Vec<Declaration>,
    /// Conditions of the enclosing blocks.
    block_given: Vec<(Option<Name>, Relation)>,
    /// Names declared anywhere in the file, with their places: to tell a name that
    /// comes too early from one that does not exist.
    ahead: BTreeMap<String, Span>,
    /// The same for names of facts.
    ahead_facts: BTreeMap<String, Span>,
    /// For every definition the names its text uses, to show circles.
    definition_uses: BTreeMap<String, Vec<String>>,
    /// Parameters and quantities whose use in a folded definition was seen.
    mentioned: BTreeSet<Name>,
    /// Links of the chain being lowered, as facts that later links may cite.
    pending: Vec<Fact>,
    /// Those that were cited.
    cited_links: BTreeSet<Name>,
    /// Nodes that folding may still produce.
    budget: u64,
}

impl Lowering {
    fn new(file: FileId, stem: String) -> Lowering {
        Lowering {
            file,
            path: String::new(),
            out: Vec::new(),
            names: Names::default(),
            theory: Theory { stem, ..Theory::default() },
            block: Vec::new(),
            block_given: Vec::new(),
            ahead: BTreeMap::new(),
            ahead_facts: BTreeMap::new(),
            pending: Vec::new(),
            cited_links: BTreeSet::new(),
            definition_uses: BTreeMap::new(),
            mentioned: BTreeSet::new(),
            budget: term::TOTAL_SIZE,
        }
    }

    fn place(&self, span: Span) -> Place {
        span.within(self.file)
    }

    /// Puts an error on the list; more can be added to what is returned.
    fn error(&mut self, code: Code, span: Span, message: impl Into<String>) -> Tell<'_> {
        self.tell(Diagnostic::error(code, span.within(self.file), message))
    }

    fn warning(&mut self, code: Code, span: Span, message: impl Into<String>) -> Tell<'_> {
        self.tell(Diagnostic::warning(code, span.within(self.file), message))
    }

    fn tell(&mut self, diagnostic: Diagnostic) -> Tell<'_> {
        Tell { list: &mut self.out, diagnostic: Some(diagnostic) }
    }

    fn origin(&self, span: Span, text: Option<&tree::Text>, label: Option<&tree::Text>) -> Origin {
        Origin {
            place: Some(self.place(span)),
            text: text.map(|t| t.text.clone()),
            label: label.map(|t| t.text.clone()),
        }
    }

    fn remark(&self, span: Span, remark: &tree::Remark) -> Origin {
        self.origin(span, remark.text.as_ref(), remark.label.as_ref())
    }

    fn tree(&mut self, tree: &tree::Tree, files: &mut Files) {
        for statement in &tree.statements {
            if let StatementKind::Use(using) = &statement.kind {
                self.use_file(using, files);
            } else {
                self.statement(statement);
            }
        }
        self.tell_unused();
    }

    fn statement(&mut self, statement: &Statement) {
        let span = statement.span;
        match &statement.kind {
            StatementKind::Dossier(title) => self.theory.title = Some(title.text.clone()),
            StatementKind::Use(_) => self.only_outside_blocks(span),
            StatementKind::Parameter(parameter) => self.parameter(parameter, span),
            StatementKind::Where(conditions) => self.conditions(conditions),
            StatementKind::Quantity(quantity) => self.quantity(quantity, span),
            StatementKind::Property(property) => self.property(property, span),
            StatementKind::Assume(assume) => self.assume(assume, span),
            StatementKind::Lemma(lemma) => self.lemma(lemma, span),
            StatementKind::Define(define) => self.define(define),
            StatementKind::Constant(constant) => self.constant(constant, span),
            StatementKind::Chain(chain) => self.chain(chain, span),
            StatementKind::Claim(claim) => self.claim(claim, span),
            StatementKind::Numbers(numbers) => self.numbers(numbers, span),
            StatementKind::Block(block) => self.block(block),
        }
    }

    fn block(&mut self, block: &tree::Block) {
        let outer = (self.block.len(), self.block_given.len());
        let own = self.variables(&block.variables, &self.block.clone());
        match own {
            Some(own) => {
                self.block.extend(own);
                for statement in &block.statements {
                    self.statement(statement);
                }
            }
            // Without its variables nothing inside can be read; its names count as broken.
            None => self.break_all(&block.statements),
        }
        self.block.truncate(outer.0);
        self.block_given.truncate(outer.1);
    }

    fn only_outside_blocks(&mut self, span: Span) {
        self.error(Code::Misplaced, span, "this statement cannot stand in a block")
            .hint("move it above the block, to the first column");
    }

    fn into_module(self) -> Module {
        Module { file: self.file, names: self.names, theory: self.theory }
    }

    /// Registers a fact name; false if it is taken.
    fn register(&mut self, name: &tree::Name, entry: Entry) -> bool {
        let taken = self.names.entries.get(&*name.text).map(|(span, _)| *span);
        let alias = self.names.aliases.get(&*name.text).map(|(span, _)| *span);
        if let Some(first) = taken.or(alias) {
            let first = self.place(first);
            self.error(
                Code::DuplicateName,
                name.span,
                format!("`{}` is already the name of a fact", name.text),
            )
            .label(first, "first used here");
            return false;
        }
        self.names.entries.insert(name.text.as_str().into(), (name.span, entry));
        true
    }
}

/// A diagnostic that goes on the list when it is dropped, so that hints and labels
/// can be added in passing.
struct Tell<'a> {
    list: &'a mut Vec<Diagnostic>,
    diagnostic: Option<Diagnostic>,
}

impl Tell<'_> {
    fn change(mut self, f: impl FnOnce(Diagnostic) -> Diagnostic) -> Self {
        self.diagnostic = self.diagnostic.take().map(f);
        self
    }

    fn label(self, place: Place, text: impl Into<String>) -> Self {
        self.change(|d| d.label(place, text))
    }

    fn hint(self, text: impl Into<String>) -> Self {
        self.change(|d| d.hint(text))
    }
}

impl Drop for Tell<'_> {
    fn drop(&mut self) {
        self.list.extend(self.diagnostic.take());
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::MemoryLibrary;

    const START: &str = "parameter s : integer in [4, infinity)\nparameter y : real in [1, infinity)\n\
        quantity f(t : real in [0, infinity)) : real in [0, infinity)\n\
        quantity n(k : integer in [0, infinity)) : real\n";

    fn lowered(text: &str) -> Lowered {
        let mut sources = Sources::new();
        let file = sources.add("a.obl", format!("{START}{text}"));
        lower(&mut sources, &MemoryLibrary::new(), file)
    }

    /// The instances that the last goal uses.
    fn uses(text: &str) -> String {
        let lowered = lowered(text);
        let errors: Vec<&str> =
            lowered.diagnostics.iter().filter(|d| d.is_error()).map(|d| d.message.as_str()).collect();
        assert!(errors.is_empty(), "{text}\n{errors:?}");
        let goal = lowered.theory.goals.last().expect("a goal");
        let instance = |u: &crate::statement::Use| {
            let values: Vec<String> = u.bindings.iter().map(|(x, t)| format!("{x} = {t}")).collect();
            format!("{}({})", u.fact, values.join(", "))
        };
        goal.uses.iter().map(instance).collect::<Vec<_>>().join(" ")
    }

    fn codes(text: &str) -> Vec<Code> {
        lowered(text).diagnostics.into_iter().map(|d| d.code).collect()
    }

    #[test]
    fn instances_are_found_by_matching() {
        let check = |fact: &str, claim: &str, expected: &str| {
            assert_eq!(
                uses(&format!("assume a {fact}\nclaim c {claim} [a]\n")),
                expected,
                "{fact} in {claim}"
            );
        };
        check("for t in [0, infinity): f(t) <= t", ": f(s + y) <= s + y", "a(t = s + y)");
        check("for t in [0, infinity): f(t) <= t", ": f(y) + f(s) <= s + y", "a(t = y) a(t = s)");
        // The instance whose values all occur wins over those of which only some do.
        check("for t in [0, infinity): f(t + 1) <= f(t)", ": f(y + 1) <= f(y)", "a(t = y)");
        // The sort of a variable rules instances out.
        check("for k : integer in [0, infinity): n(k) <= f(k)", ": f(y) + n(s) <= f(s)", "a(k = s)");
        // So does a domain, where literals decide.
        check("for t in [2, infinity): f(t) <= t", ": f(1) + f(3) <= 9", "a(t = 3)");
        // Nothing to match: the variable of the same name.
        check("for z in [0, 1]: z^2 <= z", "for z in [0, 1]: z^3 <= z", "a(z = z)");
        // Whole sides, also inside others.
        check(
            "for u in (0, infinity), v in [1, 2]: log(u)*v <= u",
            ": exp(log(y)*(3/2)) <= exp(y)",
            "a(u = y, v = 3/2)",
        );
    }

    #[test]
    fn what_one_reason_states_helps_the_next() {
        let text = "assume a: f(y) <= f(2*y)\nassume b for t in [0, infinity), u in [0, infinity): f(2*t) <= u*f(3*u)\n\
            assume c for t in [0, infinity): f(2*t) <= t\nclaim d: f(y) <= y [c, a]\n";
        assert_eq!(uses(text), "c(t = y) a()");
    }

    #[test]
    fn conditions_find_their_facts_at_hand() {
        let text = "assume a for t in [0, infinity) given f(t) <= 1: f(2*t) <= 1\nassume b for t in [0, infinity): f(t) <= 1/t\n\
            claim c: f(2*y) <= 1 [a, b(t = y)]\n";
        assert_eq!(uses(text), "b(t = y) a(t = y)");
    }

    #[test]
    fn what_is_written_is_taken_as_it_stands() {
        let text = "assume a for t in [0, infinity): f(t) <= t\nclaim c: f(y) <= 7 [a(t = 2*s)]\n";
        assert_eq!(uses(text), "a(t = 2*s)");
    }

    #[test]
    fn mistakes_have_their_codes() {
        let check = |text: &str, expected: &[Code]| assert_eq!(codes(text), expected, "{text}");
        check("claim c: f(y) <= z\nclaim d: y*s >= 1", &[Code::UnknownName]);
        check("claim c: y*s*f(y)*n(s) <= 1\nclaim c: 1 <= 2", &[Code::DuplicateName]);
        check("claim c: y*s*f(-1)*n(s) <= 1", &[Code::BadArgument]);
        check("claim c: y*s*f(1)*n(s/2) <= 1", &[Code::BadArgument]);
        check("claim c: y*s*f(y)*n(s) <= 1 [d]\nclaim d: 1 <= 2", &[Code::ForwardReason]);
        check("parameter x : real in [2, 1]\nclaim c: y*s*f(y)*n(s)*x <= 1", &[Code::BadDomain]);
        check("parameter gone : real in [2, 3]\nclaim c: y*s*f(y)*n(s) <= 1", &[Code::UnusedName]);
        check("where f(y) <= 1\nclaim c: y*s*f(y)*n(s) <= 1", &[Code::WrongKind]);
        check("define a(x) = a(x)\nclaim c: y*s*f(y)*n(s) <= 1", &[Code::CircularDefinition]);
        check("constant c = y\nclaim d: y*s*f(y)*n(s) <= 1", &[Code::WrongKind]);
        check("lemma l source \"x\": y*s*f(y)*n(s) <= 1\nclaim d: y <= 1 [l, l]", &[Code::UnusedReason]);
        check("claim d for y in [0, 1]: y*s*f(y)*n(s) <= 1", &[Code::DuplicateName]);
    }

    #[test]
    fn long_chains_of_files_are_refused() {
        let mut library = MemoryLibrary::new();
        for i in 0..3000 {
            library = library
                .with(&format!("f{i}.obl"), format!("use \"f{}.obl\" as next\nclaim c: 1 <= 2\n", i + 1));
        }
        let mut sources = Sources::new();
        let file = sources.load(&library, "f0.obl").expect("the first file");
        let lowered = lower(&mut sources, &library, file);
        assert!(lowered.diagnostics.iter().any(|d| d.code == Code::TooLarge));
    }

    #[test]
    fn a_mistake_is_told_once() {
        let text = "parameter z real in [0, 1]\nassume a for in: z <= 1\nclaim c: y*s*f(y)*n(s)*z <= 1 [a]\nclaim d: z <= 1 [c]\n";
        let codes = codes(text);
        assert_eq!(codes.len(), 2, "{codes:?}");
    }

    #[test]
    fn a_statement_speaks_of_what_its_conditions_reach() {
        let over = |text: &str| lowered(text).theory.goals.last().expect("a goal").context.over.join(" ");
        assert_eq!(over("claim c: y <= 1"), "y");
        assert_eq!(over("where y <= s\nclaim c: y <= 1"), "s y");
        // Its domain is never empty, so it says nothing about s.
        assert_eq!(over("parameter k : integer in [0, s]\nclaim c: s <= 1"), "s");
        assert_eq!(over("parameter k : integer in [0, s]\nclaim c: k <= 1"), "s k");
        // This one restricts s.
        assert_eq!(over("parameter k : integer in [9, s]\nclaim c: s <= 1"), "s k");
    }
}

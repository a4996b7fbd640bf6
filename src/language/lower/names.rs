//! What names mean in one file.
//!
//! There are three kinds of names, which may coincide: names in terms, names of
//! facts, names of properties. An alias of a used file counts as a term name and
//! as a fact name, so that `alias.x` is never ambiguous.

use std::collections::BTreeMap;
use std::rc::Rc;

use crate::expression::{Name, Term};
use crate::source::{FileId, Span};
use crate::statement::Theory;

/// What a name in a term means.
#[derive(Debug, Clone)]
pub(super) enum Named {
    /// A parameter, or a constant known only to lie in an interval.
    Parameter,
    /// A quantity with so many arguments.
    Quantity(usize),
    /// A definition or an exact constant.
    Definition(Rc<Definition>),
    /// Something whose declaration has an error; already told.
    Broken,
}

/// An abbreviation.
#[derive(Debug, Clone)]
pub(super) struct Definition {
    /// Given by position or by name.
    pub arguments: Vec<Name>,
    /// Variables of the blocks around it; given by name, or left as they are where
    /// a variable of the same name is in force.
    pub outer: Vec<Name>,
    /// What it stands for, in these and in parameters and quantities.
    pub body: Term,
}

/// What a name of a fact means.
#[derive(Debug, Clone)]
pub(super) enum Entry {
    /// A fact of the theory.
    Fact,
    /// An item that is proved by goals: also a fact of the theory. Its links can be
    /// cited by number or by name: each with the name of its goal.
    Item(Vec<(Option<Name>, Name)>),
    /// A condition that holds throughout; citing it is allowed and changes nothing.
    Condition,
    /// Its statement has an error; already told.
    Broken,
}

/// All names of a file.
#[derive(Debug, Clone, Default)]
pub(super) struct Names {
    /// Names in terms.
    pub terms: BTreeMap<Name, (Span, Named)>,
    /// Names of facts.
    pub entries: BTreeMap<Name, (Span, Entry)>,
    /// Properties of the file with the number of their arguments.
    pub properties: BTreeMap<Name, (Span, usize)>,
    /// Used files.
    pub aliases: BTreeMap<Name, (Span, Option<Rc<Module>>)>,
    /// For facts, goals and properties brought in from other files: where they come
    /// from, and their name there.
    pub foreign: BTreeMap<Name, (FileId, Name)>,
    /// How names of other files are prefixed here.
    pub prefixes: BTreeMap<FileId, Name>,
}

impl Names {
    /// The name here of something called `local` in `module`: foreign names of the
    /// module are traced to the file they come from, so that one thing reached by
    /// two ways has one name.
    pub fn import(&mut self, here: FileId, module: &Module, local: &str) -> Name {
        let (file, original) = match module.names.foreign.get(local) {
            Some((file, original)) => (*file, original.clone()),
            None => (module.file, Name::from(local)),
        };
        if file == here {
            return original;
        }
        let prefix = match self.prefixes.get(&file) {
            Some(prefix) => prefix.clone(),
            None => {
                let outer = self.prefixes.get(&module.file).cloned().unwrap_or_else(|| "used".into());
                let inner = module.names.prefixes.get(&file).cloned().unwrap_or_else(|| "used".into());
                let prefix: Name = format!("{outer}.{inner}").into();
                self.prefixes.insert(file, prefix.clone());
                prefix
            }
        };
        let name: Name = format!("{prefix}.{original}").into();
        self.foreign.insert(name.clone(), (file, original));
        name
    }
}

/// A lowered file, as others see it.
#[derive(Debug, Clone)]
pub(super) struct Module {
    /// Which file.
    pub file: FileId,
    /// Its names.
    pub names: Names,
    /// Its logic.
    pub theory: Theory,
}

impl Module {
    /// What stands for a file that could not be read.
    pub fn empty(file: FileId) -> Module {
        Module { file, names: Names::default(), theory: Theory::default() }
    }
}

/// The variables in force inside a statement: of blocks, `for` clauses, arguments of
/// definitions, indices of series.
#[derive(Debug, Clone, Default)]
pub(super) struct Variables {
    names: Vec<Name>,
}

impl Variables {
    pub fn of(names: impl IntoIterator<Item = Name>) -> Variables {
        Variables { names: names.into_iter().collect() }
    }

    pub fn contains(&self, name: &str) -> bool {
        self.names.iter().any(|n| &**n == name)
    }

    pub fn with(&self, name: Name) -> Variables {
        let mut names = self.names.clone();
        names.push(name);
        Variables { names }
    }

    pub fn iter(&self) -> impl Iterator<Item = &Name> {
        self.names.iter()
    }
}

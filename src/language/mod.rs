//! Text to syntax tree, tree to canonical text, tree to statements.
//!
//! Contract: the only room that names nom. Reading never fails as a whole: it
//! gives a tree of what could be read and a list of diagnostics; it never
//! panics, and takes time linear in the text. `grammar/language.ebnf` states
//! the syntax; the functions of `grammar/` carry the names of its rules. It
//! must never decide anything about mathematics.
//! Start with `tree.rs`, then the EBNF file.

pub mod tree;

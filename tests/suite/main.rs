//! The test suite: one module for each feature, one corpus of cases for each
//! under `tests/cases/`. Helpers come first.

mod ebnf;
mod schema;

#[cfg(unix)]
mod bad_input;
mod command;
mod dossiers;
#[cfg(feature = "mpfr")]
mod enclose;
#[cfg(feature = "mpfr")]
mod enclosure;
#[cfg(feature = "mpfr")]
#[path = "../examples/entry/mod.rs"]
mod entry;
#[cfg(feature = "mpfr")]
mod false_variants;
#[cfg(feature = "mpfr")]
mod handbook;
mod kernel_grammar;
mod language;
mod language_grammar;
#[cfg(feature = "mpfr")]
mod refuted;
mod report;
mod rooms;
mod statement;
#[cfg(feature = "mpfr")]
#[path = "../examples/variants/mod.rs"]
mod variants;

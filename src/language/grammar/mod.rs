//! The rules of `grammar/language.ebnf`, one function for each, under its name.

mod clause;
mod declaration;
mod fact;
mod interval;
mod reason;
mod result;
mod statement;
mod term;

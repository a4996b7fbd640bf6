//! The canonical printer.
//!
//! Contract: the printed text reads as the same tree; printing it again changes
//! nothing; every comment is kept. Signs are printed in ASCII, identifiers as
//! written (in NFC), so that a search for `<=` finds every relation. Lines are
//! at most 100 characters long where the text allows it. Clauses come in one
//! order. Comments stay with the line they belong to.

mod flow;
mod statement;
mod term;
mod weave;

use super::tree::{Expression, Interval, Tree};
use flow::Flow;

/// The canonical text of a file whose text was `text` and which was read as
/// `tree` without errors.
pub fn format(text: &str, tree: &Tree) -> String {
    let mut printed = Vec::new();
    statement::print(&tree.statements, 0, &mut printed);
    weave::weave(text, printed, &tree.comments)
}

/// A term on one line.
pub fn format_term(term: &Expression) -> String {
    one_line(|flow| flow.term(term))
}

/// An interval on one line.
pub fn format_interval(interval: &Interval) -> String {
    one_line(|flow| flow.interval(interval))
}

fn one_line(write: impl FnOnce(&mut Flow)) -> String {
    let mut flow = Flow::new();
    write(&mut flow);
    flow.joined()
}

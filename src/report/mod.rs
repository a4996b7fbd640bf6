//! One model of an audit, and its renderings.
//!
//! Contract: the model holds finished texts and verdicts; this room adds no
//! fact to it, words it for people (`terminal.rs`) and for programs
//! (`json.rs`), and always shows the claim as the kernel read it. It uses
//! `diagnostic` for what must not reach a terminal raw, and touches no files.
//! A rendering depends on the model only: no time, no machine, no thread.
//! Start with `model.rs`.

mod argument;
mod facts;
mod json;
mod layout;
mod model;
mod recheck;
mod terminal;

pub use argument::argument;
pub use facts::{FACTS_SCHEMA, Fact, FactSheet};
pub use json::{Unreadable, from_json, to_json};
pub use layout::Style;
pub use model::{
    Audit, Constant, Count, Dossier, Inhabitant, Item, Margin, Number, Obligation, Point, Region, RestsOn,
    SCHEMA, Stuck, Summary, Term, Tool, Value, Values, Verdict, Witness, fingerprint,
};
pub use recheck::{Claim, Composition, RECHECK_SCHEMA, Recheck};
pub use terminal::{to_terminal, verdict_line};

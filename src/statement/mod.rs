//! What is claimed, free of syntax: parameters, quantities, facts, goals, and the
//! obligations they come down to.
//!
//! What it may use: `expression`, and `source` for places in the text. What it
//! must never do: know the syntax of dossiers, search, or decide anything.
//! Start with `theory.rs`; `obligation.rs` lists what is to be shown, `plain.rs`
//! writes the text that the kernel reads. The kernel derives its own list of
//! obligations from that text; a test compares the two.

mod declaration;
mod defined;
mod obligation;
mod plain;
mod relation;
mod sequent;
mod theory;

pub use declaration::{Declaration, Domain, Signature};
pub use defined::{Condition, Signatures, conditions, has_at_hand, is_trivial};
pub use obligation::{Instance, Needed, Obligation, ObligationKind, obligations};
pub use plain::plain;
pub use relation::{Rel, Relation};
pub use sequent::{Conclusion, Sequent};
pub use theory::{
    Case, Context, Fact, Goal, Item, ItemKind, Numbers, Origin, Parameter, Proof, Property, Quantity, Says,
    Standing, Theory, Use, Where,
};

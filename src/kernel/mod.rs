//! Decides whether a certificate establishes its claim.
//!
//! The only door is text: the plain form of a dossier (`grammar/claim.ebnf`) and
//! certificates (`grammar/certificate.ebnf`). This room uses std, num-bigint,
//! num-rational, num-integer and num-traits, and no other room. It never
//! searches, never guesses, never clips a domain, and refuses every rule,
//! premise or field it does not know.
//!
//! How to read it in an afternoon: `term`, `sequent` (what is claimed), `read`
//! (how texts become those), `theory` and `obligation` (what a dossier obliges
//! to show), `defined` (what "defined" means), then `rule/`, one file a rule,
//! each opening with its statement and the reason it is sound, and last
//! `number/`, the enclosures that the numeric rules rest on.

pub mod audit;
mod bound;
pub mod closed;
pub mod compose;
pub mod defined;
pub mod differentiate;
pub mod end;
pub mod evaluate;
pub mod instance;
pub mod integer;
pub mod normal;
pub mod number;
pub mod obligation;
pub mod polynomial;
pub mod range;
pub mod read;
pub mod rule;
#[cfg(test)]
pub mod sample;
pub mod section;
pub mod sequent;
pub mod sign;
mod special;
pub mod step;
mod sturm;
pub mod term;
#[cfg(test)]
pub mod testing;
pub mod theory;
mod token;
pub mod verdict;
pub mod witness;

//! placeholder until the sign analysis lands
use super::sequent::{Relation, Sequent};
/// Whether quick analysis settles the relation.
pub fn settles(_s: &Sequent, _r: &Relation) -> bool {
    false
}

//! `{split x (c) {below} {above}}`
//!
//! Prove the goal for `x` up to `c` and from `c` on; both domains contain `c`.
//! `x` is a real variable and `c` a term in variables declared before it, defined
//! and plainly between the ends of `x`.
//! Sound: the two contexts cover Gamma, and both are contained in it.
//! Forgotten: `c` outside the domain, where a part would be larger than Gamma.

use super::{Kernel, check as prove};
use crate::kernel::section::Section;
use crate::kernel::sequent::Sequent;
use crate::kernel::step::Fields;
use crate::kernel::verdict::Checked;

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let (x, c) = (fields.word()?, fields.term()?);
    let (below, above) = (fields.step()?, fields.step()?);
    fields.end()?;
    let (left, right) = Section::split(s, x, c, k)?;
    prove(&left, below, k)?;
    prove(&right, above, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::sample::{accepts, rejects};

    #[test]
    fn both_parts_and_no_more() {
        accepts("x : real in [0, 3] | | 0 <= x", "{split x (1) {sign} {sign}}");
        accepts("a : real in [0, 1]; x : real in [a, inf) | | 0 <= x", "{split x (a + 1) {sign} {sign}}");
        rejects("x : real in [0, 3] | | x <= 3", "{split x (4) {sign} {sign}}", "not settled");
        rejects(
            "x : real in [0, 3]; a : real in [0, 3] | | 0 <= x",
            "{split x (a) {sign} {sign}}",
            "not declared",
        );
        rejects("n : integer in [0, 3] | | 0 <= n", "{split n (1) {sign} {sign}}", "not a real variable");
        // An open end is no point of the domain: 1/x has no value there.
        rejects("x : real in (0, 1] | | 0 <= -1/x", "{split x (0) {empty x} {sign}}", "not settled");
        rejects("x : real in [-1, 0) | | 0 <= 1/x", "{split x (0) {sign} {empty x}}", "not settled");
        rejects("x : real in [0, 3] | | 0 <= x", "{split x (1/0) {sign} {sign}}", "defined");
    }
}

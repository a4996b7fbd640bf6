//! `{enclose BITS}`
//!
//! The goal `l <= r` (`<`, `!=`) holds if the enclosure of `F = r - l` over the
//! whole declared domain, infinite ends included, is `>= 0` (`> 0`, free of 0).
//! Every operation must be inside its own domain for all of the box. With
//! absurdity as the goal: some hypothesis is violated on the whole box. No
//! equation is ever proved this way.
//! Sound: the value at a point of Gamma is a member of the enclosure.
//! Forgotten: an enclosure that contains 0 taken as `= 0`; a box cut down to the
//! part where the term is defined.

use super::Kernel;
use super::boxes::{Frame, leaf};
use crate::kernel::bound::Form;
use crate::kernel::sequent::Sequent;
use crate::kernel::step::Fields;
use crate::kernel::verdict::Checked;

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let frame = Frame::new(s, fields.count(super::boxes::MAX_BITS)?)?;
    fields.end()?;
    let form = if frame.has_goal() { Some(Form::Natural) } else { None };
    leaf(&frame, &frame.start()?, form, k)
}

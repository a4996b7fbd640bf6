//! The kernel: believes nothing it has not re-checked. Uses only `std` and the
//! `num` crates, and no other room.

pub mod number;

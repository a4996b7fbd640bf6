//! The kernel's enclosures against MPFR, a library the kernel shares no code with.
//!
//! Every check asks two things of an enclosure at a point: it contains the value that
//! MPFR gives with 80 more bits, and it is no wider than the precision promises.

mod boxes;
mod points;
mod support;

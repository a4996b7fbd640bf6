//! Boxes.

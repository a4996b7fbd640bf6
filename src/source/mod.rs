//! Text we were given.

//! How far long work has come, on standard error and only on a terminal.

use std::io::{self, IsTerminal};

use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};

/// Work shorter than this many steps shows nothing.
const FEW: usize = 2;

/// A bar for `steps` steps; it draws nothing unless standard error is a terminal.
pub fn bar(steps: usize) -> ProgressBar {
    if steps < FEW || !io::stderr().is_terminal() {
        return ProgressBar::hidden();
    }
    let bar = ProgressBar::with_draw_target(u64::try_from(steps).ok(), ProgressDrawTarget::stderr());
    // Without colour: the numbers say everything.
    match ProgressStyle::with_template("checking {pos}/{len} {wide_bar}") {
        Ok(style) => bar.with_style(style),
        Err(_) => bar,
    }
}

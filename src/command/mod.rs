//! The command line: arguments in, text and an exit code out.
//!
//! Contract: the only room that touches files, standard streams, threads and
//! signals, and the only one that may use every other room. It proves nothing
//! and words no result: verdicts come from `kernel`, their layout from
//! `report`. Results go to standard output, everything else to standard error.
//! Start with `arguments.rs`, then one file for each subcommand.

mod arguments;
#[cfg(feature = "mpfr")]
mod check;
mod dossier;
#[cfg(feature = "mpfr")]
mod enclose;
mod exit;
mod facts;
mod files;
mod format;
mod guard;
mod new;
mod output;
#[cfg(feature = "mpfr")]
mod progress;
mod recheck;

use std::ffi::OsString;

use clap::Parser;

pub use exit::Exit;

use arguments::{Arguments, Command};
use exit::Done;
#[cfg(not(feature = "mpfr"))]
use exit::Failure;

/// Runs the program with these arguments (the first is the program's name).
///
/// Never panics: an internal error is caught, told on standard error and gives
/// [`Exit::Internal`].
pub fn run(arguments: impl IntoIterator<Item = OsString>) -> Exit {
    let arguments = match Arguments::try_parse_from(arguments) {
        Ok(arguments) => arguments,
        Err(error) => return arguments::explain(&error),
    };
    guard::stop_on_interrupt();
    match guard::shielded(move || dispatch(arguments.command)) {
        Ok(Ok(exit)) => exit,
        Ok(Err(failure)) => {
            output::tell_failure(&failure);
            failure.exit
        }
        Err(()) => Exit::Internal,
    }
}

fn dispatch(command: Command) -> Done {
    match command {
        Command::New(request) => new::run(&request),
        #[cfg(feature = "mpfr")]
        Command::Check(request) => check::run(&request),
        Command::Facts(request) => facts::run(&request),
        Command::Recheck(request) => recheck::run(&request),
        #[cfg(feature = "mpfr")]
        Command::Enclose(request) => enclose::run(&request),
        Command::Format(request) => format::run(&request),
        #[cfg(not(feature = "mpfr"))]
        Command::Check(_) | Command::Enclose(_) => Err(Failure::input(
            "this build lacks the search and its arithmetic; build it with the feature `mpfr`",
        )),
    }
}

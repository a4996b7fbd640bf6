//! The grammar of the command line.

use std::path::PathBuf;

use clap::error::ErrorKind;
use clap::{Args, Parser, Subcommand, ValueEnum};

use super::exit::Exit;
use super::output;

/// Checks hand-derived bounds: every step of a derivation with explicit
/// constants, for all parameter values.
#[derive(Debug, Parser)]
#[command(name = "boundwright", version, max_term_width = 100, after_help = CODES)]
pub struct Arguments {
    #[command(subcommand)]
    pub command: Command,
}

const CODES: &str = "\
Exit codes:
  0    everything holds and is established
  1    something fails, is vacuous, or rests on something that does not hold
  2    something is undecided and nothing is worse
  3    wrong usage or wrong input
  4    the environment failed: an unreadable file, a full disk
  5    `recheck` rejected a certificate
  70   an error of this program
  130  interrupted";

/// What the program can do.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// Write a short commented dossier that passes, to start from
    New(New),
    /// Check every step of dossiers, for all parameter values
    Check(Check),
    /// List what may be cited in a dossier, with its hypotheses
    Facts(Facts),
    /// Let the kernel alone re-check a stored audit
    Recheck(Recheck),
    /// Enclose the values of an expression on a box, rigorously
    Enclose(Enclose),
    /// Lay out dossiers in the canonical way
    Format(Format),
}

/// How a result is written.
#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub enum Rendering {
    /// For people, in the columns of a terminal
    Terminal,
    /// For programs
    Json,
}

/// Arguments of `new`.
#[derive(Debug, Args)]
pub struct New {
    /// The file to write; it must not exist yet (`-`: standard output)
    pub file: PathBuf,
}

/// Arguments of `check`.
#[derive(Debug, Args)]
pub struct Check {
    /// Dossiers, or folders of them (`-`: standard input)
    #[arg(required = true)]
    pub paths: Vec<PathBuf>,
    /// Check only this item or link, such as `cut_tail` or `cut_tail.2`, and what it rests on; may be repeated
    #[arg(long, value_name = "ITEM")]
    pub only: Vec<String>,
    /// Give the argument by which this link or item was passed, in words; checks only it and what it rests on; may be repeated
    #[arg(long, value_name = "LINK")]
    pub explain: Vec<String>,
    /// Show the value of every term along the chains at this named set of numbers
    #[arg(long, value_name = "NUMBERS")]
    pub at: Option<String>,
    /// Work units each obligation may cost; the same on every machine
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(1..))]
    pub effort: Option<u64>,
    /// Threads to use; never changes a result
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    pub jobs: Option<u16>,
    #[command(flatten)]
    pub result: Destination,
}

/// Arguments of `facts`.
#[derive(Debug, Args)]
pub struct Facts {
    /// A dossier (`-`: standard input)
    pub path: PathBuf,
    #[command(flatten)]
    pub result: Destination,
}

/// Arguments of `recheck`.
#[derive(Debug, Args)]
pub struct Recheck {
    /// An audit written by `check --format json` (`-`: standard input)
    pub audit: PathBuf,
    #[command(flatten)]
    pub result: Destination,
}

/// Arguments of `enclose`.
#[derive(Debug, Args)]
#[command(allow_negative_numbers = true)]
pub struct Enclose {
    /// The expression, such as "exp(x)/x" (`-`: one JSON request a line on standard input)
    #[arg(allow_hyphen_values = true)]
    pub expression: String,
    /// The range of each variable, `x=[a, b]`, or its value, `x=a`
    #[arg(value_name = "VARIABLE=RANGE")]
    pub ranges: Vec<String>,
    /// At a point the relative width of the result is at most 10^-N
    #[arg(long, value_name = "N", default_value_t = 15, value_parser = clap::value_parser!(u32).range(1..=10_000))]
    pub digits: u32,
    #[command(flatten)]
    pub result: Destination,
}

/// Arguments of `format`.
#[derive(Debug, Args)]
pub struct Format {
    /// Dossiers, or folders of them (`-`: from standard input to standard output)
    #[arg(required = true)]
    pub paths: Vec<PathBuf>,
    /// Change nothing; name the files that would change, and exit with 1 if there are any
    #[arg(long)]
    pub check: bool,
}

/// Where a result goes and how it is written.
#[derive(Debug, Args)]
pub struct Destination {
    /// How the result is written
    #[arg(long, value_enum, value_name = "RENDERING", default_value = "terminal")]
    pub format: Rendering,
    /// Write the result to this file instead of standard output
    #[arg(long, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

/// Prints what the argument parser has to say; its own exit code is replaced by ours.
pub fn explain(error: &clap::Error) -> Exit {
    let asked = matches!(error.kind(), ErrorKind::DisplayHelp | ErrorKind::DisplayVersion);
    if asked {
        let text = error.render();
        let text = if output::colour() { text.ansi().to_string() } else { text.to_string() };
        return match output::print(&text) {
            Ok(()) => Exit::Success,
            Err(failure) => {
                output::tell_failure(&failure);
                failure.exit
            }
        };
    }
    output::tell(&error.render().to_string());
    Exit::Input
}

#[cfg(test)]
mod tests {
    use super::*;
    use clap::CommandFactory;

    #[test]
    fn the_definition_is_consistent() {
        Arguments::command().debug_assert();
    }
}

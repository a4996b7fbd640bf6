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
    /// Lay out dossiers in the canonical way
    Format(Format),
}

/// Arguments of `new`.
#[derive(Debug, Args)]
pub struct New {
    /// The file to write; it must not exist yet (`-`: standard output)
    pub file: PathBuf,
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

/// Prints what the argument parser has to say; its own exit code is replaced by ours.
pub fn explain(error: &clap::Error) -> Exit {
    let asked = matches!(error.kind(), ErrorKind::DisplayHelp | ErrorKind::DisplayVersion);
    if asked {
        let text = error.render();
        let text = if output::colour() { text.ansi().to_string() } else { text.to_string() };
        return match output::print(&text) {
            Ok(()) => Exit::Success,
            Err(failure) => {
                output::tell(&format!("boundwright: {failure}\n"));
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

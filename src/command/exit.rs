//! Exit codes, and failures that end a command.

use std::fmt;
use std::process::ExitCode;

use crate::report::{Audit, Verdict};

/// How a run ended. The numbers are part of the program's interface.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Exit {
    /// 0: everything holds and is established, or the work asked for was done.
    Success,
    /// 1: something fails, is vacuous, or rests on something that does not hold.
    Fails,
    /// 2: something is undecided and nothing is worse.
    Undecided,
    /// 3: wrong usage or wrong input.
    Input,
    /// 4: the environment failed: an unreadable file, a full disk.
    Environment,
    /// 5: `recheck` rejected a certificate.
    Rejected,
    /// 70: an error of this program.
    Internal,
    /// 130: interrupted.
    Interrupted,
}

impl Exit {
    /// The number the process returns.
    #[must_use]
    pub const fn code(self) -> u8 {
        match self {
            Exit::Success => 0,
            Exit::Fails => 1,
            Exit::Undecided => 2,
            Exit::Input => 3,
            Exit::Environment => 4,
            Exit::Rejected => 5,
            Exit::Internal => 70,
            Exit::Interrupted => 130,
        }
    }

    /// The worse of two: an interrupt, then 70, 4, 3, 5, 1, 2, 0.
    #[must_use]
    pub fn worse(self, other: Exit) -> Exit {
        if other.weight() > self.weight() { other } else { self }
    }

    const fn weight(self) -> u8 {
        match self {
            Exit::Success => 0,
            Exit::Undecided => 1,
            Exit::Fails => 2,
            Exit::Rejected => 3,
            Exit::Input => 4,
            Exit::Environment => 5,
            Exit::Internal => 6,
            Exit::Interrupted => 7,
        }
    }
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> ExitCode {
        ExitCode::from(exit.code())
    }
}

/// Why a command could not do its work.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Failure {
    /// The code the process returns.
    pub exit: Exit,
    message: String,
}

/// What a subcommand comes back with.
pub type Done = Result<Exit, Failure>;

impl Failure {
    /// Wrong usage or wrong input.
    pub fn input(message: impl Into<String>) -> Failure {
        Failure { exit: Exit::Input, message: message.into() }
    }

    /// The environment failed.
    pub fn environment(message: impl Into<String>) -> Failure {
        Failure { exit: Exit::Environment, message: message.into() }
    }

    /// An error of this program.
    #[cfg(feature = "mpfr")]
    pub fn internal(message: impl Into<String>) -> Failure {
        Failure { exit: Exit::Internal, message: format!("internal error: {}", message.into()) }
    }
}

impl fmt::Display for Failure {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        out.write_str(&self.message)
    }
}

/// What an audit's verdicts mean for the exit code.
pub fn verdict_code(audit: &Audit) -> Exit {
    let codes = audit.obligations.iter().map(|one| (one.verdict, one.established));
    let items = audit.items.iter().map(|one| (one.verdict, one.established));
    codes.chain(items).fold(Exit::Success, |exit, one| {
        exit.worse(match one {
            (Verdict::Holds, true) => Exit::Success,
            (Verdict::Undecided, _) => Exit::Undecided,
            _ => Exit::Fails,
        })
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_worst_code_wins() {
        // The order is the one the README promises: 70, 4, 3, 5, 1, 2, 0.
        let order = [
            Exit::Internal,
            Exit::Environment,
            Exit::Input,
            Exit::Rejected,
            Exit::Fails,
            Exit::Undecided,
            Exit::Success,
        ];
        for (place, worse) in order.iter().enumerate() {
            for better in &order[place..] {
                assert_eq!(worse.worse(*better), *worse);
                assert_eq!(better.worse(*worse), *worse);
            }
        }
        assert_eq!(order.map(Exit::code), [70, 4, 3, 5, 1, 2, 0]);
    }
}

//! The program: arguments to command to exit code, nothing else.

use std::process::ExitCode;

fn main() -> ExitCode {
    boundwright::command::run(std::env::args_os()).into()
}

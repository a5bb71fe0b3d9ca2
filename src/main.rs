//! The `ribband` command.

use std::process::ExitCode;

fn main() -> ExitCode {
    ExitCode::from(ribband::cli::main(std::env::args_os()))
}

//! The command line: what was typed, carried out, and told.

mod args;
mod machines;

use std::ffi::OsString;
use std::io::Write;

use clap::Parser;

use crate::cautions;
use crate::error::Error;
use crate::files::cannot_write;
use args::{Arguments, Command};

/// Carries out the command line `typed` (its first word is the program's name) and returns the exit status.
pub fn main(typed: impl IntoIterator<Item = OsString>) -> u8 {
    let arguments = match Arguments::try_parse_from(typed) {
        Ok(arguments) => arguments,
        Err(why) => {
            // Help and version come this way too: to standard output, with status 0.
            let shown = why.print();
            return if why.use_stderr() || shown.is_err() { 2 } else { 0 };
        }
    };
    match carry_out(arguments.command) {
        Ok(()) => 0,
        Err(error) => {
            tell(&error);
            error.exit_status()
        }
    }
}

fn carry_out(command: Command) -> Result<(), Error> {
    match command {
        Command::Machines { name, report, overwrite } => {
            machines::machines(name.as_deref(), report.as_deref(), overwrite)
        }
        Command::Cautions => print(&cautions::list()),
    }
}

/// `text` to standard output.
fn print(text: &str) -> Result<(), Error> {
    let mut out = anstream::stdout().lock();
    out.write_all(text.as_bytes())
        .and_then(|()| out.flush())
        .map_err(|why| cannot_write("standard output", &why))
}

/// `error` to standard error, in colour on a terminal.
fn tell(error: &Error) {
    let red = anstyle::AnsiColor::Red.on_default().bold();
    // Where standard error itself is closed, the exit status is all that is left to tell with.
    let _ = writeln!(anstream::stderr(), "{red}error{red:#}: {error}");
}

//! The command line: what was typed, carried out, and told.

mod args;
mod batch;
mod check;
mod compare;
mod condense;
mod generate;
mod machines;
mod measure;
mod outputs;
mod post;
mod preview;
mod progress;
mod resume;

use std::ffi::OsString;
use std::io::Write;
use std::path::Path;

use clap::Parser;

use crate::cautions;
use crate::error::{Error, Kind};
use crate::files::{self, Target, cannot_write};
use crate::job::{DrawingSettings, JobFile};
use crate::read::{Limits, WAY_OUT};
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
        Ok(status) => status,
        Err(error) => {
            tell_error(&error);
            error.exit_status()
        }
    }
}

/// Carries out one command. Its exit status is not 0 where some of several drawings failed, which was told then.
fn carry_out(command: Command) -> Result<u8, Error> {
    let done = match command {
        Command::Post(typed) => return post::posts(&typed),
        Command::Measure(typed) => return measure::measure(&typed),
        Command::Check(typed) => check::check(&typed),
        Command::Preview(typed) => preview::preview(&typed),
        Command::Condense(typed) => condense::condense(&typed),
        Command::Compare(typed) => compare::compare(&typed),
        Command::Machines { name, report, overwrite } => {
            machines::machines(name.as_deref(), report.as_deref(), overwrite)
        }
        Command::Cautions => print(&cautions::list()),
        Command::Completions { shell } => generate::completions(shell),
        Command::Manual => generate::manual(),
    };
    done.map(|()| 0)
}

/// The bytes of a drawing, or of the program for it, within the limits.
fn drawn(path: &Path, settings: &DrawingSettings) -> Result<Vec<u8>, Error> {
    files::read_at_most(path, Limits::times(settings.size_limit).bytes(), WAY_OUT)
}

/// Where a report goes, where one was asked for; refused now where writing would be refused later.
fn report_to(report: Option<&Path>, overwrite: bool, inputs: &[&Path]) -> Result<Option<Target>, Error> {
    let Some(report) = report else { return Ok(None) };
    let target = Target::new(Some(report), report, "json");
    target.check(overwrite, inputs)?;
    Ok(Some(target))
}

/// `text` to standard output.
fn print(text: &str) -> Result<(), Error> {
    let mut out = anstream::stdout().lock();
    out.write_all(text.as_bytes())
        .and_then(|()| out.flush())
        .map_err(|why| cannot_write("standard output", &why))
}

/// `text` to standard error. Where that is closed, the exit status is all that is left to tell with.
fn tell(text: &str) {
    let _ = anstream::stderr().write_all(text.as_bytes());
}

/// `error` to standard error, in colour on a terminal.
fn tell_error(error: &Error) {
    let red = anstyle::AnsiColor::Red.on_default().bold();
    tell(&format!("{red}error{red:#}: {error}\n"));
}

/// The job file of that name; an empty one where none is named.
fn job_file(path: Option<&Path>) -> Result<JobFile, Error> {
    let Some(path) = path else { return Ok(JobFile::default()) };
    let name = path.display().to_string();
    let bytes = files::read(path).map_err(|error| Error { kind: Kind::Settings, ..error })?;
    let text = String::from_utf8(bytes).map_err(|_| {
        Error::new(Kind::Settings, "the job file is not text in UTF-8")
            .in_file(&*name)
            .remedy("save it as UTF-8")
    })?;
    JobFile::parse(&name, &text)
}

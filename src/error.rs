//! What can go wrong, for the person at the machine: which file, line and element, what is wrong, what to do.

use std::fmt;

/// Why a command stopped. The kind decides the exit status.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// The job as asked is unsafe or cannot be met; nothing was written. Exit status 1.
    Refused,
    /// The command line, job file or machine profile is wrong. Exit status 2.
    Settings,
    /// The input cannot be read. Exit status 3.
    Input,
    /// The output cannot be written. Exit status 4.
    Output,
}

/// One error: where, what, and the way out.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Error {
    /// What sort of error it is.
    pub kind: Kind,
    /// The file it concerns, as the user named it; empty when none.
    pub file: String,
    /// The line of that file, from 1; 0 when unknown.
    pub line: usize,
    /// What is wrong, in one sentence without a full stop.
    pub what: String,
    /// What to do about it, in one sentence without a full stop; may be empty.
    pub remedy: String,
}

impl Error {
    /// An error of `kind` that says `what` is wrong.
    pub fn new(kind: Kind, what: impl Into<String>) -> Self {
        Self { kind, file: String::new(), line: 0, what: what.into(), remedy: String::new() }
    }

    /// The same error, placed in a file.
    #[must_use]
    pub fn in_file(mut self, file: impl Into<String>) -> Self {
        self.file = file.into();
        self
    }

    /// The same error, placed on a line.
    #[must_use]
    pub fn on_line(mut self, line: usize) -> Self {
        self.line = line;
        self
    }

    /// The same error with a way out.
    #[must_use]
    pub fn remedy(mut self, remedy: impl Into<String>) -> Self {
        self.remedy = remedy.into();
        self
    }

    /// The exit status that belongs to the error.
    pub fn exit_status(&self) -> u8 {
        match self.kind {
            Kind::Refused => 1,
            Kind::Settings => 2,
            Kind::Input => 3,
            Kind::Output => 4,
        }
    }
}

impl fmt::Display for Error {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match (self.file.is_empty(), self.line) {
            (true, 0) => {}
            (true, line) => write!(f, "line {line}: ")?,
            (false, 0) => write!(f, "{}: ", self.file)?,
            (false, line) => write!(f, "{}, line {line}: ", self.file)?,
        }
        write!(f, "{}", self.what)?;
        if !self.remedy.is_empty() {
            write!(f, "\n  {}", self.remedy)?;
        }
        Ok(())
    }
}

impl std::error::Error for Error {}

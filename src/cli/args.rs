//! The command line as typed.

use clap::{Parser, Subcommand};

/// Traced outlines to smooth router programs.
#[derive(Parser, Debug)]
#[command(name = "ribband", version, about, max_term_width = 100, after_help = EXIT_STATUSES)]
pub(super) struct Arguments {
    /// What to do.
    #[command(subcommand)]
    pub(super) command: Command,
}

const EXIT_STATUSES: &str = "Exit status:
  0  done
  1  refused: the job as asked is unsafe or cannot be met, nothing is written
  2  the command line, job file or machine profile is wrong
  3  the input cannot be read
  4  the output cannot be written";

/// The commands.
#[derive(Subcommand, Debug)]
pub(super) enum Command {
    /// Print the safety cautions
    Cautions,
}

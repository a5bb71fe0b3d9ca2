//! The command line as typed.

use std::path::PathBuf;

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
    /// List the machine profiles, or check and explain one of them
    Machines {
        /// A built-in profile, or a TOML file
        #[arg(value_name = "NAME or FILE")]
        name: Option<String>,
        /// Write names and limits as JSON instead; without a file to standard output
        #[arg(long, value_name = "FILE", num_args = 0..=1, default_missing_value = "-")]
        report: Option<PathBuf>,
        /// Replace the report if it exists already
        #[arg(long, requires = "report")]
        overwrite: bool,
    },
    /// Print the safety cautions
    Cautions,
}

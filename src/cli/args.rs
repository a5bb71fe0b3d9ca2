//! The command line as typed.

use std::path::PathBuf;

use clap::{Args, Parser, Subcommand};
use clap_complete::Shell;

use crate::job::{CheckArgs, CondenseArgs, DrawingArgs, LadderArgs, Outputs, Settings};
use crate::run::Block;

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
    /// Write the router program for a drawing, or for each of several
    Post(Posts),
    /// Say what is in a drawing: size, contours, flaws, and the tolerance it supports
    Measure(Measure),
    /// Check any program against a drawing and a machine
    Check(Check),
    /// Draw the chord error of the program that `post` would write
    Preview(Preview),
    /// Fewer blocks for an existing program, within a tolerance
    Condense(Condense),
    /// Hold a range of tolerances against blocks, time, starved blocks and deviation
    Compare(Compare),
    /// List the machine profiles, or check and explain one of them
    #[command(after_help = MACHINES_EXAMPLES)]
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
    #[command(after_help = "Example:\n  ribband cautions")]
    Cautions,
    /// Print a shell's completion script
    #[command(after_help = "Example:\n  ribband completions bash > ribband.bash")]
    Completions {
        /// The shell
        shell: Shell,
    },
    /// Print the manual page
    #[command(after_help = "Example:\n  ribband manual > ribband.1")]
    Manual,
}

const MACHINES_EXAMPLES: &str = "Examples:
  ribband machines
  ribband machines old-controller
  ribband machines --report machines.json";

/// `ribband preview` as typed: all that `post` takes, the picture in the program's place.
#[derive(Args, Debug)]
#[command(after_help = PREVIEW_EXAMPLES)]
pub(super) struct Preview {
    #[command(flatten)]
    pub(super) planned: Planned,
}

const PREVIEW_EXAMPLES: &str =
    "The picture is a page to look around in, or, where its name ends in .svg, a still in real size.

Examples:
  ribband preview sign.dxf --depth 3mm
  ribband preview blade.svg --depth 6 -o blade-picture.svg";

/// `ribband post` as typed.
#[derive(Args, Debug)]
#[command(after_help = POST_EXAMPLES)]
pub(super) struct Posts {
    #[command(flatten)]
    pub(super) first: Post,
    /// Further drawings, each done or refused by itself; -o, --report and --setup-sheet name folders then
    #[arg(value_name = "DRAWING")]
    pub(super) more: Vec<PathBuf>,
}

/// What is planned for one drawing, as typed.
#[derive(Args, Clone, Debug)]
pub(super) struct Post {
    #[command(flatten)]
    pub(super) planned: Planned,
    /// Write beside the program the same moves raised above the stock, with the spindle off
    #[arg(long, help_heading = "Files")]
    pub(super) air_cut: bool,
    /// Write beside the program a round about all that is cut, with the spindle off
    #[arg(long, help_heading = "Files")]
    pub(super) frame: bool,
    /// Write beside the program, which must stand there, one that takes it up again at a line or block
    #[arg(long, value_name = "57, N570 or 2:57", help_heading = "Files",
          conflicts_with_all = ["air_cut", "frame", "report", "setup_sheet", "save_job"])]
    pub(super) resume_at: Option<Block>,
}

/// A drawing, how it is cut, and where what comes of it goes.
#[derive(Args, Clone, Debug)]
pub(super) struct Planned {
    /// The drawing: SVG, DXF or a list of points
    pub(super) drawing: PathBuf,
    #[command(flatten)]
    pub(super) settings: Settings,
    #[command(flatten)]
    pub(super) outputs: Outputs,
    /// Write a setup sheet to print and take along
    #[arg(long, value_name = "FILE.html", help_heading = "Files")]
    pub(super) setup_sheet: Option<PathBuf>,
    /// Take settings from this file; what is typed wins
    #[arg(long, value_name = "FILE", help_heading = "Files")]
    pub(super) job: Option<PathBuf>,
    /// Save the settings of this job in a job file
    #[arg(long, value_name = "FILE.toml", help_heading = "Files")]
    pub(super) save_job: Option<PathBuf>,
    /// Print errors only
    #[arg(long, help_heading = "Files")]
    pub(super) quiet: bool,
}

/// `ribband measure` as typed.
#[derive(Args, Debug)]
#[command(after_help = MEASURE_EXAMPLES)]
pub(super) struct Measure {
    /// The drawing: SVG, DXF or a list of points
    pub(super) drawing: PathBuf,
    /// Further drawings, each by itself; --report names a folder then
    #[arg(value_name = "DRAWING")]
    pub(super) more: Vec<PathBuf>,
    #[command(flatten)]
    pub(super) settings: DrawingArgs,
    /// Write the figures in JSON
    #[arg(long, value_name = "FILE", help_heading = "Files")]
    pub(super) report: Option<PathBuf>,
    /// Replace the report if it exists already
    #[arg(long, requires = "report", help_heading = "Files")]
    pub(super) overwrite: bool,
}

const MEASURE_EXAMPLES: &str = "Examples:
  ribband measure sign.dxf
  ribband measure template.csv --drawing-unit mm --report measured.json";

/// `ribband check` as typed.
#[derive(Args, Debug)]
#[command(after_help = CHECK_EXAMPLES)]
pub(super) struct Check {
    /// The program
    pub(super) program: PathBuf,
    /// The drawing that it should cut
    #[arg(long, value_name = "DRAWING")]
    pub(super) against: PathBuf,
    #[command(flatten)]
    pub(super) settings: CheckArgs,
    /// Write the verdict in JSON
    #[arg(long, value_name = "FILE", help_heading = "Files")]
    pub(super) report: Option<PathBuf>,
    /// Replace the report if it exists already
    #[arg(long, requires = "report", help_heading = "Files")]
    pub(super) overwrite: bool,
}

const CHECK_EXAMPLES: &str = "Exit status 0 says that no claim fails, 1 that one does.

Examples:
  ribband check sign.nc --against sign.dxf --depth 3mm
  ribband check sign.nc --against sign.dxf --tolerance 0.2mm --report verdict.json";

/// `ribband condense` as typed.
#[derive(Args, Debug)]
#[command(after_help = CONDENSE_EXAMPLES)]
pub(super) struct Condense {
    /// The program
    pub(super) program: PathBuf,
    #[command(flatten)]
    pub(super) settings: CondenseArgs,
    #[command(flatten)]
    pub(super) outputs: CondenseOutputs,
    /// Print errors only
    #[arg(long, help_heading = "Files")]
    pub(super) quiet: bool,
}

const CONDENSE_EXAMPLES: &str = "Examples:
  ribband condense sign.nc
  ribband condense sign.nc --tolerance 0.05mm -o short.nc";

/// `ribband compare` as typed.
#[derive(Args, Debug)]
#[command(after_help = COMPARE_EXAMPLES)]
pub(super) struct Compare {
    /// The drawing: SVG, DXF or a list of points
    pub(super) drawing: PathBuf,
    #[command(flatten)]
    pub(super) range: LadderArgs,
    #[command(flatten)]
    pub(super) settings: Settings,
    #[command(flatten)]
    pub(super) outputs: CompareOutputs,
    /// Take settings from this file; what is typed wins
    #[arg(long, value_name = "FILE", help_heading = "Files")]
    pub(super) job: Option<PathBuf>,
}

const COMPARE_EXAMPLES: &str = "No program is written. Without --depth, 1 mm is compared.

Examples:
  ribband compare sign.dxf --machine old-controller
  ribband compare blade.svg --from 0.05mm --to 0.5mm --steps 6 -o blade-cost.svg";

/// Where the outputs of `ribband compare` go.
#[derive(Args, Debug)]
pub(super) struct CompareOutputs {
    /// Draw the comparison as an SVG picture; - is standard output
    #[arg(short, long, value_name = "FILE", help_heading = "Files")]
    pub(super) output: Option<PathBuf>,
    /// Write the figures in JSON
    #[arg(long, value_name = "FILE", help_heading = "Files")]
    pub(super) report: Option<PathBuf>,
    /// Replace outputs that exist already
    #[arg(long, help_heading = "Files")]
    pub(super) overwrite: bool,
}

/// Where the outputs of `ribband condense` go.
#[derive(Args, Debug)]
pub(super) struct CondenseOutputs {
    /// Where the new program goes; - is standard output [default: beside the old one]
    #[arg(short, long, value_name = "FILE", help_heading = "Files")]
    pub(super) output: Option<PathBuf>,
    /// Write the figures in JSON
    #[arg(long, value_name = "FILE", help_heading = "Files")]
    pub(super) report: Option<PathBuf>,
    /// Replace outputs that exist already
    #[arg(long, help_heading = "Files")]
    pub(super) overwrite: bool,
}

const POST_EXAMPLES: &str = "Examples:
  ribband post sign.dxf --depth 3mm
  ribband post sign.dxf blade.svg --depth 3mm -o programs
  ribband post blade.svg --depth 6 --tolerance 0.05mm --cutter 3.175mm --feed 1200mm/min -o blade.nc
  ribband post template.csv --drawing-unit mm --depth 1/4in --machine inch-gantry --report t.json";

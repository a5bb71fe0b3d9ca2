//! What a machine can do and how its controller wants its programs: the machine profile.
//!
//! A profile is a TOML file in the machine's own unit. [`Machine`] holds every length in mm, so feeds are in
//! mm/min and accelerations in mm/s2. Profiles describe kinds of machines, not makes.
//!
//! ```
//! use ribband::machine::Machine;
//!
//! let gantry = Machine::named("inch-gantry")?;
//! assert!((gantry.cutters[0].diameter - 6.35).abs() < 1e-12);
//! let wrong = gantry.to_toml()?.replace("queue = 200", "queue = 0");
//! let error = Machine::from_toml(&wrong).unwrap_err();
//! assert!(error.what.contains("controller.queue is 0 blocks, allowed is 1 to 100000 blocks"));
//! # Ok::<(), ribband::error::Error>(())
//! ```

mod builtin;
mod explain;
mod numbers;
mod rules;

use serde::{Deserialize, Serialize};

use crate::error::{Error, Kind};

pub use crate::num::LengthUnit as Unit;
pub use builtin::{built_in, names};
pub use explain::{explain, to_json};

/// A machine and its controller.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Machine {
    /// What the profile is called.
    pub name: String,
    /// The kind of machine, in one sentence.
    pub describes: String,
    /// The unit its programs are written in.
    pub unit: Unit,
    /// Whether it gives way under the cut.
    pub build: Build,
    /// How far each axis can go, in mm.
    pub travel: Axes,
    /// The largest feed of each axis, in mm/min.
    pub feed: Axes,
    /// The speed of each axis in a rapid, in mm/min.
    pub rapid: Axes,
    /// The acceleration of each axis, in mm/s2.
    pub acceleration: Axes,
    /// How fast blocks are taken, and how many are seen.
    pub controller: Controller,
    /// The form of the program text.
    pub program: Form,
    /// Which files the controller takes.
    pub files: Files,
    /// How arcs are written.
    pub arcs: Arcs,
    /// How a corner may be rounded.
    pub path: PathMode,
    /// Which offsets the program may set.
    pub offsets: Offsets,
    /// How the cutter gets clear of the work.
    pub retract: Retract,
    /// The spindle.
    pub spindle: Spindle,
    /// The cutters at hand.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub cutters: Vec<Cutter>,
}

/// Whether a machine holds its place under the cut.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Build {
    /// It does: climb cutting is safe.
    Stiff,
    /// It has play or bends: conventional cutting is gentler.
    Slack,
}

/// One number for each axis.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Axes {
    /// Along X.
    pub x: f64,
    /// Along Y.
    pub y: f64,
    /// Along Z.
    pub z: f64,
}

/// How a controller takes its blocks.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Controller {
    /// How far from a corner the path may be rounded in planning its speed, in mm.
    pub junction: f64,
    /// Blocks it can read in a second.
    pub blocks_per_second: f64,
    /// Blocks it can hold and see ahead.
    pub queue: u32,
    /// Bytes of program it can hold; none when programs are fed to it.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub memory_bytes: Option<u32>,
}

/// The form of the program text.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Form {
    /// Decimals of a coordinate.
    pub decimals: u32,
    /// Characters in the longest line, without the line ending.
    pub longest_line: u32,
    /// True for a blank between words; false for the shortest text.
    pub spaces: bool,
    /// How comments are marked.
    pub comments: Comments,
    /// Step of the line numbers; 0 for none.
    pub line_numbers: u32,
    /// How lines end.
    pub line_ending: LineEnding,
    /// True for a percent sign on a line of its own before and after the program.
    pub percent: bool,
    /// The modes that the program sets at its start, as words.
    pub modes: Vec<String>,
    /// Further lines at the start, as they are.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub start: Vec<String>,
    /// The lines that end the program, as they are.
    pub end: Vec<String>,
    /// What the number of a dwell counts.
    pub dwell: Dwell,
    /// The word of the cubic move with I, J, P and Q, where the controller has it.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub spline: Option<String>,
}

/// How comments are marked.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Comments {
    /// Between round brackets.
    Brackets,
    /// From a semicolon to the end of the line.
    Semicolon,
    /// The controller takes none.
    None,
}

/// How lines end.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum LineEnding {
    /// Line feed.
    Lf,
    /// Carriage return and line feed.
    Crlf,
}

/// What the P word of a dwell counts.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Dwell {
    /// Seconds.
    Seconds,
    /// Thousandths of a second.
    Milliseconds,
    /// Not known: the program stops for the operator instead.
    Unknown,
}

/// Which files the controller takes.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Files {
    /// The ending of its program files, with the point.
    pub ending: String,
    /// Characters in the longest name, without the ending.
    pub longest_name: u32,
    /// Which characters a name may have.
    pub letters: Letters,
}

/// Which characters a file name may have.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Letters {
    /// Any.
    Any,
    /// Letters and digits without accents, hyphen and underscore.
    Plain,
    /// Capital letters, digits, hyphen and underscore.
    Capitals,
}

/// How arcs are written.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Arcs {
    /// What says where the arc bends.
    pub style: ArcStyle,
    /// The word that selects the style, where the controller has one; written with the modes.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub mode_word: Option<String>,
    /// True when one block may be a whole circle.
    pub whole_circles: bool,
    /// True when an arc may change height.
    pub helices: bool,
    /// What the feed of a helix is measured along.
    pub helix_feed: HelixFeed,
    /// The smallest radius it takes, in mm.
    pub smallest: f64,
    /// The largest radius it takes, in mm.
    pub largest: f64,
    /// The largest difference between an arc's radius at its start and at its end, in mm.
    pub end_radii: f64,
}

/// What says where an arc bends.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum ArcStyle {
    /// I and J: the centre, from the start.
    CentreIncremental,
    /// I and J: the centre, from zero.
    CentreAbsolute,
    /// R: the radius.
    Radius,
    /// No arcs: straight blocks only.
    None,
}

/// What the feed of a helix is measured along.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum HelixFeed {
    /// The path itself.
    Path,
    /// Its projection on the plane of the arc.
    Plane,
}

/// How the controller runs through corners.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct PathMode {
    /// The words that set the mode, as they are; none when it has no such mode.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub word: Option<String>,
    /// How far from the path it may round a corner in that mode, in mm.
    pub blending: f64,
}

/// Which offsets the program may set. What it does not set stays as the user zeroed it.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Offsets {
    /// The word of the work offset that the program selects; none to leave the one in force.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub work: Option<String>,
    /// The word that cancels the length offset; none to leave the one in force.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub length: Option<String>,
}

/// How the cutter gets clear of the work at the start and at the end.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Retract {
    /// The way it is done.
    pub by: RetractBy,
    /// The height in machine coordinates, in mm; for a retract by machine coordinate.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub machine_z: Option<f64>,
    /// Where the program ends, in machine coordinates; none to end where the cut does.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub park: Option<Park>,
}

/// The way the cutter gets clear.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum RetractBy {
    /// To a height in machine coordinates, by G53.
    MachineCoordinate,
    /// To the clearance height above the program's zero, which the program states.
    StartHeight,
}

/// A place in machine coordinates, in mm.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Park {
    /// Along X.
    pub x: f64,
    /// Along Y.
    pub y: f64,
}

/// The spindle.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Spindle {
    /// The lowest speed, in rev/min.
    pub slowest: f64,
    /// The highest speed, in rev/min.
    pub fastest: f64,
    /// The time from rest to full speed, in seconds.
    pub spin_up: f64,
    /// True when a switch, not the program, starts it.
    pub hand_switched: bool,
}

/// A cutter at hand.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Cutter {
    /// What it is called.
    pub name: String,
    /// Diameter in mm.
    pub diameter: f64,
    /// Number of cutting edges.
    pub flutes: u32,
    /// Length of the cutting edges in mm: the deepest cut.
    pub flute_length: f64,
    /// The highest speed its maker allows, in rev/min.
    pub largest_rpm: f64,
    /// The smallest chip an edge should take, in mm: less rubs and burns.
    pub least_chip: f64,
    /// The largest chip an edge should take, in mm.
    pub most_chip: f64,
}

impl Machine {
    /// The built-in profile called `name`.
    ///
    /// # Errors
    /// [`Kind::Settings`] when there is none; names the nearest.
    pub fn named(name: &str) -> Result<Self, Error> {
        builtin::named(name)
    }

    /// The profile in `text`, in the unit it names, with every field inside its bounds.
    ///
    /// # Errors
    /// [`Kind::Settings`] for text that is not TOML, a field that is missing, unknown or of the wrong kind
    /// (with its line), or values outside their bounds (all of them, each with its range and the reason).
    pub fn from_toml(text: &str) -> Result<Self, Error> {
        let mut machine: Self = toml::from_str(text).map_err(|error| rules::unreadable(text, &error))?;
        let mm = machine.unit.mm();
        machine.lengths().into_iter().for_each(|length| *length *= mm);
        let flaws = rules::flaws(&machine);
        if flaws.is_empty() {
            return Ok(machine);
        }
        Err(Error::new(Kind::Settings, format!("the profile is wrong: {}", flaws.join(";\n  "))))
    }

    /// The profile as TOML, in its own unit; [`from_toml`](Self::from_toml) reads it back to the same
    /// machine.
    ///
    /// # Errors
    /// [`Kind::Output`] when it cannot be written as TOML.
    pub fn to_toml(&self) -> Result<String, Error> {
        let mut own = self.clone();
        let mm = self.unit.mm();
        own.lengths().into_iter().for_each(|length| *length = stated(*length, mm));
        toml::to_string(&own).map_err(|error| Error::new(Kind::Output, error.to_string()))
    }

    /// One unit of the last place of a coordinate, in mm.
    pub fn last_place(&self) -> f64 {
        self.unit.mm() / 10_f64.powi(self.program.decimals as i32)
    }

    /// The cutter called `name`.
    pub fn cutter(&self, name: &str) -> Option<&Cutter> {
        self.cutters.iter().find(|c| c.name == name)
    }

    /// Every field that is a length, or a length over a time.
    fn lengths(&mut self) -> Vec<&mut f64> {
        let mut all = Vec::new();
        for axes in [&mut self.travel, &mut self.feed, &mut self.rapid, &mut self.acceleration] {
            all.extend([&mut axes.x, &mut axes.y, &mut axes.z]);
        }
        let arcs = &mut self.arcs;
        all.extend([&mut arcs.smallest, &mut arcs.largest, &mut arcs.end_radii]);
        all.extend([&mut self.controller.junction, &mut self.path.blending]);
        all.extend(&mut self.retract.machine_z);
        all.extend(self.retract.park.iter_mut().flat_map(|park| [&mut park.x, &mut park.y]));
        for c in &mut self.cutters {
            all.extend([&mut c.diameter, &mut c.flute_length, &mut c.least_chip, &mut c.most_chip]);
        }
        all
    }
}

impl Files {
    /// What is wrong with `stem` as a file name on this controller, in words; `None` when it is fine.
    pub fn flaw_in(&self, stem: &str) -> Option<String> {
        let plain = |c: char| c.is_ascii_digit() || c == '-' || c == '_';
        let allowed = |c: char| match self.letters {
            Letters::Any => !c.is_control(),
            Letters::Plain => c.is_ascii_alphabetic() || plain(c),
            Letters::Capitals => c.is_ascii_uppercase() || plain(c),
        };
        if let Some(bad) = stem.chars().find(|&c| !allowed(c)) {
            return Some(format!("the controller takes no \"{}\" in a file name", bad.escape_default()));
        }
        let (length, most) = (stem.chars().count(), self.longest_name as usize);
        (length > most).then(|| format!("the name has {length} characters, the controller takes {most}"))
    }
}

/// The number with the fewest digits that is read back as exactly `length` in a unit of `mm`.
///
/// Division need not undo the product that reading makes; the right number is then one of the quotient's neighbours.
fn stated(length: f64, mm: f64) -> f64 {
    let quotient = length / mm;
    let short = (1..=17).map(|digits| rounded(quotient, digits));
    let near = [quotient, quotient.next_up(), quotient.next_down()];
    let exact = |value: &f64| (value * mm).to_bits() == length.to_bits();
    short.chain(near).find(exact).unwrap_or(quotient)
}

/// `value` rounded to so many significant digits.
fn rounded(value: f64, digits: usize) -> f64 {
    let less_one = digits - 1;
    format!("{value:.less_one$e}").parse().unwrap_or(value)
}

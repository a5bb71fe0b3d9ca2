//! The report: every figure of a job, as JSON for other programs and as the source of the summary.
//!
//! A field keeps its name and meaning; fields may be added. Lengths are in mm, times in seconds, the program's own
//! coordinates where `setup` says so and the drawing's everywhere else.

mod several;

use std::collections::BTreeMap;

use schemars::JsonSchema;
use serde::Serialize;

use crate::job::{Origin, ToleranceSide, Zero};

/// A whole report.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Report {
    /// The version that wrote it.
    pub ribband: String,
    /// The tolerance the program was made to.
    pub tolerance_mm: f64,
    /// `waste` where the path was held to the waste side; none where both sides were allowed.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub tolerance_side: Option<ToleranceSide>,
    /// What was drawn.
    pub drawing: Drawing,
    /// The contours that were cut, in the order of the drawing.
    pub contours: Vec<Contour>,
    /// What the machine must be set up as.
    pub setup: Setup,
    /// What was written.
    pub program: Program,
    /// What the written text was checked for.
    pub check: Check,
    /// Each program by itself, in the order in which they are run, where several cutters are needed; else none. `setup`,
    /// `program` and `check` then hold the sums and the worst of them, and all claims.
    pub programs: Vec<CutterProgram>,
    /// The dry runs that were written beside the program.
    pub dry_runs: Vec<DryRun>,
    /// What the person at the machine should know, one sentence each.
    pub warnings: Vec<String>,
    /// How long each stage took, in milliseconds. The only figures that differ from run to run.
    pub timings_ms: BTreeMap<String, f64>,
}

/// A program to try before the job's own, whose spindle stays off.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct DryRun {
    /// `air cut` or `frame`.
    pub kind: String,
    /// Its files, one to be run after the other.
    pub files: Vec<Part>,
    /// What they were checked for.
    pub claims: Vec<Claim>,
}

/// A place where a program can be taken up again after a stop, by a program that is written with `--resume-at`.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Restart {
    /// The file that it stands in.
    pub file: String,
    /// The line of that file.
    pub line: usize,
    /// The block's own number, where blocks are numbered.
    pub block: Option<u32>,
    /// Which cut it belongs to, counted from 1 in the order in which they are begun.
    pub cut: usize,
    /// The id of the contour that is cut.
    pub contour: usize,
    /// The height that the contour is cut to already; none where its cut begins.
    pub below_mm: Option<f64>,
    /// Where the cutter is then, from zero: x and y.
    pub at_mm: [f64; 2],
}

/// The program of one cutter of several.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct CutterProgram {
    /// The ids of the contours that it is for.
    pub contours: Vec<usize>,
    /// What the machine must be set up as.
    pub setup: Setup,
    /// What was written.
    pub program: Program,
    /// What the written text was checked for.
    pub check: Check,
}

/// The drawing as it was read.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Drawing {
    /// The file's name as typed.
    pub file: String,
    /// SHA-256 of its bytes, in hexadecimal.
    pub sha256: String,
    /// How many mm one unit of the file is.
    pub mm_per_unit: f64,
    /// Where that scale came from.
    pub scale_from: String,
    /// Finished width.
    pub width_mm: f64,
    /// Finished height.
    pub height_mm: f64,
    /// How many contours it holds.
    pub contours: usize,
    /// How many vertices they have in all.
    pub vertices: usize,
    /// Their length, before cleaning.
    pub length_mm: f64,
}

/// One contour: as it was drawn, and as it is cut.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Contour {
    /// Its number in the drawing, from 1.
    pub id: usize,
    /// Its layer, or empty.
    pub layer: String,
    /// True when its end is joined to its start.
    pub closed: bool,
    /// Its vertices after cleaning.
    pub vertices: usize,
    /// Its length after cleaning.
    pub length_mm: f64,
    /// The box around it, in the drawing's coordinates: least x and y, largest x and y.
    pub bbox_mm: [f64; 4],
    /// The estimated amplitude of the trace's own jaggedness.
    pub roughness_mm: f64,
    /// The corners of the path it is cut on.
    pub corners: usize,
    /// The lines of that path.
    pub lines: usize,
    /// The arcs of that path.
    pub arcs: usize,
    /// The cubic moves of that path; none where curves are written as arcs. Lines and arcs are then those that stood for
    /// them while the path was planned.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub cubics: Option<usize>,
    /// The certified deviation between that path and the contour.
    pub deviation_mm: f64,
    /// How trace, fair curve and path bend, where that was asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub curvature: Option<Curvature>,
    /// What the cutter cannot reach, one sentence each.
    pub uncut: Vec<String>,
}

/// How a contour bends: as traced, as faired, as cut.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Curvature {
    /// The trace: the turn at each vertex over half of the lengths beside it.
    pub trace: Profile,
    /// The least-bending curve within the tolerance, by the length of the trace.
    pub fair: Profile,
    /// The path, which steps at its joints.
    pub path: Profile,
}

/// Curvature along a curve, place by place.
#[derive(Clone, Debug, Default, Serialize, JsonSchema)]
pub struct Profile {
    /// The integral of the squared curvature, corners left out, in 1/mm.
    pub bending: f64,
    /// The length from the start to each place.
    pub along_mm: Vec<f64>,
    /// The curvature there in 1/mm, positive for a left turn.
    pub per_mm: Vec<f64>,
}

/// What the machine must be set up as.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Setup {
    /// The machine profile's name.
    pub machine: String,
    /// The unit the program is in: `mm` or `in`.
    pub unit: String,
    /// Where Z is zero.
    pub zero: Zero,
    /// Where X and Y are zero.
    pub origin: Origin,
    /// How thick the stock is, at least and at most; none where that is not given.
    pub thickness_mm: Option<[f64; 2]>,
    /// How deep the program cuts into the bed under the thinnest stock; none where its thickness is not given.
    pub bed_cut_mm: Option<f64>,
    /// The stock from above; none where it is not given.
    pub stock: Option<Stock>,
    /// The clamps that are kept clear of.
    pub clamps: Vec<Clamp>,
    /// How the drawing is laid out.
    pub layout: Layout,
    /// The extents of the cutter's path from that zero: least x, y, z, largest x, y, z.
    pub extents_mm: [f64; 6],
    /// The cutter's diameter; of several, the largest.
    pub cutter_mm: f64,
    /// The side of the contour that the cutter runs on.
    pub side: String,
    /// `conventional` or `climb`; none on the line, where both sides of the cut are at once one and the other.
    pub direction: Option<String>,
    /// How deep below the top of the stock.
    pub depth_mm: f64,
    /// In how many passes.
    pub passes: usize,
    /// The largest feed along a contour.
    pub feed_mm_min: f64,
    /// The largest feed straight down.
    pub plunge_mm_min: f64,
    /// The spindle's speed.
    pub spindle_rpm: f64,
}

/// The stock from above.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Stock {
    /// Its box from the program's zero: least x and y, largest x and y.
    pub box_mm: [f64; 4],
    /// Its lower left corner on the machine, from the lower left end of the travel; none where that is not given.
    pub on_machine_mm: Option<[f64; 2]>,
}

/// A clamp.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Clamp {
    /// Its box from the program's zero: least x and y, largest x and y.
    pub box_mm: [f64; 4],
    /// How far it rises above the top of the stock.
    pub height_mm: f64,
}

/// How the drawing is laid out.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Layout {
    /// True when it is mirrored left to right, before it is turned.
    pub mirrored: bool,
    /// Degrees that it is turned by, counter-clockwise.
    pub turn_deg: f64,
    /// Copies side by side.
    pub columns: usize,
    /// Copies above each other.
    pub rows: usize,
    /// The gap between the boxes around two copies.
    pub gap_mm: f64,
    /// The box around the finished parts of all copies, from the program's zero: least x and y, largest x and y.
    pub parts_mm: [f64; 4],
}

/// The program as it was written.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Program {
    /// The file's name as typed; `-` for standard output.
    pub file: String,
    /// The files that stand instead, one to be run after the other, where the controller's memory is too small for one
    /// or several cutters are needed; else none.
    pub parts: Vec<Part>,
    /// Lines that a controller must execute, of all parts.
    pub blocks: usize,
    /// Those that move an axis.
    pub motion_blocks: usize,
    /// The size of the text.
    pub bytes: usize,
    /// Length of the moves at feed.
    pub cut_length_mm: f64,
    /// Length of the rapids.
    pub rapid_length_mm: f64,
    /// Planned time of the whole program.
    pub time_s: f64,
    /// Planned time of the contour moves alone.
    pub cut_time_s: f64,
    /// Blocks whose predecessor ends with the controller's queue empty.
    pub starved_blocks: usize,
    /// The mean speed along the contours.
    pub mean_mm_min: f64,
    /// The mean speed on the slowest move along a contour.
    pub slowest_mm_min: f64,
    /// The highest feed override at which no block starves, in percent, of those up to 200; 0 where some starve at 100
    /// already.
    pub highest_override: u32,
    /// Where it can be taken up again after a stop.
    pub restarts: Vec<Restart>,
    /// The same job with every vertex of the drawing as a straight block.
    pub as_drawn: AsDrawn,
}

/// One of several files.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Part {
    /// Its name.
    pub file: String,
    /// Lines that a controller must execute.
    pub blocks: usize,
    /// The size of its text.
    pub bytes: usize,
}

/// The same job, cut as the drawing has it: every vertex a straight block at the process feed.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct AsDrawn {
    /// Blocks that move an axis.
    pub motion_blocks: usize,
    /// Planned time of the whole program.
    pub time_s: f64,
    /// Planned time of the contour moves alone.
    pub cut_time_s: f64,
    /// Blocks whose predecessor ends with the controller's queue empty.
    pub starved_blocks: usize,
}

/// What the written text was checked for, against the drawing.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Check {
    /// True when no claim fails.
    pub holds: bool,
    /// The certified deviation between what the text cuts and the drawing, the worst of all contours and passes;
    /// none where nothing that is cut could be matched to the drawing.
    pub deviation_mm: Option<f64>,
    /// The claims, one by one.
    pub claims: Vec<Claim>,
    /// What no program can check.
    pub not_checked: Vec<String>,
}

/// One claim about the program.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Claim {
    /// What is claimed.
    pub name: String,
    /// How it turned out.
    pub state: State,
    /// The worst that was found, in `unit`.
    pub value: Option<f64>,
    /// What is allowed, in `unit`.
    pub limit: Option<f64>,
    /// True when the limit is the least that is allowed; else it is the most.
    pub least: bool,
    /// The unit of both; empty for a count.
    pub unit: String,
    /// Where in the program the worst was found.
    pub at: Option<String>,
    /// Why it fails or was not checked; may be empty.
    pub note: String,
}

/// How a claim turned out.
#[derive(Clone, Copy, Debug, Serialize, JsonSchema, PartialEq, Eq)]
pub enum State {
    /// It holds.
    #[serde(rename = "holds")]
    Holds,
    /// It does not.
    #[serde(rename = "fails")]
    Fails,
    /// It could not be checked.
    #[serde(rename = "not checked")]
    NotChecked,
}

/// What came of condensing a program.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Condensed {
    /// The version that wrote it.
    pub ribband: String,
    /// How far the new cuts may be from the old ones.
    pub tolerance_mm: f64,
    /// The machine profile's name.
    pub machine: String,
    /// The program as it was.
    pub before: Size,
    /// The program as it is.
    pub after: Size,
    /// Runs of straight cuts.
    pub runs: usize,
    /// Those that are cut in fewer blocks now.
    pub bettered: usize,
    /// The largest certified distance between a run as it was and as it is; none where nothing was bettered.
    pub deviation_mm: Option<f64>,
    /// Why the program is returned as it was; none where it was bettered.
    pub unchanged: Option<String>,
    /// What the person at the machine should know, one sentence each.
    pub warnings: Vec<String>,
}

/// How large a program is.
#[derive(Clone, Debug, Serialize, JsonSchema)]
pub struct Size {
    /// The file's name as typed; `-` for standard output.
    pub file: String,
    /// Lines that a controller must execute.
    pub blocks: usize,
    /// Those that move an axis.
    pub motion_blocks: usize,
    /// The size of the text.
    pub bytes: usize,
    /// Its planned time; none where it holds words that are not known.
    pub time_s: Option<f64>,
}

impl Setup {
    /// The stock in words, each length said by `show` without its unit; none where nothing is known of it.
    pub fn stock_words(&self, show: impl Fn(f64) -> String) -> Option<String> {
        let unit = &self.unit;
        let place = |[x, y]: [f64; 2]| format!("X {} Y {}", show(x), show(y));
        let size = self.stock.as_ref().map(|Stock { box_mm: [x0, y0, x1, y1], .. }| {
            format!("{} x {} {unit}", show(x1 - x0), show(y1 - y0))
        });
        let thickness = self.thickness_mm.map(|[thinnest, thickest]| {
            let range = if thinnest < thickest { format!("{} to ", show(thinnest)) } else { String::new() };
            format!("{range}{} {unit} thick", show(thickest))
        });
        let corner = self.stock.as_ref().map(|stock| {
            let machine =
                stock.on_machine_mm.map_or(String::new(), |at| format!(", on the machine at {}", place(at)));
            format!(
                "its lower left corner at {} from zero{machine}",
                place([stock.box_mm[0], stock.box_mm[1]])
            )
        });
        let known: Vec<String> = [size, thickness, corner].into_iter().flatten().collect();
        (!known.is_empty()).then(|| known.join(", "))
    }

    /// The cut into the bed in words, likewise; none where the stock's thickness is not known.
    pub fn bed_words(&self, show: impl Fn(f64) -> String) -> Option<String> {
        let [thinnest, thickest] = self.thickness_mm?;
        let under = if thinnest < thickest { " under the thinnest stock" } else { "" };
        let depth = self.bed_cut_mm?;
        Some(if depth > 0.0 {
            format!("the bed is cut {} {} deep{under}", show(depth), self.unit)
        } else {
            "the bed is not cut".into()
        })
    }

    /// Each clamp in words with its number, likewise.
    pub fn clamp_words(&self, show: impl Fn(f64) -> String) -> Vec<String> {
        let words = |(number, Clamp { box_mm: [x0, y0, x1, y1], height_mm }): (usize, &Clamp)| {
            let [x0, y0, x1, y1, height] = [*x0, *y0, *x1, *y1, *height_mm].map(&show);
            format!("{number}: X {x0} to {x1}, Y {y0} to {y1}, {height} {} above the stock", self.unit)
        };
        (1..).zip(&self.clamps).map(words).collect()
    }
}

impl Layout {
    /// What is not as drawn, in words, a length said by `show`; empty for the drawing as it is, once.
    pub fn words(&self, show: impl Fn(f64) -> String) -> String {
        let copies = self.columns * self.rows;
        let parts = [
            self.mirrored.then(|| "mirrored".to_owned()),
            (self.turn_deg != 0.0).then(|| format!("turned {} degrees", self.turn_deg)),
            (copies > 1).then(|| {
                format!("{copies} copies, {} by {}, {} apart", self.columns, self.rows, show(self.gap_mm))
            }),
        ];
        parts.into_iter().flatten().collect::<Vec<_>>().join(", ")
    }
}

impl Profile {
    /// Adds a place; none where the curvature is not a number.
    pub(crate) fn note(&mut self, along_mm: f64, per_mm: f64) {
        if per_mm.is_finite() {
            self.along_mm.push(along_mm);
            self.per_mm.push(per_mm);
        }
    }
}

impl Condensed {
    /// The figures as JSON, with a line end.
    pub fn json(&self) -> String {
        pretty(self)
    }
}

impl Report {
    /// The report as JSON, with a line end.
    pub fn json(&self) -> String {
        pretty(self)
    }

    /// The schema that every report keeps to, as JSON with a line end.
    pub fn schema() -> String {
        pretty(&schemars::schema_for!(Self))
    }
}

/// A check alone as JSON, `{"check": ...}`, with a line end.
pub fn check_json(check: &Check) -> String {
    pretty(&BTreeMap::from([("check", check)]))
}

/// `value` as indented JSON with a line end.
fn pretty(value: &impl Serialize) -> String {
    let mut text = serde_json::to_string_pretty(value).unwrap_or_default();
    text.push('\n');
    text
}

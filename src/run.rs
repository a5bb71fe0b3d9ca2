//! The main job from end to end, to be read from top to bottom: drawing in, checked program out.

mod again;
mod checking;
mod clock;
mod curvature;
mod curving;
mod cutting;
mod dry;
mod fairing;
mod feeding;
mod header;
mod placing;
mod prepare;
mod programs;
mod progress;
mod reporting;
mod showing;
mod siding;
mod splitting;

use std::collections::{BTreeMap, HashSet};

use kurbo::{Rect, Vec2};
use rayon::prelude::*;
use sha2::{Digest, Sha256};

use crate::check;
use crate::clean::{Cleaned, Roughness};
use crate::error::Error;
use crate::fair;
use crate::fit::{self, Fitted, Pace};
use crate::gcode::{self, Dialect, Program};
use crate::job::{CheckJob, DrawingSettings, Job};
use crate::machine::Machine;
use crate::measure::{self, Measurement};
use crate::num::Tolerance;
use crate::preview::{Bend, Scene};
use crate::read;
use crate::report::{self, Report};
use crate::route::Setup;
use crate::sketch::{Contour, Sketch};
use clock::Clock;
use fairing::Cubics;
use placing::Placing;
use prepare::prepare;
use programs::Bench;

pub use again::{Block, Number, Place, Resumed};
pub use dry::{Dry, DryRun};
pub use programs::{AsDrawn, CutterProgram, Part};
pub use progress::{Progress, Unwatched};

/// A drawing as it came.
#[derive(Clone, Copy, Debug)]
pub struct Source<'a> {
    /// The file's name as typed, for messages and comments.
    pub name: &'a str,
    /// Everything in it.
    pub bytes: &'a [u8],
}

/// A planned job: everything between the drawing and its checked program.
#[derive(Clone, Debug)]
pub struct Plan {
    /// The drawing as read, without the layers that the job leaves out.
    pub sketch: Sketch,
    /// The drawing put right.
    pub cleaned: Cleaned,
    /// The jaggedness of each contour.
    pub roughness: Vec<Roughness>,
    /// The box around the finished parts, in the drawing's coordinates.
    pub part: Rect,
    /// The tolerance worked to.
    pub tolerance: Tolerance,
    /// The fair curve of each contour, in the drawing's coordinates, where it is shown or written; else none.
    pub faired: Vec<fair::Outline>,
    /// The path of each contour, in the drawing's coordinates; where cubic moves are written, the arcs that stood for them.
    pub fitted: Vec<Fitted>,
    /// How many cubic moves there are on the path of each contour; none where arcs are written.
    pub cubics: Vec<usize>,
    /// How the fair curves bend, in the program's coordinates, copy by copy, where that is shown; else none.
    pub bends: Vec<Bend>,
    /// The contours as they are drawn, in the program's coordinates, copy by copy.
    pub drawn: Vec<Contour>,
    /// The box around the finished parts of all copies, in the program's coordinates.
    pub parts_box: Rect,
    /// The stock from above, in the program's coordinates, where it is given.
    pub stock: Option<Rect>,
    /// Where the drawing's zero lies in the lower left copy, in the program's coordinates.
    pub drawing_at: Vec2,
    /// The program's zero on the machine, from the lower left end of its travel, where the stock's place there is given.
    pub zero_at: Option<Vec2>,
    /// Zero, stock and clearance, in the program's coordinates.
    pub setup: Setup,
    /// Which side of the region is cut that those contours bound together which are not cut on the line.
    pub region: check::Side,
    /// The programs, in the order in which they are run: one, or where several cutters are needed one for each.
    pub programs: Vec<CutterProgram>,
    /// SHA-256 of the drawing's bytes, in hexadecimal.
    pub sha256: String,
    /// What the person at the machine should know.
    pub warnings: Vec<String>,
    /// How long each stage took, in milliseconds.
    pub timings_ms: BTreeMap<String, f64>,
}

/// Plans, writes, reads back and checks the program for a drawing.
///
/// The same job and drawing give the same text on any number of cores.
///
/// # Errors
/// Those of reading the drawing; [`Kind::Refused`](crate::error::Kind::Refused) when the job cannot be met, or the program fails its check.
pub fn plan(job: &Job, source: Source, progress: &dyn Progress) -> Result<Plan, Error> {
    plan_unplaced(job, source, progress)
        .map_err(|error| if error.file.is_empty() { error.in_file(source.name) } else { error })
}

fn plan_unplaced(job: &Job, source: Source, progress: &dyn Progress) -> Result<Plan, Error> {
    let mut clock = Clock::default();
    let prepared = prepare(job, source, &mut clock)?;
    let placing = Placing::of(job, &prepared)?;
    let contours = &prepared.cleaned.contours;
    let sides = siding::sides(job, &prepared)?;
    let fitting = prepare::left_for_fitting(job, &prepared)?;
    let faired = clock.time("fair", || fairing::fair(job, &prepared, fitting))?;
    let cubics = fairing::cubics(job, &faired, fitting);
    let fitted = clock.time("fit", || fit(contours, &cubics, fitting, progress));

    let setup = cutting::setup(job, &placing);
    let sided = clock
        .time("offset", || cutting::sided(job, contours, &fitted, (&sides, prepared.tolerance), &placing))?;
    let sha256 = digest(source.bytes);
    let cubics_placed = fairing::routed(&cubics, &sided.routed, &placing);
    let bench = Bench {
        job,
        name: source.name,
        sha256: &sha256,
        prepared: &prepared,
        sides: &sides,
        setup: &setup,
        placing: &placing,
        cubics: &cubics_placed,
    };
    let (programs, told) = programs::programs(&bench, &sided.routed, &mut clock)?;
    let notes = [prepared.warnings, sides.notes, sided.notes, told];
    Ok(Plan {
        roughness: clock.time("measure", || prepare::roughness(contours)),
        drawn: placing.drawn(&prepared.sketch.contours),
        parts_box: placing.parts,
        stock: placing.stock,
        sketch: prepared.sketch,
        cleaned: prepared.cleaned,
        part: prepared.part,
        tolerance: prepared.tolerance,
        cubics: cubics.iter().map(Cubics::count).collect(),
        bends: curvature::fair_bends(job, &faired, &placing),
        faired,
        fitted,
        drawing_at: placing.drawing_at,
        zero_at: placing.zero_at,
        setup,
        region: sides.region,
        programs,
        sha256,
        warnings: once_each(notes.concat()),
        timings_ms: clock.times(),
    })
}

/// Reads a drawing and measures what is in it.
///
/// # Errors
/// Those of reading the drawing.
pub fn measure(settings: &DrawingSettings, drawing: Source) -> Result<Measurement, Error> {
    let sketch = read::read(drawing.name, drawing.bytes, &prepare::scale(settings))?;
    Ok(measure::measure(&sketch, settings.join_mm.unwrap_or(Tolerance::DEFAULT.mm())))
}

/// Reads a program, whoever wrote it, and checks it against a drawing and a machine.
///
/// # Errors
/// Those of reading the drawing and the program; [`Kind::Refused`](crate::error::Kind::Refused) for a program with
/// words that are not known. That a claim fails is no error here.
pub fn check(job: &CheckJob, program: Source, drawing: Source) -> Result<report::Check, Error> {
    let sketch = read::read(drawing.name, drawing.bytes, &prepare::scale(&job.drawing))?;
    // Comments may be in any encoding; what a controller executes is ASCII.
    let text = String::from_utf8_lossy(program.bytes);
    let read = checking::Existing::read(&text, &job.machine).map_err(|error| error.in_file(program.name))?;
    Ok(reporting::check_of(&checking::check_existing(job, &read, &sketch)?))
}

/// A report of each program of a plan; `drawing` and `program` are the files' names as typed.
pub fn reports(job: &Job, plan: &Plan, drawing: &str, program: &str) -> Vec<Report> {
    reporting::reports(job, plan, drawing, program)
}

/// The moves of a plan's programs raised above the stock, with the spindle off; checked.
///
/// # Errors
/// [`Kind::Refused`](crate::error::Kind::Refused) when it fails its check.
pub fn air_cut(job: &Job, plan: &Plan) -> Result<DryRun, Error> {
    dry::air_cut(job, plan)
}

/// A round about all that a plan's programs cut and about the clamps, at clearance height, with the spindle off; checked.
///
/// # Errors
/// [`Kind::Refused`](crate::error::Kind::Refused) when it fails its check, or a clamp is in the way.
pub fn frame(job: &Job, plan: &Plan) -> Result<DryRun, Error> {
    dry::frame(job, plan)
}

/// The program that takes one of a plan's programs up at a block; checked.
///
/// # Errors
/// [`Kind::Settings`](crate::error::Kind::Settings) for a file that there is not;
/// [`Kind::Refused`](crate::error::Kind::Refused) for a block that is no place to start again, with the nearest that
/// are, and when it fails its check.
pub fn resume(job: &Job, plan: &Plan, block: Block) -> Result<Resumed, Error> {
    again::resume(job, plan, block)
}

/// The report of a dry run whose files have these names.
pub fn report_dry_run(run: &DryRun, files: &[String]) -> report::DryRun {
    reporting::dry_run(run, files)
}

/// What the pictures of a plan show, one for each program, with their `reports`.
pub fn scenes<'a>(job: &Job, plan: &'a Plan, reports: &'a [Report]) -> Vec<Scene<'a>> {
    showing::scenes(job, plan, reports)
}

/// Drops what was said before: copies are alike.
fn once_each(mut told: Vec<String>) -> Vec<String> {
    let mut said = HashSet::new();
    told.retain(|sentence| said.insert(sentence.clone()));
    told
}

/// The most vertices of a drawing for which the search for the fewest spans may take its time: some seconds.
const MOST_AT_LEISURE: usize = 50_000;

/// Every contour replaced by its path, in the contours' order however many cores work on them; by the arcs that stand
/// for its cubics where those are written.
fn fit(
    contours: &[Contour],
    cubics: &[Cubics],
    tolerance: Tolerance,
    progress: &dyn Progress,
) -> Vec<Fitted> {
    if !cubics.is_empty() {
        return cubics.iter().map(|cubics| cubics.fitted.clone()).collect();
    }
    let vertices = contours.iter().map(|contour| contour.path.vertices.len()).sum();
    progress.begin(vertices);
    let pace = if vertices > MOST_AT_LEISURE { Pace::Brisk } else { Pace::Thorough };
    let fit = |contour: &Contour| {
        let fitted = fit::fit(&contour.path, tolerance, pace);
        progress.done(contour.path.vertices.len());
        fitted
    };
    contours.par_iter().map(fit).collect()
}

/// SHA-256 in hexadecimal (FIPS 180-4).
fn digest(bytes: &[u8]) -> String {
    Sha256::digest(bytes).iter().map(|byte| format!("{byte:02x}")).collect()
}

/// What the text says on the machine's controller.
fn read_back(text: &str, machine: &Machine) -> Result<Program, Error> {
    gcode::interpret(&gcode::read(text)?, &Dialect::of(machine))
}

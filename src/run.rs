//! The main job from end to end, to be read from top to bottom: drawing in, checked program out.

mod checking;
mod clock;
mod curvature;
mod curving;
mod cutting;
mod fairing;
mod feeding;
mod header;
mod placing;
mod prepare;
mod progress;
mod reporting;
mod showing;
mod siding;
mod splitting;

use std::collections::{BTreeMap, HashSet};

use kurbo::Rect;
use rayon::prelude::*;
use sha2::{Digest, Sha256};

use crate::check::Verdict;
use crate::clean::{Cleaned, Roughness};
use crate::error::Error;
use crate::fair;
use crate::feed::{self, Limits, Times};
use crate::fit::{self, Fitted};
use crate::gcode::{self, Dialect, Header, Program};
use crate::job::{CheckJob, DrawingSettings, Job};
use crate::machine::Machine;
use crate::measure::{self, Measurement};
use crate::num::Tolerance;
use crate::preview::{Bend, Scene};
use crate::read;
use crate::report::{self, Report};
use crate::route::{self, Routed, Routing, Setup};
use crate::sketch::{Contour, Sketch};
use checking::Intended;
use clock::Clock;
use fairing::Cubics;
use placing::Placing;
use prepare::prepare;

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
    /// Each path in the program's coordinates, with how it is cut.
    pub routed: Vec<Routed>,
    /// The moves as meant.
    pub routing: Routing,
    /// The program's text, as a whole.
    pub text: String,
    /// What that text says, read back.
    pub program: Program,
    /// The same in parts, in the order in which they are run, where the controller's memory is too small for the whole;
    /// else none.
    pub parts: Vec<Part>,
    /// What it was checked for.
    pub verdict: Verdict,
    /// Its planned times.
    pub times: Times,
    /// The highest feed override at which no block starves, in percent; 0 where some starve at 100 % already.
    pub highest_override: u32,
    /// The same job with the drawing cut as it is.
    pub as_drawn: AsDrawn,
    /// SHA-256 of the drawing's bytes, in hexadecimal.
    pub sha256: String,
    /// What the person at the machine should know.
    pub warnings: Vec<String>,
    /// How long each stage took, in milliseconds.
    pub timings_ms: BTreeMap<String, f64>,
}

/// A part of a program, complete by itself.
#[derive(Clone, Debug)]
pub struct Part {
    /// Its text.
    pub text: String,
    /// What that text says, read back.
    pub program: Program,
}

/// The same job with every span of the drawing as a block of its own.
#[derive(Clone, Debug)]
pub struct AsDrawn {
    /// Blocks that move an axis.
    pub motion_blocks: usize,
    /// Its planned times.
    pub times: Times,
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
    let mut routing = clock.time("route", || route::route(&sided.routed, &setup))?;
    placing.stays_on_machine(&routing.toolpath, &job.machine)?;

    let sha256 = digest(source.bytes);
    let mut header = header::header(job, source.name, (prepared.tolerance, placing.stock), &setup, &sha256);
    header.curves = curving::curves(&routing.toolpath, &fairing::routed(&cubics, &sided.routed, &placing));
    let feeds = clock.time("feed", || feeding::suit(&mut routing.toolpath, &header, job));
    let lifts = splitting::lift(job, &mut routing.toolpath, &mut header)?;
    let text = clock.time("write", || gcode::write(&routing.toolpath, &header, &job.machine))?;
    let program = clock.time("read back", || read_back(&text, &job.machine))?;
    let intended = Intended { routed: &sided.routed, setup: &setup, sides: &sides, placing: &placing };
    let verdict = clock.time("check", || checking::check(job, &program, &prepared, &intended));
    checking::hold(&verdict.claims)?;
    let check_part = |part: &Program| checking::check_part(job, part, &prepared, &intended);
    let parts = splitting::parts(job, &routing.toolpath, &header, (&text, &program), check_part)?;

    let limits = Limits::of(&job.machine);
    let times = clock.time("time", || feed::time(&program.toolpath, &limits));
    let highest_override = clock.time("override", || feed::highest_override(&program.toolpath, &limits));
    let meant = (&setup, &header, &placing);
    let as_drawn = clock.time("as drawn", || as_drawn(job, contours, meant, (&text, &program)))?;
    let over = placing.over_the_edge(&routing.toolpath, job.cutter_mm);
    let late = over.into_iter().chain(feeds).chain(lifts).collect();
    let notes = [prepared.warnings, sides.notes, sided.notes, routing.notes.clone(), late];
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
        routed: sided.routed,
        routing,
        text,
        program,
        parts,
        verdict,
        times,
        highest_override,
        as_drawn,
        sha256,
        warnings: once_each(notes.concat()),
        timings_ms: clock.times(),
    })
}

/// The same job with the drawing's own spans, on the line.
fn as_drawn(
    job: &Job,
    contours: &[Contour],
    (setup, header, placing): (&Setup, &Header, &Placing),
    (text, program): (&str, &Program),
) -> Result<AsDrawn, Error> {
    // Both texts have the same lines but for their motion.
    let still = text.lines().count() - program.motion_blocks;
    // It is never run: no clamp is in its way.
    let setup = Setup { keep_outs: Vec::new(), ..setup.clone() };
    let toolpath = route::route(&cutting::as_drawn(job, contours, placing), &setup)?.toolpath;
    let header = Header { curves: Vec::new(), ..header.clone() };
    let text = gcode::write(&toolpath, &header, &job.machine)?;
    let motion_blocks = text.lines().count() - still;
    Ok(AsDrawn { motion_blocks, times: feed::time(&toolpath, &Limits::of(&job.machine)) })
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

/// The report of a plan; `drawing` and `program` are the files' names as typed.
pub fn report(job: &Job, plan: &Plan, drawing: &str, program: &str) -> Report {
    reporting::report(job, plan, drawing, program)
}

/// What the pictures of a plan show, with the plan's `report`.
pub fn scene<'a>(job: &Job, plan: &'a Plan, report: &'a Report) -> Scene<'a> {
    showing::scene(job, plan, report)
}

/// Drops what was said before: copies are alike.
fn once_each(mut told: Vec<String>) -> Vec<String> {
    let mut said = HashSet::new();
    told.retain(|sentence| said.insert(sentence.clone()));
    told
}

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
    progress.begin(contours.iter().map(|contour| contour.path.vertices.len()).sum());
    let fit = |contour: &Contour| {
        let fitted = fit::fit(&contour.path, tolerance);
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

//! The written text held against the drawing, the machine, and what was asked for.

use std::collections::BTreeSet;

use kurbo::Vec2;

use super::placing::{Placing, for_check};
use super::prepare::Prepared;
use super::{CutterProgram, Plan};
use crate::check::{self, Asked, Claim, Feeds, State, Verdict};
use crate::error::{Error, Kind};
use crate::gcode::{self, Dialect, Program};
use crate::job::{self, CheckJob, Clamp, Cutting, Job, Stock, ToleranceSide};
use crate::machine::Machine;
use crate::num::Tolerance;
use crate::route::{Cut, Routed, Setup};
use crate::sketch::{Contour, Sketch};

/// What the program says, judged against the drawing as it was read.
pub(super) fn check(job: &Job, program: &Program, prepared: &Prepared, plan: &Intended) -> Verdict {
    check::check(
        program,
        &prepared.sketch,
        &job.machine,
        &asked(job, &prepared.sketch, prepared.tolerance, plan),
    )
}

/// What holds of one part of the program by itself: all but what is about the drawing.
pub(super) fn check_part(job: &Job, part: &Program, prepared: &Prepared, plan: &Intended) -> Vec<Claim> {
    check::check_moves(part, &job.machine, &asked(job, &prepared.sketch, prepared.tolerance, plan))
}

/// What the program was meant to do, as far as the check may know it.
pub(super) struct Intended<'a> {
    pub(super) cutter: usize,
    pub(super) contours: &'a BTreeSet<usize>,
    pub(super) routed: &'a [Routed],
    pub(super) setup: &'a Setup,
    pub(super) region: check::Side,
    pub(super) drawing_at: Vec2,
    pub(super) zero_at: Option<Vec2>,
}

impl<'a> Intended<'a> {
    /// What a program of a finished plan was meant to do.
    pub(super) fn of(made: &'a CutterProgram, plan: &'a Plan) -> Self {
        Self {
            cutter: made.cutter,
            contours: &made.contours,
            routed: &made.routed,
            setup: &plan.setup,
            region: plan.region,
            drawing_at: plan.drawing_at,
            zero_at: plan.zero_at,
        }
    }
}

/// What holds of a program that takes up another one, as far as its moves go.
pub(super) fn check_again(job: &Job, program: &Program, plan: &Plan, of: &Intended) -> Vec<Claim> {
    check::check_moves(program, &job.machine, &asked(job, &plan.sketch, plan.tolerance, of))
}

/// What holds of a dry run that keeps above a height.
pub(super) fn check_dry(
    job: &Job,
    program: &Program,
    plan: &Plan,
    (of, clearance): (&Intended, f64),
) -> Vec<Claim> {
    let asked = Asked { clearance: Some(clearance), ..asked(job, &plan.sketch, plan.tolerance, of) };
    check::check_dry(program, &job.machine, &asked)
}

fn asked(job: &Job, sketch: &Sketch, tolerance: Tolerance, plan: &Intended) -> Asked {
    let most =
        |figure: fn(&Cut) -> f64| plan.routed.iter().map(|routed| figure(&routed.cut)).fold(0.0, f64::max);
    let heights = plan.setup.heights();
    let waste = job.keeps_to_waste();
    let cuttings = || sketch.contours.iter().map(|contour| (contour, job.cutting_for(contour)));
    let on_line = |cutting: &Cutting| !waste && cutting.side == job::Side::On;
    let beside =
        |(contour, cutting): &(&Contour, &Cutting)| plan.contours.contains(&contour.id) && !on_line(cutting);
    // What is cut on the line by itself must not go anywhere else.
    let side = if cuttings().any(|c| beside(&c)) { plan.region } else { check::Side::On };
    let edge = |cutting: &Cutting| if waste { job.edge_mm(cutting) } else { cutting.allowance_mm };
    let allowance = cuttings().find(beside).map_or(0.0, |(_, cutting)| edge(cutting));
    let height = |cutting: &Cutting| heights.top - cutting.depth_mm;
    Asked {
        side,
        on_line: cuttings().filter(|(_, cutting)| on_line(cutting)).map(|(c, _)| c.id).collect(),
        relieved: cuttings().filter(|(_, cutting)| cutting.relief).map(|(c, _)| c.id).collect(),
        only: Some(plan.contours.clone()),
        allowance,
        allowance_of_contour: cuttings().map(|(c, cutting)| (c.id, edge(cutting))).collect(),
        waste,
        leave: most(|cut| cut.leave_mm),
        layout: for_check(&job.layout),
        drawing_at: Some(plan.drawing_at),
        zero_at: plan.zero_at,
        keep_out: keep_outs(&job.stock),
        stock_top: heights.top,
        clearance: Some(heights.clearance),
        lowest: Some(heights.top - most(|cut| cut.depth_mm)),
        lowest_of_contour: cuttings().map(|(c, cutting)| (c.id, height(cutting))).collect(),
        pass: Some(most(|cut| cut.pass_mm)),
        feeds: Some(Feeds { cutting: most(|cut| cut.feed), plunge: most(|cut| cut.plunge) }),
        cutter: job.cutters[plan.cutter].diameter_mm,
        ..Asked::new(tolerance)
    }
}

/// A program that exists already, read both ways where a switch of the controller decides whether lines that start
/// with a slash are run or skipped.
pub(super) struct Existing {
    run: Program,
    skipped: Option<Program>,
}

impl Existing {
    /// What `text` says on the machine's controller.
    pub(super) fn read(text: &str, machine: &Machine) -> Result<Self, Error> {
        let words = gcode::read(text)?;
        let dialect = |skip_optional| Dialect { skip_optional, ..Dialect::of(machine) };
        let run = gcode::interpret(&words, &dialect(false))?;
        let skipped = || {
            gcode::interpret(&words, &dialect(true)).map_err(|error| {
                let what = format!("with the lines that start with a slash skipped, {}", error.what);
                Error { what, ..error }
            })
        };
        let optional = words.blocks.iter().any(|block| block.optional);
        Ok(Self { run, skipped: optional.then(skipped).transpose()? })
    }
}

/// Checks a program that exists already, whoever wrote it: it must hold both ways.
///
/// # Errors
/// [`Kind::Refused`] when the drawing as it is laid out does not fit the stock.
pub(super) fn check_existing(job: &CheckJob, program: &Existing, sketch: &Sketch) -> Result<Verdict, Error> {
    let asked = asked_of_existing(job, sketch)?;
    let mut verdict = check::check(&program.run, sketch, &job.machine, &asked);
    if let Some(skipped) = &program.skipped {
        let skipped = check::check(skipped, sketch, &job.machine, &asked);
        verdict.claims.push(holds_skipped(&skipped));
        verdict.holds &= skipped.holds;
    }
    Ok(verdict)
}

/// The claim that all else holds with the lines that start with a slash skipped, of which `skipped` is the verdict.
fn holds_skipped(skipped: &Verdict) -> Claim {
    let failed: Vec<&Claim> = skipped.claims.iter().filter(|claim| claim.state == State::Fails).collect();
    Claim {
        name: "all else holds too with the lines that start with a slash skipped",
        state: if failed.is_empty() { State::Holds } else { State::Fails },
        value: Some(failed.len() as f64),
        limit: Some(0.0),
        least: false,
        unit: "",
        at: failed.first().and_then(|claim| claim.at),
        note: failed.first().map(|claim| in_words(claim)).unwrap_or_default(),
    }
}

fn asked_of_existing(job: &CheckJob, sketch: &Sketch) -> Result<Asked, Error> {
    let top = job.stock.top_mm();
    let contours = &sketch.contours[..];
    let placing = Placing::new(&job.layout, &job.stock, (contours, contours));
    placing.fits_stock()?;
    let waste = job.tolerance_side == ToleranceSide::Waste;
    let cutter = job.cutter_mm.unwrap_or(0.0);
    Ok(Asked {
        side: match job.side {
            // On the line, what is kept and what is waste goes by nesting.
            job::Side::On if waste => check::Side::Outside,
            job::Side::On => check::Side::On,
            job::Side::Inside => check::Side::Inside,
            job::Side::Outside | job::Side::Auto => check::Side::Outside,
        },
        relieved: sketch.contours.iter().filter(|_| job.relief).map(|contour| contour.id).collect(),
        cutter,
        allowance: if waste && job.side == job::Side::On { -cutter / 2.0 } else { job.allowance_mm },
        waste,
        layout: for_check(&job.layout),
        drawing_at: job.stock.origin.map(|_| placing.drawing_at),
        zero_at: placing.zero_at,
        keep_out: keep_outs(&job.stock),
        stock_top: top,
        clearance: job.stock.clearance_mm.map(|clearance| top + clearance),
        lowest: job.depth_mm.map(|depth| top - depth),
        pass: job.pass_mm,
        ..Asked::new(job.tolerance)
    })
}

/// The clamps in the check's words.
fn keep_outs(stock: &Stock) -> Vec<check::KeepOut> {
    let keep_out = |(number, clamp): (usize, &Clamp)| check::KeepOut {
        name: format!("clamp {number}"),
        outline: clamp.place,
        top: stock.top_mm() + clamp.height_mm,
    };
    (1..).zip(&stock.clamps).map(keep_out).collect()
}

/// Refuses a program for which a claim fails.
pub(super) fn hold(claims: &[Claim]) -> Result<(), Error> {
    let failed: Vec<String> =
        claims.iter().filter(|claim| claim.state == State::Fails).map(in_words).collect();
    if failed.is_empty() {
        return Ok(());
    }
    let what = format!(
        "the program fails its check against the drawing, so it was not written: {}",
        failed.join("; ")
    );
    let remedy =
        "look at the drawing there, or change tolerance, depth or feeds; please report it if neither helps";
    Err(Error::new(Kind::Refused, what).remedy(remedy))
}

/// A failed claim in one line.
fn in_words(claim: &Claim) -> String {
    let mut words = format!("it does not hold that {}", claim.name);
    if let (Some(value), Some(limit)) = (claim.value, claim.limit) {
        words += &format!(" ({value:.4} against {limit:.4} {})", claim.unit);
    }
    if let Some(at) = claim.at {
        words += &format!(" at {at}");
    }
    if !claim.note.is_empty() {
        words += &format!(": {}", claim.note);
    }
    words
}

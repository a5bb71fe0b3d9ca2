//! What the program says of itself before it moves.

use std::path::Path;

use kurbo::Rect;

use super::prepare::band;
use super::programs::Bench;
use crate::cautions;
use crate::gcode::Header;
use crate::job::{Clamp, Job, Layout, Side};
use crate::machine::{ArcStyle, Machine};
use crate::num::Tolerance;
use crate::route::{Cut, Routed};

/// The header of the program for some lines, all cut by that cutter; `place` says which program of how many it is. It
/// holds no time, so that the same job gives the same text.
pub(super) fn header(bench: &Bench, cutter: usize, routed: &[Routed], place: Option<&str>) -> Header {
    let Bench { job, name, sha256, setup, .. } = *bench;
    let tolerance = bench.prepared.tolerance;
    let file = Path::new(name).file_name().map_or_else(|| name.into(), |file| file.to_string_lossy());
    let most = |figure: fn(&Cut) -> f64| routed.iter().map(|routed| figure(&routed.cut)).fold(0.0, f64::max);
    let mut notes = vec![
        side(job, cutter).to_owned(),
        format!(
            "tolerance {} mm{}, depth {} mm, pass {} mm at most",
            tolerance.mm(),
            if job.keeps_to_waste() { " on the waste side" } else { "" },
            most(|cut| cut.depth_mm),
            most(|cut| cut.pass_mm)
        ),
        format!("made by ribband {} from {file}", env!("CARGO_PKG_VERSION")),
        format!("drawing sha256 {sha256}"),
    ];
    notes.extend(laid_out(job));
    notes.extend(set_up(job, bench.placing.stock));
    notes.extend(cautions::SHORT.map(str::to_owned));
    Header {
        title: place.map_or_else(|| file.clone().into_owned(), |place| format!("{file}, {place}")),
        xy_zero: job.stock.origin().words().into(),
        z_zero: job.stock.zero.words().into(),
        cutter: cutter_words(job, cutter),
        clearance: setup.heights().clearance,
        chord_error: chord_error(&job.machine, band(job, tolerance)),
        notes,
        marks: Vec::new(),
        curves: Vec::new(),
    }
}

/// Stock and clamps, as far as they are given.
fn set_up(job: &Job, stock: Option<Rect>) -> Vec<String> {
    let unit = job.machine.unit;
    let show = |mm: f64| format!("{}", (mm / unit.mm() * 1e4).round() / 1e4);
    let range = |axis: &str, from, to| format!("{axis} {} to {}", show(from), show(to));
    let place = |r: Rect| format!("{}, {}", range("X", r.x0, r.x1), range("Y", r.y0, r.y1));
    let thickness = job.stock.thickness.map(|thickness| thickness.words(show, unit.symbol()));
    let stock = stock.map(|stock| format!("{} from zero", place(stock)));
    let told: Vec<String> = [thickness, stock].into_iter().flatten().collect();
    let clamp = |(number, clamp): (usize, &Clamp)| {
        let height = show(clamp.height_mm);
        format!("clamp {number}: {}, {height} {} above the stock", place(clamp.place), unit.symbol())
    };
    let stock = (!told.is_empty()).then(|| format!("stock {}", told.join(", ")));
    stock.into_iter().chain((1..).zip(&job.stock.clamps).map(clamp)).collect()
}

/// How the drawing is laid out, where it is not once as drawn.
fn laid_out(job: &Job) -> Option<String> {
    let Layout { mirror, turn_deg, copies, gap_mm } = job.layout;
    (!job.layout.is_as_drawn()).then(|| {
        let mirrored = if mirror { "mirrored, " } else { "" };
        format!("{mirrored}turned {turn_deg} degrees, {copies} copies {gap_mm} mm apart")
    })
}

/// The side in words that stand in a comment.
fn side(job: &Job, cutter: usize) -> &'static str {
    let mut sides = job.cuttings().filter(|cutting| cutting.cutter == cutter).map(|cutting| cutting.side);
    let first = sides.next().unwrap_or_default();
    if sides.any(|side| side != first) {
        return "on the side that each layer asks for";
    }
    match first {
        Side::On => "on the line: the part comes out smaller by the radius of the cutter",
        Side::Inside => "inside the contours: holes keep the drawn size",
        Side::Outside => "outside the contours: parts keep the drawn size",
        Side::Auto => "outside the outer contours, inside the holes",
    }
}

/// What of the tolerance is kept for arcs that become straight blocks, in mm: a quarter on a machine without arcs; a
/// tenth on one without helices, whose ramps along arcs become blocks, and many where the share is small. On others
/// only arcs that are straight within half a unit of the last place become blocks.
pub(super) fn chord_error(machine: &Machine, tolerance: Tolerance) -> f64 {
    match (machine.arcs.style, machine.arcs.helices) {
        (ArcStyle::None, _) => tolerance.mm() / 4.0,
        (_, false) => tolerance.mm() / 10.0,
        (_, true) => 0.0,
    }
}

/// The cutter in words.
pub(super) fn cutter_words(job: &Job, cutter: usize) -> String {
    let diameter = job.cutters[cutter].diameter_mm / job.machine.unit.mm();
    format!("{diameter} {}", job.machine.unit.symbol())
}

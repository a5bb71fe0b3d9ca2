//! From the drawing's bytes to contours that can be cut: read, measured, put right, held against the machine.

use std::collections::BTreeSet;

use kurbo::Rect;
use rayon::prelude::*;

use super::Source;
use super::clock::Clock;
use super::header::chord_error;
use crate::clean::{self, Cleaned, Roughness};
use crate::error::{Error, Kind};
use crate::job::{self, DrawingSettings, DrawingUnit, Job};
use crate::num::Tolerance;
use crate::read::{self, Limits, Scale, Unit};
use crate::sketch::{Contour, Sketch};

/// A drawing ready to be fitted.
pub(super) struct Prepared {
    /// As read, without the layers that the job leaves out.
    pub(super) sketch: Sketch,
    /// Put right.
    pub(super) cleaned: Cleaned,
    /// The tolerance to work to.
    pub(super) tolerance: Tolerance,
    /// The box around the finished parts, in the drawing's coordinates.
    pub(super) part: Rect,
    /// What the person at the machine should know.
    pub(super) warnings: Vec<String>,
}

/// Reads the drawing, settles the tolerance, puts the contours right.
pub(super) fn prepare(job: &Job, source: Source, clock: &mut Clock) -> Result<Prepared, Error> {
    let sketch = clock.time("read", || read_wanted(job, source))?;
    let (tolerance, told) = clock.time("measure", || tolerance(job, &sketch));
    let join_mm = job.drawing.join_mm.unwrap_or(tolerance.mm());
    let cleaned = clock.time("clean", || clean::clean(&sketch, join_mm));
    let bbox = cleaned.contours.iter().filter_map(|c| c.path.bbox()).reduce(|a, b| a.union(b));
    let part = bbox.ok_or_else(nothing_to_cut)?;
    let mut warnings: Vec<String> = told.into_iter().collect();
    warnings.extend(cleaning(&cleaned));
    warnings.extend(sketch.notes.iter().cloned());
    Ok(Prepared { sketch, cleaned, tolerance, part, warnings })
}

/// What the settings say of a drawing's scale, in the reader's words.
pub(super) fn scale(settings: &DrawingSettings) -> Scale {
    let unit = |unit| match unit {
        DrawingUnit::Mm => Unit::Mm,
        DrawingUnit::In => Unit::Inch,
        DrawingUnit::Px => Unit::Px,
    };
    Scale {
        drawing_unit: settings.unit.map(unit),
        scale: settings.scale.unwrap_or(1.0),
        fit_width_mm: settings.fit_width_mm,
        layers: settings.layers.clone(),
        limits: Limits::times(settings.size_limit),
    }
}

/// The jaggedness of each contour.
pub(super) fn roughness(contours: &[Contour]) -> Vec<Roughness> {
    contours.par_iter().map(|contour| clean::roughness(&contour.path)).collect()
}

/// How far a path may be off where it is meant to be: on the waste side alone it is meant half a tolerance beyond the
/// line, and may be off by the other half.
pub(super) fn band(job: &Job, tolerance: Tolerance) -> Tolerance {
    let beyond = if job.keeps_to_waste() { tolerance.mm() / 2.0 } else { 0.0 };
    tolerance.less(beyond).unwrap_or(tolerance)
}

/// What is left of the tolerance for fitting: rounding the program's numbers takes 1.5 units of their last place
/// (and blocks for arcs their share, on a machine without arcs), sampling the drawing's free curves what the reader says, and the check settles no more than a five-hundredth.
pub(super) fn left_for_fitting(job: &Job, prepared: &Prepared) -> Result<Tolerance, Error> {
    let band = band(job, prepared.tolerance);
    let unsettled = band.mm() / 500.0;
    // A path on the waste side alone keeps one place off the line, by which the check knows that it never crosses it.
    let places = if job.keeps_to_waste() { 2.5 } else { 1.5 };
    let written = places * job.machine.last_place() + chord_error(&job.machine, band);
    let spent = written + prepared.sketch.sampling_mm + unsettled;
    band.less(spent).ok_or_else(|| {
        let what = format!("rounding and the drawing's free curves take {spent:.4} mm, the whole tolerance");
        Error::new(Kind::Refused, what).remedy("ask for a wider --tolerance")
    })
}

/// The drawing, without the layers that the job leaves out.
fn read_wanted(job: &Job, source: Source) -> Result<Sketch, Error> {
    let mut sketch = read::read(source.name, source.bytes, &scale(&job.drawing))?;
    let before = sketch.contours.len();
    sketch.contours.retain(|contour| job.cutting_of(contour).is_some());
    if sketch.contours.is_empty() && before > 0 {
        return Err(nothing_to_cut());
    }
    sketch.notes.extend(missing(job, &sketch.contours));
    Ok(sketch)
}

/// What the job file names and the drawing does not have.
fn missing(job: &Job, contours: &[Contour]) -> Vec<String> {
    let layers: BTreeSet<String> = contours.iter().map(|contour| contour.layer.clone()).collect();
    let colours: BTreeSet<String> =
        contours.iter().map(|contour| job::same_colour(&contour.colour)).collect();
    let mut told = Vec::new();
    for (kind, entries, drawn) in [("layer", &job.layers, layers), ("colour", &job.colours, colours)] {
        let cut = entries.iter().filter(|(_, cutting)| cutting.is_some()).map(|(name, _)| name);
        let missing = cut.filter(|name| !drawn.contains(*name));
        told.extend(
            missing.map(|name| format!("the job file has a {kind} \"{name}\", the drawing has none")),
        );
    }
    told
}

/// The tolerance asked for; else the default, or what the traces support where that is more, which is then told.
fn tolerance(job: &Job, sketch: &Sketch) -> (Tolerance, Option<String>) {
    let rough = roughness(&sketch.contours);
    let supports = rough.iter().map(Roughness::support);
    let worst = supports.max_by(|a, b| a.mm.total_cmp(&b.mm)).filter(|support| support.mm > 0.0);
    let default = Tolerance::DEFAULT;
    match (job.tolerance, worst) {
        (Some(asked), Some(support)) if support.mm > asked.mm() => {
            let told = format!(
                "the trace supports a tolerance of {} mm, not {}: {}",
                support.mm,
                asked.mm(),
                support.reason
            );
            (asked, Some(told))
        }
        (None, Some(support)) if support.mm > default.mm() => {
            let told = format!("tolerance {} mm, as the trace supports: {}", support.mm, support.reason);
            (Tolerance::new(support.mm).unwrap_or(default), Some(told))
        }
        (asked, _) => (asked.unwrap_or(default), None),
    }
}

/// What cleaning did, for the person who drew it.
fn cleaning(cleaned: &Cleaned) -> Vec<String> {
    let counts = &cleaned.counts;
    let told = [
        (counts.repeated_points, "repeated points dropped"),
        (counts.without_length, "contours without length dropped"),
        (counts.gaps_closed, "gaps closed"),
        (counts.duplicates, "lines drawn twice removed"),
    ];
    let mut told: Vec<String> =
        told.iter().filter(|(count, _)| *count > 0).map(|(count, what)| format!("{count} {what}")).collect();
    let flawed = cleaned.flaws.iter().filter(|flaw| flaw.kind == clean::FlawKind::NearlyClosed);
    told.extend(flawed.map(ToString::to_string));
    told
}

fn nothing_to_cut() -> Error {
    Error::new(Kind::Refused, "there is nothing to cut")
        .remedy("look at the layers asked for, and at the drawing's size")
}

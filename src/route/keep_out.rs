//! Clamps kept clear of: by every cut, and by the whole rectangle of every rapid.

use kurbo::{Point, Rect};

use crate::error::Error;
use crate::geom::Span;
use crate::toolpath::{Move, Toolpath};

use super::setup::{KeepOut, Setup, refused};

/// Refuses a toolpath that comes within the cutter's radius of a keep-out below its height.
pub(super) fn check(toolpath: &Toolpath, radius: f64, setup: &Setup) -> Result<(), Error> {
    for keep_out in &setup.keep_outs {
        let top = setup.heights().top + keep_out.height_mm;
        // The program's numbers are rounded by less than a step.
        let (reach, top) = (radius + setup.step_mm, top + setup.step_mm);
        let around = keep_out.place.inflate(reach, reach);
        for m in toolpath.moves.iter().filter(|m| m.from.z.min(m.to.z) < top) {
            if let Some(at) = meets(m, around, setup.step_mm) {
                return Err(in_the_way(m, keep_out, at));
            }
        }
    }
    Ok(())
}

/// Where a move meets a box. A rapid in the plane may run anywhere in its rectangle: axes need not keep step.
fn meets(m: &Move, around: Rect, step_mm: f64) -> Option<Point> {
    if m.is_rapid() {
        let swept = Rect::from_points(m.from.xy, m.to.xy);
        let shared = swept.intersect(around);
        let met = shared.x0 <= shared.x1 && shared.y0 <= shared.y1 && overlaps(swept, around);
        return met.then(|| shared.center());
    }
    span_meets(&m.span(), around, step_mm)
}

/// Where a span meets a box, to the last place of the program.
fn span_meets(span: &Span, around: Rect, step_mm: f64) -> Option<Point> {
    if !overlaps(span.bbox(), around) {
        return None;
    }
    if around.contains(span.start) || span.length() <= step_mm {
        return Some(span.start);
    }
    let (first, second) = (span.part(0.0, 0.5), span.part(0.5, 1.0));
    span_meets(&first, around, step_mm).or_else(|| span_meets(&second, around, step_mm))
}

/// True when two boxes share a point, be they as thin as a line.
fn overlaps(a: Rect, b: Rect) -> bool {
    a.x0 <= b.x1 && b.x0 <= a.x1 && a.y0 <= b.y1 && b.y0 <= a.y1
}

fn in_the_way(m: &Move, keep_out: &KeepOut, at: Point) -> Error {
    let (what, remedy) = if m.is_rapid() {
        let remedy = "move the clamp or the drawing, or raise --clearance above the clamp";
        ("a rapid, which may run anywhere in its rectangle,", remedy)
    } else {
        ("a cut", "move the clamp, or the drawing")
    };
    let place = keep_out.place;
    refused(
        format!(
            "{what} comes to ({:.1}, {:.1}) at Z {:.1}, into the clamp at ({:.1}, {:.1}) to ({:.1}, {:.1})",
            at.x,
            at.y,
            m.from.z.min(m.to.z),
            place.x0,
            place.y0,
            place.x1,
            place.y1
        ),
        remedy,
    )
}

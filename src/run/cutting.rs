//! From paths to what the router needs: depth and feed for each, heights, zero.

use kurbo::{Affine, Point};

use super::placing::Placing;
use super::siding::Sides;
use crate::error::Error;
use crate::fit::Fitted;
use crate::job::{Clamp, Corners, Cutting, Held, Job, Origin};
use crate::num::Tolerance;
use crate::route::{self, Cut, KeepOut, Outline, Routed, Setup, Sided, Work};
use crate::sketch::Contour;

/// What all contours of the program share. The program ends above its zero, or, where that is the drawing's, above the
/// parts' lower left corner.
pub(super) fn setup(job: &Job, placing: &Placing) -> Setup {
    let park = if job.stock.origin() == Origin::Drawing { placing.parts.origin() } else { Point::ORIGIN };
    Setup {
        zero: job.stock.zero,
        thickness: job.stock.thickness,
        clearance_mm: job.stock.clearance_mm(),
        bed_cut_mm: job.stock.bed_cut_mm,
        park,
        step_mm: job.machine.last_place(),
        keep_outs: job.stock.clamps.iter().map(keep_out).collect(),
        ..Setup::default()
    }
}

fn keep_out(clamp: &Clamp) -> KeepOut {
    KeepOut { place: clamp.place, height_mm: clamp.height_mm }
}

/// The line of the cutter's centre for each contour's path of every copy, in the program's coordinates, with how it is cut.
pub(super) fn sided(
    job: &Job,
    contours: &[Contour],
    fitted: &[Fitted],
    (sides, tolerance): (&Sides, Tolerance),
    placing: &Placing,
) -> Result<Sided, Error> {
    type Ready<'a> = ((&'a Contour, &'a Fitted), &'a route::Side);
    let outline = |((contour, fitted), side): &Ready, place: Affine| Outline {
        id: contour.id,
        path: fitted.path.transformed(place),
        cut: beyond(
            job,
            tolerance,
            job.cutting_for(contour),
            Cut { side: **side, ..cut(job, job.cutting_for(contour)) },
        ),
    };
    let ready: Vec<Ready> = contours.iter().zip(fitted).zip(&sides.each).collect();
    let outlines: Vec<Outline> = placing.place(&ready, outline).collect();
    route::beside(&outlines, tolerance.mm())
}

/// The cut moved to the middle of its band where the whole tolerance lies on the waste side: off the line itself where
/// the cutter's centre follows that, else further off the edge. A corner of the line stays one where it can.
fn beyond(job: &Job, tolerance: Tolerance, cutting: &Cutting, cut: Cut) -> Cut {
    if !job.keeps_to_waste() {
        return cut;
    }
    let corners = if job.cuts_on_line_only() { Corners::Sharp } else { cut.corners };
    Cut { allowance_mm: job.edge_mm(cutting) + tolerance.mm() / 2.0, corners, ..cut }
}

/// Each contour of every copy as it is drawn, cut on the line and held in some way: the job to compare with.
pub(super) fn as_drawn(job: &Job, contours: &[&Contour], placing: &Placing) -> Vec<Routed> {
    let cut = |contour: &&Contour, place: Affine| {
        let cutting = job.cutting_for(contour);
        let cut = Cut { tabs: None, held: Some(Held::Vacuum), leave_mm: 0.0, ..cut(job, cutting) };
        Routed { id: contour.id, path: contour.path.transformed(place), cut, work: Work::OnLine }
    };
    placing.place(contours, cut).collect()
}

fn cut(job: &Job, cutting: &Cutting) -> Cut {
    Cut {
        cutter: cutting.cutter,
        depth_mm: cutting.depth_mm,
        pass_mm: cutting.pass_mm,
        feed: cutting.feed,
        plunge: cutting.plunge,
        spindle_rpm: cutting.spindle_rpm,
        cutter_mm: job.cutters[cutting.cutter].diameter_mm,
        corners: cutting.corners,
        allowance_mm: cutting.allowance_mm,
        leave_mm: cutting.leave_mm,
        relief: cutting.relief,
        entry: cutting.entry,
        direction: cutting.direction,
        tabs: cutting.tabs,
        held: cutting.held,
        ..Cut::default()
    }
}

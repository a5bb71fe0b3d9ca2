//! From paths to what the router needs: depth and feed for each, heights, zero.

use kurbo::{Point, Rect, Vec2};

use super::placing::moved;
use crate::geom::ArcSpline;
use crate::job::{self, Cutting, Job, Origin};
use crate::route::{Cut, Entry, Held, Routed, Setup, Thickness, Work, Zero};
use crate::sketch::Contour;

/// What all contours of the program share. The program ends above its zero, or, where that is the drawing's, above the
/// part's lower left corner.
pub(super) fn setup(job: &Job, part: Rect, shift: Vec2) -> Setup {
    let park = if job.stock.origin() == Origin::Drawing { part.origin() + shift } else { Point::ORIGIN };
    Setup {
        zero: match job.stock.zero {
            job::Zero::StockTop => Zero::StockTop,
            job::Zero::Bed => Zero::Bed,
        },
        thickness: job.stock.thickness_mm.map(|mm| Thickness { thinnest: mm, thickest: mm }),
        clearance_mm: job.stock.clearance_mm(),
        park,
        step_mm: job.machine.last_place(),
        ..Setup::default()
    }
}

/// Each contour's path in the program's coordinates, with how it is cut.
pub(super) fn routed<'a>(
    job: &Job,
    contours: &[Contour],
    paths: impl Iterator<Item = &'a ArcSpline>,
    shift: Vec2,
) -> Vec<Routed> {
    let cut = |(contour, path): (&Contour, &ArcSpline)| {
        let cutting = job.cutting_of(&contour.layer).unwrap_or(&job.cutting);
        Routed { id: contour.id, path: moved(path, shift), cut: cut(job, cutting), work: Work::OnLine }
    };
    contours.iter().zip(paths).map(cut).collect()
}

fn cut(job: &Job, cutting: &Cutting) -> Cut {
    let Cutting { depth_mm, pass_mm, feed, plunge, spindle_rpm, entry, held } = *cutting;
    Cut {
        depth_mm,
        pass_mm,
        feed,
        plunge,
        spindle_rpm,
        cutter_mm: job.cutter_mm,
        entry: match entry {
            job::Entry::Ramp => Entry::Ramp,
            job::Entry::Plunge => Entry::Plunge,
            job::Entry::Helix => Entry::Helix,
        },
        held: held.map(|held| match held {
            job::Held::Vacuum => Held::Vacuum,
            job::Held::Screws => Held::Screws,
            job::Held::Tape => Held::Tape,
        }),
        ..Cut::default()
    }
}

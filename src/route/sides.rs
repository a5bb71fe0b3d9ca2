//! From fitted outlines to the lines of the cutter's centre, each with its start and its way in and out.

use std::f64::consts::SQRT_2;

use kurbo::Point;

use crate::error::Error;
use crate::geom::{ArcSpline, SpanIndex};
use crate::job::Direction;
use crate::offset::{self, CentreLine, Compensated, Uncut, compensate};

use super::cut::{Cut, Side};
use super::relief::Corners;
use super::setup::refused;
use super::{Routed, Work, start};

/// A contour as fitted, in the program's coordinates, and how it is cut.
#[derive(Clone, Debug)]
pub struct Outline {
    /// The contour's id in the drawing.
    pub id: usize,
    /// The fitted path.
    pub path: ArcSpline,
    /// How it is cut.
    pub cut: Cut,
}

/// The lines of the cutter's centre, and what is to be told about them.
#[derive(Clone, Debug, Default)]
pub struct Sided {
    /// The lines, ready to be routed.
    pub routed: Vec<Routed>,
    /// What stays uncut, by contour.
    pub uncut: Vec<(usize, Uncut)>,
    /// What the person at the machine should know, one sentence each.
    pub notes: Vec<String>,
}

/// Outlines that bound one region, the side of it that is cut, and all that leads must stay clear of.
struct Group<'a> {
    outlines: Vec<&'a Outline>,
    side: offset::Side,
}

/// Puts the cutter on its side of every outline.
///
/// Outlines of one side bound one region together. Lines keep clear of every outline of their region, so that close
/// neighbours are not cut into. `tolerance` mm is what may stay uncut without being told.
///
/// # Errors
/// Refused for an open contour with a side, for one that cannot be followed without a doubt, and when the cutter is
/// too large for every contour.
pub fn beside(outlines: &[Outline], tolerance: f64) -> Result<Sided, Error> {
    let mut sided = Sided::default();
    let mut cut_beside = Vec::new();
    for outline in outlines {
        outline.cut.validate()?;
        if outline.cut.side == Side::On {
            sided.routed.push(outline.routed(outline.path.clone(), Work::OnLine));
        } else {
            outline.must_be_closed()?;
            cut_beside.push(outline);
        }
    }
    let all = SpanIndex::new(cut_beside.iter().flat_map(|o| o.path.spans()));
    let wanted = cut_beside.len();
    let depths = depths(&cut_beside);
    let (drilled, followed): (Vec<_>, Vec<_>) =
        cut_beside.into_iter().zip(depths).partition(|(o, depth)| o.is_drilled(*depth, tolerance));
    sided.routed.extend(drilled.iter().map(|(o, _)| o.routed(o.path.clone(), Work::Drill)));
    let followed: Vec<&Outline> = followed.into_iter().map(|(o, _)| o).collect();
    for group in groups(&followed) {
        group.follow(&all, tolerance, &mut sided)?;
    }
    if wanted > 0 && sided.routed.is_empty() {
        return Err(refused(
            "the cutter is too large for every contour: nothing can be cut on the side that was asked for",
            "use a smaller --cutter",
        ));
    }
    Ok(sided)
}

/// By how many of the others each outline is enclosed.
fn depths(outlines: &[&Outline]) -> Vec<usize> {
    let boxes: Vec<_> = outlines.iter().map(|o| o.path.bbox().unwrap_or_default()).collect();
    let depth = |i: usize| {
        let at = outlines[i].path.span(0).at(0.5);
        let around = |&j: &usize| j != i && boxes[j].contains(at) && outlines[j].path.winding(at) != 0;
        (0..outlines.len()).filter(around).count()
    };
    (0..outlines.len()).map(depth).collect()
}

/// The outlines that bound regions together.
fn groups<'a>(outlines: &[&'a Outline]) -> Vec<Group<'a>> {
    let of = |side: Side| outlines.iter().copied().filter(|o| o.cut.side == side).collect();
    let mut groups = vec![
        Group { outlines: of(Side::Inside), side: offset::Side::Inside },
        Group { outlines: of(Side::Outside), side: offset::Side::Outside },
    ];
    groups.retain(|group| !group.outlines.is_empty());
    groups
}

impl Group<'_> {
    /// Adds the lines of the group, one way of cutting after the other.
    fn follow(&self, all: &SpanIndex, tolerance: f64, sided: &mut Sided) -> Result<(), Error> {
        let mut ways: Vec<&Cut> = Vec::new();
        for outline in &self.outlines {
            if !ways.iter().any(|cut| **cut == outline.cut) {
                ways.push(&outline.cut);
            }
        }
        let loops: Vec<ArcSpline> = self.outlines.iter().map(|o| o.path.clone()).collect();
        for cut in ways {
            let distance = cut.distance();
            let further = distance + cut.leave_mm;
            let lines = compensate(&loops, distance, self.side, cut.corners)?;
            let rough = match cut.leave_mm > 0.0 {
                true => compensate(&loops, further, self.side, cut.corners)?,
                false => Compensated::default(),
            };
            let ours = |i: usize| self.outlines[i].cut == *cut;
            let uncut_at = |lines: &Compensated, distance: f64| -> Vec<Uncut> {
                offset::uncut(&loops, lines, distance, tolerance)
                    .into_iter()
                    .filter(|u| ours(u.along))
                    .collect()
            };
            let uncut = uncut_at(&lines, distance);
            let uncut_by_rough = if cut.relief { uncut_at(&rough, further) } else { Vec::new() };
            let mut corners = Corners { outlines: all, tolerance, left: Vec::new() };
            self.tell(cut, &lines, sided);
            for line in lines.lines.iter().filter(|line| ours(line.along[0])) {
                // Where both corners are sharp, the rough one is a diagonal further out.
                let beside = rough.lines.iter().filter(|rough| rough.along == line.along);
                let mut rough = beside_line(&line.path, beside, cut.leave_mm * SQRT_2 + tolerance);
                let mut path = line.path.clone();
                if cut.relief {
                    path = corners.relieved(&path, &uncut, distance);
                    rough = rough.map(|rough| corners.relieved(&rough, &uncut_by_rough, further));
                }
                sided.routed.push(self.routed(cut, &path, rough, (line.along[0], all)));
            }
            sided.notes.extend(corners.told());
            sided.uncut.extend(uncut.into_iter().map(|u| (self.outlines[u.along].id, u)));
        }
        Ok(())
    }

    /// One line with its direction, start and leads. The line has its outline on the right, so that it climbs.
    fn routed(
        &self,
        cut: &Cut,
        path: &ArcSpline,
        rough: Option<ArcSpline>,
        (along, all): (usize, &SpanIndex),
    ) -> Routed {
        let climbs = cut.direction == Direction::Climb;
        let turned = |path: ArcSpline| if climbs { path } else { path.reversed() };
        let (path, lead) = start::begun(&turned(path.clone()), all, cut.distance(), climbs, cut);
        self.outlines[along].routed(path, Work::Beside { lead, rough: rough.map(turned) })
    }

    /// What the compensation did that the drawing does not show.
    fn tell(&self, cut: &Cut, lines: &Compensated, sided: &mut Sided) {
        let id = |i: usize| self.outlines[i].id;
        let ours = |i: &usize| self.outlines[*i].cut == *cut;
        for i in lines.vanished.iter().copied().filter(|i| ours(i)) {
            sided.notes.push(format!(
                "contour {} is not cut: the cutter of {} mm is too large for it",
                id(i),
                cut.cutter_mm
            ));
        }
        for i in (0..self.outlines.len()).filter(|i| ours(i)) {
            let parts = lines.lines.iter().filter(|line| line.along == [i]).count();
            if parts > 1 {
                sided.notes.push(format!(
                    "contour {} is cut in {parts} parts: it has necks that the cutter does not pass",
                    id(i)
                ));
            }
        }
        for line in lines.lines.iter().filter(|line| line.along.len() > 1 && ours(&line.along[0])) {
            let ids: Vec<String> = line.along.iter().map(|&i| id(i).to_string()).collect();
            sided.notes.push(format!(
                "contours {} share one cut: the cutter does not fit between them",
                ids.join(" and ")
            ));
        }
        for at in &lines.contacts {
            sided.notes.push(format!("outlines meet or cross at ({:.3}, {:.3})", at.x, at.y));
        }
    }
}

/// The one rough line that runs beside `path` no further away than `reach`; none where there is no such line or more
/// than one, and the path itself is then cut in passes.
fn beside_line<'a>(
    path: &ArcSpline,
    rough: impl Iterator<Item = &'a CentreLine>,
    reach: f64,
) -> Option<ArcSpline> {
    let index = SpanIndex::new(path.spans());
    let near = |p: Point| index.distance(p) <= reach;
    let mut candidates = rough.filter(|rough| rough.path.vertices.iter().all(|v| near(v.at)));
    let only = candidates.next()?;
    candidates.next().is_none().then(|| only.path.clone())
}

impl Outline {
    /// The outline's line with its own settings.
    fn routed(&self, path: ArcSpline, work: Work) -> Routed {
        Routed { id: self.id, path, cut: self.cut.clone(), work }
    }

    /// Only a closed contour has sides.
    fn must_be_closed(&self) -> Result<(), Error> {
        let (Some(first), Some(last), false) =
            (self.path.vertices.first(), self.path.vertices.last(), self.path.closed)
        else {
            return Ok(());
        };
        Err(refused(
            format!(
                "contour {} is open by {:.3} mm, from ({:.3}, {:.3}) to ({:.3}, {:.3}): it has no inside",
                self.id,
                first.at.distance(last.at),
                last.at.x,
                last.at.y,
                first.at.x,
                first.at.y
            ),
            "close it with a larger --join, or cut it with --side on",
        ))
    }

    /// True for a hole that is a circle of the cutter's own diameter within the tolerance.
    fn is_drilled(&self, depth: usize, tolerance: f64) -> bool {
        let is_hole = match self.cut.side {
            Side::Inside => depth.is_multiple_of(2),
            Side::Outside => !depth.is_multiple_of(2),
            Side::On => false,
        };
        let Some(bbox) = self.path.bbox() else { return false };
        let radius = self.cut.distance();
        let round = |p: Point| (p.distance(bbox.center()) - radius).abs() <= tolerance;
        is_hole && self.path.spans().all(|s| [0.0, 0.25, 0.5, 0.75].iter().all(|&t| round(s.at(t))))
    }
}

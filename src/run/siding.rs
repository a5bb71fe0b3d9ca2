//! Which side of each contour is cut, and whether one program can be checked for all of them.

use crate::check;
use crate::clean::{FlawKind, nesting};
use crate::error::{Error, Kind};
use crate::job::{Job, Side};
use crate::route;
use crate::sketch::Contour;

use super::prepare::Prepared;

/// The sides of all contours.
pub(super) struct Sides {
    /// The side of each contour, in the contours' order.
    pub(super) each: Vec<route::Side>,
    /// The side of the region that those contours bound together which are not cut on the line.
    pub(super) region: check::Side,
    /// What the person at the machine should know.
    pub(super) notes: Vec<String>,
}

/// Settles the sides. With `auto`, open strokes are cut on the line; where the tolerance is for the waste side alone, the
/// waste of a cut on the line goes by nesting. All other contours must bound one region that is kept, or one that is
/// cut: nothing else can be checked from the text.
pub(super) fn sides(job: &Job, prepared: &Prepared) -> Result<Sides, Error> {
    let contours = &prepared.cleaned.contours;
    let mut asked: Vec<Side> = contours
        .iter()
        .map(|contour| job.cutting_of(contour).map_or(Side::On, |cutting| cutting.side))
        .collect();
    if job.keeps_to_waste() {
        for (contour, side) in contours.iter().zip(&mut asked) {
            must_have_waste(contour)?;
            *side = if *side == Side::On { Side::Auto } else { *side };
        }
    }
    let mut notes = Vec::new();
    for (contour, side) in contours.iter().zip(&mut asked) {
        if !contour.path.closed && *side != Side::On {
            must_be_a_stroke(contour, *side, prepared)?;
            *side = Side::On;
            notes.push(format!("contour {} is open: it is cut on the line", contour.id));
        }
    }
    let region = region(contours, &asked)?;
    let mut beside = contours.iter().zip(&asked).filter(|(_, side)| **side != Side::On);
    if !job.keeps_to_waste() {
        beside.try_for_each(|(contour, _)| can_be_judged(job, contour, prepared))?;
    }
    let each = asked.iter().map(|&side| for_route(side, region)).collect();
    Ok(Sides { each, region, notes })
}

/// A cutter that may be off by its own radius has no side.
fn can_be_judged(job: &Job, contour: &Contour, prepared: &Prepared) -> Result<(), Error> {
    let cutting = job.cutting_for(contour);
    let radius = job.cutters[cutting.cutter].diameter_mm / 2.0;
    let (tolerance, distance) = (prepared.tolerance.mm(), radius + cutting.allowance_mm);
    if tolerance < distance {
        return Ok(());
    }
    let what = format!(
        "with a tolerance of {tolerance} mm a cutter whose centre runs {distance} mm beside the drawing has no side"
    );
    Err(Error::new(Kind::Refused, what).remedy("take a larger --cutter, or ask for a finer --tolerance"))
}

/// An open contour parts nothing from anything.
fn must_have_waste(contour: &Contour) -> Result<(), Error> {
    if contour.path.closed {
        return Ok(());
    }
    let what = format!("contour {} is open: neither side of it is waste", contour.id);
    Err(Error::new(Kind::Refused, what)
        .remedy("close it in the drawing or with a larger --join, or use --tolerance-side both"))
}

/// Only `auto` takes an open contour, and only one that is not meant to be closed.
fn must_be_a_stroke(contour: &Contour, side: Side, prepared: &Prepared) -> Result<(), Error> {
    let flaws = &prepared.cleaned.flaws;
    let nearly = flaws.iter().find(|f| f.kind == FlawKind::NearlyClosed && f.contour == contour.id);
    if let Some(flaw) = nearly {
        return Err(Error::new(Kind::Refused, format!("contour {} {}", contour.id, flaw.what()))
            .remedy(flaw.remedy()));
    }
    if side == Side::Auto {
        return Ok(());
    }
    let what = format!("contour {} is open: it has no {}", contour.id, side.name());
    Err(Error::new(Kind::Refused, what)
        .remedy("close it in the drawing, or cut it on the line with --side on or --side auto"))
}

/// The side of the region that the contours beside the line bound by even and odd.
fn region(contours: &[Contour], asked: &[Side]) -> Result<check::Side, Error> {
    let beside: Vec<(&Contour, Side)> =
        contours.iter().zip(asked.iter().copied()).filter(|(_, side)| *side != Side::On).collect();
    let alone: Vec<Contour> = beside.iter().map(|(contour, _)| (*contour).clone()).collect();
    let mut found: Option<(usize, check::Side)> = None;
    for ((contour, side), nest) in beside.iter().zip(nesting(&alone)) {
        let outer = nest.depth.is_multiple_of(2);
        let region = match (side, outer) {
            (Side::Inside, true) | (Side::Outside, false) => check::Side::Inside,
            _ => check::Side::Outside,
        };
        match found {
            Some((other, before)) if before != region => return Err(two_regions(other, contour.id)),
            _ => found = Some((contour.id, region)),
        }
    }
    Ok(found.map_or(check::Side::On, |(_, region)| region))
}

fn two_regions(one: usize, other: usize) -> Error {
    let what = format!(
        "the sides of contours {one} and {other} do not agree: beside one of them the part is kept, beside the other \
         it would be cut away"
    );
    Error::new(Kind::Refused, what)
        .remedy("use --side auto, which goes by nesting, or write a program for each with --layers")
}

/// A region is cut as one: so every line keeps clear of all of its border.
fn for_route(side: Side, region: check::Side) -> route::Side {
    match (side, region) {
        (Side::On, _) => route::Side::On,
        (_, check::Side::Inside) => route::Side::Inside,
        _ => route::Side::Outside,
    }
}

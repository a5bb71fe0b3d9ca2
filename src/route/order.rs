//! A short tour between the contours: inner ones before those that enclose them, part by part.

use kurbo::{Point, Rect};
use rstar::RTree;
use rstar::primitives::GeomWithData;

use super::shorten::{Leg, shortened};
use super::{Routed, Setup, Work};

/// One stop of the tour: a contour, and the vertex at which it is entered.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) struct Stop {
    pub(super) contour: usize,
    pub(super) entry: usize,
}

type Entrance = GeomWithData<[f64; 2], Stop>;

/// A short tour from the park position and back: all that lies within a contour is done before it, and a part is
/// finished before the next is begun.
pub(super) fn tour(contours: &[Routed], setup: &Setup) -> Vec<Stop> {
    let parents = parents(contours);
    let stops = nearest_first(contours, &parents, setup);
    let same_part = |a: &Stop, b: &Stop| outermost(&parents, a.contour) == outermost(&parents, b.contour);
    let parts: Vec<&[Stop]> = stops.chunk_by(same_part).collect();
    let out = |stop: &Stop| leaves_at(&contours[stop.contour], stop.entry);
    let leg = |(number, part): (usize, &&[Stop])| {
        let (first, last) = (part[0], part[part.len() - 1]);
        Leg { number, into: contours[first.contour].entrance(first.entry), out: out(&last) }
    };
    let legs = shortened(parts.iter().enumerate().map(leg).collect(), setup.park);
    legs.iter().flat_map(|leg| parts[leg.number].iter().copied()).collect()
}

/// A tour that always goes on to the nearest entrance that is free.
fn nearest_first(contours: &[Routed], parents: &[Option<usize>], setup: &Setup) -> Vec<Stop> {
    let part = |i: usize| outermost(parents, i);
    let mut waiting = vec![0_usize; contours.len()];
    parents.iter().flatten().for_each(|&parent| waiting[parent] += 1);
    let entrances: Vec<Vec<Entrance>> =
        contours.iter().enumerate().map(|(i, contour)| entrances(i, contour, setup.step_mm)).collect();
    let mut left = RTree::bulk_load(entrances.concat());
    let (mut at, mut begun) = (setup.park, None);
    let mut stops = Vec::with_capacity(contours.len());
    while stops.len() < contours.len() {
        let free = |stop: Stop| waiting[stop.contour] == 0 && begun.is_none_or(|p| p == part(stop.contour));
        let Some(stop) = nearest(&left, at, free) else { break };
        for entrance in &entrances[stop.contour] {
            left.remove(entrance);
        }
        if let Some(parent) = parents[stop.contour] {
            waiting[parent] -= 1;
        }
        begun = parents[stop.contour].map(|_| part(stop.contour));
        at = leaves_at(&contours[stop.contour], stop.entry);
        stops.push(stop);
    }
    stops
}

/// One program's worth of contours for each change of cutter: a contour never comes before one that it encloses, so
/// that the freeing cut is in the last program. Cutters come in the order of the drawing where that leaves a choice, and
/// as seldom as the nesting allows.
pub fn by_cutter(contours: &[Routed]) -> Vec<Vec<Routed>> {
    let parents = parents(contours);
    let mut left: Vec<usize> = (0..contours.len()).collect();
    let mut programs = Vec::new();
    while !left.is_empty() {
        let mut cutters: Vec<usize> = left.iter().map(|&i| contours[i].cut.cutter).collect();
        cutters.dedup();
        // Of all cutters the one that gets done with most of its contours.
        let unfinished = |cutter: usize| {
            let now = possible(contours, &parents, &left, cutter).len();
            let all = left.iter().filter(|&&i| contours[i].cut.cutter == cutter).count();
            (all - now, usize::MAX - now)
        };
        let Some(best) = cutters.into_iter().min_by_key(|&cutter| unfinished(cutter)) else { break };
        let now = possible(contours, &parents, &left, best);
        left.retain(|i| !now.contains(i));
        programs.push(now.into_iter().map(|i| contours[i].clone()).collect());
    }
    programs
}

/// The contours that a cutter can do now: those within which nothing is left for another cutter.
fn possible(contours: &[Routed], parents: &[Option<usize>], left: &[usize], cutter: usize) -> Vec<usize> {
    let mut blocked = vec![false; contours.len()];
    for &i in left.iter().filter(|&&i| contours[i].cut.cutter != cutter) {
        let mut around = parents[i];
        while let Some(j) = around {
            blocked[j] = true;
            around = parents[j];
        }
    }
    let is_its_own = |&i: &usize| contours[i].cut.cutter == cutter && !blocked[i];
    left.iter().copied().filter(is_its_own).collect()
}

/// For every contour the smallest closed one around it.
fn parents(contours: &[Routed]) -> Vec<Option<usize>> {
    let boxes: Vec<Rect> = contours.iter().map(|c| c.path.bbox().unwrap_or_default()).collect();
    let areas: Vec<f64> = contours.iter().map(|c| c.path.area().abs()).collect();
    let parent = |i: usize| {
        let at = contours[i].path.span(0).at(0.5);
        let around = |&j: &usize| {
            let larger =
                j != i && contours[j].path.closed && (!contours[i].path.closed || areas[j] > areas[i]);
            larger && boxes[j].contains(at) && contours[j].path.winding(at) != 0
        };
        (0..contours.len()).filter(around).min_by(|&a, &b| areas[a].total_cmp(&areas[b]))
    };
    (0..contours.len()).map(parent).collect()
}

/// The contour around a contour that nothing is around.
fn outermost(parents: &[Option<usize>], mut i: usize) -> usize {
    while let Some(parent) = parents[i] {
        i = parent;
    }
    i
}

/// The nearest free entrance; of several equally near the one that stands first in the drawing.
fn nearest(left: &RTree<Entrance>, at: Point, free: impl Fn(Stop) -> bool) -> Option<Stop> {
    let mut best: Option<(f64, Stop)> = None;
    for (entrance, distance) in left.nearest_neighbor_iter_with_distance_2([at.x, at.y]) {
        match best {
            Some((nearest, _)) if distance > nearest => break,
            Some((_, stop)) if stop < entrance.data => {}
            _ if free(entrance.data) => best = Some((distance, entrance.data)),
            _ => {}
        }
    }
    best.map(|(_, stop)| stop)
}

fn entrances(index: usize, contour: &Routed, step_mm: f64) -> Vec<Entrance> {
    let entrance = |entry| {
        let place = contour.entrance(entry);
        GeomWithData::new([place.x, place.y], Stop { contour: index, entry })
    };
    contour.entries(step_mm).into_iter().map(entrance).collect()
}

/// Where the cutter is when the contour is done.
fn leaves_at(contour: &Routed, entry: usize) -> Point {
    let last = contour.path.vertices.len() - 1;
    let to_and_fro = contour.cut.passes().len().is_multiple_of(2);
    if contour.path.closed || to_and_fro || contour.work == Work::Drill {
        contour.entrance(entry)
    } else {
        contour.entrance(last - entry)
    }
}

//! Pieces chained to closed lines, with nothing left over.

use std::collections::HashMap;

use kurbo::{Point, Vec2};

use crate::geom::{ArcSpline, Span};

use super::CentreLine;
use super::pieces::Piece;

/// A place where the line of the cutter's centre is in doubt.
#[derive(Clone, Copy, Debug)]
pub(super) struct Fault {
    pub(super) at: Point,
}

/// A piece with the nodes that it joins.
#[derive(Clone, Copy, Debug)]
struct Edge {
    from: usize,
    to: usize,
    piece: Piece,
}

/// Chains all pieces to closed lines; a fault where one is left over that is longer than a few snaps.
pub(super) fn chain(pieces: Vec<Piece>, snap: f64) -> Result<Vec<CentreLine>, Fault> {
    let edges = joined(pieces, snap);
    let edges = without_doubles(edges, snap);
    let edges = without_dead_ends(edges, snap)?;
    let mut leaving: HashMap<usize, Vec<usize>> = HashMap::new();
    for (i, edge) in edges.iter().enumerate() {
        leaving.entry(edge.from).or_default().push(i);
    }
    let mut lines = Vec::new();
    let mut used = vec![false; edges.len()];
    for first in 0..edges.len() {
        if !used[first] {
            let walk = walk(first, &edges, &leaving, &mut used)?;
            lines.extend(line(&walk, snap));
        }
    }
    Ok(lines)
}

/// The pieces as edges between nodes: ends within a snap of each other are one node.
fn joined(pieces: Vec<Piece>, snap: f64) -> Vec<Edge> {
    let mut nodes = Nodes { cell: 2.0 * snap, places: Vec::new(), cells: HashMap::new() };
    let edge = |piece: Piece| {
        let (from, to) = (nodes.at(piece.span.start), nodes.at(piece.span.end));
        Edge { from, to, piece }
    };
    let mut edges: Vec<Edge> = pieces.into_iter().map(edge).collect();
    for edge in &mut edges {
        edge.piece.span.start = nodes.places[edge.from];
        edge.piece.span.end = nodes.places[edge.to];
    }
    edges.retain(|e| e.from != e.to);
    edges
}

/// Places by number; those in reach of each other share one.
struct Nodes {
    cell: f64,
    places: Vec<Point>,
    cells: HashMap<(i64, i64), Vec<usize>>,
}

impl Nodes {
    /// The number of the place at `p`.
    fn at(&mut self, p: Point) -> usize {
        let (column, row) = ((p.x / self.cell).floor() as i64, (p.y / self.cell).floor() as i64);
        for (dx, dy) in (-1..=1).flat_map(|dx| (-1..=1).map(move |dy| (dx, dy))) {
            let near = self.cells.get(&(column + dx, row + dy)).into_iter().flatten();
            for &known in near {
                if self.places[known].distance(p) <= self.cell {
                    return known;
                }
            }
        }
        self.places.push(p);
        self.cells.entry((column, row)).or_default().push(self.places.len() - 1);
        self.places.len() - 1
    }
}

/// Of edges that run along each other, one where they agree in direction, and none where they are opposed: there the
/// room between two sides is as wide as the cutter, and no wider.
fn without_doubles(edges: Vec<Edge>, snap: f64) -> Vec<Edge> {
    let mut kept: Vec<Option<Edge>> = Vec::with_capacity(edges.len());
    let mut between: HashMap<(usize, usize), Vec<usize>> = HashMap::new();
    for edge in edges {
        let same_place = |other: &Edge| {
            let (a, b) = (edge.piece.span.at(0.5), other.piece.span.at(0.5));
            a.distance(b) <= 4.0 * snap
        };
        let pair = between.entry((edge.from.min(edge.to), edge.from.max(edge.to))).or_default();
        let double = pair.iter().copied().find(|&i| kept[i].as_ref().is_some_and(same_place));
        match double {
            Some(i) if kept[i].is_some_and(|other| other.from == edge.from) => {}
            Some(i) => kept[i] = None,
            None => {
                pair.push(kept.len());
                kept.push(Some(edge));
            }
        }
    }
    kept.into_iter().flatten().collect()
}

/// The edges that are part of a cycle as far as ends can tell. What leads nowhere is dropped where it is a few snaps
/// long, and a fault where it is longer.
fn without_dead_ends(mut edges: Vec<Edge>, snap: f64) -> Result<Vec<Edge>, Fault> {
    loop {
        let mut entering: HashMap<usize, usize> = HashMap::new();
        let mut leaving: HashMap<usize, usize> = HashMap::new();
        for edge in &edges {
            *leaving.entry(edge.from).or_default() += 1;
            *entering.entry(edge.to).or_default() += 1;
        }
        let before = edges.len();
        let leads_on = |e: &Edge| leaving.contains_key(&e.to) && entering.contains_key(&e.from);
        if let Some(lost) = edges.iter().find(|e| !leads_on(e) && e.piece.span.length() > 16.0 * snap) {
            return Err(Fault { at: lost.piece.span.at(0.5) });
        }
        edges.retain(leads_on);
        if edges.len() == before {
            return Ok(edges);
        }
    }
}

/// Walks on from edge `first`, at every node by the leftmost way, until it comes back to where it began.
fn walk(
    first: usize,
    edges: &[Edge],
    leaving: &HashMap<usize, Vec<usize>>,
    used: &mut [bool],
) -> Result<Vec<Piece>, Fault> {
    let mut at = first;
    let mut pieces = Vec::new();
    loop {
        used[at] = true;
        let edge = &edges[at];
        pieces.push(edge.piece);
        if edge.to == edges[first].from {
            return Ok(pieces);
        }
        let heading = edge.piece.span.tangent(1.0);
        let ways = leaving.get(&edge.to).into_iter().flatten().copied().filter(|&i| !used[i]);
        let turn = |i: &usize| turn(heading, edges[*i].piece.span.tangent(0.0));
        let next = ways.max_by(|i, j| turn(i).total_cmp(&turn(j)));
        at = next.ok_or(Fault { at: edge.piece.span.end })?;
    }
}

/// The signed angle from one heading to another, in radians.
fn turn(from: Vec2, to: Vec2) -> f64 {
    from.cross(to).atan2(from.dot(to))
}

/// The line that a walk makes; none for one that is no longer than a few snaps.
fn line(walk: &[Piece], snap: f64) -> Option<CentreLine> {
    let spans = merged(walk);
    let mut along: Vec<usize> = walk.iter().map(|piece| piece.along).collect();
    along.sort_unstable();
    along.dedup();
    let length: f64 = spans.iter().map(Span::length).sum();
    (length > 64.0 * snap).then(|| CentreLine { path: ArcSpline::from_spans(&spans, true), along })
}

/// The spans of a walk, with the cuts taken out again where it runs on along the same candidate.
fn merged(walk: &[Piece]) -> Vec<Span> {
    let runs_on = |a: &Piece, b: &Piece| a.of == b.of && a.t1.total_cmp(&b.t0).is_eq();
    // Begin where a candidate begins, so that the last and the first need no merging.
    let count = walk.len();
    let start = (0..count).find(|&i| !runs_on(&walk[(i + count - 1) % count], &walk[i])).unwrap_or(0);
    let mut spans: Vec<Span> = Vec::with_capacity(count);
    let mut previous: Option<Piece> = None;
    for piece in walk.iter().cycle().skip(start).take(count) {
        match (spans.last_mut(), previous) {
            (Some(last), Some(before)) if runs_on(&before, piece) => {
                let quarter = last.bulge.atan() + piece.span.bulge.atan();
                *last = Span::arc(last.start, piece.span.end, quarter.tan());
            }
            _ => spans.push(piece.span),
        }
        previous = Some(*piece);
    }
    spans
}

//! The trace as a curve over its chord length: where to put stations, and where a spline strays from it.

use kurbo::{Point, Vec2};

use super::bending::Station;
use super::spline::Piece;
use super::{CubicSpline, chord_lengths};
use crate::num::{Deviation, Tolerance};

/// A polyline over its chord length, without repeated points; around a ring the first point stands at the end again.
pub(super) struct Trace {
    stations: Vec<Station>,
    ring: bool,
}

/// What a spline does in one gap between neighbouring stations of the solution.
#[derive(Clone, Copy)]
struct Worst {
    squared: f64,
    station: Station,
}

/// How far a spline is from the trace.
pub(super) struct Strays {
    /// An upper bound of the distance at like parameters, and so of the Fréchet distance.
    pub(super) deviation: Deviation,
    /// In each gap where it strays farther than the tolerance, the place where that is worst.
    pub(super) stations: Vec<Station>,
}

impl Trace {
    /// The trace through `points`; `None` unless two of them differ and all are finite.
    pub(super) fn new(points: &[Point], ring: bool) -> Option<Self> {
        if !points.iter().all(|p| p.is_finite()) {
            return None;
        }
        let closing = points.first().filter(|_| ring);
        let along = chord_lengths(points, ring).into_iter();
        let mut stations: Vec<Station> =
            along.zip(points.iter().chain(closing)).map(|(t, &at)| Station { t, at }).collect();
        // Points closer than the parameter can tell apart are one point; a ring's end is kept.
        stations.dedup_by(|next, kept| next.t <= kept.t);
        (stations.len() >= 2).then_some(Self { stations, ring })
    }

    /// The length of the trace.
    pub(super) fn length(&self) -> f64 {
        self.stations.last().map_or(0.0, |s| s.t)
    }

    /// As many stations as straight lines within the tolerance would need, more or less: a line from the last station
    /// must pass every vertex since then within it, or a new station is due.
    pub(super) fn first_stations(&self, tolerance: Tolerance) -> Vec<Station> {
        let last = self.stations.len() - 1;
        let mut chosen = vec![0];
        let mut sector: Option<(Vec2, Vec2)> = None;
        let mut from = self.stations[0].at;
        for i in 1..last {
            let mut to = self.stations[i].at - from;
            if sector.is_some_and(|(right, left)| right.cross(to) < 0.0 || to.cross(left) < 0.0) {
                chosen.push(i - 1);
                (from, sector) = (self.stations[i - 1].at, None);
                to = self.stations[i].at - from;
            }
            let squared = to.hypot2();
            if squared > tolerance.mm() * tolerance.mm() {
                let side = Vec2::new(-to.y, to.x) * (tolerance.mm() / squared.sqrt());
                sector = Some(narrowed(sector, (to - side, to + side)));
            }
        }
        if self.ring && chosen.len() < 3 {
            return [0.0, 1.0, 2.0].map(|third| self.at(self.length() * third / 3.0)).to_vec();
        }
        if !self.ring {
            chosen.push(last);
        }
        chosen.into_iter().map(|i| self.stations[i]).collect()
    }

    /// Where and how far the spline strays from the trace. The spline's knots lie on the trace.
    pub(super) fn strays(&self, spline: &CubicSpline, tolerance: Tolerance) -> Strays {
        let mut deviation = Deviation { mm: 0.0, at: self.stations[0].at, certified: true };
        let mut stations = Vec::new();
        let mut next = 1;
        for gap in 0..spline.knots().len() - 1 {
            let piece = spline.piece(gap);
            let mut walk = Walk::new(piece, self.between(next - 1, piece.from), tolerance.mm());
            while self.stations[next].t < piece.to {
                walk.to(self.stations[next]);
                next += 1;
            }
            walk.to(self.between(next - 1, piece.to));
            if walk.bound > deviation.mm {
                deviation = Deviation { mm: walk.bound, at: walk.at, certified: true };
            }
            stations.extend(walk.worst.map(|worst| worst.station));
        }
        Strays { deviation, stations }
    }

    /// The point of the trace at parameter `t`.
    pub(super) fn at(&self, t: f64) -> Station {
        self.between(self.stations.partition_point(|s| s.t <= t).saturating_sub(1), t)
    }

    /// The point of the trace at parameter `t`, between vertex `i` and the next.
    fn between(&self, i: usize, t: f64) -> Station {
        let (from, to) = (self.stations[i], self.stations[(i + 1).min(self.stations.len() - 1)]);
        let fraction = if to.t > from.t { ((t - from.t) / (to.t - from.t)).clamp(0.0, 1.0) } else { 0.0 };
        Station { t, at: from.at.lerp(to.at, fraction) }
    }
}

/// The common part of two sectors, each given by its right and its left side.
fn narrowed(sector: Option<(Vec2, Vec2)>, (right, left): (Vec2, Vec2)) -> (Vec2, Vec2) {
    let Some((old_right, old_left)) = sector else { return (right, left) };
    let right = if old_right.cross(right) > 0.0 { right } else { old_right };
    let left = if left.cross(old_left) > 0.0 { left } else { old_left };
    (right, left)
}

/// A walk along one piece of a spline and the trace beside it.
struct Walk {
    piece: Piece,
    bend: f64,
    radius: f64,
    from: Station,
    squared: f64,
    bound: f64,
    at: Point,
    worst: Option<Worst>,
}

impl Walk {
    fn new(piece: Piece, from: Station, radius: f64) -> Self {
        let end = piece.second + piece.third * (piece.to - piece.from);
        let bend = piece.second.hypot2().max(end.hypot2()).sqrt();
        let squared = piece.local(from.t).at.distance_squared(from.at);
        Self { piece, bend, radius, from, squared, bound: squared.sqrt(), at: from.at, worst: None }
    }

    /// Goes on along a straight chord of the trace. Between the ends of a chord the spline leaves its own chord by at
    /// most an eighth of the second derivative times the squared width; a chord too long for that is cut.
    fn to(&mut self, end: Station) {
        let start = self.from;
        let width = end.t - start.t;
        let belly = self.bend * width * width / 8.0;
        let parts = (belly * 512.0 / self.radius).sqrt().ceil().clamp(1.0, 256.0);
        for part in 1..parts as u32 {
            let fraction = f64::from(part) / parts;
            self.visit(
                Station { t: start.t + width * fraction, at: start.at.lerp(end.at, fraction) },
                belly / (parts * parts),
            );
        }
        self.visit(end, belly / (parts * parts));
    }

    fn visit(&mut self, station: Station, belly: f64) {
        let squared = self.piece.local(station.t).at.distance_squared(station.at);
        let larger = squared.max(self.squared);
        let bound = larger.sqrt() + belly;
        if bound > self.bound {
            (self.bound, self.at) = (bound, station.at);
        }
        let worst = self.worst.map_or(self.radius * self.radius, |worst| worst.squared);
        if squared > worst && station.t > self.piece.from && station.t < self.piece.to {
            self.worst = Some(Worst { squared, station });
        }
        (self.from, self.squared) = (station, squared);
    }
}

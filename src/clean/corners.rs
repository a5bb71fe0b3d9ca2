//! Where a trace has corners: turns that neither its noise nor its roundings explain.

use std::f64::consts::PI;

use kurbo::{Point, Vec2};

use crate::geom::ArcSpline;

use super::{Roughness, Texture};

/// One corner of a path.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CornerPlace {
    /// The vertex, from 0.
    pub vertex: usize,
    /// Where it is, in mm.
    pub at: Point,
    /// The turn in radians, positive to the left.
    pub turn: f64,
}

/// A break of the tangent below 20 degrees is not counted as a corner.
const LEAST_TURN: f64 = 20.0 * PI / 180.0;
/// What noise can fake is a turn of this times sigma over the arm's length: sqrt(6) is one standard deviation, and
/// five of them are not reached by chance among the thousands of vertices of a trace.
const FAKED: f64 = 5.0 * 2.449_489_742_783_178;
/// Each arm is the square root of two times as long as the one before.
const ARMS: usize = 7;
/// A corner must be told from a rounding by this many standard deviations.
const SURE: f64 = 3.0;

/// The corners of a path, in order.
///
/// Of a drawn path: the vertices where its tangents break. Of a trace: the vertices whose turn over two arms of
/// length w exceeds what the noise can fake, 5 sqrt(6) sigma / w, and does not shrink as the arms are halved, where
/// a rounding would lose half of it. Arms of several lengths are tried, from the shortest on which noise leaves a
/// turn of 20 degrees to be seen: some arm must show the corner surely, and no shorter one may deny it. A corner is
/// therefore sure to be seen only where the path runs on for 50 sigma / turn, and two vertices, to both sides.
pub fn corners(path: &ArcSpline, roughness: &Roughness) -> Vec<CornerPlace> {
    if path.is_empty() {
        return Vec::new();
    }
    let drawn = roughness.texture == Texture::Drawn || path.vertices.iter().any(|v| v.bulge != 0.0);
    if drawn { breaks(path) } else { Arms::of(path, roughness.sigma_mm).corners(path) }
}

/// The vertices where the tangents of neighbouring spans differ.
fn breaks(path: &ArcSpline) -> Vec<CornerPlace> {
    let first = usize::from(!path.closed);
    let turn = |i: usize| {
        let before = path.span(if i == 0 { path.len() - 1 } else { i - 1 });
        angle(before.tangent(1.0), path.span(i).tangent(0.0))
    };
    let all = (first..path.len()).map(|i| CornerPlace { vertex: i, at: path.vertices[i].at, turn: turn(i) });
    all.filter(|c| c.turn.abs() >= LEAST_TURN).collect()
}

/// The signed angle from one vector to another; NaN if one has no length.
fn angle(from: Vec2, to: Vec2) -> f64 {
    from.cross(to).atan2(from.dot(to))
}

/// Turns over arms of several lengths at each vertex.
struct Arms {
    /// The length of the longer arms of each pair, in mm.
    lengths: Vec<f64>,
    /// For each length the turn at each vertex, NaN where an open path is too short.
    turns: Vec<Vec<f64>>,
    /// The place of each vertex along the path in mm.
    along: Vec<f64>,
    sigma: f64,
}

/// The place of each vertex along the path in mm, the end of the last span included, and the median step between them.
fn stations(path: &ArcSpline) -> (Vec<f64>, f64) {
    let mut steps: Vec<f64> = path.spans().map(|s| s.length()).collect();
    let mut along = Vec::with_capacity(steps.len() + 1);
    along.push(0.0);
    for (i, step) in steps.iter().enumerate() {
        along.push(along[i] + step);
    }
    let middle = steps.len() / 2;
    (along, *steps.select_nth_unstable_by(middle, f64::total_cmp).1)
}

/// How a trace bends between its corners.
pub(super) struct Bends<'a> {
    path: &'a ArcSpline,
    along: Vec<f64>,
    step: f64,
    sigma: f64,
}

impl<'a> Bends<'a> {
    /// Of a path that has spans.
    pub(super) fn of(path: &'a ArcSpline, sigma: f64) -> Self {
        let (along, step) = stations(path);
        Self { path, along, step, sigma }
    }

    /// The least radius of curvature in mm, as far as noise lets it be seen; `None` where all is straight.
    pub(super) fn smallest_radius(&self, corners: &[CornerPlace]) -> Option<f64> {
        let whole = self.along[self.along.len() - 1];
        let mut arm = 2.0 * self.step;
        while arm < whole / 8.0 {
            let curvature = self.largest_curvature(arm, corners);
            let faked = FAKED * self.sigma / (arm * arm);
            if 4.0 * faked <= curvature {
                return (curvature * whole > 1.0 / SURE).then(|| curvature.recip());
            }
            arm *= 2_f64.sqrt();
        }
        None
    }

    /// The largest turn over an arm's length, away from corners by two arms.
    fn largest_curvature(&self, arm: f64, corners: &[CornerPlace]) -> f64 {
        let whole = self.along[self.along.len() - 1];
        let near = |vertex: usize, corner: &CornerPlace| {
            let apart = (self.along[vertex] - self.along[corner.vertex]).abs();
            let round = if self.path.closed { whole - apart } else { apart };
            apart.min(round) < 2.0 * arm
        };
        let turns = Walker { path: self.path, along: &self.along }.turns(arm);
        let mut next = 0;
        let mut largest = 0.0_f64;
        for (vertex, turn) in turns.iter().enumerate().filter(|(_, turn)| !turn.is_nan()) {
            // Corners are in order: only the one before, the one after, and those across the start can be near.
            while next + 1 < corners.len() && corners[next].vertex < vertex {
                next += 1;
            }
            let around =
                corners[next.saturating_sub(1)..].iter().take(2).chain(corners.first()).chain(corners.last());
            if !around.clone().any(|corner| near(vertex, corner)) {
                largest = largest.max(turn.abs() / arm);
            }
        }
        largest
    }
}

/// What a pair of arms says of a vertex.
#[derive(PartialEq)]
enum Verdict {
    /// A corner, surely.
    Corner,
    /// A rounding or a straight run, surely.
    None,
    /// The noise hides it.
    Open,
}

impl Arms {
    fn of(path: &ArcSpline, sigma: f64) -> Self {
        let (along, step) = stations(path);
        let noisy = FAKED * sigma / LEAST_TURN;
        let shortest = noisy.max(2.0 * step) / 2.0;
        let lengths: Vec<f64> = (0..ARMS).map(|k| shortest * 2_f64.powf(k as f64 / 2.0)).collect();
        let walker = Walker { path, along: &along };
        let turns = lengths.iter().map(|&length| walker.turns(length)).collect();
        Self { lengths, turns, along, sigma }
    }

    /// Short arms first: where they show a corner or deny it, longer ones are not asked, nor where longer ones would
    /// reach over a corner already found.
    fn corners(&self, path: &ArcSpline) -> Vec<CornerPlace> {
        let count = path.vertices.len();
        let mut denied = vec![false; count];
        let mut found: Vec<CornerPlace> = Vec::new();
        for k in 2..ARMS {
            let mut settled = denied.clone();
            for corner in &found {
                self.mark(corner.vertex, self.lengths[k], path.closed, &mut settled);
            }
            let mut shown = Vec::new();
            for vertex in (0..count).filter(|&v| !settled[v]) {
                match self.verdict(k, vertex) {
                    Verdict::Corner => shown.push(vertex),
                    Verdict::None => denied[vertex] = true,
                    Verdict::Open => {}
                }
            }
            for vertex in self.sharpest(k, shown, path.closed) {
                found.push(CornerPlace { vertex, at: path.vertices[vertex].at, turn: self.turns[k][vertex] });
            }
        }
        found.sort_by_key(|c| c.vertex);
        found
    }

    /// What the arms of length `k` and their halves say of a vertex.
    ///
    /// Of a corner the half arms show all of the turn, of a rounding half of it: the middle divides them. The noise of
    /// that comparison comes from five vertices with weights 3, -2, -2, 1/2 and 1/2 over the arm.
    fn verdict(&self, k: usize, vertex: usize) -> Verdict {
        let (turn, half, arm) = (self.turns[k][vertex], self.turns[k - 2][vertex], self.lengths[k]);
        let margin = half.abs() - 0.75 * turn.abs();
        let noise = SURE * 17.5_f64.sqrt() * self.sigma / arm;
        let seen = turn.abs() > LEAST_TURN.max(FAKED * self.sigma / arm) && turn * half > 0.0;
        if margin.is_nan() || margin < -noise {
            Verdict::None
        } else if seen && margin >= noise {
            Verdict::Corner
        } else {
            Verdict::Open
        }
    }

    /// Of the vertices that show a corner, the one with the sharpest turn within half an arm.
    fn sharpest(&self, k: usize, mut shown: Vec<usize>, closed: bool) -> Vec<usize> {
        let sharpness = |v: usize| self.turns[2][v].abs();
        shown.sort_by(|&a, &b| sharpness(b).total_cmp(&sharpness(a)).then(a.cmp(&b)));
        let mut settled = vec![false; self.along.len()];
        shown.retain(|&vertex| {
            let free = !settled[vertex];
            if free {
                self.mark(vertex, 0.5 * self.lengths[k], closed, &mut settled);
            }
            free
        });
        shown
    }

    /// Marks the vertices at most `reach` along the path from one of them.
    fn mark(&self, vertex: usize, reach: f64, closed: bool, marks: &mut [bool]) {
        let spans = self.along.len() - 1;
        let count = if closed { spans } else { spans + 1 };
        let around = if closed { self.along[spans] } else { f64::INFINITY };
        let near = |other: usize| {
            let apart = (self.along[other] - self.along[vertex]).abs();
            apart.min(around - apart) <= reach
        };
        let within = |other: &usize| *other < count && near(*other);
        let forth = (1..count).map(|k| if closed { (vertex + k) % count } else { vertex + k });
        let back =
            (1..count).map(|k| if closed { (vertex + count - k) % count } else { vertex.wrapping_sub(k) });
        marks[vertex] = true;
        for other in forth.take_while(within).chain(back.take_while(within)) {
            marks[other] = true;
        }
    }
}

/// Finds points of a path of lines by their distance along it.
struct Walker<'a> {
    path: &'a ArcSpline,
    along: &'a [f64],
}

impl Walker<'_> {
    /// The turn at each vertex between the chords to the points `arm` before and after it.
    fn turns(&self, arm: f64) -> Vec<f64> {
        let (mut before, mut after) = (0, 0);
        let vertices = self.path.vertices.iter().enumerate();
        vertices
            .map(|(i, vertex)| {
                let back = self.point(self.along[i] - arm, &mut before);
                let forth = self.point(self.along[i] + arm, &mut after);
                match (back, forth) {
                    (Some(back), Some(forth)) => angle(vertex.at - back, forth - vertex.at),
                    _ => f64::NAN,
                }
            })
            .collect()
    }

    /// The point at a distance along the path; around a closed path as often as need be, `None` beyond the ends of
    /// an open one. `span` is where the last search ended; searches run forwards.
    fn point(&self, distance: f64, span: &mut usize) -> Option<Point> {
        let whole = self.along[self.path.len()];
        if !self.path.closed && !(0.0..=whole).contains(&distance) {
            return None;
        }
        let distance = if self.path.closed { distance.rem_euclid(whole) } else { distance };
        if distance < self.along[*span] {
            *span = 0;
        }
        if self.along[*span + 1] < distance && *span + 2 < self.along.len() {
            let rest = &self.along[*span + 1..self.path.len()];
            *span += 1 + steps_to(rest, distance);
        }
        let part = (distance - self.along[*span]) / (self.along[*span + 1] - self.along[*span]);
        Some(self.path.span(*span).at(part))
    }
}

/// How many further spans start at or before `distance`; near ones are found first.
fn steps_to(starts: &[f64], distance: f64) -> usize {
    let mut reach = 1;
    while reach < starts.len() && starts[reach] < distance {
        reach *= 2;
    }
    starts[..reach.min(starts.len())].partition_point(|&s| s <= distance).saturating_sub(1)
}

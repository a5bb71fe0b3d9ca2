//! A path measured by the way along it.

use kurbo::{Point, Vec2};

use crate::geom::{ArcSpline, Span};

use super::profile::Profile;

/// A path with the way at which each of its spans begins. A closed track goes on for ever.
#[derive(Clone, Debug)]
pub(super) struct Track {
    spans: Vec<Span>,
    /// The way at every joint: one more than there are spans.
    joints: Vec<f64>,
    closed: bool,
}

/// A part of a span with the height at its end.
#[derive(Clone, Copy, Debug)]
pub(super) struct Stretch {
    pub(super) span: Span,
    pub(super) z: f64,
}

/// How a heading changes, in radians.
#[derive(Clone, Copy, Debug)]
pub(super) struct Turning {
    /// The sum of all bends along arcs, unsigned.
    pub(super) bend: f64,
    /// The sharpest corner.
    pub(super) sharpest: f64,
}

impl Track {
    pub(super) fn new(path: &ArcSpline) -> Self {
        let spans: Vec<Span> = path.spans().filter(|span| span.length() > 0.0).collect();
        let mut joints = vec![0.0];
        for span in &spans {
            joints.push(joints[joints.len() - 1] + span.length());
        }
        Self { spans, joints, closed: path.closed }
    }

    /// Length in mm; once round for a closed track.
    pub(super) fn length(&self) -> f64 {
        self.joints[self.joints.len() - 1]
    }

    pub(super) fn is_closed(&self) -> bool {
        self.closed
    }

    /// The place after the way `s`.
    pub(super) fn place(&self, s: f64) -> Point {
        let (i, t) = self.locate(s);
        self.spans[i].at(t)
    }

    /// The heading at the start.
    pub(super) fn heading(&self) -> Vec2 {
        self.spans[0].tangent(0.0)
    }

    /// The way of a joint within `reach` mm of `s`, or `s` itself.
    pub(super) fn at_joint(&self, s: f64, reach: f64) -> f64 {
        let lap = self.lap(s);
        let near = self.joints.iter().map(|joint| joint + lap).find(|joint| (joint - s).abs() <= reach);
        near.unwrap_or(s)
    }

    /// The way at which the lap of `s` began.
    fn lap(&self, s: f64) -> f64 {
        if self.closed { (s / self.length()).floor() * self.length() } else { 0.0 }
    }

    /// The span at the way `s`, and the fraction of it.
    fn locate(&self, s: f64) -> (usize, f64) {
        let s = s - self.lap(s);
        let i = self.joints.partition_point(|&joint| joint <= s).clamp(1, self.spans.len()) - 1;
        (i, ((s - self.joints[i]) / (self.joints[i + 1] - self.joints[i])).clamp(0.0, 1.0))
    }

    /// The stretches from the way `from` to the way `to` at the heights of `profile`, cut at joints and breaks. Breaks
    /// within `reach` mm of a joint are taken there.
    pub(super) fn stretches(&self, from: f64, to: f64, profile: &Profile, reach: f64) -> Vec<Stretch> {
        let mut ways = vec![from, to];
        let mut lap = self.lap(from);
        while lap < to {
            ways.extend(self.joints.iter().map(|joint| joint + lap).filter(|&s| s > from && s < to));
            lap += self.length();
            if !self.closed {
                break;
            }
        }
        for s in profile.breaks().filter(|&s| s > from && s < to) {
            if ways.iter().all(|way| (way - s).abs() > reach) {
                ways.push(s);
            }
        }
        ways.sort_by(f64::total_cmp);
        ways.windows(2).filter_map(|pair| self.stretch(pair[0], pair[1], profile)).collect()
    }

    /// The part of one span between two neighbouring ways; none where they are one place but for rounding.
    fn stretch(&self, s0: f64, s1: f64, profile: &Profile) -> Option<Stretch> {
        if s1 - s0 <= 64.0 * f64::EPSILON * self.length() {
            return None;
        }
        let (i, _) = self.locate((s0 + s1) / 2.0);
        let lap = self.lap((s0 + s1) / 2.0);
        let length = self.joints[i + 1] - self.joints[i];
        let fraction = |s: f64| {
            let t = (s - lap - self.joints[i]) / length;
            // Joints are met exactly, whatever lap they are in.
            if (t * length).abs() <= 64.0 * f64::EPSILON * s.abs() {
                0.0
            } else if ((1.0 - t) * length).abs() <= 64.0 * f64::EPSILON * s.abs() {
                1.0
            } else {
                t
            }
        };
        Some(Stretch { span: self.spans[i].part(fraction(s0), fraction(s1)), z: profile.at(s1) })
    }

    /// How the heading changes between two ways.
    pub(super) fn turning(&self, from: f64, to: f64) -> Turning {
        let parts = self.stretches(from, to, &Profile::level(0.0), 0.0);
        let bend: f64 = parts.iter().map(|part| part.span.sweep().abs()).sum();
        let turn = |pair: &[Stretch]| {
            let (a, b) = (pair[0].span.tangent(1.0), pair[1].span.tangent(0.0));
            a.cross(b).atan2(a.dot(b)).abs()
        };
        Turning { bend, sharpest: parts.windows(2).map(turn).fold(0.0, f64::max) }
    }

    /// The same open track walked the other way.
    pub(super) fn reversed(&self) -> Self {
        let spans: Vec<Span> = self.spans.iter().rev().map(Span::reversed).collect();
        Self::new(&ArcSpline::from_spans(&spans, self.closed))
    }

    /// The way of the place on the track that is nearest to `p`.
    pub(super) fn way_of(&self, p: Point) -> f64 {
        let near = self.spans.iter().map(|span| span.nearest(p)).enumerate();
        let best = near.min_by(|a, b| a.1.distance.total_cmp(&b.1.distance));
        best.map_or(0.0, |(i, near)| self.joints[i] + near.t * (self.joints[i + 1] - self.joints[i]))
    }
}

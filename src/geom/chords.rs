//! Chains of chords: lines and arcs replaced by straight pieces within a stated sagitta.

use std::f64::consts::PI;

use kurbo::Point;

use super::{ArcSpline, Span};

/// A polyline inscribed in a chain of lines and arcs.
///
/// An arc of at most half a turn is within its sagitta of its chord in the Fréchet sense: projecting the arc on the
/// chord is monotone and moves no point further than that.
#[derive(Clone, Debug)]
pub(super) struct Chords {
    /// The corners in order, none equal to the one before it; a closed chain's first is not repeated.
    pub(super) points: Vec<Point>,
    /// True when the last corner is joined to the first.
    pub(super) closed: bool,
    /// The largest sagitta of any arc piece, in mm: the most that the chain is from the polyline.
    pub(super) sagitta: f64,
}

impl Chords {
    /// The polyline inscribed in `chain`, no piece of an arc higher than `sagitta` mm above its chord.
    pub(super) fn new(chain: &ArcSpline, sagitta: f64) -> Self {
        let mut chords =
            Self { points: Vec::with_capacity(chain.vertices.len()), closed: chain.closed, sagitta: 0.0 };
        for span in chain.spans() {
            chords.push(span.start);
            chords.cut_arc(span, sagitta);
        }
        match chain.vertices.last() {
            Some(last) if !chain.closed || chain.is_empty() => chords.push(last.at),
            _ => {}
        }
        while chords.closed && chords.points.len() > 1 && chords.points.first() == chords.points.last() {
            chords.points.pop();
        }
        chords
    }

    fn push(&mut self, p: Point) {
        if self.points.last() != Some(&p) {
            self.points.push(p);
        }
    }

    /// The corners inside an arc; its ends are pushed by the caller.
    fn cut_arc(&mut self, span: Span, sagitta: f64) {
        if span.sagitta() <= sagitta && span.bulge.abs() <= 1.0 {
            self.sagitta = self.sagitta.max(span.sagitta());
            return;
        }
        let radius = span.radius();
        let sweep = span.sweep().abs();
        let step = (2.0 * (1.0 - sagitta / radius).max(-1.0).acos()).min(PI);
        let pieces = (sweep / step).ceil();
        let quarter = (sweep / pieces / 4.0).sin();
        self.sagitta = self.sagitta.max(2.0 * radius * quarter * quarter);
        for k in 1..pieces as usize {
            self.push(span.at(k as f64 / pieces));
        }
    }

    /// The corners from first to last, a closed chain's first repeated; at least two.
    pub(super) fn lap(&self) -> Vec<Point> {
        let mut lap = self.points.clone();
        if self.closed || lap.len() == 1 {
            lap.push(self.points[0]);
        }
        lap
    }

    /// The straight pieces, as pairs of ends.
    pub(super) fn pieces(&self) -> impl Iterator<Item = (Point, Point)> + '_ {
        let closing = self.closed.then(|| self.points[0]);
        let ends = self.points[1..].iter().copied().chain(closing);
        self.points.iter().copied().zip(ends)
    }
}

/// A closed lap, its first corner repeated, started at the place `at` of its piece `piece` instead.
pub(super) fn reopened(lap: &[Point], piece: usize, at: Point) -> Vec<Point> {
    let mut open = Vec::with_capacity(lap.len() + 1);
    open.push(at);
    open.extend(&lap[piece + 1..]);
    open.extend(&lap[1..=piece]);
    open.dedup();
    open.push(at);
    open
}

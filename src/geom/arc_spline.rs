//! A chain of lines and arcs, continuous by construction.

use kurbo::{Affine, Point, Rect};

use super::Span;

/// A vertex of an arc spline with the bulge of the span that leaves it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Vertex {
    /// The place, in mm.
    pub at: Point,
    /// tan(sweep/4) of the span to the next vertex; 0 for a line.
    pub bulge: f64,
}

/// A chain of lines and arcs. A closed chain runs from its last vertex back to its first, which is not repeated; in
/// an open chain the last vertex's bulge is 0 and means nothing.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ArcSpline {
    /// The vertices in order.
    pub vertices: Vec<Vertex>,
    /// True when the last vertex is joined to the first.
    pub closed: bool,
}

impl ArcSpline {
    /// The chain of straight spans through `points`.
    pub fn polyline(points: impl IntoIterator<Item = Point>, closed: bool) -> Self {
        let vertices = points.into_iter().map(|at| Vertex { at, bulge: 0.0 }).collect();
        Self { vertices, closed }
    }

    /// The chain of `spans`, each of which starts where the one before it ends. A closed chain's last span ends at
    /// the first one's start.
    pub fn from_spans(spans: &[Span], closed: bool) -> Self {
        let mut vertices: Vec<Vertex> =
            spans.iter().map(|s| Vertex { at: s.start, bulge: s.bulge }).collect();
        if let (false, Some(last)) = (closed, spans.last()) {
            vertices.push(Vertex { at: last.end, bulge: 0.0 });
        }
        Self { vertices, closed }
    }

    /// How many spans the chain has.
    pub fn len(&self) -> usize {
        if self.closed { self.vertices.len() } else { self.vertices.len().saturating_sub(1) }
    }

    /// True when the chain has no span.
    pub fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// Span `i`, counted from 0.
    ///
    /// # Panics
    /// When `i` is not below [`len`](Self::len).
    pub fn span(&self, i: usize) -> Span {
        let from = self.vertices[i];
        let next = if i + 1 == self.vertices.len() { 0 } else { i + 1 };
        Span { start: from.at, end: self.vertices[next].at, bulge: from.bulge }
    }

    /// The spans in order.
    pub fn spans(&self) -> impl ExactSizeIterator<Item = Span> + DoubleEndedIterator + Clone + '_ {
        (0..self.len()).map(|i| self.span(i))
    }

    /// Length in mm.
    pub fn length(&self) -> f64 {
        self.spans().map(|s| s.length()).sum()
    }

    /// Signed area in mm2, positive counter-clockwise; an open chain is closed by its chord.
    pub fn area(&self) -> f64 {
        let closing = match (self.closed, self.vertices.first(), self.vertices.last()) {
            (false, Some(first), Some(last)) => Span::line(last.at, first.at).double_area(),
            _ => 0.0,
        };
        (self.spans().map(|s| s.double_area()).sum::<f64>() + closing) / 2.0
    }

    /// The smallest upright box around the chain; `None` for a chain without vertices.
    pub fn bbox(&self) -> Option<Rect> {
        let first = self.vertices.first()?.at;
        let start = Rect::from_points(first, first);
        Some(self.spans().fold(start, |bbox, span| bbox.union(span.bbox())))
    }

    /// The turn at the start of span `i`, in radians, positive counter-clockwise; `None` at the start of an open chain.
    pub fn turn(&self, i: usize) -> Option<f64> {
        let before = match i {
            0 if self.closed => self.len() - 1,
            0 => return None,
            _ => i - 1,
        };
        let (a, b) = (self.span(before).tangent(1.0), self.span(i).tangent(0.0));
        Some(a.cross(b).atan2(a.dot(b)))
    }

    /// The vertices at which the tangent breaks by more than rounding coordinates to `place` mm explains, as indices.
    ///
    /// Moving both ends of a chord by half a place each way turns a line by `place / chord` and the tangent of an
    /// arc, whose centre is rounded too, by twice that.
    pub fn corners(&self, place: f64) -> impl Iterator<Item = usize> + '_ {
        (0..self.len()).filter(move |&i| {
            let before = self.span(if i == 0 { self.len() - 1 } else { i - 1 }).chord().hypot();
            let explained = 2.0 * place * (before.recip() + self.span(i).chord().hypot().recip());
            self.turn(i).is_some_and(|turn| turn.abs() > explained)
        })
    }

    /// The same chain walked the other way.
    pub fn reversed(&self) -> Self {
        let spans: Vec<Span> = self.spans().rev().map(|s| s.reversed()).collect();
        if spans.is_empty() { self.clone() } else { Self::from_spans(&spans, self.closed) }
    }

    /// A closed chain started at vertex `first` instead.
    pub fn started_at(&self, first: usize) -> Self {
        let mut turned = self.clone();
        turned.vertices.rotate_left(first);
        turned
    }

    /// The image under a similarity (equal scale both ways, mirroring allowed).
    pub fn transformed(&self, similarity: Affine) -> Self {
        let sign = similarity.determinant().signum();
        let image = |v: &Vertex| Vertex { at: similarity * v.at, bulge: v.bulge * sign };
        Self { vertices: self.vertices.iter().map(image).collect(), closed: self.closed }
    }
}

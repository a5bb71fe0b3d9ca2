//! Places along a chain, and the parts between them.

use super::{ArcSpline, Span};

/// A place on a chain: a span and a fraction of its length.
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd)]
pub struct Along {
    /// The span, counted from 0.
    pub span: usize,
    /// The fraction of its length, 0 to 1.
    pub t: f64,
}

impl ArcSpline {
    /// The open chain from one place to another, forward; a closed chain is walked over its start where `to` lies
    /// before `from`, an open one gives its end then. A chain between equal places is a point.
    ///
    /// # Panics
    /// When a place's span is not below [`len`](ArcSpline::len).
    pub fn part(&self, from: Along, to: Along) -> Self {
        if from.span == to.span && from.t <= to.t {
            return Self::from_spans(&[self.span(from.span).part(from.t, to.t)], false);
        }
        let end = if to < from && self.closed { to.span + self.len() } else { to.span.max(from.span) };
        let mut spans: Vec<Span> = vec![self.span(from.span).part(from.t, 1.0)];
        spans.extend((from.span + 1..end).map(|i| self.span(i % self.len())));
        if to < from && !self.closed {
            return Self::from_spans(&spans, false);
        }
        spans.push(self.span(to.span).part(0.0, to.t));
        Self::from_spans(&spans, false)
    }
}

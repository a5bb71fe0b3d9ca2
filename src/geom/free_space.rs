//! Whether two polylines are within a distance of each other in the Fréchet sense, decided exactly.
//!
//! The free-space method of Alt and Godau 1995: for a piece of each polyline the pairs of places within the distance
//! form a convex set, so that reachability passes from cell to cell through intervals on the cells' sides. Only
//! cells that can be reached are visited.

use kurbo::Point;

/// What the decision came to.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Reach {
    /// The Fréchet distance is at most the one asked for.
    Within,
    /// It is larger; nothing beyond this corner of the contour could be reached.
    Stuck(Point),
    /// The work allowed ran out first.
    Unknown,
}

/// An interval of a piece, in fractions of it; empty when `from > to`.
#[derive(Clone, Copy)]
struct Interval {
    from: f64,
    to: f64,
}

impl Interval {
    const EMPTY: Self = Self { from: 1.0, to: 0.0 };

    fn is_empty(self) -> bool {
        self.from > self.to
    }

    fn not_before(self, from: f64) -> Self {
        Self { from: self.from.max(from), to: self.to }
    }

    /// The part of the piece from `a` to `b` within the distance of `p`, whose square is given.
    fn free(p: Point, a: Point, b: Point, squared: f64) -> Self {
        let along = b - a;
        let to = p - a;
        let length2 = along.hypot2();
        let cross = to.cross(along);
        let spread2 = squared * length2 - cross * cross;
        if length2 == 0.0 {
            return if to.hypot2() <= squared { Self { from: 0.0, to: 1.0 } } else { Self::EMPTY };
        }
        if spread2 < 0.0 {
            return Self::EMPTY;
        }
        let (middle, spread) = (to.dot(along), spread2.sqrt());
        if middle + spread < 0.0 || middle - spread > length2 {
            return Self::EMPTY;
        }
        Self { from: ((middle - spread) / length2).max(0.0), to: ((middle + spread) / length2).min(1.0) }
    }
}

/// A reachable interval of the contour's piece `piece`, beside a corner of the path.
#[derive(Clone, Copy)]
struct Entry {
    piece: usize,
    at: Interval,
}

/// Decides whether two polylines of at least two corners, both walked from first to last, are within `distance`;
/// at most `budget` cells are visited.
pub(super) fn within(path: &[Point], contour: &[Point], distance: f64, budget: usize) -> Reach {
    let mut row = Row { contour, squared: distance * distance, budget, furthest: 0 };
    if path[0].distance_squared(contour[0]) > row.squared {
        return Reach::Stuck(contour[0]);
    }
    let mut entries = row.first(path[0]);
    let mut next = Vec::new();
    for piece in path.windows(2) {
        row.cross(piece[0], piece[1], &entries, &mut next);
        if row.budget == 0 {
            return Reach::Unknown;
        }
        if next.is_empty() {
            return Reach::Stuck(contour[row.furthest]);
        }
        std::mem::swap(&mut entries, &mut next);
    }
    let last = contour.len() - 2;
    match entries.last() {
        Some(entry) if entry.piece == last && entry.at.to >= 1.0 => Reach::Within,
        _ => Reach::Stuck(contour[row.furthest]),
    }
}

/// One row of cells: one piece of the path beside the whole contour.
struct Row<'a> {
    contour: &'a [Point],
    squared: f64,
    budget: usize,
    furthest: usize,
}

impl Row<'_> {
    /// What can be reached on the contour while the path stays at its first corner.
    fn first(&mut self, corner: Point) -> Vec<Entry> {
        let mut entries = Vec::new();
        for (piece, ends) in self.contour.windows(2).enumerate() {
            let at = Interval::free(corner, ends[0], ends[1], self.squared);
            if at.is_empty() || at.from > 0.0 {
                break;
            }
            entries.push(Entry { piece, at });
            if at.to < 1.0 {
                break;
            }
        }
        entries
    }

    /// Carries the reachable intervals beside the path's corner `a` over its piece to `b`.
    fn cross(&mut self, a: Point, b: Point, entries: &[Entry], next: &mut Vec<Entry>) {
        next.clear();
        let mut waiting = entries.iter().peekable();
        let mut left = match entries.first() {
            Some(entry) if entry.piece == 0 && entry.at.from <= 0.0 => {
                Interval::free(self.contour[0], a, b, self.squared)
            }
            _ => Interval::EMPTY,
        };
        let mut piece = 0;
        while self.budget > 0 {
            if left.is_empty() {
                let Some(entry) = waiting.peek() else { break };
                piece = entry.piece;
            }
            if piece + 1 >= self.contour.len() {
                break;
            }
            let bottom = waiting.next_if(|entry| entry.piece == piece).map_or(Interval::EMPTY, |e| e.at);
            let (from, to) = (self.contour[piece], self.contour[piece + 1]);
            let top = Interval::free(b, from, to, self.squared);
            let right = Interval::free(to, a, b, self.squared);
            let top = if left.is_empty() { top.not_before(bottom.from) } else { top };
            left = if bottom.is_empty() { right.not_before(left.from) } else { right };
            if !top.is_empty() {
                next.push(Entry { piece, at: top });
            }
            piece += 1;
            self.furthest = self.furthest.max(piece);
            self.budget -= 1;
        }
    }
}

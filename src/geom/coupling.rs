//! Two polylines walked together from end to end: a quick upper bound of their Fréchet distance.
//!
//! Every corner of the contour is matched to its foot on the path, found by walking forward, and the feet are made
//! monotone; every corner of the path is then matched to a place on the piece of contour that runs beside it.
//! Between two matched pairs both polylines are straight, so that their distance is convex and largest at a pair:
//! the largest distance of any pair bounds the Fréchet distance from above.

use kurbo::Point;

/// The place on a straight piece that is nearest to a point.
#[derive(Clone, Copy, Debug)]
pub(super) struct Foot {
    /// Fraction of the piece, 0 to 1.
    pub(super) t: f64,
    /// The square of the distance.
    pub(super) squared: f64,
}

/// The foot of `p` on the piece from `a` to `b`.
pub(super) fn foot(p: Point, a: Point, b: Point) -> Foot {
    let along = b - a;
    let t = (p - a).dot(along) / along.hypot2();
    let t = if t.is_nan() { 0.0 } else { t.clamp(0.0, 1.0) };
    Foot { t, squared: (a + along * t - p).hypot2() }
}

/// The distance from `p` to a polyline.
pub(super) fn nearest(p: Point, polyline: &[Point]) -> f64 {
    polyline.windows(2).map(|ends| foot(p, ends[0], ends[1]).squared).fold(f64::INFINITY, f64::min).sqrt()
}

/// A place to cut two closed chains open.
#[derive(Clone, Copy, Debug)]
pub(super) struct Cut {
    /// The contour's corner.
    pub(super) corner: usize,
    /// The path's piece that holds its foot.
    pub(super) piece: usize,
    /// The foot itself.
    pub(super) foot: Point,
}

/// What walking two polylines together gave.
#[derive(Clone, Copy, Debug)]
pub(super) struct Coupling {
    /// The largest distance of a matched pair, in mm.
    pub(super) mm: f64,
    /// Where on the contour that pair stands.
    pub(super) at: Point,
    /// The corner that is furthest from the other chain, as far as the walk saw.
    pub(super) outlier: Outlier,
}

/// A corner and the chain it belongs to.
#[derive(Clone, Copy, Debug)]
pub(super) enum Outlier {
    /// A corner of the path.
    OfPath(Point),
    /// A corner of the contour.
    OfContour(Point),
}

/// A pair of polylines on the way to being coupled.
pub(super) struct Walk<'a> {
    path: &'a [Point],
    contour: &'a [Point],
    /// For each corner of the contour its place on the path: the piece's number plus the fraction along it.
    feet: Vec<f64>,
    monotone: bool,
    /// The corner of the contour that is furthest from its foot, and the square of that distance.
    outlier: (Point, f64),
}

impl<'a> Walk<'a> {
    /// Walks along the path beside the contour; both have at least two corners.
    pub(super) fn new(path: &'a [Point], contour: &'a [Point]) -> Self {
        let outlier = (contour[0], 0.0);
        let mut walk =
            Self { path, contour, feet: Vec::with_capacity(contour.len()), monotone: true, outlier };
        walk.find_feet();
        walk
    }

    fn find_feet(&mut self) {
        let mut place = Place { piece: 0, t: 0.0, distance: self.path[0].distance(self.contour[0]) };
        let mut budget = 32 * (self.path.len() + self.contour.len());
        for &corner in self.contour {
            let before = place.piece as f64 + place.t;
            place = place.follow(self.path, corner, &mut budget);
            let here = place.piece as f64 + place.t;
            self.monotone &= here >= before;
            self.feet.push(here);
            if place.distance > self.outlier.1 {
                self.outlier = (corner, place.distance);
            }
        }
    }

    /// Where closed chains are best cut open: a corner of the contour with all earlier feet before its foot and all
    /// later ones behind, so that an optimal walk has little reason to match it elsewhere. Of several, the nearest.
    pub(super) fn cut(&self) -> Option<Cut> {
        let minima = suffix_minima(&self.feet);
        let mut furthest = 0.0_f64;
        let mut best = None;
        let mut least = f64::INFINITY;
        for (k, (&here, &next)) in self.feet.iter().zip(&minima).enumerate() {
            let in_order = here >= furthest && here <= next && k > 0 && k + 1 < self.feet.len();
            furthest = furthest.max(here);
            let foot = self.on_path(here);
            let squared = foot.distance_squared(self.contour[k]);
            if in_order && squared < least {
                least = squared;
                best = Some(Cut { corner: k, piece: self.piece(here), foot });
            }
        }
        best
    }

    /// The piece of the path that holds a place.
    fn piece(&self, place: f64) -> usize {
        (place as usize).min(self.path.len() - 2)
    }

    fn on_path(&self, place: f64) -> Point {
        let piece = self.piece(place);
        self.path[piece].lerp(self.path[piece + 1], place - piece as f64)
    }

    /// Matches the ends with the ends and every corner between in order; the feet are moved as little as that needs.
    pub(super) fn couple(mut self) -> Coupling {
        self.make_monotone();
        let last = self.feet.len() - 1;
        self.feet[0] = 0.0;
        self.feet[last] = (self.path.len() - 1) as f64;
        let mut worst = Worst { squared: -1.0, at: self.contour[0] };
        let mut path_outlier = (self.path[0], 0.0);
        worst.note(self.path[0], self.contour[0]);
        for k in 0..last {
            self.couple_piece(k, &mut worst, &mut path_outlier);
            worst.note(self.on_path(self.feet[k + 1]), self.contour[k + 1]);
        }
        let (corner, distance) = self.outlier;
        let outlier = if path_outlier.1 > distance * distance {
            Outlier::OfPath(path_outlier.0)
        } else {
            Outlier::OfContour(corner)
        };
        Coupling { mm: worst.squared.sqrt(), at: worst.at, outlier }
    }

    /// Isotonic regression in the largest norm: half way between the running maximum from the front and the running
    /// minimum from the back.
    fn make_monotone(&mut self) {
        if self.monotone {
            return;
        }
        let minima = suffix_minima(&self.feet);
        let mut furthest = 0.0_f64;
        for (place, least) in self.feet.iter_mut().zip(minima) {
            furthest = furthest.max(*place);
            *place = furthest.midpoint(least);
        }
    }

    /// Matches the path's corners beside the contour's piece `k` to places on it, in order.
    fn couple_piece(&self, k: usize, worst: &mut Worst, outlier: &mut (Point, f64)) {
        let (a, b) = (self.contour[k], self.contour[k + 1]);
        let first = self.feet[k] as usize + 1;
        let end = self.feet[k + 1].ceil() as usize;
        let mut reached = 0.0_f64;
        for &corner in self.path.get(first..end).unwrap_or(&[]) {
            let raw = foot(corner, a, b);
            reached = reached.max(raw.t);
            worst.note(corner, a.lerp(b, reached));
            if raw.squared > outlier.1 {
                *outlier = (corner, raw.squared);
            }
        }
    }
}

/// For each place the least of it and all later ones.
fn suffix_minima(feet: &[f64]) -> Vec<f64> {
    let mut minima = feet.to_vec();
    for k in (1..minima.len()).rev() {
        minima[k - 1] = minima[k - 1].min(minima[k]);
    }
    minima
}

/// The worst pair so far.
struct Worst {
    squared: f64,
    at: Point,
}

impl Worst {
    fn note(&mut self, on_path: Point, on_contour: Point) {
        let squared = on_path.distance_squared(on_contour);
        if squared > self.squared {
            *self = Self { squared, at: on_contour };
        }
    }
}

/// Where the walk stands on the path, and how far that is from the contour's corner.
#[derive(Clone, Copy)]
struct Place {
    piece: usize,
    t: f64,
    distance: f64,
}

impl Place {
    /// The foot of the contour's next `corner`, searched forward and backward from here while the path stays near:
    /// within twice the best distance found plus the one before. Passes of the path that are nearer but far along it
    /// are so left alone. With the budget spent, only a path that comes nearer is followed, which keeps the walk linear.
    fn follow(self, path: &[Point], corner: Point, budget: &mut usize) -> Self {
        let start = foot(corner, path[self.piece], path[self.piece + 1]);
        let mut best = Self { piece: self.piece, t: start.t, distance: start.squared.sqrt() };
        let generous = *budget > 0;
        let reach = |best: f64| if generous { 2.0 * best + self.distance } else { best };
        let mut limit = reach(best.distance);
        let mut tried = 1;
        for piece in self.piece + 1..path.len() - 1 {
            if path[piece].distance_squared(corner) > limit * limit {
                break;
            }
            if best.improve(path, piece, corner) {
                limit = reach(best.distance);
            }
            tried += 1;
        }
        for piece in (0..self.piece).rev() {
            if path[piece + 1].distance_squared(corner) > limit * limit {
                break;
            }
            if best.improve(path, piece, corner) {
                limit = reach(best.distance);
            }
            tried += 1;
        }
        *budget = budget.saturating_sub(tried);
        best
    }

    fn improve(&mut self, path: &[Point], piece: usize, corner: Point) -> bool {
        let found = foot(corner, path[piece], path[piece + 1]);
        let better = found.squared < self.distance * self.distance;
        if better {
            *self = Self { piece, t: found.t, distance: found.squared.sqrt() };
        }
        better
    }
}

//! How jagged a trace is of itself, and the tolerance it therefore supports.

use std::f64::consts::FRAC_PI_4;

use kurbo::{Point, Vec2};
use rayon::prelude::*;

use crate::geom::ArcSpline;
use crate::sketch::Contour;

/// What the jaggedness of a trace is.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Texture {
    /// Too few straight pieces in a row to be a trace: the vertices are meant.
    Drawn,
    /// What small turns there are belong to the shape, as far as can be told.
    Shape,
    /// Noise, independent from vertex to vertex.
    Noise,
    /// The steps of a picture's pixels.
    Steps {
        /// The edge of a pixel in mm.
        pixel_mm: f64,
        /// True where the steps also run along diagonals, from pixel centre to pixel centre.
        diagonal: bool,
    },
}

/// The estimated jaggedness of a trace.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Roughness {
    /// The standard deviation of the vertices across the path, in mm; 0 when none can be told from the shape. Of
    /// pixel steps, that of a value rounded to whole pixels, 1/sqrt(12) of a pixel.
    pub sigma_mm: f64,
    /// What it is.
    pub texture: Texture,
}

/// The least tolerance at which a trace's own jaggedness is not cut, with the reason.
#[derive(Clone, Debug, PartialEq)]
pub struct Support {
    /// The tolerance in mm; 0 when the trace gives no reason for one.
    pub mm: f64,
    /// Why, in words without a full stop.
    pub reason: String,
}

/// Noise below half the third decimal is the rounding of the file.
const ROUNDING_MM: f64 = 0.0005;
/// Fewer windows than this say nothing about chance.
const FEWEST: usize = 48;
/// Windows are taken from this many stretches of a long trace...
const STRETCHES: usize = 32;
/// ...each of this many windows, so that a trace of a million vertices takes no longer than one of ten thousand.
const STRETCH: usize = 512;

/// Fourth-difference weights for even spacing; their squares add up to 70.
const EVEN: [f64; 5] = [1.0, -4.0, 6.0, -4.0, 1.0];

/// Estimates the jaggedness of a trace.
///
/// The standard deviation comes from fourth differences across the chord of five vertices, by their median
/// absolute value, so that up to half of the windows may hold corners. Both even spacing and the spacing found are
/// tried and the smaller estimate kept, as each is too large where its spacing is wrong. It is believed only when the
/// differences look like independent normal noise: their quartiles, and the correlation of neighbours, which is
/// -0.8 for noise and weaker for real shapes. Steps of pixels are recognised before that.
pub fn roughness(path: &ArcSpline) -> Roughness {
    let windows = Windows::of(path);
    if windows.count() < FEWEST {
        return Roughness { sigma_mm: 0.0, texture: Texture::Drawn };
    }
    if let Some((pixel_mm, diagonal)) = steps(path) {
        return Roughness {
            sigma_mm: pixel_mm / 12_f64.sqrt(),
            texture: Texture::Steps { pixel_mm, diagonal },
        };
    }
    let even = Differences::of(&windows, |_| EVEN);
    let found = Differences::of(&windows, divided);
    // Noise that is large beside the spacing spoils the spacing found, and then the even one is the better guess.
    let spoilt = 10.0 * even.sigma() > windows.spacing();
    let sigma_mm = if spoilt { even.sigma() } else { even.sigma().min(found.sigma()) };
    if even.look_like_noise() && sigma_mm > ROUNDING_MM {
        Roughness { sigma_mm, texture: Texture::Noise }
    } else {
        Roughness { sigma_mm: 0.0, texture: Texture::Shape }
    }
}

impl Roughness {
    /// The tolerance that the trace supports: four standard deviations of noise; 0.7 of a pixel where the steps run
    /// along pixel edges, half a pixel where they run from centre to centre (the most that a digital line is off
    /// its true line).
    pub fn support(&self) -> Support {
        match self.texture {
            Texture::Steps { pixel_mm, diagonal } => {
                let mm = two_places_up(if diagonal { 0.5 } else { 0.7 } * pixel_mm);
                let reason =
                    format!("steps of a {pixel_mm:.2} mm pixel; below {mm} mm the cut follows the steps");
                Support { mm, reason }
            }
            Texture::Noise => {
                let mm = two_places_up(4.0 * self.sigma_mm);
                let sigma = self.sigma_mm;
                Support {
                    mm,
                    reason: format!("noise of {sigma:.3} mm; below {mm} mm the cut follows the noise"),
                }
            }
            Texture::Shape => Support { mm: 0.0, reason: "no noise or pixel steps found".into() },
            Texture::Drawn => {
                Support { mm: 0.0, reason: "drawn, not traced: too few vertices to be rough".into() }
            }
        }
    }
}

/// The tolerance that all of the contours support: the largest of their own.
pub fn support(contours: &[Contour]) -> Support {
    let all: Vec<Support> = contours.par_iter().map(|c| roughness(&c.path).support()).collect();
    Support::largest(&all)
}

impl Support {
    /// The one of the largest tolerance.
    pub fn largest<'a>(all: impl IntoIterator<Item = &'a Self>) -> Self {
        let none = Self { mm: 0.0, reason: "no noise or pixel steps found".into() };
        all.into_iter().fold(&none, |most, own| if own.mm > most.mm { own } else { most }).clone()
    }
}

/// `mm` rounded up to the second decimal; what exceeds that by less than a nanometre does not count.
fn two_places_up(mm: f64) -> f64 {
    ((mm * 1e6).round() / 1e4).ceil() / 100.0
}

/// Runs of five vertices joined by lines.
struct Windows<'a> {
    path: &'a ArcSpline,
    /// The first vertices of the windows, in stretches of neighbours.
    stretches: Vec<std::ops::Range<usize>>,
}

impl<'a> Windows<'a> {
    fn of(path: &'a ArcSpline) -> Self {
        let starts = if path.closed { path.len() } else { (path.len() + 1).saturating_sub(4) };
        let stretches = if starts <= STRETCHES * STRETCH {
            std::iter::once(0..starts).collect()
        } else {
            (0..STRETCHES)
                .map(|k| k * (starts - STRETCH) / (STRETCHES - 1))
                .map(|at| at..at + STRETCH)
                .collect()
        };
        Self { path, stretches }
    }

    /// How many there are in all, whether of lines or arcs: none in a short path.
    fn count(&self) -> usize {
        if self.path.vertices.len() < 5 { 0 } else { self.stretches.iter().map(|s| s.len()).sum() }
    }

    /// The median length of the first span of a window.
    fn spacing(&self) -> f64 {
        let mut lengths: Vec<f64> =
            self.stretches.iter().cloned().flatten().map(|start| self.path.span(start).length()).collect();
        let middle = lengths.len() / 2;
        *lengths.select_nth_unstable_by(middle, f64::total_cmp).1
    }

    /// The five vertices from `start`; none if an arc is among their spans.
    fn get(&self, start: usize) -> Option<[Point; 5]> {
        let all = &self.path.vertices;
        let vertex = |k: usize| all[(start + k) % all.len()];
        let straight = (0..4).all(|k| vertex(k).bulge == 0.0);
        straight.then(|| [0, 1, 2, 3, 4].map(|k| vertex(k).at))
    }
}

/// Weights of the fourth divided difference by chord length.
fn divided(window: [Point; 5]) -> [f64; 5] {
    let mut along = [0.0; 5];
    for k in 1..5 {
        along[k] = along[k - 1] + window[k].distance(window[k - 1]);
    }
    [0, 1, 2, 3, 4].map(|j: usize| {
        let others = (0..5).filter(|&k| k != j);
        others.map(|k| along[j] - along[k]).product::<f64>().recip()
    })
}

/// Fourth differences across the chord, scaled so that noise of deviation sigma gives differences of deviation
/// sigma.
struct Differences {
    signed: Vec<f64>,
    /// The quartiles of the absolute values.
    quartiles: [f64; 3],
}

impl Differences {
    fn of(windows: &Windows, weights: impl Fn([Point; 5]) -> [f64; 5]) -> Self {
        let starts = windows.stretches.iter().cloned().flatten();
        let all = starts.filter_map(|start| windows.get(start));
        let signed: Vec<f64> = all.map(|w| across(w, weights(w))).filter(|d| d.is_finite()).collect();
        let mut sizes: Vec<f64> = signed.iter().map(|d| d.abs()).collect();
        sizes.sort_unstable_by(f64::total_cmp);
        let quartile = |k: usize| sizes.get(sizes.len() * k / 4).copied().unwrap_or(0.0);
        let quartiles = [quartile(1), quartile(2), quartile(3)];
        Self { signed, quartiles }
    }

    /// The standard deviation by the median: 1.4826 times it for a normal distribution.
    fn sigma(&self) -> f64 {
        1.4826 * self.quartiles[1]
    }

    /// True when the differences are those of independent normal noise, as far as can be told.
    ///
    /// Normal quartiles stand as 0.47 : 1 : 1.71, and neighbouring fourth differences of independent values correlate
    /// by -56/70. The bounds allow for chance in a few dozen windows and for corners in a few of them.
    fn look_like_noise(&self) -> bool {
        let [low, middle, high] = self.quartiles;
        let clip = |d: f64| d.clamp(-4.0 * middle, 4.0 * middle);
        let products: f64 = self.signed.windows(2).map(|d| clip(d[0]) * clip(d[1])).sum();
        let squares: f64 = self.signed.iter().map(|&d| clip(d) * clip(d)).sum();
        self.signed.len() >= FEWEST
            && (0.30..0.62).contains(&(low / middle))
            && (1.35..2.2).contains(&(high / middle))
            && products < -0.65 * squares
    }
}

/// The weighted sum of the window's points, across its chord.
fn across(window: [Point; 5], weights: [f64; 5]) -> f64 {
    let sum: Vec2 = window.iter().zip(weights).map(|(p, w)| (*p - window[2]) * w).sum();
    let size = weights.iter().map(|w| w * w).sum::<f64>().sqrt();
    (window[4] - window[0]).normalize().cross(sum) / size
}

/// Nineteen in twenty edges must run along the grid of pixels.
const ON_GRID: f64 = 0.95;
/// A staircase turns at least this often to each side...
const TURNS: usize = 10;
/// ...and its pixel is at most this part of the contour's box: larger steps are taken as meant.
const PIXEL_SHARE: f64 = 1.0 / 40.0;

/// The pixel of a staircase in mm, and whether its steps run along diagonals too; `None` for any other path.
fn steps(path: &ArcSpline) -> Option<(f64, bool)> {
    if path.vertices.iter().any(|v| v.bulge != 0.0) {
        return None;
    }
    let frame = grid_direction(path);
    let edges: Vec<Vec2> = path.spans().map(|s| in_frame(s.chord(), frame)).collect();
    let pixel = pixel(&edges)?;
    let size = path.bbox().map_or(0.0, |b| b.width().hypot(b.height()));
    let turns = |side: f64| edges.windows(2).filter(|e| e[0].cross(e[1]) * side > 0.0).count();
    let on_grid = edges.iter().filter(|e| on_grid(**e, pixel)).count() as f64;
    let holds = on_grid >= ON_GRID * edges.len() as f64
        && turns(1.0).min(turns(-1.0)) >= TURNS
        && pixel <= PIXEL_SHARE * size;
    let diagonals = edges.iter().filter(|e| e.x.abs().min(e.y.abs()) > 0.5 * pixel).count();
    holds.then_some((pixel, 20 * diagonals > edges.len()))
}

/// The direction of the pixel rows as a unit vector: the mean of the edges' directions modulo 45 degrees, so turned
/// that the shorter edges do not run along its diagonals.
fn grid_direction(path: &ArcSpline) -> Vec2 {
    let eighth = |v: Vec2| Vec2::from_angle(8.0 * v.atan2()) * v.hypot();
    let sum: Vec2 = path.spans().map(|s| eighth(s.chord())).sum();
    let angle = if sum.hypot() == 0.0 { 0.0 } else { sum.atan2() / 8.0 };
    let mut chords: Vec<Vec2> = path.spans().map(|s| s.chord()).collect();
    let few = chords.len() / 20;
    let short = *chords.select_nth_unstable_by(few, |a, b| a.hypot2().total_cmp(&b.hypot2())).1;
    let short = in_frame(short, Vec2::from_angle(angle));
    let along_diagonal = short.x.abs().min(short.y.abs()) > 0.5 * short.x.abs().max(short.y.abs());
    Vec2::from_angle(if along_diagonal { angle + FRAC_PI_4 } else { angle })
}

fn in_frame(v: Vec2, frame: Vec2) -> Vec2 {
    Vec2::new(v.dot(frame), frame.cross(v))
}

/// The step that most edges are a whole multiple of, from the shorter edges, then refined by all.
fn pixel(edges: &[Vec2]) -> Option<f64> {
    let mut longest: Vec<f64> = edges.iter().map(|e| e.x.abs().max(e.y.abs())).collect();
    longest.sort_unstable_by(f64::total_cmp);
    let first = *longest.get(longest.len() / 20)?;
    let steps: f64 = longest.iter().map(|length| (length / first).round()).sum();
    let pixel = longest.iter().sum::<f64>() / steps;
    (pixel.is_finite() && pixel > 0.0).then_some(pixel)
}

/// True when an edge runs along a row, a column or a diagonal by whole pixels.
fn on_grid(edge: Vec2, pixel: f64) -> bool {
    let (x, y) = (edge.x.abs() / pixel, edge.y.abs() / pixel);
    let whole = |v: f64| (v - v.round()).abs() < 0.05 * v.max(1.0);
    whole(x) && whole(y) && (x.round() * y.round() < 0.5 || (x - y).abs() < 0.1 * x)
}

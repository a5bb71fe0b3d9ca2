//! What is wrong with a drawing, and a drawing put right: repeated points dropped, loose segments chained, gaps
//! closed, doubled lines removed. What was done is counted, and every flaw is placed.

mod chain;
mod corners;
mod crossings;
mod duplicates;
mod flaw;
mod nesting;
mod roughness;
mod size;
mod tidy;

use crate::sketch::{Contour, Sketch};

pub use corners::{CornerPlace, corners};
pub use crossings::crossings;
pub use flaw::{Flaw, FlawKind, worst_first};
pub use nesting::{Nest, Role, nesting};
pub use roughness::{Roughness, Support, Texture, roughness, support};
pub use size::{largest_disc, smallest_radius};

/// A drawing put right, with what was wrong.
#[derive(Clone, Debug, Default)]
pub struct Cleaned {
    /// The contours to cut, by their number. A contour that was chained of several carries the lowest of their
    /// numbers.
    pub contours: Vec<Contour>,
    /// What was wrong, worst first.
    pub flaws: Vec<Flaw>,
    /// What was done.
    pub counts: Counts,
}

/// What cleaning did, in numbers.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Counts {
    /// Points that repeat the point before them, and were dropped.
    pub repeated_points: usize,
    /// Contours without any length, dropped.
    pub without_length: usize,
    /// Ends that met exactly, joined in pairs.
    pub joints: usize,
    /// Gaps closed with a straight line, none longer than the join length.
    pub gaps_closed: usize,
    /// Contours of the drawing that became a part of a longer one.
    pub chained: usize,
    /// Lines and contours drawn twice, removed or cut back to the part drawn once.
    pub duplicates: usize,
}

impl Counts {
    /// What was done, one phrase each; nothing for what was not needed.
    pub fn told(&self) -> Vec<String> {
        let phrases = [
            (self.repeated_points, "repeated point", "dropped"),
            (self.without_length, "contour without length", "dropped"),
            (self.duplicates, "duplicate", "removed"),
            (self.chained, "loose piece", "joined to others"),
            (self.gaps_closed, "gap", "closed"),
        ];
        let told = phrases.into_iter().filter(|(count, ..)| *count > 0);
        told.map(|(count, what, done)| format!("{count} {} {done}", plural(what, count))).collect()
    }
}

/// The plural of a phrase by its first noun, where the count asks for it.
fn plural(phrase: &str, count: usize) -> String {
    match (count, phrase.split_once(" without")) {
        (1, _) => phrase.to_string(),
        (_, Some((noun, rest))) => format!("{noun}s without{rest}"),
        (_, None) => format!("{phrase}s"),
    }
}

/// Puts a drawing right. Ends at most `join_mm` apart are joined, nearest first; nothing else of the drawing moves.
///
/// The result depends on where the lines are and not on their order or direction, except that a contour of its own
/// keeps the start and direction it was drawn with. Takes time n log n in the number of contours and linear time in
/// the number of vertices. Does not look for crossings.
pub fn clean(sketch: &Sketch, join_mm: f64) -> Cleaned {
    let mut counts = Counts::default();
    let mut flaws = Vec::new();
    let mut contours = Vec::with_capacity(sketch.contours.len());
    for contour in &sketch.contours {
        let (path, dropped) = tidy::without_repeats(&contour.path);
        counts.repeated_points += dropped;
        if path.is_empty() {
            counts.without_length += 1;
            flaws.extend(tidy::without_length(contour));
            continue;
        }
        contours.push(Contour { path, ..contour_without_path(contour) });
    }
    let near_mm = join_mm / 10.0;
    let contours = duplicates::remove(contours, near_mm, &mut counts, &mut flaws);
    let contours = chain::chain(contours, join_mm, &mut counts, &mut flaws);
    flaws.extend(contours.iter().flat_map(|c| tidy::spikes(c, near_mm)));
    flaws.extend(contours.iter().filter_map(chain::nearly_closed));
    flaw::worst_first(&mut flaws);
    Cleaned { contours, flaws, counts }
}

/// Everything of a contour but its path.
fn contour_without_path(contour: &Contour) -> Contour {
    Contour {
        id: contour.id,
        layer: contour.layer.clone(),
        colour: contour.colour.clone(),
        place: contour.place.clone(),
        path: Default::default(),
    }
}

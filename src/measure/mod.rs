//! What is in a drawing, in numbers: for `ribband measure`, and for whoever asks before cutting.

mod json;
mod table;

use std::collections::BTreeMap;

use kurbo::Rect;
use rayon::prelude::*;

use crate::clean::{self, Counts, Flaw, Role, Roughness, Support};
use crate::sketch::{Contour, Sketch};

/// A drawing, measured.
#[derive(Clone, Debug)]
pub struct Measurement {
    /// The box around the finished parts in mm, in the drawing's coordinates; `None` for an empty drawing.
    pub bbox: Option<Rect>,
    /// How many mm one unit of the file is.
    pub mm_per_unit: f64,
    /// Where that scale came from.
    pub scale_from: String,
    /// What the file held, before cleaning.
    pub drawn: Drawn,
    /// The contours after cleaning, by number.
    pub contours: Vec<Measured>,
    /// What is wrong, crossings included, worst first.
    pub flaws: Vec<Flaw>,
    /// What cleaning did.
    pub counts: Counts,
    /// The tolerance that every contour supports.
    pub support: Support,
    /// What reading has to say.
    pub notes: Vec<String>,
}

/// What a file held, before cleaning.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Drawn {
    /// How many contours.
    pub contours: usize,
    /// How many vertices they have.
    pub vertices: usize,
    /// How long they are together, in mm.
    pub length_mm: f64,
}

/// One contour, measured.
#[derive(Clone, Debug)]
pub struct Measured {
    /// Its number in the drawing, from 1.
    pub id: usize,
    /// Its layer, or empty.
    pub layer: String,
    /// What it bounds.
    pub role: Role,
    /// Its vertices after cleaning.
    pub vertices: usize,
    /// Its length in mm.
    pub length_mm: f64,
    /// Its signed area in mm2, positive counter-clockwise; `None` when open.
    pub area_mm2: Option<f64>,
    /// The box around it in mm, in the drawing's coordinates.
    pub bbox: Rect,
    /// How jagged it is.
    pub roughness: Roughness,
    /// The tolerance it supports.
    pub support: Support,
    /// How many corners it has.
    pub corners: usize,
    /// Its smallest radius in mm, corners left out; `None` where nothing is curved.
    pub smallest_radius_mm: Option<f64>,
    /// The diameter in mm of the largest disc inside it, whatever else lies inside; `None` when open.
    pub largest_cutter_mm: Option<f64>,
}

/// How many open and closed contours a layer has.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct LayerCount {
    /// Open contours.
    pub open: usize,
    /// Closed ones.
    pub closed: usize,
}

/// Measures a drawing whose ends are joined over gaps of up to `join_mm`.
pub fn measure(sketch: &Sketch, join_mm: f64) -> Measurement {
    let cleaned = clean::clean(sketch, join_mm);
    let roles = clean::nesting(&cleaned.contours);
    let contours: Vec<Measured> =
        cleaned.contours.par_iter().zip(&roles).filter_map(|(c, nest)| measured(c, nest.role)).collect();
    let support = Support::largest(contours.iter().map(|c| &c.support));
    let mut flaws = cleaned.flaws;
    flaws.extend(clean::crossings(&cleaned.contours));
    clean::worst_first(&mut flaws);
    Measurement {
        bbox: sketch.bbox(),
        mm_per_unit: sketch.mm_per_unit,
        scale_from: sketch.scale_from.clone(),
        drawn: drawn(sketch),
        contours,
        flaws,
        counts: cleaned.counts,
        support,
        notes: sketch.notes.clone(),
    }
}

fn drawn(sketch: &Sketch) -> Drawn {
    let paths = || sketch.contours.iter().map(|c| &c.path);
    Drawn {
        contours: sketch.contours.len(),
        vertices: paths().map(|p| p.vertices.len()).sum(),
        length_mm: paths().map(|p| p.length()).sum(),
    }
}

/// A contour, measured; `None` for one without vertices.
fn measured(contour: &Contour, role: Role) -> Option<Measured> {
    let path = &contour.path;
    let roughness = clean::roughness(path);
    let corners = clean::corners(path, &roughness);
    Some(Measured {
        id: contour.id,
        layer: contour.layer.clone(),
        role,
        vertices: path.vertices.len(),
        length_mm: path.length(),
        area_mm2: path.closed.then(|| path.area()),
        bbox: path.bbox()?,
        support: roughness.support(),
        corners: corners.len(),
        smallest_radius_mm: clean::smallest_radius(path, &roughness, &corners),
        largest_cutter_mm: clean::largest_disc(contour),
        roughness,
    })
}

impl Measurement {
    /// The open and closed contours of each layer.
    pub fn layers(&self) -> BTreeMap<&str, LayerCount> {
        let mut layers: BTreeMap<&str, LayerCount> = BTreeMap::new();
        for contour in &self.contours {
            let count = layers.entry(&contour.layer).or_default();
            match contour.role {
                Role::Open => count.open += 1,
                _ => count.closed += 1,
            }
        }
        layers
    }
}

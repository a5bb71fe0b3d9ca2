//! The drawing in memory: contours in mm, in the drawing's own coordinates, and how its scale was known.

use kurbo::Rect;

use crate::geom::ArcSpline;

/// What a drawing holds, after reading and before cleaning.
#[derive(Clone, Debug, Default)]
pub struct Sketch {
    /// The contours in the order of the file.
    pub contours: Vec<Contour>,
    /// How many mm one unit of the file is.
    pub mm_per_unit: f64,
    /// Where that scale came from, in words for the summary ("$INSUNITS 4", "--drawing-unit mm").
    pub scale_from: String,
    /// The largest distance, in mm, between `contours` and the true curves of the file: 0 when every curve was a line
    /// or an arc, else what sampling ellipses and free curves cost.
    pub sampling_mm: f64,
    /// What was read but not kept, or needs a word: one sentence each ("3 TEXT entities are not cut").
    pub notes: Vec<String>,
}

/// One polyline or chain of exact segments of the drawing.
#[derive(Clone, Debug)]
pub struct Contour {
    /// 1 for the first contour of the file.
    pub id: usize,
    /// The drawing's layer, or empty.
    pub layer: String,
    /// Stroke or entity colour as written in the file, or empty: a job file may choose settings by it.
    pub colour: String,
    /// Where it stands in the file.
    pub place: Place,
    /// Lines and arcs in mm; coordinates are multiples of 2^-20 mm.
    pub path: ArcSpline,
}

/// Where an element stands in its file.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Place {
    /// The line, from 1; 0 when unknown.
    pub line: usize,
    /// The element's own name ("path", "LWPOLYLINE", "point list").
    pub element: String,
}

impl Sketch {
    /// The smallest upright box around all contours; `None` for an empty drawing.
    pub fn bbox(&self) -> Option<Rect> {
        self.contours.iter().filter_map(|c| c.path.bbox()).reduce(|a, b| a.union(b))
    }
}

/// `mm` snapped to the grid of 2^-20 mm that coordinates are held on, so that one contour read from three formats is
/// one contour.
pub fn snap(mm: f64) -> f64 {
    const GRID: f64 = (1_u64 << 20) as f64;
    (mm * GRID).round() / GRID
}

//! The measurement as JSON, in the shape of the report.

use serde_json::{Value, json};

use crate::clean::{Flaw, FlawKind, Texture};

use super::{Measured, Measurement};

impl Measurement {
    /// The report of the drawing `file`: `drawing`, `contours` and `warnings` as in every report, besides `layers`,
    /// `flaws` and `supported`. Lengths in mm, in the drawing's own coordinates.
    pub fn json(&self, file: &str) -> Value {
        let layers = self.layers();
        let layers =
            layers.iter().map(|(name, n)| json!({ "layer": name, "open": n.open, "closed": n.closed }));
        json!({
            "ribband": env!("CARGO_PKG_VERSION"),
            "drawing": {
                "file": file,
                "mm_per_unit": self.mm_per_unit,
                "scale_from": self.scale_from,
                "width_mm": self.bbox.map_or(0.0, |b| b.width()),
                "height_mm": self.bbox.map_or(0.0, |b| b.height()),
                "contours": self.drawn.contours,
                "vertices": self.drawn.vertices,
                "length_mm": self.drawn.length_mm,
            },
            "layers": layers.collect::<Vec<_>>(),
            "contours": self.contours.iter().map(contour).collect::<Vec<_>>(),
            "flaws": self.flaws.iter().map(flaw).collect::<Vec<_>>(),
            "supported": { "tolerance_mm": self.support.mm, "reason": self.support.reason },
            "warnings": self.notes,
        })
    }
}

fn contour(c: &Measured) -> Value {
    let (texture, pixel) = match c.roughness.texture {
        Texture::Drawn => ("drawn", None),
        Texture::Shape => ("smooth", None),
        Texture::Noise => ("noise", None),
        Texture::Steps { pixel_mm, .. } => ("steps", Some(pixel_mm)),
    };
    json!({
        "id": c.id,
        "layer": c.layer,
        "closed": c.area_mm2.is_some(),
        "role": c.role.name(),
        "vertices": c.vertices,
        "length_mm": c.length_mm,
        "area_mm2": c.area_mm2,
        "bbox_mm": [c.bbox.x0, c.bbox.y0, c.bbox.x1, c.bbox.y1],
        "roughness_mm": c.roughness.sigma_mm,
        "texture": texture,
        "pixel_mm": pixel,
        "corners": c.corners,
        "smallest_radius_mm": c.smallest_radius_mm,
        "largest_cutter_mm": c.largest_cutter_mm,
        "supported_tolerance_mm": c.support.mm,
    })
}

fn flaw(f: &Flaw) -> Value {
    let size = (f.kind != FlawKind::Junction && f.size > 0.0).then_some(f.size);
    json!({
        "kind": f.kind.name(),
        "contour": f.contour,
        "vertex": f.vertex,
        "at": [f.at.x, f.at.y],
        "size_mm": size,
        "other": f.other,
        "what": f.what(),
        "remedy": f.remedy(),
    })
}

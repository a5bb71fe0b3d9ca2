//! The measurement for the terminal: a table of contours, then a summary.

use std::fmt::Write;

use comfy_table::presets::NOTHING;
use comfy_table::{CellAlignment, ContentArrangement, Table};

use crate::clean::Texture;

use super::{Measured, Measurement};

/// A terminal shows this many contours; the report has all of them.
const ROWS: usize = 40;
/// A terminal shows this many flaws.
const FLAWS: usize = 20;

impl Measurement {
    /// The table of contours, a line each, with a last line that says how many are left out.
    pub fn table(&self) -> String {
        let mut table = Table::new();
        table.load_style(NOTHING).set_content_arrangement(ContentArrangement::Disabled);
        table.set_header([
            "contour",
            "layer",
            "kind",
            "vertices",
            "length",
            "area",
            "jaggedness",
            "corners",
            "least radius",
            "largest cutter",
        ]);
        table.add_rows(self.contours.iter().take(ROWS).map(row));
        for numeric in (0..10).filter(|k| ![1, 2, 6].contains(k)) {
            if let Some(column) = table.column_mut(numeric) {
                column.set_cell_alignment(CellAlignment::Right);
            }
        }
        let mut text = format!("{table}\n");
        if self.contours.len() > ROWS {
            let more = self.contours.len() - ROWS;
            text += &format!("and {more} more contours: --report FILE.json has all of them\n");
        }
        text + "lengths in mm, areas in mm2; the largest cutter is the widest disc that fits inside the contour\n"
    }

    /// The drawing as a whole, a line for each figure, then the flaws with what can be done about them.
    pub fn summary(&self) -> String {
        let (width, height) = self.bbox.map_or((0.0, 0.0), |b| (b.width(), b.height()));
        let (wide, high) = (width / 25.4, height / 25.4);
        let size = format!("{width:.2} x {height:.2} mm ({wide:.3} x {high:.3} in)");
        let scale = format!("1 unit of the drawing is {} mm ({})", self.mm_per_unit, self.scale_from);
        let lines = [
            ("finished size", size),
            ("scale", scale),
            ("contours", self.contours_by_layer()),
            ("vertices", self.drawn.vertices.to_string()),
            ("length", format!("{:.2} mm", self.drawn.length_mm)),
            ("tolerance", self.tolerance()),
            ("cleaning", one_or(self.counts.told(), "nothing to do")),
            ("flaws", if self.flaws.is_empty() { "none found".into() } else { self.flaws.len().to_string() }),
        ];
        let mut text: String = lines.iter().map(|(name, value)| format!("{name:<15}{value}\n")).collect();
        self.flaws.iter().take(FLAWS).for_each(|flaw| text += &format!("- {flaw}\n"));
        if self.flaws.len() > FLAWS {
            let more = self.flaws.len() - FLAWS;
            text += &format!("and {more} more flaws: --report FILE.json has all of them\n");
        }
        self.notes.iter().for_each(|note| text += &format!("note: {note}\n"));
        text
    }

    fn contours_by_layer(&self) -> String {
        let layers = self.layers();
        let (closed, open) = layers.values().fold((0, 0), |(c, o), n| (c + n.closed, o + n.open));
        let mut text = format!("{closed} closed, {open} open");
        if layers.keys().any(|name| !name.is_empty()) {
            for (name, count) in &layers {
                let name = if name.is_empty() { "no layer" } else { name };
                // Writing to a string cannot fail.
                let _ = write!(text, "; {name}: {} closed, {} open", count.closed, count.open);
            }
        }
        text
    }

    fn tolerance(&self) -> String {
        if self.support.mm > 0.0 {
            format!("{} mm or more: {}", self.support.mm, self.support.reason)
        } else {
            format!("any: {}", self.support.reason)
        }
    }
}

fn one_or(phrases: Vec<String>, none: &str) -> String {
    if phrases.is_empty() { none.to_string() } else { phrases.join(", ") }
}

fn row(c: &Measured) -> [String; 10] {
    let or_dash = |value: Option<f64>| value.map_or_else(|| "-".into(), |v| format!("{v:.2}"));
    [
        c.id.to_string(),
        c.layer.clone(),
        c.role.name().into(),
        c.vertices.to_string(),
        format!("{:.2}", c.length_mm),
        or_dash(c.area_mm2),
        jaggedness(c),
        c.corners.to_string(),
        or_dash(c.smallest_radius_mm),
        or_dash(c.largest_cutter_mm),
    ]
}

fn jaggedness(c: &Measured) -> String {
    match c.roughness.texture {
        Texture::Drawn => "drawn".into(),
        Texture::Shape => "smooth".into(),
        Texture::Noise => format!("noise {:.3}", c.roughness.sigma_mm),
        Texture::Steps { pixel_mm, .. } => format!("{pixel_mm:.2} pixels"),
    }
}

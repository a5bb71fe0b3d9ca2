//! What was met and not drawn, counted, and told in sentences.

use std::collections::BTreeMap;

/// Counts of what needs a word.
#[derive(Default)]
pub(super) struct Tally {
    /// Elements that are not outlines, by name.
    not_drawn: BTreeMap<String, usize>,
    clipped: usize,
    markers: usize,
    hidden: usize,
    lost_references: Vec<String>,
    remarks: Vec<String>,
    stroked: usize,
    widest_stroke: f64,
}

impl Tally {
    pub(super) fn not_drawn(&mut self, name: &str) {
        *self.not_drawn.entry(name.to_owned()).or_default() += 1;
    }

    pub(super) fn clipped(&mut self) {
        self.clipped += 1;
    }

    pub(super) fn markers(&mut self) {
        self.markers += 1;
    }

    pub(super) fn hidden(&mut self) {
        self.hidden += 1;
    }

    pub(super) fn lost_reference(&mut self, href: &str) {
        self.lost_references.push(href.to_owned());
    }

    pub(super) fn remark(&mut self, remark: String) {
        self.remarks.push(remark);
    }

    /// A stroke of a width in file units.
    pub(super) fn stroke(&mut self, width: f64) {
        self.stroked += 1;
        self.widest_stroke = self.widest_stroke.max(width);
    }

    /// One sentence for each thing that was met. Strokes are told where they are at least a millimetre wide, or may
    /// be: `mm_per_unit` is `None` while the unit is unknown.
    pub(super) fn notes(self, mm_per_unit: Option<f64>) -> Vec<String> {
        let mut notes = Vec::new();
        for (name, count) in &self.not_drawn {
            notes.push(format!("{} not cut: {}", counted(*count, name), way_out(name)));
        }
        if self.hidden > 0 {
            notes.push(format!("{} hidden and left out", counted(self.hidden, "shape")));
        }
        if self.clipped > 0 {
            let what = counted(self.clipped, "element");
            notes.push(format!(
                "{what} with a clip path or mask: it is not applied, the whole outline is cut"
            ));
        }
        if self.markers > 0 {
            notes.push(format!("{} with markers, which are not cut", counted(self.markers, "shape")));
        }
        if let Some(first) = self.lost_references.first() {
            let what = counted(self.lost_references.len(), "use");
            notes.push(format!(
                "{what} of something that is not in the file, not drawn (the first: \"{first}\")"
            ));
        }
        let wide = self.widest_stroke * mm_per_unit.unwrap_or(1.0);
        if self.stroked > 0 && wide >= 1.0 {
            let unit = if mm_per_unit.is_some() { "mm" } else { "units" };
            let what = counted(self.stroked, "shape");
            notes.push(format!(
                "{what} drawn with a stroke, up to {wide:.2} {unit} wide: the path is its middle line"
            ));
        }
        notes.extend(self.remarks);
        notes
    }
}

fn counted(count: usize, name: &str) -> String {
    if count == 1 { format!("1 {name}") } else { format!("{count} {name}s") }
}

fn way_out(name: &str) -> &'static str {
    match name {
        "text" => "turn text into paths before saving",
        "image" => "a picture has no outline, trace it first",
        _ => "it is no outline",
    }
}

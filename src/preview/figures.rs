//! Figures: sizes of boxes, round numbers, and the report's own in a list.

use kurbo::Rect;
use serde_json::Value;

use super::markup::escaped;
use crate::num::LengthUnit;
use crate::report::Report;
use crate::summary::duration;

/// The diagonal of a box, in mm.
pub(super) fn diagonal(around: Rect) -> f64 {
    around.width().hypot(around.height())
}

/// The largest of 1, 2 and 5 times a power of ten that is not above `value`, which is above 0.
pub(super) fn round(value: f64) -> f64 {
    let power = 10_f64.powf(value.log10().floor());
    [5.0, 2.0, 1.0].map(|step| step * power).into_iter().find(|&step| step <= value).unwrap_or(power)
}

/// How a figure is shown.
#[derive(Clone, Copy)]
enum As {
    /// A length to a tenth of a mm, or to two thousandths of an inch.
    Length,
    /// A small length.
    Fine,
    /// A feed.
    Feed,
    /// A time.
    Time,
    /// A speed of the spindle.
    Speed,
    /// Ranges in X, Y and Z.
    Ranges,
    /// As it stands.
    Plain,
}

/// A figure of the report: its section, its name there, its name in words.
type Row = (&'static str, &'static str, &'static str, As);

const ROWS: [Row; 27] = [
    ("", "tolerance_mm", "Tolerance", As::Fine),
    ("check", "deviation_mm", "Largest deviation, certified", As::Fine),
    ("program", "motion_blocks", "Motion blocks", As::Plain),
    ("program/as_drawn", "motion_blocks", "as drawn", As::Plain),
    ("program", "time_s", "Planned time", As::Time),
    ("program/as_drawn", "time_s", "as drawn", As::Time),
    ("program", "cut_time_s", "along the contours", As::Time),
    ("program/as_drawn", "cut_time_s", "as drawn", As::Time),
    ("program", "starved_blocks", "Starved blocks", As::Plain),
    ("program/as_drawn", "starved_blocks", "as drawn", As::Plain),
    ("program", "cut_length_mm", "Length at feed", As::Length),
    ("program", "rapid_length_mm", "Length by rapid", As::Length),
    ("program", "blocks", "Blocks", As::Plain),
    ("program", "bytes", "Size in bytes", As::Plain),
    ("drawing", "width_mm", "Finished width", As::Length),
    ("drawing", "height_mm", "Finished height", As::Length),
    ("drawing", "contours", "Contours", As::Plain),
    ("drawing", "vertices", "Vertices drawn", As::Plain),
    ("setup", "machine", "Machine", As::Plain),
    ("setup", "extents_mm", "Cutter's path from zero", As::Ranges),
    ("setup", "cutter_mm", "Cutter", As::Length),
    ("setup", "side", "Side of the contour", As::Plain),
    ("setup", "depth_mm", "Depth", As::Length),
    ("setup", "passes", "Passes", As::Plain),
    ("setup", "feed_mm_min", "Feed", As::Feed),
    ("setup", "plunge_mm_min", "Feed straight down", As::Feed),
    ("setup", "spindle_rpm", "Spindle", As::Speed),
];

/// The report's figures as a list of terms; each value also stands, exactly, in an attribute named as in the report.
pub(super) fn list(report: &Report) -> String {
    let values = serde_json::to_value(report).unwrap_or_default();
    let inch = report.setup.unit == LengthUnit::Inch.symbol();
    let rows = ROWS.iter().map(|&(section, name, words, shown)| {
        let path = if section.is_empty() { format!("/{name}") } else { format!("/{section}/{name}") };
        let value = values.pointer(&path).unwrap_or(&Value::Null);
        let exact = value.as_str().map_or_else(|| value.to_string(), str::to_owned);
        format!(
            "<dt>{words}</dt><dd data-section=\"{}\" data-{name}=\"{}\">{}</dd>\n",
            section.replace('/', "."),
            escaped(&exact),
            escaped(&show(value, shown, inch))
        )
    });
    format!("<dl>\n{}</dl>\n", rows.collect::<String>())
}

/// A value in words, in the machine's unit.
fn show(value: &Value, shown: As, inch: bool) -> String {
    let Some(number) = value.as_f64() else {
        return match (value, shown) {
            (Value::String(text), _) => text.clone(),
            (Value::Array(all), As::Ranges) => ranges(all, inch),
            _ => "none".into(),
        };
    };
    match shown {
        As::Length => length(number, inch),
        As::Fine if inch => format!("{:.5} in", number / 25.4),
        As::Fine => format!("{number:.4} mm"),
        As::Feed if inch => format!("{:.1} in/min", number / 25.4),
        As::Feed => format!("{number:.0} mm/min"),
        As::Time => duration(number),
        As::Speed => format!("{number:.0} rev/min"),
        As::Plain | As::Ranges => value.to_string(),
    }
}

/// A length in the machine's unit.
pub(super) fn length(mm: f64, inch: bool) -> String {
    if inch {
        format!("{} in", super::markup::number(mm / 25.4, 3))
    } else {
        format!("{} mm", super::markup::number(mm, 1))
    }
}

fn ranges(all: &[Value], inch: bool) -> String {
    let at = |i: usize| all.get(i).and_then(Value::as_f64).unwrap_or_default();
    let range =
        |axis: &str, i: usize| format!("{axis} {} to {}", length(at(i), inch), length(at(i + 3), inch));
    [range("X", 0), range("Y", 1), range("Z", 2)].join(", ")
}

//! Figures: sizes of boxes, round numbers, and the report's own in a list.

use kurbo::Rect;

/// The diagonal of a box, in mm.
pub(super) fn diagonal(around: Rect) -> f64 {
    around.width().hypot(around.height())
}

/// The largest of 1, 2 and 5 times a power of ten that is not above `value`, which is above 0.
pub(super) fn round(value: f64) -> f64 {
    let power = 10_f64.powf(value.log10().floor());
    [5.0, 2.0, 1.0].map(|step| step * power).into_iter().find(|&step| step <= value).unwrap_or(power)
}

//! Lengths, view boxes, and how large the drawing says it is.

use std::str::FromStr;

use kurbo::{Affine, Size, Vec2};
use nom::Parser;
use nom::bytes::complete::take_while;
use nom::character::complete::multispace0;
use nom::combinator::eof;
use svgtypes::{Align, AspectRatio};

use super::super::number::{Fault, number};
use super::super::scale::{FileUnit, MM_PER_INCH, Unit};

/// Pixels to an inch (CSS Values and Units).
const PX_PER_INCH: f64 = 96.0;

/// A length as written.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Length {
    /// A number without a unit: user units.
    Bare(f64),
    /// An absolute length, in px.
    Px(f64),
    /// A share of the viewport, 1 for 100 %.
    Share(f64),
}

impl Length {
    /// Reads a length; says what is wrong with it otherwise.
    pub(super) fn parse(text: &str) -> Result<Self, String> {
        let unit = take_while::<_, _, Fault<'_>>(|c: char| c.is_ascii_alphabetic() || c == '%');
        let parsed = (multispace0, number, unit, multispace0, eof).parse(text);
        let Ok((_, (_, value, unit, _, _))) = parsed else {
            return Err(format!("\"{text}\" is not a length"));
        };
        let px = match unit.to_ascii_lowercase().as_str() {
            "" => return Ok(Self::Bare(value)),
            "%" => return Ok(Self::Share(value / 100.0)),
            "px" => 1.0,
            "in" => PX_PER_INCH,
            "mm" => PX_PER_INCH / MM_PER_INCH,
            "cm" => PX_PER_INCH / MM_PER_INCH * 10.0,
            "q" => PX_PER_INCH / MM_PER_INCH / 4.0,
            "pt" => PX_PER_INCH / 72.0,
            "pc" => PX_PER_INCH / 6.0,
            other => return Err(format!("\"{text}\" is in {other}, which has no fixed size here")),
        };
        Ok(Self::Px(value * px))
    }

    /// The length in user units, where all of the viewport is `whole`.
    pub(super) fn resolve(self, whole: Option<f64>) -> Result<f64, String> {
        match self {
            Self::Bare(value) | Self::Px(value) => Ok(value),
            Self::Share(share) => whole
                .map(|w| w * share)
                .ok_or_else(|| "a length in % of a page whose size is not given".to_owned()),
        }
    }
}

/// A view box: the part of user space that fills the viewport.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct ViewBox {
    pub(super) origin: Vec2,
    pub(super) size: Size,
}

impl ViewBox {
    /// Reads four numbers; `Ok(None)` for a size that is not above zero, which disables what it is on.
    pub(super) fn parse(text: &str) -> Result<Option<Self>, String> {
        let bad = || format!("viewBox=\"{text}\" is not four numbers");
        let (points, odd) = super::path::points(text).map_err(|_| bad())?;
        let [corner, size] = points[..] else { return Err(bad()) };
        if odd {
            return Err(bad());
        }
        let size = Size::new(size.x, size.y);
        Ok((size.width > 0.0 && size.height > 0.0).then_some(Self { origin: corner.to_vec2(), size }))
    }

    /// The map from user space into a viewport of `size` with its corner at zero (SVG 2, "Computing the equivalent
    /// transform of an SVG viewport").
    pub(super) fn fit(&self, aspect: AspectRatio, size: Size) -> Affine {
        let (mut sx, mut sy) = (size.width / self.size.width, size.height / self.size.height);
        if aspect.align != Align::None {
            let s = if aspect.slice { sx.max(sy) } else { sx.min(sy) };
            (sx, sy) = (s, s);
        }
        let slack = Vec2::new(size.width - self.size.width * sx, size.height - self.size.height * sy);
        let (ax, ay) = shares(aspect.align);
        let (tx, ty) = (slack.x * ax - self.origin.x * sx, slack.y * ay - self.origin.y * sy);
        Affine::new([sx, 0.0, 0.0, sy, tx, ty])
    }
}

/// How much of the slack goes before the drawing, in x and y.
fn shares(align: Align) -> (f64, f64) {
    match align {
        Align::None | Align::XMinYMin => (0.0, 0.0),
        Align::XMidYMin => (0.5, 0.0),
        Align::XMaxYMin => (1.0, 0.0),
        Align::XMinYMid => (0.0, 0.5),
        Align::XMidYMid => (0.5, 0.5),
        Align::XMaxYMid => (1.0, 0.5),
        Align::XMinYMax => (0.0, 1.0),
        Align::XMidYMax => (0.5, 1.0),
        Align::XMaxYMax => (1.0, 1.0),
    }
}

/// Reads `preserveAspectRatio`; absent is xMidYMid meet.
pub(super) fn aspect(text: Option<&str>) -> Result<AspectRatio, String> {
    let Some(text) = text else { return Ok(AspectRatio::default()) };
    AspectRatio::from_str(text.trim())
        .map_err(|_| format!("preserveAspectRatio=\"{text}\" is not understood"))
}

/// The whole page: how its user space maps to the drawing's file units, y up, and what it says of its size.
#[derive(Clone, Debug, Default)]
pub(super) struct Page {
    /// From user space to file units.
    pub(super) map: Affine,
    /// The viewport in user units, for lengths in %.
    pub(super) viewport: Option<Size>,
    /// The unit, where a width or height states one.
    pub(super) unit: Option<FileUnit>,
    /// The unit to take bare numbers for when the user names none.
    pub(super) assumed: Option<FileUnit>,
}

/// The width and height of the root; `None` where absent, `auto` or a percentage.
#[derive(Clone, Debug)]
pub(super) struct Stated {
    pub(super) width: Option<Length>,
    pub(super) height: Option<Length>,
    /// Both as written, for the summary ("page size 4in x 2in").
    pub(super) words: String,
}

impl Page {
    /// The page of a root element. A page's bottom edge is y = 0; one of unknown height has its top there.
    pub(super) fn new(stated: Stated, view_box: Option<ViewBox>, aspect: AspectRatio) -> Self {
        let ratio = view_box.map(|b| b.size.width / b.size.height);
        let px = |length: Option<Length>| match length {
            Some(Length::Bare(v) | Length::Px(v)) => Some(v),
            _ => None,
        };
        let (width, height) = (px(stated.width), px(stated.height));
        let size = match (width, height, ratio) {
            (Some(w), Some(h), _) => Some(Size::new(w, h)),
            (Some(w), None, Some(ratio)) => Some(Size::new(w, w / ratio)),
            (None, Some(h), Some(ratio)) => Some(Size::new(h * ratio, h)),
            _ => None,
        };
        let (map, px) = placed(size, view_box, aspect);
        let viewport = view_box.map(|b| b.size).or(size);
        let page = Self { map, viewport, unit: None, assumed: None };
        let is = |wanted: fn(&Length) -> bool| [stated.width, stated.height].iter().flatten().any(wanted);
        if is(|l| matches!(l, Length::Px(_))) {
            Self { unit: Some(FileUnit { mm: mm_of(px), said_by: stated.words }), ..page }
        } else if is(|l| matches!(l, Length::Bare(_))) {
            // A bare number is what --drawing-unit explains, so the page is measured in bare numbers.
            let said_by = format!("{}, px at 96 to the inch", stated.words);
            let assumed = Some(FileUnit { mm: Unit::Px.mm(), said_by });
            Self { map: Affine::scale(px) * map, assumed, ..page }
        } else {
            page
        }
    }
}

/// The map from user space to file units of a page of `size` px, and how many px one file unit is. A user unit is the
/// file's unit where it is as large both ways; the map then only moves and flips.
fn placed(size: Option<Size>, view_box: Option<ViewBox>, aspect: AspectRatio) -> (Affine, f64) {
    let page = size.or(view_box.map(|b| b.size));
    let fit = match (view_box, page) {
        (Some(b), Some(page)) => b.fit(aspect, page),
        _ => Affine::IDENTITY,
    };
    let [sx, _, _, sy, tx, ty] = fit.as_coeffs();
    let height = page.map_or(0.0, |p| p.height);
    if (sx - sy).abs() <= 4.0 * f64::EPSILON * sx {
        (Affine::new([1.0, 0.0, 0.0, -1.0, tx / sx, (height - ty) / sx]), sx)
    } else {
        (Affine::new([sx, 0.0, 0.0, -sy, tx, height - ty]), 1.0)
    }
}

/// Millimetres in so many px. A page of 120 mm for 120 units means 1 mm a unit, not what is left of it after px and
/// back.
fn mm_of(px: f64) -> f64 {
    let mm = px * MM_PER_INCH / PX_PER_INCH;
    let nearest = (mm * 1e6).round() / 1e6;
    if (nearest - mm).abs() <= 4.0 * f64::EPSILON * mm { nearest } else { mm }
}

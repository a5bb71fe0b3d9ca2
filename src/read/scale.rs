//! How large one unit of a drawing is, and the refusal where nothing says so.

use kurbo::Rect;

use super::curve::Drawing;
use super::limits::Limits;
use crate::error::{Error, Kind};

/// Millimetres to an inch, exactly.
pub const MM_PER_INCH: f64 = 25.4;

/// What a bare number in a drawing stands for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Unit {
    /// Millimetres.
    Mm,
    /// Inches.
    Inch,
    /// Pixels, 96 to the inch (CSS Values and Units, absolute lengths).
    Px,
}

impl Unit {
    /// All units, in the order messages name them.
    pub const ALL: [Self; 3] = [Self::Mm, Self::Inch, Self::Px];

    /// Millimetres in one unit.
    pub fn mm(self) -> f64 {
        match self {
            Self::Mm => 1.0,
            Self::Inch => MM_PER_INCH,
            Self::Px => MM_PER_INCH / 96.0,
        }
    }

    /// The word `--drawing-unit` takes for it.
    pub fn name(self) -> &'static str {
        match self {
            Self::Mm => "mm",
            Self::Inch => "in",
            Self::Px => "px",
        }
    }
}

/// What the user said about a drawing's scale and what to read of it.
#[derive(Clone, Debug, PartialEq)]
pub struct Scale {
    /// `--drawing-unit`: what a bare number means where the drawing does not say.
    pub drawing_unit: Option<Unit>,
    /// `--scale`: how many times the drawn size the finished size is.
    pub scale: f64,
    /// `--fit-width`: the finished width in mm, whatever the drawing's unit.
    pub fit_width_mm: Option<f64>,
    /// `--layers`: the only layers to read; `None` reads all.
    pub layers: Option<Vec<String>>,
    /// `--size-limit`: how large the drawing may be.
    pub limits: Limits,
}

impl Default for Scale {
    /// Full size, the drawing's own unit, all layers.
    fn default() -> Self {
        Self { drawing_unit: None, scale: 1.0, fit_width_mm: None, layers: None, limits: Limits::default() }
    }
}

/// The unit that a drawing states itself.
#[derive(Clone, Debug, PartialEq)]
pub struct FileUnit {
    /// Millimetres in one unit of the file.
    pub mm: f64,
    /// Where the file says so, for the summary ("$INSUNITS 4 (mm)").
    pub said_by: String,
}

/// A scale that is settled.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Settled {
    pub(super) mm_per_unit: f64,
    pub(super) from: String,
    pub(super) note: Option<String>,
}

impl Scale {
    /// Checks the values by themselves, before any drawing is read.
    pub(super) fn checked(&self) -> Result<(), Error> {
        let positive = |x: f64| x.is_finite() && x > 0.0;
        if !positive(self.scale) {
            let what = format!("--scale {} is not a number above zero", self.scale);
            return Err(Error::new(Kind::Settings, what).remedy("give a factor such as 2 or 0.5"));
        }
        if let Some(mm) = self.fit_width_mm.filter(|&mm| !positive(mm)) {
            let what = format!("--fit-width {mm} is not a length above zero");
            return Err(Error::new(Kind::Settings, what).remedy("give the finished width, such as 300mm"));
        }
        if self.fit_width_mm.is_some() && (self.scale - 1.0).abs() > 0.0 {
            let error = Error::new(Kind::Settings, "--scale and --fit-width both set the size");
            return Err(error.remedy("give one of them"));
        }
        Ok(())
    }

    /// Settles the scale of a drawing whose box in its own units is `bbox`.
    pub(super) fn settle(&self, drawing: &Drawing, bbox: Rect) -> Result<Settled, Error> {
        if let Some(width) = self.fit_width_mm {
            return fit_width(width, bbox);
        }
        let said = |unit: &FileUnit, note| Settled { mm_per_unit: unit.mm, from: unit.said_by.clone(), note };
        let settled = match (&drawing.unit, self.drawing_unit, &drawing.assumed) {
            (Some(own), named, _) => said(own, named.and_then(|unit| overruled(own, unit))),
            (None, Some(unit), _) => Settled {
                mm_per_unit: unit.mm(),
                from: format!("--drawing-unit {}", unit.name()),
                note: None,
            },
            (None, None, Some(assumed)) => said(assumed, None),
            (None, None, None) => return Err(unknown(bbox)),
        };
        Ok(self.multiplied(settled))
    }

    fn multiplied(&self, settled: Settled) -> Settled {
        if (self.scale - 1.0).abs() <= 0.0 {
            return settled;
        }
        Settled {
            mm_per_unit: settled.mm_per_unit * self.scale,
            from: format!("{}, --scale {}", settled.from, self.scale),
            note: settled.note,
        }
    }
}

fn fit_width(width_mm: f64, bbox: Rect) -> Result<Settled, Error> {
    let mm_per_unit = width_mm / bbox.width();
    if !mm_per_unit.is_finite() {
        let error = Error::new(Kind::Refused, "the drawing has no width, so --fit-width cannot scale it");
        return Err(error.remedy("give --drawing-unit mm, in or px instead"));
    }
    Ok(Settled { mm_per_unit, from: format!("--fit-width {width_mm} mm"), note: None })
}

fn overruled(own: &FileUnit, said: Unit) -> Option<String> {
    let same = (own.mm - said.mm()).abs() <= 1e-9 * own.mm;
    (!same).then(|| {
        let scale = said.mm() / own.mm;
        format!(
            "--drawing-unit {} is not used: the drawing states its own scale ({}); to cut it at the other size give \
             --scale {scale:.6}",
            said.name(),
            own.said_by
        )
    })
}

fn unknown(bbox: Rect) -> Error {
    let sizes: Vec<String> = Unit::ALL
        .iter()
        .map(|u| {
            let (w, h) = (bbox.width() * u.mm(), bbox.height() * u.mm());
            format!("{w:.1} x {h:.1} mm with --drawing-unit {}", u.name())
        })
        .collect();
    let what = "the drawing does not say how large one unit is";
    Error::new(Kind::Refused, what)
        .remedy(format!("it would be {}; or give the finished width with --fit-width", sizes.join(", ")))
}

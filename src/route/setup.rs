//! What all contours of a program share: zero, stock, clearance, what stands on the table.

use kurbo::{Point, Rect};

use crate::error::{Error, Kind};
use crate::job::{Thickness, Zero};

/// The order in which passes are cut.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Default)]
pub enum Order {
    /// All passes of a contour before the next contour.
    #[default]
    ByContour,
    /// One pass of every contour before the next pass.
    ByPass,
}

/// A clamp or another thing that the cutter must keep clear of.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct KeepOut {
    /// Where it stands, in the program's coordinates, in mm.
    pub place: Rect,
    /// How far it rises above the stock's top, in mm.
    pub height_mm: f64,
}

/// What all contours of a program share.
#[derive(Clone, Debug, PartialEq)]
pub struct Setup {
    /// Where Z is zero.
    pub zero: Zero,
    /// The stock's thickness, where it is known; needed with zero on the bed, and for tabs.
    pub thickness: Option<Thickness>,
    /// How far above the stock's top the cutter travels by rapid, in mm.
    pub clearance_mm: f64,
    /// The deepest cut into the bed that is allowed, in mm.
    pub bed_cut_mm: f64,
    /// Where the program ends, at the clearance height.
    pub park: Point,
    /// One unit of the last place of the program's coordinates, in mm.
    pub step_mm: f64,
    /// The order of the passes.
    pub order: Order,
    /// Clamps and the like.
    pub keep_outs: Vec<KeepOut>,
}

/// The heights of a program, in mm in its own coordinates.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Heights {
    /// The top of the thickest stock.
    pub top: f64,
    /// Where the cutter travels by rapid.
    pub clearance: f64,
    /// The highest that the stock's underside can be, where the thickness is known.
    pub underside: Option<f64>,
}

impl Default for Setup {
    /// Zero on the stock's top, 5 mm of clearance, 0.3 mm into the bed at most, parked at the origin, three decimals of
    /// a millimetre, no clamps.
    fn default() -> Self {
        Self {
            zero: Zero::StockTop,
            thickness: None,
            clearance_mm: 5.0,
            bed_cut_mm: 0.3,
            park: Point::ORIGIN,
            step_mm: 0.001,
            order: Order::ByContour,
            keep_outs: Vec::new(),
        }
    }
}

impl Setup {
    /// The heights that the zero and the thickness give.
    pub fn heights(&self) -> Heights {
        let top = match (self.zero, self.thickness) {
            (Zero::Bed, Some(stock)) => stock.thickest,
            _ => 0.0,
        };
        let underside = self.thickness.map(|stock| match self.zero {
            Zero::StockTop => -stock.thinnest,
            Zero::Bed => 0.0,
        });
        Heights { top, clearance: top + self.clearance_mm, underside }
    }

    /// The height of travel that clears every clamp too.
    pub fn clearance_over_all(&self) -> f64 {
        let tallest = self.keep_outs.iter().map(|k| k.height_mm).fold(0.0, f64::max);
        self.heights().clearance + tallest
    }

    /// The depth, below the top of the thickest stock, that goes `past` mm below the thickest stock's underside.
    pub fn depth_through(&self, past: f64) -> Option<f64> {
        self.thickness.map(|stock| stock.thickest + past)
    }

    /// The depth, below the top of the thickest stock, that leaves a skin of at least `skin` mm everywhere.
    pub fn depth_leaving(&self, skin: f64) -> Option<f64> {
        let heights = self.heights();
        heights.underside.map(|underside| heights.top - underside - skin)
    }

    /// True when a cut of `depth` goes through stock of some thickness that was given; unknown without one.
    pub fn is_through(&self, depth: f64) -> Option<bool> {
        let heights = self.heights();
        heights.underside.map(|underside| heights.top - depth <= underside + self.step_mm / 2.0)
    }

    /// How deep a cut of `depth` goes into the bed at most, in mm; unknown without a thickness.
    pub fn bed_cut(&self, depth: f64) -> Option<f64> {
        let heights = self.heights();
        heights.underside.map(|underside| (underside - (heights.top - depth)).max(0.0))
    }

    /// Every setting inside its bounds.
    pub(super) fn validate(&self) -> Result<(), Error> {
        positive("clearance", self.clearance_mm)?;
        if let Some(stock) = self.thickness {
            positive("thickness", stock.thinnest)?;
            positive("thickness", stock.thickest)?;
            if stock.thinnest > stock.thickest {
                return Err(settings(
                    "the thinnest stock is thicker than the thickest",
                    "give the range low to high",
                ));
            }
        } else if self.zero == Zero::Bed {
            return Err(settings(
                "zero is on the bed, but the stock's thickness is not known",
                "pass --thickness",
            ));
        }
        Ok(())
    }
}

/// An error that names a setting which is not a number above zero.
pub(super) fn positive(name: &str, value: f64) -> Result<(), Error> {
    if value.is_finite() && value > 0.0 {
        return Ok(());
    }
    Err(settings(format!("{name} is {value}, and must be above zero"), format!("correct --{name}")))
}

/// A wrong setting.
pub(super) fn settings(what: impl Into<String>, remedy: impl Into<String>) -> Error {
    Error::new(Kind::Settings, what).remedy(remedy)
}

/// A job that is refused.
pub(super) fn refused(what: impl Into<String>, remedy: impl Into<String>) -> Error {
    Error::new(Kind::Refused, what).remedy(remedy)
}

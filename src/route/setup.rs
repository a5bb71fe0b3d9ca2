//! What routing must know: where zero is, how thick the stock is, how deep and fast to cut.

use kurbo::Point;

use crate::error::{Error, Kind};

/// Where Z is zero.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Default)]
pub enum Zero {
    /// On the top face of the stock.
    #[default]
    StockTop,
    /// On the bed that the stock lies on.
    Bed,
}

/// How thick the stock is, in mm: one value, or a range where it varies.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Thickness {
    /// The least thickness.
    pub thinnest: f64,
    /// The largest thickness.
    pub thickest: f64,
}

/// What all contours of a program share.
#[derive(Clone, Debug, PartialEq)]
pub struct Setup {
    /// Where Z is zero.
    pub zero: Zero,
    /// The stock's thickness, where it is known; needed with zero on the bed.
    pub thickness: Option<Thickness>,
    /// How far above the stock's top the cutter travels by rapid, in mm.
    pub clearance_mm: f64,
    /// Where the program ends, at the clearance height.
    pub park: Point,
    /// One unit of the last place of the program's coordinates, in mm.
    pub step_mm: f64,
}

/// How one contour is cut.
#[derive(Clone, Debug, PartialEq)]
pub struct Cut {
    /// How far below the stock's top the cut reaches, in mm, above zero.
    pub depth_mm: f64,
    /// The deepest pass, in mm.
    pub pass_mm: f64,
    /// Feed along the contour, in mm/min.
    pub feed: f64,
    /// Feed straight down, in mm/min.
    pub plunge: f64,
    /// Spindle speed in rev/min.
    pub spindle_rpm: f64,
}

/// The heights of a program, in mm in its own coordinates.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Heights {
    /// The top of the thickest stock.
    pub top: f64,
    /// Where the cutter travels by rapid.
    pub clearance: f64,
}

impl Default for Setup {
    /// Zero on the stock's top, 5 mm of clearance, parked at the origin, three decimals of a millimetre.
    fn default() -> Self {
        Self { zero: Zero::StockTop, thickness: None, clearance_mm: 5.0, park: Point::ORIGIN, step_mm: 0.001 }
    }
}

impl Setup {
    /// The heights that the zero and the thickness give.
    pub fn heights(&self) -> Heights {
        let top = match (self.zero, self.thickness) {
            (Zero::Bed, Some(stock)) => stock.thickest,
            _ => 0.0,
        };
        Heights { top, clearance: top + self.clearance_mm }
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

impl Cut {
    /// The depths of the passes below the stock's top, in mm, the deepest last: equal, none deeper than the pass.
    pub fn passes(&self) -> Vec<f64> {
        let count = (self.depth_mm / self.pass_mm * (1.0 - f64::EPSILON)).ceil().max(1.0);
        (1..=count as usize).map(|k| self.depth_mm * k as f64 / count).collect()
    }

    /// Every setting inside its bounds.
    pub(super) fn validate(&self) -> Result<(), Error> {
        positive("depth", self.depth_mm)?;
        positive("pass", self.pass_mm)?;
        positive("feed", self.feed)?;
        positive("plunge", self.plunge)?;
        positive("spindle", self.spindle_rpm)
    }
}

/// An error that names a setting which is not a number above zero.
fn positive(name: &str, value: f64) -> Result<(), Error> {
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

//! What a program that exists already is to be checked for.

use clap::Args;

use super::{
    DrawingArgs, DrawingSettings, Layout, LayoutArgs, SettingUpArgs, Side, Stock, ToleranceSide, Units,
    bounds, cutter, machine,
};
use crate::error::{Error, Kind};
use crate::machine::Machine;
use crate::num::{Length, Tolerance};

/// What a program is checked for, as typed.
#[derive(Args, Clone, Debug, Default)]
pub struct CheckArgs {
    /// Machine profile: a built-in name, or a TOML file [default: shop-router]
    #[arg(long, value_name = "NAME or FILE", help_heading = "Machine")]
    pub machine: Option<String>,
    /// How the drawing is read.
    #[command(flatten)]
    pub drawing: DrawingArgs,
    /// Largest distance allowed between cut path and drawing [default: 0.1mm]
    #[arg(long, value_name = "LEN", help_heading = "Accuracy")]
    pub tolerance: Option<Length>,
    /// Where the tolerance may be used: on both sides of the line, or never inside the part [default: both]
    #[arg(long, value_enum, help_heading = "Accuracy")]
    pub tolerance_side: Option<ToleranceSide>,
    /// The side of the contour that must be cut on [default: on]
    #[arg(long, value_enum, help_heading = "Cut")]
    pub side: Option<Side>,
    /// Inside corners may be cut into up to the corner itself
    #[arg(long, help_heading = "Cut")]
    pub corner_relief: bool,
    /// The cutter, where a side is cut or clamps are declared: its diameter, or a name in the machine profile [default: the profile's first]
    #[arg(long, value_name = "DIAMETER or NAME", help_heading = "Cut")]
    pub cutter: Option<String>,
    /// Material left on the drawn edge [default: none]
    #[arg(long, value_name = "LEN", help_heading = "Cut", allow_hyphen_values = true)]
    pub allowance: Option<Length>,
    /// How deep every contour must be cut, below the top of the stock
    #[arg(long, value_name = "LEN", help_heading = "Cut")]
    pub depth: Option<Length>,
    /// Deepest single pass allowed
    #[arg(long, value_name = "LEN", help_heading = "Cut")]
    pub pass: Option<Length>,
    /// How the drawing is laid on the stock.
    #[command(flatten)]
    pub layout: LayoutArgs,
    /// Zero, stock and clamps.
    #[command(flatten)]
    pub setting_up: SettingUpArgs,
}

/// A check whose settings are inside their bounds. Lengths in mm.
#[derive(Clone, Debug)]
pub struct CheckJob {
    /// The machine that the program is for.
    pub machine: Machine,
    /// How the drawing is read.
    pub drawing: DrawingSettings,
    /// The tolerance that must hold.
    pub tolerance: Tolerance,
    /// Where the tolerance may be used.
    pub tolerance_side: ToleranceSide,
    /// The side of the contours that must be cut on.
    pub side: Side,
    /// True when inside corners may be cut into up to the corner itself.
    pub relief: bool,
    /// The cutter's diameter, where a side is cut or clamps are declared.
    pub cutter_mm: Option<f64>,
    /// Material left on the drawn edge; negative for a looser fit.
    pub allowance_mm: f64,
    /// How deep every contour must be cut, where that was said.
    pub depth_mm: Option<f64>,
    /// The deepest single pass allowed, where that was said.
    pub pass_mm: Option<f64>,
    /// How the drawing is laid on the stock.
    pub layout: Layout,
    /// Zero, stock, clamps and the height of travel.
    pub stock: Stock,
}

impl CheckJob {
    /// The check that `typed` asks for.
    ///
    /// # Errors
    /// [`Kind::Settings`](crate::error::Kind) for a setting out of its bounds.
    pub fn new(typed: &CheckArgs) -> Result<Self, Error> {
        let machine = machine(typed.machine.as_deref())?;
        let mm = Units { machine: machine.unit };
        let tolerance = mm.length(&bounds::TOLERANCE, typed.tolerance)?.and_then(Tolerance::new);
        let side = typed.side.unwrap_or_default();
        let clamps = typed.setting_up.clamp.is_some();
        if typed.setting_up.stock_at.is_some() && typed.setting_up.origin.is_none() {
            let what = "--stock-at is given, and not where on the stock X and Y are zero";
            return Err(Error::new(Kind::Settings, what).remedy("give --origin, such as --origin lower-left"));
        }
        let needed = typed.cutter.is_some() || side != Side::On || clamps;
        let cutter = needed.then(|| cutter(typed.cutter.as_deref(), &machine, mm)).transpose()?;
        Ok(Self {
            tolerance_side: typed.tolerance_side.unwrap_or_default(),
            side,
            relief: typed.corner_relief,
            cutter_mm: cutter.map(|cutter| cutter.diameter_mm),
            allowance_mm: mm.length(&bounds::ALLOWANCE, typed.allowance)?.unwrap_or(0.0),
            drawing: DrawingSettings::new(&typed.drawing, &machine)?,
            tolerance: tolerance.unwrap_or(Tolerance::DEFAULT),
            depth_mm: mm.length(&bounds::DEPTH, typed.depth)?,
            pass_mm: mm.length(&bounds::PASS, typed.pass)?,
            layout: Layout::new(&typed.layout, mm)?,
            stock: Stock::new(&typed.setting_up, None, mm)?,
            machine,
        })
    }
}

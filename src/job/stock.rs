//! Zero, the stock with its place, and the clamps that hold it: as typed, and judged.

use clap::Args;
use kurbo::{Rect, Size, Vec2};
use serde::{Deserialize, Serialize};

use super::places::{ClampWanted, Pair, SizeWanted, ThicknessWanted};
use super::settings::{Origin, Zero};
use super::{Units, bounds};
use crate::error::{Error, Kind};
use crate::num::Length;

/// Zero, stock, clamps and the height of travel, as typed.
#[derive(Args, Clone, Debug, Default, Deserialize, Serialize, PartialEq)]
#[serde(default, rename_all = "kebab-case")]
pub struct SettingUpArgs {
    /// Where Z is zero [default: stock-top]
    #[arg(long, value_enum, help_heading = "Setting up")]
    pub zero: Option<Zero>,
    /// Thickness of the stock: one, or a range where it varies, such as 17.6..18.4mm
    #[arg(long, value_name = "LEN or RANGE", help_heading = "Setting up")]
    pub thickness: Option<ThicknessWanted>,
    /// Height above the stock at which the cutter travels [default: 5mm]
    #[arg(long, value_name = "LEN", help_heading = "Setting up")]
    pub clearance: Option<Length>,
    /// Where X and Y are zero [default: lower-left]
    #[arg(long, value_enum, help_heading = "Setting up")]
    pub origin: Option<Origin>,
    /// Size of the stock from above, such as 600x400mm
    #[arg(long, value_name = "WxH", help_heading = "Setting up")]
    pub stock: Option<SizeWanted>,
    /// Where on the machine the stock's lower left corner lies, from the lower left end of its travel; needs --stock
    #[arg(long, value_name = "X,Y", help_heading = "Setting up", allow_hyphen_values = true)]
    pub stock_at: Option<Pair>,
    /// Where on the stock the finished parts begin, from its lower left corner; needs --stock [default: in its middle]
    #[arg(long, value_name = "X,Y", help_heading = "Setting up", allow_hyphen_values = true)]
    pub parts_at: Option<Pair>,
    /// A clamp to keep clear of, from the program's zero, its height above the stock; may be given again
    #[arg(long, value_name = "X0,Y0,X1,Y1,HEIGHT", help_heading = "Setting up", allow_hyphen_values = true)]
    pub clamp: Option<Vec<ClampWanted>>,
}

/// Zero, the stock with its place, the clamps, and the height of travel. Lengths in mm.
#[derive(Clone, Debug, PartialEq)]
pub struct Stock {
    /// Where Z is zero.
    pub zero: Zero,
    /// The stock's thickness, where it is given.
    pub thickness: Option<Thickness>,
    /// The deepest cut into the bed that is allowed.
    pub bed_cut_mm: f64,
    /// How far above the stock the cutter travels, where that was said.
    pub clearance_mm: Option<f64>,
    /// Where X and Y are zero; `None` where that was not said.
    pub origin: Option<Origin>,
    /// The stock from above, where it is given.
    pub sheet: Option<Sheet>,
    /// What the cutter must keep clear of.
    pub clamps: Vec<Clamp>,
}

/// How thick the stock is, in mm: one value, or a range where it varies.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Thickness {
    /// The least thickness.
    pub thinnest: f64,
    /// The largest thickness.
    pub thickest: f64,
}

/// The stock from above, in mm.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Sheet {
    /// Its size.
    pub size: Size,
    /// Its lower left corner on the machine, from the lower left end of the travel; `None` where that was not said.
    pub at: Option<Vec2>,
    /// The lower left corner of the finished parts on it, from its own; `None` for parts in its middle.
    pub parts_at: Option<Vec2>,
}

/// A clamp, in mm.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Clamp {
    /// Where it stands, from the program's zero.
    pub place: Rect,
    /// How far it rises above the stock's top.
    pub height_mm: f64,
}

/// How far above the stock the cutter travels where nothing else is asked for, in mm.
const DEFAULT_CLEARANCE_MM: f64 = 5.0;
/// How far into the bed a cut may go where nothing else is asked for, in mm.
const DEFAULT_BED_CUT_MM: f64 = 0.3;

impl Stock {
    /// What was typed, judged.
    ///
    /// # Errors
    /// [`Kind::Settings`] for a setting out of its bounds, or one that another needs and that is missing.
    pub(super) fn new(typed: &SettingUpArgs, bed_cut: Option<Length>, mm: Units) -> Result<Self, Error> {
        let thickness = typed.thickness.map(|wanted| thickness(wanted, mm)).transpose()?;
        if typed.zero == Some(Zero::Bed) && thickness.is_none() {
            let what = "zero is on the bed, and the thickness of the stock is not given";
            return Err(Error::new(Kind::Settings, what).remedy("give --thickness, or use --zero stock-top"));
        }
        let clamps = typed.clamp.iter().flatten();
        Ok(Self {
            zero: typed.zero.unwrap_or_default(),
            thickness,
            bed_cut_mm: mm.length(&bounds::BED_CUT, bed_cut)?.unwrap_or(DEFAULT_BED_CUT_MM),
            clearance_mm: mm.length(&bounds::CLEARANCE, typed.clearance)?,
            origin: typed.origin,
            sheet: sheet(typed, mm)?,
            clamps: clamps.map(|wanted| clamp(wanted, mm)).collect::<Result<_, _>>()?,
        })
    }

    /// Where X and Y are zero.
    pub fn origin(&self) -> Origin {
        self.origin.unwrap_or_default()
    }

    /// How far above the stock the cutter travels.
    pub fn clearance_mm(&self) -> f64 {
        self.clearance_mm.unwrap_or(DEFAULT_CLEARANCE_MM)
    }

    /// The height of the top of the thickest stock, in the program's coordinates.
    pub fn top_mm(&self) -> f64 {
        match (self.zero, self.thickness) {
            (Zero::Bed, Some(thickness)) => thickness.thickest,
            _ => 0.0,
        }
    }

    /// How far the stock's underside may be above the height that the thickest stock's has, in mm: with zero on the
    /// stock's top thin stock lies on a bed that is higher by as much.
    pub fn play_mm(&self) -> f64 {
        match (self.zero, self.thickness) {
            (Zero::StockTop, Some(thickness)) => thickness.thickest - thickness.thinnest,
            _ => 0.0,
        }
    }
}

impl Thickness {
    /// The thickness in words, each length said by `show`, the unit once.
    pub fn words(self, show: impl Fn(f64) -> String, unit: &str) -> String {
        if self.thinnest < self.thickest {
            format!("{} to {} {unit} thick", show(self.thinnest), show(self.thickest))
        } else {
            format!("{} {unit} thick", show(self.thickest))
        }
    }
}

fn thickness(wanted: ThicknessWanted, mm: Units) -> Result<Thickness, Error> {
    let length = |typed| Ok(mm.length(&bounds::THICKNESS, Some(typed))?.unwrap_or_default());
    let (thinnest, thickest) = (length(wanted.thinnest)?, length(wanted.thickest)?);
    if thinnest > thickest {
        let what = format!("the thickness goes from {thinnest} down to {thickest} mm");
        return Err(Error::new(Kind::Settings, what).remedy("give the thinnest first, as in 17.6..18.4mm"));
    }
    Ok(Thickness { thinnest, thickest })
}

fn sheet(typed: &SettingUpArgs, mm: Units) -> Result<Option<Sheet>, Error> {
    let pair = |bound, typed: Option<Pair>| -> Result<Option<Vec2>, Error> {
        let Some(Pair { x, y }) = typed else { return Ok(None) };
        let length = |typed| mm.length(bound, Some(typed)).map(Option::unwrap_or_default);
        Ok(Some(Vec2::new(length(x)?, length(y)?)))
    };
    let (at, parts_at) = (pair(&bounds::STOCK_AT, typed.stock_at)?, pair(&bounds::PARTS_AT, typed.parts_at)?);
    let Some(SizeWanted { width, height }) = typed.stock else {
        let needs = [
            (at.is_some(), "--stock-at"),
            (parts_at.is_some(), "--parts-at"),
            (typed.origin == Some(Origin::Stock), "--origin stock"),
        ];
        let Some((_, option)) = needs.into_iter().find(|(given, _)| *given) else { return Ok(None) };
        let what = format!("{option} needs to know how large the stock is");
        return Err(Error::new(Kind::Settings, what).remedy("give --stock, such as --stock 600x400mm"));
    };
    let side = |typed| mm.length(&bounds::STOCK, Some(typed)).map(Option::unwrap_or_default);
    Ok(Some(Sheet { size: Size::new(side(width)?, side(height)?), at, parts_at }))
}

fn clamp(wanted: &ClampWanted, mm: Units) -> Result<Clamp, Error> {
    let place = |typed| mm.length(&bounds::CLAMP, Some(typed)).map(Option::unwrap_or_default);
    let ([x0, x1], [y0, y1]) = (wanted.x, wanted.y);
    let height_mm = mm.length(&bounds::CLAMP_HEIGHT, Some(wanted.height))?.unwrap_or_default();
    Ok(Clamp { place: Rect::new(place(x0)?, place(y0)?, place(x1)?, place(y1)?).abs(), height_mm })
}

impl SettingUpArgs {
    /// These settings, and where one is absent, that of `other`. Whoever names clamps names all.
    #[must_use]
    pub(super) fn or(self, other: Self) -> Self {
        Self {
            zero: self.zero.or(other.zero),
            thickness: self.thickness.or(other.thickness),
            clearance: self.clearance.or(other.clearance),
            origin: self.origin.or(other.origin),
            stock: self.stock.or(other.stock),
            stock_at: self.stock_at.or(other.stock_at),
            parts_at: self.parts_at.or(other.parts_at),
            clamp: self.clamp.or(other.clamp),
        }
    }
}

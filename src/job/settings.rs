//! Settings as they are typed or stand in a job file: one list for both, nothing judged yet.

use std::path::PathBuf;

use clap::{Args, ValueEnum};
use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::accuracy::AccuracyArgs;
use super::laying::LayoutArgs;
use super::stock::SettingUpArgs;
use super::wishes::CutArgs;
use crate::num::Length;

/// Every setting, each of which may be absent.
#[derive(Args, Clone, Debug, Default, Deserialize, Serialize, PartialEq)]
#[serde(default, rename_all = "kebab-case")]
pub struct Settings {
    /// Machine profile: a built-in name, or a TOML file [default: shop-router]
    #[arg(long, value_name = "NAME or FILE", help_heading = "Machine")]
    pub machine: Option<String>,

    /// How the drawing is read.
    #[command(flatten)]
    #[serde(flatten)]
    pub drawing: DrawingArgs,

    /// Largest distance allowed between cut path and drawing [default: 0.1mm, or what the trace supports]
    #[arg(long, value_name = "LEN", help_heading = "Accuracy")]
    pub tolerance: Option<Length>,
    /// How the tolerance is used, and what curves become.
    #[command(flatten)]
    #[serde(flatten)]
    pub accuracy: AccuracyArgs,

    /// How contours are cut.
    #[command(flatten)]
    #[serde(flatten)]
    pub cut: CutArgs,

    /// How the drawing is laid on the stock.
    #[command(flatten)]
    #[serde(flatten)]
    pub layout: LayoutArgs,
    /// Deepest cut into the bed under the stock [default: 0.3mm]
    #[arg(long, value_name = "LEN", help_heading = "Setting up")]
    pub bed_cut: Option<Length>,
    /// Zero, stock and clamps.
    #[command(flatten)]
    #[serde(flatten)]
    pub setting_up: SettingUpArgs,
}

/// How a drawing is read.
#[derive(Args, Clone, Debug, Default, Deserialize, Serialize, PartialEq)]
#[serde(default, rename_all = "kebab-case")]
pub struct DrawingArgs {
    /// What a bare number in the drawing means, where the drawing does not say
    #[arg(long, value_enum, value_name = "UNIT", help_heading = "Drawing")]
    pub drawing_unit: Option<DrawingUnit>,
    /// Scale the drawing by this factor
    #[arg(long, value_name = "F", help_heading = "Drawing")]
    pub scale: Option<f64>,
    /// Scale the drawing to this finished width
    #[arg(long, value_name = "LEN", help_heading = "Drawing", conflicts_with = "scale")]
    pub fit_width: Option<Length>,
    /// Cut only these layers
    #[arg(long, value_name = "A,B", value_delimiter = ',', help_heading = "Drawing")]
    pub layers: Option<Vec<String>>,
    /// Join ends that are at most this far apart [default: the tolerance]
    #[arg(long, value_name = "LEN", help_heading = "Drawing")]
    pub join: Option<Length>,
    /// Read drawings up to so many times the usual size: 256 MiB, 200000 contours, 5000000 vertices [default: 1]
    #[arg(long, value_name = "F", help_heading = "Drawing")]
    pub size_limit: Option<f64>,
}

/// What a bare number in a drawing means.
#[derive(Clone, Copy, Debug, Deserialize, Serialize, PartialEq, Eq, ValueEnum)]
#[serde(rename_all = "kebab-case")]
pub enum DrawingUnit {
    /// Millimetres
    Mm,
    /// Inches
    In,
    /// Pixels, 96 to the inch
    Px,
}

/// Where Z is zero.
#[derive(Clone, Copy, Debug, Default, Deserialize, Serialize, JsonSchema, PartialEq, Eq, ValueEnum)]
#[serde(rename_all = "kebab-case")]
pub enum Zero {
    /// On top of the stock
    #[default]
    StockTop,
    /// On the bed, under the stock
    Bed,
}

/// Where X and Y are zero.
#[derive(Clone, Copy, Debug, Default, Deserialize, Serialize, JsonSchema, PartialEq, Eq, ValueEnum)]
#[serde(rename_all = "kebab-case")]
pub enum Origin {
    /// At the lower left corner of the finished parts
    #[default]
    LowerLeft,
    /// In the middle of the finished parts
    Centre,
    /// Where the drawing has it
    Drawing,
    /// At the lower left corner of the stock
    Stock,
}

impl Zero {
    /// The place in words.
    pub fn words(self) -> &'static str {
        match self {
            Self::StockTop => "the top of the stock",
            Self::Bed => "the bed under the stock",
        }
    }
}

impl Origin {
    /// The place in words.
    pub fn words(self) -> &'static str {
        match self {
            Self::LowerLeft => "the lower left corner of the finished parts",
            Self::Centre => "the middle of the finished parts",
            Self::Drawing => "the drawing's own zero",
            Self::Stock => "the lower left corner of the stock",
        }
    }
}

/// Where outputs go, and what may be replaced.
#[derive(Args, Clone, Debug, Default)]
pub struct Outputs {
    /// Where the program goes; - is standard output [default: beside the drawing]
    #[arg(short, long, value_name = "FILE", help_heading = "Files")]
    pub output: Option<PathBuf>,
    /// Write a report in JSON
    #[arg(long, value_name = "FILE", help_heading = "Files")]
    pub report: Option<PathBuf>,
    /// Replace outputs that exist already
    #[arg(long, help_heading = "Files")]
    pub overwrite: bool,
}

impl Settings {
    /// These settings, and where one is absent, that of `other`.
    #[must_use]
    pub fn or(self, other: Self) -> Self {
        Self {
            machine: self.machine.or(other.machine),
            drawing: self.drawing.or(other.drawing),
            tolerance: self.tolerance.or(other.tolerance),
            accuracy: self.accuracy.or(other.accuracy),
            cut: self.cut.or(other.cut),
            bed_cut: self.bed_cut.or(other.bed_cut),
            layout: self.layout.or(other.layout),
            setting_up: self.setting_up.or(other.setting_up),
        }
    }
}

impl DrawingArgs {
    fn or(self, other: Self) -> Self {
        Self {
            drawing_unit: self.drawing_unit.or(other.drawing_unit),
            // A typed scale replaces a width asked for in the file, and the other way round.
            scale: if self.fit_width.is_some() { self.scale } else { self.scale.or(other.scale) },
            fit_width: if self.scale.is_some() { self.fit_width } else { self.fit_width.or(other.fit_width) },
            layers: self.layers.or(other.layers),
            join: self.join.or(other.join),
            size_limit: self.size_limit.or(other.size_limit),
        }
    }
}

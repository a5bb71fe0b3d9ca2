//! How the tolerance is used, and what the curves become.

use clap::{Args, ValueEnum};
use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::{Cutting, Side};
use crate::error::{Error, Kind};
use crate::machine::{Machine, names};

/// Settings about accuracy beside the tolerance itself, each of which may be absent.
#[derive(Args, Clone, Debug, Default, Deserialize, Serialize, PartialEq)]
#[serde(default, rename_all = "kebab-case")]
pub struct AccuracyArgs {
    /// Where the tolerance may be used: on both sides of the line, or never inside the part [default: both]
    #[arg(long, value_enum, help_heading = "Accuracy")]
    pub tolerance_side: Option<ToleranceSide>,
    /// What curves are written as [default: arcs]
    #[arg(long = "as", value_enum, value_name = "MOVES", help_heading = "Accuracy")]
    #[serde(rename = "as")]
    pub moves: Option<Moves>,
    /// Show curvature along trace, fair curve and path, in the report and the picture
    #[arg(long, help_heading = "Accuracy", num_args = 0, default_missing_value = "true")]
    pub curvature: Option<bool>,
}

/// Where the tolerance may be used.
#[derive(Clone, Copy, Debug, Default, Deserialize, Serialize, JsonSchema, PartialEq, Eq, ValueEnum)]
#[serde(rename_all = "kebab-case")]
pub enum ToleranceSide {
    /// On both sides of the line
    #[default]
    Both,
    /// On the waste side: what is kept is never cut into
    Waste,
}

/// What curves are written as.
#[derive(Clone, Copy, Debug, Default, Deserialize, Serialize, JsonSchema, PartialEq, Eq, ValueEnum)]
#[serde(rename_all = "kebab-case")]
pub enum Moves {
    /// Arcs and lines
    #[default]
    Arcs,
    /// Cubic moves, on machines that have a word for them
    Splines,
}

impl AccuracyArgs {
    /// These settings, and where one is absent, that of `other`.
    #[must_use]
    pub(super) fn or(self, other: Self) -> Self {
        Self {
            tolerance_side: self.tolerance_side.or(other.tolerance_side),
            moves: self.moves.or(other.moves),
            curvature: self.curvature.or(other.curvature),
        }
    }

    /// Refuses what the machine, or the sides that are cut on, do not allow.
    pub(super) fn judge<'a>(
        &self,
        machine: &Machine,
        mut cuttings: impl Iterator<Item = &'a Cutting> + Clone,
    ) -> Result<(), Error> {
        let refused = |what: String, remedy: String| Err(Error::new(Kind::Refused, what).remedy(remedy));
        let waste = self.tolerance_side == Some(ToleranceSide::Waste);
        let beside = |cutting: &Cutting| cutting.side != Side::On;
        let (some_beside, some_on) = (cuttings.clone().any(beside), cuttings.any(|cutting| !beside(cutting)));
        if waste && some_beside && some_on {
            let what = "--tolerance-side waste, and some layers are cut on the line and some beside it: one \
                        program cannot be checked for both";
            return refused(what.into(), "write a program for each with --layers".into());
        }
        if self.moves != Some(Moves::Splines) {
            return Ok(());
        }
        if machine.program.spline.is_none() {
            let has_word = |name: &&str| Machine::named(name).is_ok_and(|m| m.program.spline.is_some());
            let with_word: Vec<&str> = names().filter(has_word).collect();
            return refused(
                format!(
                    "{} has no word for cubic moves: its profile declares no program.spline",
                    machine.name
                ),
                format!("leave --as out, or name a machine that has one, such as {}", with_word.join(", ")),
            );
        }
        if some_beside || waste {
            let what = "cubic moves run on the line only: beside a cubic runs no cubic";
            return refused(what.into(), "leave --as out: arcs stay arcs beside the line".into());
        }
        Ok(())
    }
}

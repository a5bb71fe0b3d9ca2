//! What a program that exists already is to be condensed to.

use clap::Args;

use super::{Units, bounds, machine, spans_decimals};
use crate::error::Error;
use crate::machine::Machine;
use crate::num::{Length, Tolerance};

/// How a program is condensed, as typed.
#[derive(Args, Clone, Debug, Default)]
pub struct CondenseArgs {
    /// Machine profile: a built-in name, or a TOML file [default: shop-router]
    #[arg(long, value_name = "NAME or FILE", help_heading = "Machine")]
    pub machine: Option<String>,
    /// Largest distance allowed between the program's own cuts and the new ones [default: 0.1mm]
    #[arg(long, value_name = "LEN", help_heading = "Accuracy")]
    pub tolerance: Option<Length>,
}

/// How a program is condensed, every setting inside its bounds.
#[derive(Clone, Debug)]
pub struct CondenseJob {
    /// The machine that the program is for.
    pub machine: Machine,
    /// How far the new cuts may be from the old ones.
    pub tolerance: Tolerance,
}

impl CondenseJob {
    /// What `typed` asks for.
    ///
    /// # Errors
    /// [`Kind::Settings`](crate::error::Kind) for a setting out of its bounds, [`Kind::Refused`](crate::error::Kind)
    /// for a tolerance below what the machine's decimals hold.
    pub fn new(typed: &CondenseArgs) -> Result<Self, Error> {
        let machine = machine(typed.machine.as_deref())?;
        let mm = Units { machine: machine.unit };
        let tolerance = mm.length(&bounds::TOLERANCE, typed.tolerance)?;
        if let Some(tolerance) = tolerance {
            spans_decimals(tolerance, &machine)?;
        }
        let tolerance = tolerance.and_then(Tolerance::new).unwrap_or(Tolerance::DEFAULT);
        Ok(Self { machine, tolerance })
    }
}

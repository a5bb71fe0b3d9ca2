//! A range of tolerances to compare.

use clap::Args;

use super::{Units, bounds};
use crate::error::{Error, Kind};
use crate::machine::Machine;
use crate::num::Length;

/// A range of tolerances as typed.
#[derive(Args, Clone, Debug, Default)]
pub struct LadderArgs {
    /// Finest tolerance [default: 0.02mm]
    #[arg(long, value_name = "LEN", help_heading = "Range")]
    pub from: Option<Length>,
    /// Widest tolerance [default: 1mm]
    #[arg(long, value_name = "LEN", help_heading = "Range")]
    pub to: Option<Length>,
    /// How many tolerances, each the same factor above the one before [default: 9]
    #[arg(long, value_name = "N", help_heading = "Range")]
    pub steps: Option<usize>,
}

/// A range of tolerances inside its bounds, in mm.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Ladder {
    from_mm: f64,
    to_mm: f64,
    steps: usize,
}

const FROM_MM: f64 = 0.02;
const TO_MM: f64 = 1.0;
const STEPS: usize = 9;
/// More tolerances than this are no easier to read.
const MOST_STEPS: usize = 100;

impl Ladder {
    /// The range that `typed` asks for; a bare number is in the machine's unit.
    ///
    /// # Errors
    /// [`Kind::Settings`] for a value out of its bounds, or a range that does not rise.
    pub fn new(typed: &LadderArgs, machine: &Machine) -> Result<Self, Error> {
        let mm = Units { machine: machine.unit };
        let from_mm = mm.length(&bounds::FROM, typed.from)?.unwrap_or(FROM_MM);
        let to_mm = mm.length(&bounds::TO, typed.to)?.unwrap_or(TO_MM);
        let steps = typed.steps.unwrap_or(STEPS);
        if from_mm >= to_mm {
            let what = format!("the range of tolerances from {from_mm} to {to_mm} mm does not rise");
            return Err(Error::new(Kind::Settings, what).remedy("give a --from below --to"));
        }
        if !(2..=MOST_STEPS).contains(&steps) {
            let what = format!("steps is {steps}, and must be from 2 to {MOST_STEPS}");
            return Err(Error::new(Kind::Settings, what).remedy("correct --steps"));
        }
        Ok(Self { from_mm, to_mm, steps })
    }

    /// The tolerances in mm, the finest first, each the same factor above the one before. Those between the ends are
    /// rounded to three digits.
    pub fn tolerances(&self) -> Vec<f64> {
        let last = self.steps - 1;
        let rung = |k: usize| match k {
            0 => self.from_mm,
            k if k == last => self.to_mm,
            k => three_digits(self.from_mm * (self.to_mm / self.from_mm).powf(k as f64 / last as f64)),
        };
        let mut all: Vec<f64> = (0..self.steps).map(rung).collect();
        all.dedup();
        all
    }
}

fn three_digits(value: f64) -> f64 {
    format!("{value:.2e}").parse().unwrap_or(value)
}

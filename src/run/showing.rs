//! From a plan to its pictures.

use super::{CutterProgram, Plan};
use crate::feed::Limits;
use crate::job::Job;
use crate::preview::Scene;
use crate::report::Report;

/// What the pictures of a plan show, one for each program.
pub(super) fn scenes<'a>(job: &Job, plan: &'a Plan, reports: &'a [Report]) -> Vec<Scene<'a>> {
    let diameter = |made: &CutterProgram| job.cutters[made.cutter].diameter_mm;
    let cutters_mm: Vec<f64> = plan.programs.iter().map(diameter).collect();
    let scene = |(number, (made, report)): (usize, (&'a CutterProgram, &'a Report))| Scene {
        report,
        text: &made.text,
        program: &made.program,
        drawn: &plan.drawn,
        verdict: &made.verdict,
        limits: Limits::of(&job.machine),
        cutters_mm: cutters_mm.clone(),
        number,
        stock_top: plan.setup.heights().top,
        fair: plan.bends.clone(),
    };
    plan.programs.iter().zip(reports).enumerate().map(scene).collect()
}

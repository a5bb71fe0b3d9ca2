//! From a plan to its pictures.

use super::{Plan, cutting};
use crate::feed::Limits;
use crate::job::Job;
use crate::preview::Scene;
use crate::report::Report;

/// What the pictures of a plan show.
pub(super) fn scene<'a>(job: &Job, plan: &'a Plan, report: &'a Report) -> Scene<'a> {
    Scene {
        report,
        text: &plan.text,
        program: &plan.program,
        sketch: &plan.sketch,
        drawing_at: plan.shift,
        verdict: &plan.verdict,
        limits: Limits::of(&job.machine),
        stock_top: cutting::setup(job, plan.part, plan.shift).heights().top,
        thickness_mm: job.stock.thickness_mm,
    }
}

//! From a plan to its pictures.

use super::Plan;
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
        drawn: &plan.drawn,
        verdict: &plan.verdict,
        limits: Limits::of(&job.machine),
        stock_top: job.stock.top_mm(),
        fair: plan.bends.clone(),
    }
}

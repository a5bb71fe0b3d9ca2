//! `ribband compare`: what a drawing costs at a range of tolerances.

use super::args::Compare;
use super::{drawn, job_file, print, report_to, tell};
use crate::compare::compare as planned;
use crate::error::{Error, Kind};
use crate::files::Target;
use crate::job::{CutArgs, Job, JobFile, Ladder, Settings};
use crate::num::Length;
use crate::run::Source;

/// The depth that is compared where none is asked for, in mm: one pass of any cutter, so that no pass counts twice.
const DEPTH_MM: f64 = 1.0;

/// Carries out `ribband compare`.
pub(super) fn compare(typed: &Compare) -> Result<(), Error> {
    if typed.settings.tolerance.is_some() {
        let what = "compare goes through a range of tolerances, and --tolerance asks for one";
        return Err(Error::new(Kind::Settings, what).remedy("give the range with --from, --to and --steps"));
    }
    let file = job_file(typed.job.as_deref())?;
    let default = CutArgs { depth: Some(Length::from_mm(DEPTH_MM)), ..CutArgs::default() };
    let settings = file.settings.or(Settings { cut: default, ..Settings::default() });
    let job = Job::new(&typed.settings, &JobFile { settings, ..file })?;
    let ladder = Ladder::new(&typed.range, &job.machine)?;
    let outputs = &typed.outputs;
    let report = report_to(outputs.report.as_deref(), outputs.overwrite, &[&typed.drawing])?;
    let plot = outputs.output.as_deref().map(|path| Target::new(Some(path), &typed.drawing, "svg"));
    if let Some(plot) = &plot {
        plot.check(outputs.overwrite, &[&typed.drawing])?;
    }
    if plot.is_some() && plot == report {
        let what = "plot and report would be the same file";
        return Err(Error::new(Kind::Settings, what).remedy("choose another --report"));
    }
    let name = typed.drawing.display().to_string();
    let bytes = drawn(&typed.drawing, &job.drawing)?;
    let compared = planned(&job, Source { name: &name, bytes: &bytes }, &ladder)
        .map_err(|error| if error.file.is_empty() { error.in_file(name.as_str()) } else { error })?;

    // Both are ready before either appears.
    let staged_report = report.as_ref().map(|to| to.stage(compared.json().as_bytes())).transpose()?;
    let staged_plot = plot.as_ref().map(|to| to.stage(compared.plot().as_bytes())).transpose()?;
    for staged in [staged_report, staged_plot].into_iter().flatten() {
        staged.appear(outputs.overwrite)?;
    }
    let table = compared.table(job.machine.unit);
    if [report, plot].contains(&Some(Target::Stdout)) {
        tell(&table);
        return Ok(());
    }
    print(&table)
}

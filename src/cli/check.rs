//! `ribband check`: any program against a drawing.

use super::args::Check;
use super::{drawn, print, report_to, tell};
use crate::error::{Error, Kind};
use crate::files::Target;
use crate::job::CheckJob;
use crate::report;
use crate::run::{self, Source};
use crate::summary;

/// Carries out `ribband check`; a claim that fails is an error after everything was told.
pub(super) fn check(typed: &Check) -> Result<(), Error> {
    let job = CheckJob::new(&typed.settings)?;
    let report = report_to(typed.report.as_deref(), typed.overwrite, &[&typed.program, &typed.against])?;
    let (program, drawing) = (typed.program.display().to_string(), typed.against.display().to_string());
    let program_bytes = drawn(&typed.program, &job.drawing)?;
    let drawing_bytes = drawn(&typed.against, &job.drawing)?;
    let told = run::check(
        &job,
        Source { name: &program, bytes: &program_bytes },
        Source { name: &drawing, bytes: &drawing_bytes },
    )?;
    if let Some(report) = &report {
        report.write(report::check_json(&told).as_bytes(), typed.overwrite)?;
    }
    let text = summary::check_list(&told);
    if report == Some(Target::Stdout) {
        tell(&text);
    } else {
        print(&text)?;
    }
    holds(&told, &program)
}

fn holds(verdict: &report::Check, program: &str) -> Result<(), Error> {
    if verdict.holds {
        return Ok(());
    }
    let error = Error::new(Kind::Refused, "the program does not hold against the drawing").in_file(program);
    Err(error.remedy("the claims that fail are listed above, with the lines of the program"))
}

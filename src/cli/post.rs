//! `ribband post`: from a drawing to a program on disk.

use std::path::Path;

use super::args::Post;
use super::progress::Bar;
use super::{job_file, print, tell};
use crate::cautions;
use crate::error::{Error, Kind};
use crate::files::{self, Target};
use crate::job::Job;
use crate::machine::Machine;
use crate::run::{self, Source};
use crate::summary::summary;

/// Carries out `ribband post`.
pub(super) fn post(typed: &Post) -> Result<(), Error> {
    let job = Job::new(&typed.settings, &job_file(typed.job.as_deref())?)?;
    let (program, report) = targets(typed, &job.machine)?;
    let name = typed.drawing.display().to_string();
    let bytes = files::read(&typed.drawing)?;
    let plan = run::plan(&job, Source { name: &name, bytes: &bytes }, &Bar::new(typed.quiet))?;
    let told = run::report(&job, &plan, &name, &program.name());

    // Both are ready before either appears: a program never stands without the report that was asked for.
    let staged_program = program.stage(plan.text.as_bytes())?;
    let staged_report = report.as_ref().map(|report| report.stage(told.json().as_bytes())).transpose()?;
    let overwrite = typed.outputs.overwrite;
    staged_program.appear(overwrite)?;
    staged_report.map_or(Ok(()), |staged| staged.appear(overwrite))?;

    if typed.quiet {
        return Ok(());
    }
    let text = format!("{}\nCautions\n{}", summary(&told), cautions::list());
    if [Some(&program), report.as_ref()].contains(&Some(&Target::Stdout)) {
        tell(&text);
        return Ok(());
    }
    print(&text)
}

/// Where program and report go, refused now where writing would be refused later.
fn targets(typed: &Post, machine: &Machine) -> Result<(Target, Option<Target>), Error> {
    let outputs = &typed.outputs;
    let ending = machine.files.ending.trim_start_matches('.');
    let program = Target::new(outputs.output.as_deref(), &typed.drawing, ending);
    let report = outputs.report.as_deref().map(|path| Target::new(Some(path), &typed.drawing, "json"));
    let inputs: Vec<&Path> =
        [Some(typed.drawing.as_path()), typed.job.as_deref()].into_iter().flatten().collect();
    program.check(outputs.overwrite, &inputs)?;
    if let Some(report) = &report {
        report.check(outputs.overwrite, &inputs)?;
        if *report == program {
            let what = "program and report would be the same file";
            return Err(Error::new(Kind::Settings, what)
                .in_file(program.name())
                .remedy("choose another --report"));
        }
    }
    named_for(&program, machine)?;
    Ok((program, report))
}

/// Refuses a file name that the controller does not take.
pub(super) fn named_for(program: &Target, machine: &Machine) -> Result<(), Error> {
    let Target::File(path) = program else { return Ok(()) };
    let stem = path.file_stem().unwrap_or_default().to_string_lossy();
    let Some(flaw) = machine.files.flaw_in(&stem) else { return Ok(()) };
    Err(Error::new(Kind::Settings, flaw).in_file(program.name()).remedy("choose another name with -o"))
}

//! `ribband post`: from a drawing to a program on disk.

use super::args::Post;
use super::outputs::Targets;
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
    let ending = job.machine.files.ending.trim_start_matches('.');
    let program = Target::new(typed.outputs.output.as_deref(), &typed.drawing, ending);
    let targets = Targets::new(typed, program, "program")?;
    named_for(targets.main(), &job.machine)?;
    let name = typed.drawing.display().to_string();
    let bytes = files::read(&typed.drawing)?;
    let plan = run::plan(&job, Source { name: &name, bytes: &bytes }, &Bar::new(typed.quiet))?;
    let told = run::report(&job, &plan, &name, &targets.main().name());
    targets.write(&plan.text, &run::scene(&job, &plan, &told))?;

    if typed.quiet {
        return Ok(());
    }
    let text = format!("{}\nCautions\n{}", summary(&told), cautions::list());
    if targets.use_stdout() {
        tell(&text);
        return Ok(());
    }
    print(&text)
}

/// Refuses a file name that the controller does not take.
pub(super) fn named_for(program: &Target, machine: &Machine) -> Result<(), Error> {
    let Target::File(path) = program else { return Ok(()) };
    let stem = path.file_stem().unwrap_or_default().to_string_lossy();
    let Some(flaw) = machine.files.flaw_in(&stem) else { return Ok(()) };
    Err(Error::new(Kind::Settings, flaw).in_file(program.name()).remedy("choose another name with -o"))
}

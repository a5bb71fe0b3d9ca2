//! `ribband post`: from a drawing to a program on disk.

use super::args::Post;
use super::outputs::Targets;
use super::progress::Bar;
use super::{job_file, print, tell};
use crate::cautions;
use crate::error::{Error, Kind};
use crate::files::{self, Staged, Target};
use crate::job::Job;
use crate::machine::Machine;
use crate::run::{self, Part, Plan, Source};
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
    let staged = staged_programs(&plan, targets.main(), &job.machine, typed.outputs.overwrite)?;
    targets.write_staged(staged, &run::scene(&job, &plan, &told))?;

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

/// The program's file, or those of its parts, ready to appear.
fn staged_programs(
    plan: &Plan,
    to: &Target,
    machine: &Machine,
    overwrite: bool,
) -> Result<Vec<Staged>, Error> {
    if plan.parts.is_empty() {
        return Ok(vec![to.stage(plan.text.as_bytes())?]);
    }
    if *to == Target::Stdout {
        let what = format!("the program is {} parts for this controller's memory", plan.parts.len());
        return Err(Error::new(Kind::Output, what).remedy("name a file with -o instead of standard output"));
    }
    let stage = |(k, part): (usize, &Part)| {
        let target = to.part(k);
        target.check(overwrite, &[])?;
        named_for(&target, machine)?;
        target.stage(part.text.as_bytes())
    };
    (1..).zip(&plan.parts).map(stage).collect()
}

/// Refuses a file name that the controller does not take.
pub(super) fn named_for(program: &Target, machine: &Machine) -> Result<(), Error> {
    let Target::File(path) = program else { return Ok(()) };
    let stem = path.file_stem().unwrap_or_default().to_string_lossy();
    let Some(flaw) = machine.files.flaw_in(&stem) else { return Ok(()) };
    Err(Error::new(Kind::Settings, flaw).in_file(program.name()).remedy("choose another name with -o"))
}

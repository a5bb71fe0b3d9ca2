//! `ribband post`: from a drawing to a program on disk.

use std::collections::HashMap;
use std::path::{Path, PathBuf};

use super::args::{Post, Posts};
use super::outputs::Targets;
use super::progress::Bar;
use super::{batch, drawn, job_file, print, tell};
use crate::cautions;
use crate::error::{Error, Kind};
use crate::files::{Staged, Target};
use crate::job::{Job, Outputs};
use crate::machine::Machine;
use crate::report::Report;
use crate::run::{self, Part, Plan, Source};
use crate::summary::{in_short, summary};

/// Carries out `ribband post`; returns the exit status.
pub(super) fn posts(typed: &Posts) -> Result<u8, Error> {
    let job = Job::new(&typed.first.settings, &job_file(typed.first.job.as_deref())?)?;
    if typed.more.is_empty() { post(&typed.first, &job).map(|()| 0) } else { each(typed, &job) }
}

/// One drawing.
fn post(typed: &Post, job: &Job) -> Result<(), Error> {
    let (told, on_stdout) = write(typed, job)?;
    if typed.quiet {
        return Ok(());
    }
    let text = format!("{}\nCautions\n{}", summary(&told), cautions::list());
    if on_stdout {
        tell(&text);
        return Ok(());
    }
    print(&text)
}

/// Several drawings, each by itself.
fn each(typed: &Posts, job: &Job) -> Result<u8, Error> {
    let first = &typed.first;
    let drawings: Vec<&Path> =
        std::iter::once(&first.drawing).chain(&typed.more).map(PathBuf::as_path).collect();
    let alone = |drawing: &Path| {
        let outputs = &first.outputs;
        let place = |folder: &Option<PathBuf>, ending: &str, option: &str| {
            batch::place(folder.as_deref(), drawing, ending, option)
        };
        let place_if = |folder: &Option<PathBuf>, ending: &str, option: &str| {
            folder.is_some().then(|| place(folder, ending, option)).transpose()
        };
        let ending = job.machine.files.ending.trim_start_matches('.');
        let output = Some(place(&outputs.output, ending, "-o")?);
        let report = place_if(&outputs.report, "json", "--report")?;
        let setup_sheet = place_if(&first.setup_sheet, "html", "--setup-sheet")?;
        let outputs = Outputs { output, report, ..outputs.clone() };
        Ok(Post { drawing: drawing.to_owned(), outputs, setup_sheet, quiet: true, ..first.clone() })
    };
    let posts = drawings.iter().map(|drawing| alone(drawing)).collect::<Result<Vec<Post>, Error>>()?;
    let outputs: Vec<PathBuf> = posts.iter().filter_map(|post| post.outputs.output.clone()).collect();
    batch::apart(&drawings, &outputs)?;
    let posts: HashMap<&Path, &Post> = drawings.iter().copied().zip(&posts).collect();
    let status = batch::each(&drawings, first.quiet, |drawing| {
        let (told, _) = write(posts[drawing], job)?;
        Ok(in_short(&told))
    })?;
    if !first.quiet {
        print(&format!("\nCautions\n{}", cautions::list()))?;
    }
    Ok(status)
}

/// Plans one drawing and writes what was asked for; true when some of it went to standard output.
fn write(typed: &Post, job: &Job) -> Result<(Report, bool), Error> {
    let ending = job.machine.files.ending.trim_start_matches('.');
    let program = Target::new(typed.outputs.output.as_deref(), &typed.drawing, ending);
    let targets = Targets::new(typed, program, "program")?;
    named_for(targets.main(), &job.machine)?;
    let name = typed.drawing.display().to_string();
    let bytes = drawn(&typed.drawing, &job.drawing)?;
    let plan = run::plan(job, Source { name: &name, bytes: &bytes }, &Bar::new(typed.quiet))?;
    let told = run::report(job, &plan, &name, &targets.main().name());
    let staged = staged_programs(&plan, targets.main(), &job.machine, typed.outputs.overwrite)?;
    targets.write_staged(staged, &run::scene(job, &plan, &told))?;
    Ok((told, targets.use_stdout()))
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

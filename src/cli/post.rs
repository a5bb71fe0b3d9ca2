//! `ribband post`: from a drawing to a program on disk.

use std::collections::HashMap;
use std::path::{Path, PathBuf};

use super::args::{Planned, Post, Posts};
use super::outputs::{Numbered, Targets};
use super::progress::Bar;
use super::{batch, drawn, job_file, print, resume, tell};
use crate::cautions;
use crate::error::{Error, Kind};
use crate::files::{Staged, Target};
use crate::job::{Job, JobFile, Outputs};
use crate::machine::Machine;
use crate::report::{self, Report};
use crate::run::{self, Dry, DryRun, Plan, Source};
use crate::summary::{in_short, summary};

/// Carries out `ribband post`; returns the exit status.
pub(super) fn posts(typed: &Posts) -> Result<u8, Error> {
    let planned = &typed.first.planned;
    let file = job_file(planned.job.as_deref())?;
    let job = Job::new(&planned.settings, &file)?;
    match (typed.first.resume_at, typed.more.is_empty()) {
        (Some(block), true) => resume::resume(planned, &job, block).map(|()| 0),
        (Some(_), false) => {
            let what = "one program is taken up again at a time, and several drawings are named";
            Err(Error::new(Kind::Settings, what).remedy("name one drawing with --resume-at"))
        }
        (None, true) => post(&typed.first, (&file, &job)).map(|()| 0),
        (None, false) => each(typed, (&file, &job)),
    }
}

/// One drawing.
fn post(typed: &Post, job: (&JobFile, &Job)) -> Result<(), Error> {
    let (told, on_stdout) = write(typed, job)?;
    if typed.planned.quiet {
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
fn each(typed: &Posts, (file, job): (&JobFile, &Job)) -> Result<u8, Error> {
    let first = &typed.first.planned;
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
        let save_job = place_if(&first.save_job, "toml", "--save-job")?;
        let outputs = Outputs { output, report, ..outputs.clone() };
        let drawing = drawing.to_owned();
        let planned = Planned { drawing, outputs, setup_sheet, save_job, quiet: true, ..first.clone() };
        Ok(Post { planned, ..typed.first.clone() })
    };
    let posts = drawings.iter().map(|drawing| alone(drawing)).collect::<Result<Vec<Post>, Error>>()?;
    let outputs: Vec<PathBuf> = posts.iter().filter_map(|post| post.planned.outputs.output.clone()).collect();
    batch::apart(&drawings, &outputs)?;
    let posts: HashMap<&Path, &Post> = drawings.iter().copied().zip(&posts).collect();
    let status = batch::each(&drawings, first.quiet, |drawing| {
        let (told, _) = write(posts[drawing], (file, job))?;
        Ok(in_short(&told))
    })?;
    if !first.quiet {
        print(&format!("\nCautions\n{}", cautions::list()))?;
    }
    Ok(status)
}

/// Plans one drawing and writes what was asked for; true when some of it went to standard output.
fn write(typed: &Post, (file, job): (&JobFile, &Job)) -> Result<(Report, bool), Error> {
    let planned = &typed.planned;
    let targets = Targets::new(planned, file, place(planned, job), "program")?;
    named_for(targets.main(), &job.machine)?;
    let name = planned.drawing.display().to_string();
    let plan = plan(planned, job)?;
    let mut reports = run::reports(job, &plan, &name, &targets.main().name());
    let texts: Vec<&str> = plan.programs.iter().flat_map(|program| program.texts()).collect();
    let mut staged = Vec::new();
    for run in dry_runs(typed, job, &plan)? {
        let (told, files) = stage_dry_run(&run, targets.main(), job, planned.outputs.overwrite)?;
        reports.iter_mut().for_each(|report| report.dry_runs.push(told.clone()));
        staged.extend(files);
    }
    let numbered = Numbered { overwrite: planned.outputs.overwrite, machine: Some(&job.machine) };
    staged.extend(numbered.stage(&texts, targets.main())?);
    targets.write_staged(staged, &run::scenes(job, &plan, &reports))?;
    let told = Report::together(&reports);
    let told = told.ok_or_else(|| Error::new(Kind::Refused, "there is nothing to cut"))?;
    Ok((told, targets.use_stdout()))
}

/// Where the program goes.
pub(super) fn place(typed: &Planned, job: &Job) -> Target {
    let ending = job.machine.files.ending.trim_start_matches('.');
    Target::new(typed.outputs.output.as_deref(), &typed.drawing, ending)
}

/// The drawing's plan.
pub(super) fn plan(typed: &Planned, job: &Job) -> Result<Plan, Error> {
    let name = typed.drawing.display().to_string();
    let bytes = drawn(&typed.drawing, &job.drawing)?;
    run::plan(job, Source { name: &name, bytes: &bytes }, &Bar::new(typed.quiet))
}

/// The dry runs that are asked for.
fn dry_runs(typed: &Post, job: &Job, plan: &Plan) -> Result<Vec<DryRun>, Error> {
    let air_cut = typed.air_cut.then(|| run::air_cut(job, plan)).transpose()?;
    let frame = typed.frame.then(|| run::frame(job, plan)).transpose()?;
    Ok([air_cut, frame].into_iter().flatten().collect())
}

/// A dry run beside the program, ready to appear.
fn stage_dry_run(
    run: &DryRun,
    program: &Target,
    job: &Job,
    overwrite: bool,
) -> Result<(report::DryRun, Vec<Staged>), Error> {
    if *program == Target::Stdout {
        let what =
            format!("the {} stands beside the program, and that goes to standard output", run.kind.name());
        return Err(Error::new(Kind::Output, what).remedy("name a file with -o"));
    }
    let words = match run.kind {
        Dry::AirCut => ["air", "a"],
        Dry::Frame => ["frame", "f"],
    };
    let target = beside(program, &words, &job.machine)?;
    let texts: Vec<&str> = run.texts.iter().map(String::as_str).collect();
    let numbered = Numbered { overwrite, machine: Some(&job.machine) };
    let names = Numbered::places(texts.len(), &target).iter().map(Target::name).collect::<Vec<_>>();
    Ok((run::report_dry_run(run, &names), numbered.stage(&texts, &target)?))
}

/// The place beside a program with the first of these words that makes a name for the controller.
pub(super) fn beside(program: &Target, words: &[&str; 2], machine: &Machine) -> Result<Target, Error> {
    let places = words.map(|word| {
        let lower = program.beside(word);
        if named_for(&lower, machine).is_ok() { lower } else { program.beside(&word.to_uppercase()) }
    });
    let [long, short] = places;
    if named_for(&long, machine).is_ok() {
        return Ok(long);
    }
    named_for(&short, machine).map(|()| short)
}

/// Refuses a file name that the controller does not take.
pub(super) fn named_for(program: &Target, machine: &Machine) -> Result<(), Error> {
    let Target::File(path) = program else { return Ok(()) };
    let stem = path.file_stem().unwrap_or_default().to_string_lossy();
    let Some(flaw) = machine.files.flaw_in(&stem) else { return Ok(()) };
    Err(Error::new(Kind::Settings, flaw).in_file(program.name()).remedy("choose another name with -o"))
}

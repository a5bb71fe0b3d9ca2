//! What a planned job writes: its main output, a report, a setup sheet; all of them or none.

use std::path::Path;

use super::args::Planned;
use super::post::named_for;
use crate::error::{Error, Kind};
use crate::files::{Staged, Target};
use crate::job::JobFile;
use crate::machine::Machine;
use crate::preview::{Scene, setup_sheet};
use crate::report::Report;

/// Where everything goes.
pub(super) struct Targets {
    /// The program, or its picture.
    main: Target,
    report: Option<Target>,
    sheet: Option<Target>,
    /// A job file, with its text.
    job: Option<(Target, String)>,
    overwrite: bool,
}

/// One file, or several that are numbered.
pub(super) struct Numbered<'a> {
    pub(super) overwrite: bool,
    /// The machine whose controller must take the names; `None` for what no controller reads.
    pub(super) machine: Option<&'a Machine>,
}

impl Numbered<'_> {
    /// The places of so many files: the one that was named, or numbered ones.
    pub(super) fn places(count: usize, to: &Target) -> Vec<Target> {
        if count == 1 { vec![to.clone()] } else { (1..=count).map(|k| to.part(k)).collect() }
    }

    /// The files ready to appear, each in a place that is free and has a name that the controller takes.
    pub(super) fn stage(&self, texts: &[&str], to: &Target) -> Result<Vec<Staged>, Error> {
        if texts.len() > 1 && *to == Target::Stdout {
            let what = format!("the job takes {} files, one to be run after the other", texts.len());
            return Err(
                Error::new(Kind::Output, what).remedy("name a file with -o instead of standard output")
            );
        }
        let stage = |(target, text): (&Target, &&str)| {
            target.check(self.overwrite, &[])?;
            self.machine.map_or(Ok(()), |machine| named_for(target, machine))?;
            target.stage(text.as_bytes())
        };
        Self::places(texts.len(), to).iter().zip(texts).map(stage).collect()
    }
}

impl Targets {
    /// The places that were typed, `main` being for the `what`; refused now where writing would be refused later.
    pub(super) fn new(typed: &Planned, file: &JobFile, main: Target, what: &str) -> Result<Self, Error> {
        let outputs = &typed.outputs;
        let named = |path: &Path| Target::new(Some(path), &typed.drawing, "");
        let report = outputs.report.as_deref().map(named);
        let sheet = typed.setup_sheet.as_deref().map(named);
        let job = typed.save_job.as_deref().map(named);
        let inputs: Vec<&Path> =
            [Some(typed.drawing.as_path()), typed.job.as_deref()].into_iter().flatten().collect();
        let named = [
            (Some(&main), what, "-o"),
            (report.as_ref(), "report", "--report"),
            (sheet.as_ref(), "setup sheet", "--setup-sheet"),
            (job.as_ref(), "job file", "--save-job"),
        ];
        for (i, (target, name, option)) in named.iter().enumerate() {
            let Some(target) = target else { continue };
            target.check(outputs.overwrite, &inputs)?;
            if let Some((_, other, _)) = named[..i].iter().find(|(other, ..)| *other == Some(target)) {
                let flaw = format!("{other} and {name} would be the same file");
                return Err(Error::new(Kind::Settings, flaw)
                    .in_file(target.name())
                    .remedy(format!("choose another {option}")));
            }
        }
        let text = |to| Ok((to, file.with(&typed.settings, &typed.drawing.display().to_string())?));
        let job = job.map(text).transpose()?;
        Ok(Self { main, report, sheet, job, overwrite: outputs.overwrite })
    }

    /// Writes the main output, which is ready, and what was asked for beside it. All is ready before any of it appears,
    /// the main output last: it never stands without the others.
    pub(super) fn write_staged(&self, main: Vec<Staged>, scenes: &[Scene]) -> Result<(), Error> {
        let stage = |target: &Target, text: String| target.stage(text.as_bytes());
        let reports: Vec<Report> = scenes.iter().map(|scene| scene.report.clone()).collect();
        let told = self.report.as_ref().zip(Report::together(&reports));
        let report = told.map(|(target, told)| stage(target, told.json())).transpose()?;
        let sheet = self.sheet.as_ref().map(|target| stage(target, setup_sheet(scenes))).transpose()?;
        let job = self.job.as_ref().map(|(to, text)| to.stage(text.as_bytes())).transpose()?;
        let all = [report, sheet, job].into_iter().flatten().chain(main);
        all.into_iter().try_for_each(|staged| staged.appear(self.overwrite))
    }

    /// True when something goes to standard output.
    pub(super) fn use_stdout(&self) -> bool {
        let job = self.job.as_ref().map(|(to, _)| to);
        let all = [Some(&self.main), self.report.as_ref(), self.sheet.as_ref(), job];
        all.contains(&Some(&Target::Stdout))
    }

    /// The main output's place.
    pub(super) fn main(&self) -> &Target {
        &self.main
    }
}

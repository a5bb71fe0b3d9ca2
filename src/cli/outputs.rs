//! What a planned job writes: its main output, a report, a setup sheet; all of them or none.

use std::path::Path;

use super::args::Post;
use crate::error::{Error, Kind};
use crate::files::{Staged, Target};
use crate::preview::{Scene, setup_sheet};

/// Where everything goes.
pub(super) struct Targets {
    /// The program, or its picture.
    main: Target,
    report: Option<Target>,
    sheet: Option<Target>,
    overwrite: bool,
}

impl Targets {
    /// The places that were typed, `main` being for the `what`; refused now where writing would be refused later.
    pub(super) fn new(typed: &Post, main: Target, what: &str) -> Result<Self, Error> {
        let outputs = &typed.outputs;
        let named = |path: &Path| Target::new(Some(path), &typed.drawing, "");
        let report = outputs.report.as_deref().map(named);
        let sheet = typed.setup_sheet.as_deref().map(named);
        let inputs: Vec<&Path> =
            [Some(typed.drawing.as_path()), typed.job.as_deref()].into_iter().flatten().collect();
        let named = [
            (Some(&main), what, "-o"),
            (report.as_ref(), "report", "--report"),
            (sheet.as_ref(), "setup sheet", "--setup-sheet"),
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
        Ok(Self { main, report, sheet, overwrite: outputs.overwrite })
    }

    /// Writes `main` and what was asked for beside it. All is ready before any of it appears, the main output last: it
    /// never stands without the others.
    pub(super) fn write(&self, main: &str, scene: &Scene) -> Result<(), Error> {
        self.write_staged(vec![self.main.stage(main.as_bytes())?], scene)
    }

    /// Like [`write`](Self::write), for a main output of several files that are ready already.
    pub(super) fn write_staged(&self, main: Vec<Staged>, scene: &Scene) -> Result<(), Error> {
        let stage = |target: &Target, text: String| target.stage(text.as_bytes());
        let report = self.report.as_ref().map(|target| stage(target, scene.report.json())).transpose()?;
        let sheet = self.sheet.as_ref().map(|target| stage(target, setup_sheet(scene))).transpose()?;
        let all = [report, sheet].into_iter().flatten().chain(main);
        all.into_iter().try_for_each(|staged| staged.appear(self.overwrite))
    }

    /// True when something goes to standard output.
    pub(super) fn use_stdout(&self) -> bool {
        let all = [Some(&self.main), self.report.as_ref(), self.sheet.as_ref()];
        all.contains(&Some(&Target::Stdout))
    }

    /// The main output's place.
    pub(super) fn main(&self) -> &Target {
        &self.main
    }
}

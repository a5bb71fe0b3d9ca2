//! Pictures of a program: what they show, held against the program and the report.

mod page;
mod setting;
mod still;
mod terminal;

use std::path::Path;

use ribband::job::{Job, JobFile, Settings};
use ribband::report::Report;
use ribband::run::{self, Plan, Source, Unwatched};

/// A planned job.
pub(crate) struct Made {
    pub(crate) job: Job,
    pub(crate) plan: Plan,
    pub(crate) report: Report,
}

impl Made {
    /// The job that cuts a drawing of the demo 6 mm deep.
    pub(crate) fn demo(file: &str) -> Self {
        let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/demo").join(file);
        Self::of(file, &std::fs::read(path).expect("a demo drawing"))
    }

    /// The job that cuts a drawing 6 mm deep.
    pub(crate) fn of(name: &str, drawing: &[u8]) -> Self {
        Self::with(name, drawing, "depth = \"6mm\"\nheld = \"vacuum\"\n")
    }

    /// The job for a drawing in mm, with the settings of a job file.
    pub(crate) fn with(name: &str, drawing: &[u8], settings: &str) -> Self {
        let file = JobFile::parse("job.toml", &format!("drawing-unit = \"mm\"\n{settings}"));
        let job = Job::new(&Settings::default(), &file.expect("a job file")).expect("a job");
        let plan = run::plan(&job, Source { name, bytes: drawing }, &Unwatched).expect("a plan");
        let report = run::reports(&job, &plan, name, "part.nc").remove(0);
        Self { job, plan, report }
    }

    /// What its pictures show.
    pub(crate) fn scene(&self) -> ribband::preview::Scene<'_> {
        run::scenes(&self.job, &self.plan, std::slice::from_ref(&self.report)).remove(0)
    }
}

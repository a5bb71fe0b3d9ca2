//! `ribband measure`: what is in a drawing.

use super::args::Measure;
use super::{print, report_to, tell};
use crate::error::Error;
use crate::files::{self, Target};
use crate::job::{self, DrawingSettings};
use crate::run::{self, Source};

/// Carries out `ribband measure`.
pub(super) fn measure(typed: &Measure) -> Result<(), Error> {
    let settings = DrawingSettings::new(&typed.settings, &job::machine(None)?)?;
    let report = report_to(typed.report.as_deref(), typed.overwrite, &[&typed.drawing])?;
    let name = typed.drawing.display().to_string();
    let bytes = files::read(&typed.drawing)?;
    let measured = run::measure(&settings, Source { name: &name, bytes: &bytes })?;
    if let Some(report) = &report {
        report.write(format!("{:#}\n", measured.json(&name)).as_bytes(), typed.overwrite)?;
    }
    let text = format!("{}\n{}", measured.table(), measured.summary());
    if report == Some(Target::Stdout) {
        tell(&text);
        return Ok(());
    }
    print(&text)
}

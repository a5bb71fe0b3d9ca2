//! `ribband measure`: what is in a drawing.

use std::path::{Path, PathBuf};

use super::args::Measure;
use super::{batch, drawn, print, report_to, tell};
use crate::error::Error;
use crate::files::Target;
use crate::job::{self, DrawingSettings};
use crate::measure::Measurement;
use crate::run::{self, Source};

/// Carries out `ribband measure`; returns the exit status.
pub(super) fn measure(typed: &Measure) -> Result<u8, Error> {
    let settings = DrawingSettings::new(&typed.settings, &job::machine(None)?)?;
    if !typed.more.is_empty() {
        return each(typed, &settings);
    }
    let report = report_to(typed.report.as_deref(), typed.overwrite, &[&typed.drawing])?;
    let (name, measured) = measured(&typed.drawing, &settings)?;
    if let Some(report) = &report {
        report.write(json(&measured, &name).as_bytes(), typed.overwrite)?;
    }
    let text = format!("{}\n{}", measured.table(), measured.summary());
    if report == Some(Target::Stdout) {
        tell(&text);
    } else {
        print(&text)?;
    }
    Ok(0)
}

/// Several drawings, each by itself.
fn each(typed: &Measure, settings: &DrawingSettings) -> Result<u8, Error> {
    let drawings: Vec<&Path> =
        std::iter::once(&typed.drawing).chain(&typed.more).map(PathBuf::as_path).collect();
    let report = |drawing: &Path| batch::place(typed.report.as_deref(), drawing, "json", "--report");
    if typed.report.is_some() {
        let reports = drawings.iter().map(|drawing| report(drawing)).collect::<Result<Vec<_>, _>>()?;
        batch::apart(&drawings, &reports)?;
    }
    batch::each(&drawings, false, |drawing| {
        let report = typed.report.is_some().then(|| report(drawing)).transpose()?;
        let report = report_to(report.as_deref(), typed.overwrite, &[drawing])?;
        let (name, measured) = measured(drawing, settings)?;
        if let Some(report) = report {
            report.write(json(&measured, &name).as_bytes(), typed.overwrite)?;
        }
        Ok(format!("{name}\n{}\n", measured.summary()))
    })
}

/// A drawing's name and what is in it.
fn measured(drawing: &Path, settings: &DrawingSettings) -> Result<(String, Measurement), Error> {
    let name = drawing.display().to_string();
    let bytes = drawn(drawing, settings)?;
    let measured = run::measure(settings, Source { name: &name, bytes: &bytes })?;
    Ok((name, measured))
}

fn json(measured: &Measurement, name: &str) -> String {
    format!("{:#}\n", measured.json(name))
}

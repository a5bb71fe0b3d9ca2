//! `ribband condense`: an existing program in fewer blocks.

use std::path::{Path, PathBuf};

use super::args::Condense;
use super::post::named_for;
use super::{print, report_to, tell};
use crate::condense::{self, Condensed};
use crate::error::{Error, Kind};
use crate::files::{self, Target};
use crate::job::CondenseJob;
use crate::report;
use crate::summary;

/// Carries out `ribband condense`.
pub(super) fn condense(typed: &Condense) -> Result<(), Error> {
    let job = CondenseJob::new(&typed.settings)?;
    let outputs = &typed.outputs;
    let beside = beside(&typed.program);
    let program = Target::new(Some(outputs.output.as_deref().unwrap_or(&beside)), &typed.program, "nc");
    program.check(outputs.overwrite, &[&typed.program])?;
    named_for(&program, &job.machine)?;
    let report = report_to(outputs.report.as_deref(), outputs.overwrite, &[&typed.program])?;
    if report.as_ref() == Some(&program) {
        let what = "program and report would be the same file";
        return Err(Error::new(Kind::Settings, what)
            .in_file(program.name())
            .remedy("choose another --report"));
    }
    let name = typed.program.display().to_string();
    let letters = Letters::of(&files::read(&typed.program)?);
    let condensed = condense::condense(&letters.text, &job.machine, job.tolerance)
        .map_err(|error| error.in_file(name.as_str()))?;
    let (old, new) = (letters.bytes(&letters.text), letters.bytes(&condensed.text));
    let told = told(&condensed, &job, [(&name, old.len()), (&program.name(), new.len())]);

    let staged_program = program.stage(&new)?;
    let staged_report = report.as_ref().map(|report| report.stage(told.json().as_bytes())).transpose()?;
    staged_program.appear(outputs.overwrite)?;
    staged_report.map_or(Ok(()), |staged| staged.appear(outputs.overwrite))?;
    if typed.quiet {
        return Ok(());
    }
    let text = summary::condensed(&told);
    if [Some(&program), report.as_ref()].contains(&Some(&Target::Stdout)) {
        tell(&text);
        return Ok(());
    }
    print(&text)
}

/// Where the new program goes unasked: beside the old one, with a word more to its name.
fn beside(program: &Path) -> PathBuf {
    let stem = program.file_stem().unwrap_or_default().to_string_lossy();
    let ending = program.extension().map(|ending| format!(".{}", ending.to_string_lossy()));
    program.with_file_name(format!("{stem}-condensed{}", ending.unwrap_or_default()))
}

/// The letters of a program, so that those of its comments come out as the bytes they were, whatever they stand for.
struct Letters {
    mark: bool,
    latin: bool,
    text: String,
}

const MARK: &[u8] = "\u{feff}".as_bytes();

impl Letters {
    fn of(bytes: &[u8]) -> Self {
        let mark = bytes.starts_with(MARK);
        let bytes = bytes.strip_prefix(MARK).unwrap_or(bytes);
        match std::str::from_utf8(bytes) {
            Ok(text) => Self { mark, latin: false, text: text.to_owned() },
            // Every byte is a letter of its own.
            Err(_) => Self { mark, latin: true, text: bytes.iter().map(|&byte| char::from(byte)).collect() },
        }
    }

    fn bytes(&self, text: &str) -> Vec<u8> {
        let mut bytes = if self.mark { MARK.to_vec() } else { Vec::new() };
        if self.latin {
            bytes.extend(text.chars().map(|letter| letter as u8));
        } else {
            bytes.extend_from_slice(text.as_bytes());
        }
        bytes
    }
}

/// The figures as the report has them; `old` and `new` are the files' names as typed, with their sizes in bytes.
fn told(condensed: &Condensed, job: &CondenseJob, [old, new]: [(&str, usize); 2]) -> report::Condensed {
    let size = |(file, bytes): (&str, usize), size: &condense::Size| report::Size {
        file: file.into(),
        blocks: size.blocks,
        motion_blocks: size.motion_blocks,
        bytes,
        time_s: size.time_s,
    };
    report::Condensed {
        ribband: env!("CARGO_PKG_VERSION").into(),
        tolerance_mm: job.tolerance.mm(),
        machine: job.machine.name.clone(),
        before: size(old, &condensed.before),
        after: size(new, &condensed.after),
        runs: condensed.runs,
        bettered: condensed.bettered,
        deviation_mm: condensed.deviation.map(|deviation| deviation.mm),
        unchanged: condensed.unchanged.clone(),
        warnings: condensed.notes.clone(),
    }
}

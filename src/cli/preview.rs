//! `ribband preview`: the picture of the program that `post` would write.

use std::path::Path;

use super::args::Preview;
use super::progress::Bar;
use super::{job_file, tell};
use crate::error::{Error, Kind};
use crate::files::{self, Target};
use crate::job::{Job, Outputs};
use crate::preview::{Scene, page, still};
use crate::run::{self, Source};

/// Carries out `ribband preview`.
pub(super) fn preview(typed: &Preview) -> Result<(), Error> {
    let typed = &typed.post;
    let job = Job::new(&typed.settings, &job_file(typed.job.as_deref())?)?;
    let (picture, report) = targets(&typed.drawing, typed.job.as_deref(), &typed.outputs)?;
    let name = typed.drawing.display().to_string();
    let bytes = files::read(&typed.drawing)?;
    let plan = run::plan(&job, Source { name: &name, bytes: &bytes }, &Bar::new(typed.quiet))?;
    let program = Target::new(None, &typed.drawing, job.machine.files.ending.trim_start_matches('.'));
    let told = run::report(&job, &plan, &name, &program.name());
    let drawn = draw(&picture, &run::scene(&job, &plan, &told))?;

    // Both are ready before either appears.
    let staged_picture = picture.stage(drawn.as_bytes())?;
    let staged_report = report.as_ref().map(|report| report.stage(told.json().as_bytes())).transpose()?;
    staged_picture.appear(typed.outputs.overwrite)?;
    staged_report.map_or(Ok(()), |staged| staged.appear(typed.outputs.overwrite))?;
    if !typed.quiet {
        tell(&format!("{}: {} bytes\n", picture.name(), drawn.len()));
    }
    Ok(())
}

/// Where picture and report go, refused now where writing would be refused later.
fn targets(drawing: &Path, job: Option<&Path>, outputs: &Outputs) -> Result<(Target, Option<Target>), Error> {
    let picture = Target::new(outputs.output.as_deref(), drawing, "html");
    let report = outputs.report.as_deref().map(|path| Target::new(Some(path), drawing, "json"));
    let inputs: Vec<&Path> = [Some(drawing), job].into_iter().flatten().collect();
    for target in [Some(&picture), report.as_ref()].into_iter().flatten() {
        target.check(outputs.overwrite, &inputs)?;
    }
    if report.as_ref() == Some(&picture) {
        let what = "picture and report would be the same file";
        return Err(Error::new(Kind::Settings, what)
            .in_file(picture.name())
            .remedy("choose another --report"));
    }
    Ok((picture, report))
}

/// A page, or, for a name that ends so, an SVG picture.
fn draw(target: &Target, scene: &Scene) -> Result<String, Error> {
    let ends_in_svg = |path: &Path| path.extension().is_some_and(|e| e.eq_ignore_ascii_case("svg"));
    match target {
        Target::File(path) if ends_in_svg(path) => Ok(still(scene)),
        _ => page(scene),
    }
}

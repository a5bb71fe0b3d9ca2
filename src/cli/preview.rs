//! `ribband preview`: the picture of the program that `post` would write.

use std::path::Path;

use super::args::Preview;
use super::outputs::Targets;
use super::progress::Bar;
use super::{drawn, job_file, print, tell};
use crate::error::Error;
use crate::files::Target;
use crate::job::Job;
use crate::preview::{Scene, page, still, terminal};
use crate::run::{self, Source};

/// Carries out `ribband preview`.
pub(super) fn preview(typed: &Preview) -> Result<(), Error> {
    let typed = &typed.post;
    let job = Job::new(&typed.settings, &job_file(typed.job.as_deref())?)?;
    let picture = Target::new(typed.outputs.output.as_deref(), &typed.drawing, "html");
    let targets = Targets::new(typed, picture, "picture")?;
    let name = typed.drawing.display().to_string();
    let bytes = drawn(&typed.drawing, &job.drawing)?;
    let plan = run::plan(&job, Source { name: &name, bytes: &bytes }, &Bar::new(typed.quiet))?;
    let program = Target::new(None, &typed.drawing, job.machine.files.ending.trim_start_matches('.'));
    let told = run::report(&job, &plan, &name, &program.name());
    let scene = run::scene(&job, &plan, &told);
    let drawn = draw(targets.main(), &scene)?;
    targets.write(&drawn, &scene)?;
    if typed.quiet {
        return Ok(());
    }
    let text = format!("{}{}, {} bytes\n", terminal(&scene), targets.main().name(), drawn.len());
    if targets.use_stdout() {
        tell(&text);
        return Ok(());
    }
    print(&text)
}

/// A page, or, for a name that ends so, an SVG picture.
fn draw(target: &Target, scene: &Scene) -> Result<String, Error> {
    let ends_in_svg = |path: &Path| path.extension().is_some_and(|e| e.eq_ignore_ascii_case("svg"));
    match target {
        Target::File(path) if ends_in_svg(path) => Ok(still(scene)),
        _ => page(scene),
    }
}

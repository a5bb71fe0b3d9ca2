//! `ribband preview`: the picture of the program that `post` would write.

use std::path::Path;

use super::args::Preview;
use super::outputs::{Numbered, Targets};
use super::progress::Bar;
use super::{drawn, job_file, print, tell};
use crate::error::Error;
use crate::files::Target;
use crate::job::Job;
use crate::preview::{Scene, page, still, terminal};
use crate::run::{self, Source};

/// Carries out `ribband preview`.
pub(super) fn preview(typed: &Preview) -> Result<(), Error> {
    let typed = &typed.planned;
    let file = job_file(typed.job.as_deref())?;
    let job = Job::new(&typed.settings, &file)?;
    let picture = Target::new(typed.outputs.output.as_deref(), &typed.drawing, "html");
    let targets = Targets::new(typed, &file, picture, "picture")?;
    let name = typed.drawing.display().to_string();
    let bytes = drawn(&typed.drawing, &job.drawing)?;
    let plan = run::plan(&job, Source { name: &name, bytes: &bytes }, &Bar::new(typed.quiet))?;
    let program = Target::new(None, &typed.drawing, job.machine.files.ending.trim_start_matches('.'));
    let reports = run::reports(&job, &plan, &name, &program.name());
    let scenes = run::scenes(&job, &plan, &reports);
    let drawn = scenes.iter().map(|scene| draw(targets.main(), scene)).collect::<Result<Vec<_>, Error>>()?;
    let pages: Vec<&str> = drawn.iter().map(String::as_str).collect();
    let numbered = Numbered { overwrite: typed.outputs.overwrite, machine: None };
    targets.write_staged(numbered.stage(&pages, targets.main())?, &scenes)?;
    if typed.quiet {
        return Ok(());
    }
    let told = (1..).zip(scenes.iter().zip(&drawn)).map(|(k, (scene, drawn))| {
        let place = if scenes.len() > 1 { targets.main().part(k) } else { targets.main().clone() };
        format!("{}{}, {} bytes\n", terminal(scene), place.name(), drawn.len())
    });
    let text: String = told.collect();
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

//! `ribband post --resume-at`: the program that takes up another one after a stop.

use super::args::Planned;
use super::outputs::Numbered;
use super::post::{beside, named_for, place, plan};
use super::print;
use crate::cautions;
use crate::error::{Error, Kind};
use crate::files::{self, Target};
use crate::job::Job;
use crate::run::{self, Block};

/// Writes, beside the program that ran, one that takes it up at a block.
pub(super) fn resume(typed: &Planned, job: &Job, block: Block) -> Result<(), Error> {
    let program = place(typed, job);
    if program == Target::Stdout {
        let what = "a program that is taken up again must stand in a file, to be compared";
        return Err(Error::new(Kind::Settings, what).remedy("name the program that ran with -o"));
    }
    let plan = plan(typed, job)?;
    let resumed = run::resume(job, &plan, block)?;
    let texts: Vec<&str> = plan.programs.iter().flat_map(|program| program.texts()).collect();
    let ran = Numbered::places(texts.len(), &program).swap_remove(resumed.file);
    must_be_the_same(&ran, texts[resumed.file])?;
    let line = resumed.place.line;
    let target = beside(&ran, &[&format!("from-{line}"), &line.to_string()], &job.machine)?;
    target.check(typed.outputs.overwrite, &[&typed.drawing])?;
    named_for(&target, &job.machine)?;
    target.write(resumed.text.as_bytes(), typed.outputs.overwrite)?;
    if typed.quiet {
        return Ok(());
    }
    let told = format!(
        "{:10} {}\n{:10} {}, {} bytes; run what comes after it as it is\n{:10} read back and checked: {} claims hold\n",
        "Takes up",
        format_args!("{} at {}", ran.name(), resumed.place),
        "Program",
        target.name(),
        resumed.text.len(),
        "Check",
        resumed.claims.iter().filter(|claim| claim.holds()).count(),
    );
    print(&format!("{told}\nCautions\n{}", cautions::list()))
}

/// Refuses a program on disk that is not the one whose lines are counted.
fn must_be_the_same(ran: &Target, text: &str) -> Result<(), Error> {
    let Target::File(path) = ran else { return Ok(()) };
    let remedy = "give the drawing and the settings of that program, and its name with -o";
    let there = files::read(path).map_err(|error| error.remedy(remedy))?;
    if there == text.as_bytes() {
        return Ok(());
    }
    let what = "this is not the program that these settings make, so its lines are others";
    Err(Error::new(Kind::Refused, what).in_file(ran.name()).remedy(remedy))
}

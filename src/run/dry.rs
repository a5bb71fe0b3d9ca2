//! Programs to try before the job's own: the same moves in the air, and a round about everything. The spindle never
//! turns.

use super::checking::{self, Intended};
use super::programs::CutterProgram;
use super::{Plan, read_back, splitting};
use crate::check::{self, Claim};
use crate::error::Error;
use crate::gcode::{self, Header, Program};
use crate::job::Job;
use crate::route::{self, Cut};
use crate::toolpath::Toolpath;

/// A dry run: one program, or several that are run one after the other.
#[derive(Clone, Debug)]
pub struct DryRun {
    /// What it is.
    pub kind: Dry,
    /// The texts, each a program of its own.
    pub texts: Vec<String>,
    /// How many blocks each of them has.
    pub blocks: Vec<usize>,
    /// What they were checked for.
    pub claims: Vec<Claim>,
}

/// What a dry run shows.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Dry {
    /// Every move of the program, raised above the stock.
    AirCut,
    /// The extents of all cuts, and the clamps.
    Frame,
}

impl Dry {
    /// What it is called.
    pub fn name(self) -> &'static str {
        match self {
            Self::AirCut => "air cut",
            Self::Frame => "frame",
        }
    }
}

/// The moves of every program raised above the stock.
pub(super) fn air_cut(job: &Job, plan: &Plan) -> Result<DryRun, Error> {
    let mut run = DryRun { kind: Dry::AirCut, texts: Vec::new(), blocks: Vec::new(), claims: Vec::new() };
    for made in &plan.programs {
        let air = route::air_cut(&made.routing.toolpath, &plan.setup);
        let clearance = plan.setup.heights().clearance;
        let title = format!("{}, air cut: all moves {} mm higher", made.header.title, air.lift_mm);
        let header = header(job, &made.header, title, clearance + air.lift_mm);
        let intended = Intended::of(made, plan);
        let same = |program: &Program| check::raised(program, &made.program, &job.machine);
        run.add(
            job,
            (&air.toolpath, &header),
            |program| checking::check_dry(job, program, plan, (&intended, clearance)),
            same,
        )?;
    }
    Ok(run)
}

/// A round about all that the programs cut, and about the clamps, by the widest cutter.
pub(super) fn frame(job: &Job, plan: &Plan) -> Result<DryRun, Error> {
    let mut run = DryRun { kind: Dry::Frame, texts: Vec::new(), blocks: Vec::new(), claims: Vec::new() };
    let widest = plan.programs.iter().max_by(|a, b| width(a).total_cmp(&width(b)));
    let Some((made, cut)) = widest.and_then(|made| Some((made, &made.routed.first()?.cut))) else {
        return Ok(run);
    };
    let all = plan.programs.iter().flat_map(|made| made.routing.toolpath.moves.iter().copied());
    let framed = route::frame(&Toolpath { moves: all.collect() }, &slowest(cut, plan), &plan.setup)?;
    let clearance = plan.setup.clearance_over_all();
    let title = format!("{}, frame: round all that is cut", made.header.title);
    let header = Header { curves: Vec::new(), ..header(job, &made.header, title, clearance) };
    let intended = Intended::of(made, plan);
    let read: Vec<&Program> = plan.programs.iter().map(|made| &made.program).collect();
    let around = |program: &Program| check::around(program, &read, cut.cutter_mm / 2.0, &job.machine);
    run.add(
        job,
        (&framed, &header),
        |program| checking::check_dry(job, program, plan, (&intended, clearance)),
        around,
    )?;
    Ok(run)
}

fn width(made: &CutterProgram) -> f64 {
    made.routed.iter().map(|routed| routed.cut.cutter_mm).fold(0.0, f64::max)
}

/// The cut with the lowest feeds of all: a frame is to be watched.
fn slowest(cut: &Cut, plan: &Plan) -> Cut {
    let cuts = || plan.programs.iter().flat_map(|made| made.routed.iter().map(|routed| &routed.cut));
    Cut {
        feed: cuts().map(|cut| cut.feed).fold(cut.feed, f64::min),
        plunge: cuts().map(|cut| cut.plunge).fold(cut.plunge, f64::min),
        ..cut.clone()
    }
}

/// What a dry run says of itself.
fn header(job: &Job, of: &Header, title: String, clearance: f64) -> Header {
    let mut notes = vec!["dry run: the spindle stays off".to_owned()];
    if job.machine.spindle.hand_switched {
        notes.push("leave the spindle switched off".into());
    }
    notes.extend(
        of.notes.iter().filter(|note| note.starts_with("made by") || note.starts_with("drawing")).cloned(),
    );
    Header { title, clearance, notes, marks: Vec::new(), ..of.clone() }
}

impl DryRun {
    /// Writes a toolpath, reads it back and checks it: the whole by both checks, its parts by the first.
    fn add(
        &mut self,
        job: &Job,
        (toolpath, header): (&Toolpath, &Header),
        check: impl Fn(&Program) -> Vec<Claim>,
        whole: impl Fn(&Program) -> Claim,
    ) -> Result<(), Error> {
        let text = gcode::write(toolpath, header, &job.machine)?;
        let program = read_back(&text, &job.machine)?;
        let mut claims = check(&program);
        claims.push(whole(&program));
        checking::hold(&claims)?;
        let parts = splitting::parts(job, toolpath, header, (&text, &program), check)?;
        self.claims.extend(claims);
        if parts.is_empty() {
            self.blocks.push(program.blocks);
            self.texts.push(text);
        }
        for part in parts {
            self.blocks.push(part.program.blocks);
            self.texts.push(part.text);
        }
        Ok(())
    }
}

//! What a drawing costs at a range of tolerances: blocks, bytes, time, starved blocks, deviation, and where asking for
//! more accuracy begins to cost much.

mod knee;
mod plot;
mod table;

use rayon::prelude::*;
use serde::Serialize;

use crate::clean::Support;
use crate::error::{Error, Kind};
use crate::job::{Job, Ladder};
use crate::num::Tolerance;
use crate::run::{self, Plan, Source, Unwatched};

pub use knee::Knee;

/// A drawing's programs at a range of tolerances, on one machine. Lengths in mm, times in s.
#[derive(Clone, Debug, Serialize)]
pub struct Comparison {
    /// The version that made it.
    pub ribband: String,
    /// The drawing's file name as typed.
    pub drawing: String,
    /// The machine profile's name.
    pub machine: String,
    /// Bytes of program that its controller can hold; none when programs are fed to it.
    pub memory_bytes: Option<u32>,
    /// The programs, the finest tolerance first.
    pub rows: Vec<Row>,
    /// The same job with every vertex of the drawing as a straight block.
    pub as_drawn: AsDrawn,
    /// The tolerance from which on less accuracy saves little; none where no such place stands out.
    pub knee: Option<Knee>,
    /// The tolerance that the trace itself supports; 0 when it gives no reason for one.
    pub supports_mm: f64,
    /// Why the trace supports no finer one.
    pub supports_why: String,
}

/// One tolerance of the range.
#[derive(Clone, Debug, Serialize)]
pub struct Row {
    /// The tolerance.
    pub tolerance_mm: f64,
    /// What the program at that tolerance comes to; none where it is refused.
    pub program: Option<Figures>,
    /// Why it is refused; none where it is not.
    pub refused: Option<String>,
}

/// What a program comes to.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Figures {
    /// Blocks that move an axis.
    pub motion_blocks: usize,
    /// The size of the text.
    pub bytes: usize,
    /// Planned time of the whole program.
    pub time_s: f64,
    /// Planned time of the contour moves alone.
    pub cut_time_s: f64,
    /// Blocks whose predecessor ends with the controller's queue empty.
    pub starved_blocks: usize,
    /// The certified deviation between what the program cuts and the drawing.
    pub deviation_mm: Option<f64>,
}

/// The job with the drawing cut as it is.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct AsDrawn {
    /// Blocks that move an axis.
    pub motion_blocks: usize,
    /// Planned time of the whole program.
    pub time_s: f64,
    /// Planned time of the contour moves alone.
    pub cut_time_s: f64,
    /// Blocks whose predecessor ends with the controller's queue empty.
    pub starved_blocks: usize,
}

/// Plans, writes and checks the program for a drawing at every tolerance of the ladder; writes no file.
///
/// # Errors
/// Those of reading the drawing; the first refusal where the job is refused at every tolerance.
pub fn compare(job: &Job, source: Source, ladder: &Ladder) -> Result<Comparison, Error> {
    let planned: Vec<(f64, Result<Rung, Error>)> =
        ladder.tolerances().par_iter().map(|&mm| (mm, rung(job, source, mm))).collect();
    let mut first: Option<&Rung> = None;
    let mut rows = Vec::with_capacity(planned.len());
    for (tolerance_mm, rung) in &planned {
        let (program, refused) = match rung {
            Ok(rung) => {
                first = first.or(Some(rung));
                (Some(rung.figures), None)
            }
            Err(error) if error.kind == Kind::Refused => (None, Some(error.what.clone())),
            Err(error) => return Err(error.clone()),
        };
        rows.push(Row { tolerance_mm: *tolerance_mm, program, refused });
    }
    let Some(first) = first else {
        let refused = planned.into_iter().find_map(|(_, rung)| rung.err());
        return Err(refused.unwrap_or_else(|| Error::new(Kind::Settings, "no tolerance is asked for")));
    };
    Ok(Comparison {
        ribband: env!("CARGO_PKG_VERSION").into(),
        drawing: source.name.into(),
        machine: job.machine.name.clone(),
        memory_bytes: job.machine.controller.memory_bytes,
        knee: Knee::of(&rows),
        as_drawn: first.as_drawn,
        supports_mm: first.support.mm,
        supports_why: first.support.reason.clone(),
        rows,
    })
}

/// What is kept of a plan.
struct Rung {
    figures: Figures,
    as_drawn: AsDrawn,
    support: Support,
}

fn rung(job: &Job, source: Source, tolerance_mm: f64) -> Result<Rung, Error> {
    let mut job = Job { tolerance: Tolerance::new(tolerance_mm), ..job.clone() };
    // How long the programs are is what is asked here: none is refused for it, or cut into parts.
    job.machine.controller.memory_bytes = None;
    let plan = run::plan(&job, source, &Unwatched)?;
    let supports: Vec<Support> = plan.roughness.iter().map(|rough| rough.support()).collect();
    let drawn = || plan.programs.iter().map(|program| &program.as_drawn);
    Ok(Rung {
        figures: figures(&plan),
        as_drawn: AsDrawn {
            motion_blocks: drawn().map(|drawn| drawn.motion_blocks).sum(),
            time_s: drawn().map(|drawn| drawn.times.time_s).sum(),
            cut_time_s: drawn().map(|drawn| drawn.times.cut_time_s).sum(),
            starved_blocks: drawn().map(|drawn| drawn.times.starved_blocks).sum(),
        },
        support: Support::largest(&supports),
    })
}

/// The figures of all programs of a plan together.
fn figures(plan: &Plan) -> Figures {
    let all = || plan.programs.iter();
    let deviations = all().filter_map(|made| made.verdict.deviation).map(|deviation| deviation.mm);
    Figures {
        motion_blocks: all().map(|made| made.program.motion_blocks).sum(),
        bytes: all().map(|made| made.text.len()).sum(),
        time_s: all().map(|made| made.times.time_s).sum(),
        cut_time_s: all().map(|made| made.times.cut_time_s).sum(),
        starved_blocks: all().map(|made| made.times.starved_blocks).sum(),
        deviation_mm: deviations.reduce(f64::max),
    }
}

impl Comparison {
    /// The comparison as JSON, with a line end.
    pub fn json(&self) -> String {
        let mut text = serde_json::to_string_pretty(self).unwrap_or_default();
        text.push('\n');
        text
    }
}

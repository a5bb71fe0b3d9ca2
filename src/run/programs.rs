//! From the cutter's lines to checked programs: one for each cutter, in the order in which they are run.

use std::collections::BTreeSet;
use std::ops::Range;

use super::again::{self, Place};
use super::checking::{self, Intended};
use super::clock::Clock;
use super::fairing::Cubic;
use super::placing::Placing;
use super::prepare::Prepared;
use super::siding::Sides;
use super::{curving, cutting, feeding, header, read_back, splitting};
use crate::check::{Relieved, Verdict};
use crate::error::Error;
use crate::feed::{self, Limits, Times};
use crate::gcode::{self, Header, Program};
use crate::job::Job;
use crate::route::{self, Routed, Routing, Setup};
use crate::sketch::Contour;

/// What one cutter cuts in one go.
#[derive(Clone, Debug)]
pub struct CutterProgram {
    /// Which of the job's cutters it is, from 0.
    pub cutter: usize,
    /// The ids of the contours that it is for.
    pub contours: BTreeSet<usize>,
    /// Each path in the program's coordinates, with how it is cut.
    pub routed: Vec<Routed>,
    /// The moves as meant.
    pub routing: Routing,
    /// What its opening comments say.
    pub header: Header,
    /// The program's text, as a whole.
    pub text: String,
    /// What that text says, read back.
    pub program: Program,
    /// The same in parts, in the order in which they are run, where the controller's memory is too small for the whole;
    /// else none.
    pub parts: Vec<Part>,
    /// Where it can be taken up again.
    pub restarts: Vec<Place>,
    /// What it was checked for.
    pub verdict: Verdict,
    /// Its planned times.
    pub times: Times,
    /// The highest feed override at which no block starves, in percent; 0 where some starve at 100 % already.
    pub highest_override: u32,
    /// The same contours cut as they are drawn.
    pub as_drawn: AsDrawn,
}

/// A part of a program, complete by itself.
#[derive(Clone, Debug)]
pub struct Part {
    /// Its text.
    pub text: String,
    /// The line, from 1, on which each of its moves begins.
    pub lines: Vec<usize>,
    /// The moves of the whole that it makes.
    pub moves: Range<usize>,
    /// What that text says, read back.
    pub program: Program,
}

/// The same job with every span of the drawing as a block of its own.
#[derive(Clone, Debug)]
pub struct AsDrawn {
    /// Blocks that move an axis.
    pub motion_blocks: usize,
    /// Its planned times.
    pub times: Times,
}

impl CutterProgram {
    /// The texts that stand for it, in the order in which they are run.
    pub fn texts(&self) -> Vec<&str> {
        if self.parts.is_empty() {
            return vec![&self.text];
        }
        self.parts.iter().map(|part| part.text.as_str()).collect()
    }
}

/// What the programs of a job have in common.
pub(super) struct Bench<'a> {
    pub(super) job: &'a Job,
    /// The drawing's name.
    pub(super) name: &'a str,
    pub(super) sha256: &'a str,
    pub(super) prepared: &'a Prepared,
    pub(super) sides: &'a Sides,
    pub(super) setup: &'a Setup,
    pub(super) placing: &'a Placing,
    /// The cubic moves that may be written, in the program's coordinates.
    pub(super) cubics: &'a [Cubic],
}

/// The programs for all lines: as few as the nesting allows, the cuts that free a part in the last. Tells too what the
/// person at the machine should know.
pub(super) fn programs(
    bench: &Bench,
    routed: &[Routed],
    clock: &mut Clock,
) -> Result<(Vec<CutterProgram>, Vec<String>), Error> {
    let mut lots = route::by_cutter(routed);
    if lots.is_empty() {
        lots.push(Vec::new());
    }
    let contours = if lots.len() > 1 {
        contours_of(bench, &lots)
    } else {
        vec![bench.prepared.sketch.contours.iter().map(|contour| contour.id).collect()]
    };
    let mut told = Vec::new();
    let of = lots.len();
    let mut made = Vec::with_capacity(of);
    for (k, (lot, contours)) in lots.into_iter().zip(contours).enumerate() {
        let place = (of > 1).then(|| format!("program {} of {of}", k + 1));
        let cutter = lot.first().map_or(bench.job.cutting.cutter, |routed| routed.cut.cutter);
        let lot = Lot { cutter, contours, routed: lot, place };
        made.push(lot.program(bench, clock, &mut told)?);
    }
    Ok((made, told))
}

/// The ids of the drawing's contours that each program is for: those it cuts, and the pieces that they were joined from.
/// What no program cuts belongs to the first of its cutter, which tells that it stays uncut.
fn contours_of(bench: &Bench, lots: &[Vec<Routed>]) -> Vec<BTreeSet<usize>> {
    let mut ids: Vec<BTreeSet<usize>> =
        lots.iter().map(|lot| lot.iter().map(|routed| routed.id).collect()).collect();
    let cleaned = &bench.prepared.cleaned.contours;
    let of_cutter = |cutter: usize, k: &usize| lots[*k].iter().any(|routed| routed.cut.cutter == cutter);
    for contour in &bench.prepared.sketch.contours {
        if ids.iter().any(|ids| ids.contains(&contour.id)) {
            continue;
        }
        let cutter = bench.job.cutting_for(contour).cutter;
        let own: Vec<usize> = (0..lots.len()).filter(|k| of_cutter(cutter, k)).collect();
        let joined = nearest(cleaned, contour).and_then(|id| own.iter().find(|&&k| ids[k].contains(&id)));
        let place = joined.or(own.first()).copied().unwrap_or(0);
        ids[place].insert(contour.id);
    }
    ids
}

/// The id of the contour that runs nearest to the middle of a piece's first span.
fn nearest(contours: &[Contour], piece: &Contour) -> Option<usize> {
    let at = piece.path.spans().next()?.at(0.5);
    let distance = |c: &Contour| c.path.spans().map(|s| s.nearest(at).distance).fold(f64::INFINITY, f64::min);
    contours.iter().min_by(|a, b| distance(a).total_cmp(&distance(b))).map(|c| c.id)
}

/// The lines of one program.
struct Lot {
    cutter: usize,
    contours: BTreeSet<usize>,
    routed: Vec<Routed>,
    /// Which program of how many, where there are several.
    place: Option<String>,
}

impl Lot {
    /// Routed, written, read back and checked.
    fn program(
        self,
        bench: &Bench,
        clock: &mut Clock,
        told: &mut Vec<String>,
    ) -> Result<CutterProgram, Error> {
        let Bench { job, prepared, sides, setup, placing, .. } = *bench;
        let mut routing = clock.time("route", || route::route(&self.routed, setup))?;
        placing.stays_on_machine(&routing.toolpath, &job.machine)?;
        let mut plain = header::header(bench, self.cutter, &self.routed, self.place.as_deref());
        plain.curves = curving::curves(&routing.toolpath, bench.cubics);
        let feeds = clock.time("feed", || feeding::suit(&mut routing.toolpath, &plain, job, self.cutter));
        let lifts = splitting::lift(job, &mut routing, &mut plain)?;
        let restarts = route::restarts(&routing, &self.routed, setup);
        let unmarked = clock.time("write", || gcode::write(&routing.toolpath, &plain, &job.machine))?;
        let (header, written) =
            clock.time("write", || again::marked(job, &routing.toolpath, &plain, &restarts))?;
        let (text, lines) = (written.text, written.lines);
        let program = clock.time("read back", || read_back(&text, &job.machine))?;
        let intended = Intended {
            cutter: self.cutter,
            contours: &self.contours,
            routed: &self.routed,
            setup,
            region: sides.region,
            drawing_at: placing.drawing_at,
            zero_at: placing.zero_at,
        };
        let verdict = clock.time("check", || checking::check(job, &program, prepared, &intended));
        checking::hold(&verdict.claims)?;
        let check_part = |part: &Program| checking::check_part(job, part, prepared, &intended);
        let parts = splitting::parts(job, &routing.toolpath, &header, (&text, &program), check_part)?;
        let limits = Limits::of(&job.machine);
        let times = clock.time("time", || feed::time(&program.toolpath, &limits));
        let highest_override = clock.time("override", || feed::highest_override(&program.toolpath, &limits));
        // Both texts have the same lines but for their motion.
        let still = unmarked.lines().count() - program.motion_blocks;
        let as_drawn = clock.time("as drawn", || self.as_drawn(bench, &plain, still))?;
        let restarts = again::places(&restarts, &lines, (&text, &program), &parts);
        told.extend(routing.notes.iter().cloned());
        told.extend(placing.over_the_edge(&routing.toolpath, job.cutters[self.cutter].diameter_mm));
        told.extend(Relieved::told(&verdict.relieved));
        told.extend(feeds);
        told.extend(lifts);
        let Self { cutter, contours, routed, .. } = self;
        Ok(CutterProgram {
            cutter,
            contours,
            routed,
            routing,
            header,
            text,
            program,
            parts,
            restarts,
            verdict,
            times,
            highest_override,
            as_drawn,
        })
    }

    /// The same contours as the drawing has them, on the line.
    fn as_drawn(&self, bench: &Bench, header: &Header, still: usize) -> Result<AsDrawn, Error> {
        let own = bench.prepared.cleaned.contours.iter().filter(|c| self.contours.contains(&c.id));
        let own: Vec<&Contour> = own.collect();
        let drawn = cutting::as_drawn(bench.job, &own, bench.placing);
        // It is never run: no clamp is in its way.
        let setup = Setup { keep_outs: Vec::new(), ..bench.setup.clone() };
        let toolpath = route::route(&drawn, &setup)?.toolpath;
        let header = Header { curves: Vec::new(), ..header.clone() };
        let text = gcode::write(&toolpath, &header, &bench.job.machine)?;
        let motion_blocks = text.lines().count() - still;
        Ok(AsDrawn { motion_blocks, times: feed::time(&toolpath, &Limits::of(&bench.job.machine)) })
    }
}

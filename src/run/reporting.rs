//! From a plan to its report.

use std::path::Path;

use kurbo::Rect;

use super::feeding::spindle_rpm;
use super::{CutterProgram, DryRun, Place, Plan, curvature};
use crate::check::{self, Verdict};
use crate::clean::Roughness;
use crate::files::Target;
use crate::fit::Fitted;
use crate::job::{self, Cutting, Job, Side, Zero};
use crate::report::{
    self, AsDrawn, Check, Claim, Clamp, Contour, Drawing, Layout, Part, Program, Report, Restart, Setup,
    State, Stock,
};
use crate::sketch;
use crate::toolpath::{Move, Toolpath};

/// A report of each program of `plan`; `drawing` and `program` are the files' names as typed.
pub(super) fn reports(job: &Job, plan: &Plan, drawing: &str, program: &str) -> Vec<Report> {
    let names = Target::new(Some(Path::new(program)), Path::new(""), "");
    let texts: usize = plan.programs.iter().map(|program| program.texts().len()).sum();
    let mut numbers = 1..;
    let one = |made: &CutterProgram| {
        let name =
            |_: &&str| if texts > 1 { names.part(numbers.next().unwrap_or(0)).name() } else { names.name() };
        let files: Vec<String> = made.texts().iter().map(name).collect();
        Report {
            ribband: env!("CARGO_PKG_VERSION").into(),
            tolerance_mm: plan.tolerance.mm(),
            tolerance_side: Some(job.tolerance_side).filter(|_| job.keeps_to_waste()),
            drawing: drawing_of(plan, drawing),
            contours: contours(job, plan, made),
            setup: setup(job, plan, made),
            program: program_of(made, program, &files),
            check: check_of(&made.verdict),
            programs: Vec::new(),
            dry_runs: Vec::new(),
            warnings: plan.warnings.clone(),
            timings_ms: plan.timings_ms.clone(),
        }
    };
    plan.programs.iter().map(one).collect()
}

fn drawing_of(plan: &Plan, file: &str) -> Drawing {
    let contours = &plan.sketch.contours;
    Drawing {
        file: file.into(),
        sha256: plan.sha256.clone(),
        mm_per_unit: plan.sketch.mm_per_unit,
        scale_from: plan.sketch.scale_from.clone(),
        width_mm: plan.part.width(),
        height_mm: plan.part.height(),
        contours: contours.len(),
        vertices: contours.iter().map(|c| c.path.vertices.len()).sum(),
        length_mm: contours.iter().map(|c| c.path.length()).sum(),
    }
}

fn contours(job: &Job, plan: &Plan, made: &CutterProgram) -> Vec<Contour> {
    let place_mm = job.machine.last_place();
    let reaching = if job.cuts_on_line_only() { "the path" } else { "the cutter" };
    let drawn = plan.cleaned.contours.iter().zip(&plan.roughness);
    let cubics = plan.cubics.iter().copied().map(Some).chain(std::iter::repeat(None));
    let shown = if job.curvature { curvature::of(plan) } else { Vec::new() };
    let curvature = shown.into_iter().map(Some).chain(std::iter::repeat_with(|| None));
    type Figures<'a> = ((&'a sketch::Contour, &'a Roughness), &'a Fitted);
    let told = |(((drawn, rough), fitted), (cubics, curvature)): (Figures, _)| Contour {
        cubics,
        curvature,
        roughness_mm: rough.sigma_mm,
        uncut: uncut(made, drawn.id, reaching),
        ..contour(drawn, fitted, place_mm)
    };
    let own = |(((drawn, _), _), _): &(Figures, _)| made.contours.contains(&drawn.id);
    drawn.zip(&plan.fitted).zip(cubics.zip(curvature)).filter(own).map(told).collect()
}

fn contour(drawn: &sketch::Contour, fitted: &Fitted, place_mm: f64) -> Contour {
    let bbox = drawn.path.bbox().unwrap_or(Rect::ZERO);
    let lines = fitted.path.spans().filter(|span| span.is_line()).count();
    Contour {
        id: drawn.id,
        layer: drawn.layer.clone(),
        closed: drawn.path.closed,
        vertices: drawn.path.vertices.len(),
        length_mm: drawn.path.length(),
        bbox_mm: [bbox.x0, bbox.y0, bbox.x1, bbox.y1],
        roughness_mm: 0.0,
        corners: fitted.path.corners(place_mm).count(),
        lines,
        arcs: fitted.path.len() - lines,
        cubics: None,
        deviation_mm: fitted.deviation.mm,
        curvature: None,
        uncut: Vec::new(),
    }
}

/// What the cutter, or the path, does not reach of a contour: of copies, of the one that it reaches least of.
fn uncut(made: &CutterProgram, contour: usize, reaching: &str) -> Vec<String> {
    let of_contour = || made.verdict.uncut.iter().filter(|uncut| uncut.contour == contour);
    let worst = of_contour().max_by(|a, b| a.gap.total_cmp(&b.gap)).map(|uncut| uncut.copy);
    of_contour().filter(|uncut| Some(uncut.copy) == worst).map(|uncut| stays(reaching, uncut)).collect()
}

/// A stretch that is not reached, in one sentence.
fn stays(what: &str, uncut: &check::Uncut) -> String {
    let check::Uncut { length, at, gap, .. } = *uncut;
    if gap.is_infinite() {
        return format!("nothing of it is cut: {what} does not fit, by X {:.3} Y {:.3}", at.x, at.y);
    }
    format!(
        "{what} does not reach {length:.2} mm of it, by {gap:.2} mm at most, at X {:.3} Y {:.3}",
        at.x, at.y
    )
}

/// The way that all contours are cut which are cut beside the line, or "by layer".
fn shared<'a>(cuttings: impl Iterator<Item = &'a Cutting>, name: fn(&Cutting) -> &'static str) -> String {
    let mut names: Vec<&str> = cuttings.filter(|c| c.side != Side::On).map(name).collect();
    names.dedup();
    if names.len() == 1 { names[0].into() } else { "by layer".into() }
}

fn setup(job: &Job, plan: &Plan, made: &CutterProgram) -> Setup {
    let cuttings = || job.cuttings().filter(|cutting| cutting.cutter == made.cutter);
    let beside = cuttings().any(|cutting| cutting.side != Side::On);
    let mixed = beside && cuttings().any(|cutting| cutting.side == Side::On);
    let cuts = || made.routed.iter().map(|routed| &routed.cut);
    let extents = extents(&made.program.toolpath);
    let most = |figure: fn(&crate::route::Cut) -> f64| cuts().map(figure).fold(0.0, f64::max);
    Setup {
        machine: job.machine.name.clone(),
        unit: job.machine.unit.symbol().into(),
        zero: job.stock.zero,
        origin: job.stock.origin(),
        thickness_mm: job.stock.thickness.map(|stock| [stock.thinnest, stock.thickest]),
        bed_cut_mm: bed_cut(job, extents[2]),
        stock: plan.stock.map(|stock| Stock {
            box_mm: sides(stock),
            on_machine_mm: job.stock.sheet.and_then(|sheet| sheet.at).map(|at| [at.x, at.y]),
        }),
        clamps: job.stock.clamps.iter().map(clamp).collect(),
        layout: layout(job, plan),
        extents_mm: extents,
        cutter_mm: job.cutters[made.cutter].diameter_mm,
        side: match (beside, mixed) {
            (false, _) => Side::On.name().into(),
            (true, true) => "by layer".into(),
            (true, false) => shared(cuttings(), |cutting| cutting.side.name()),
        },
        direction: beside.then(|| shared(cuttings(), |cutting| cutting.direction.name())),
        depth_mm: most(|cut| cut.depth_mm),
        passes: cuts().map(|cut| cut.passes().len()).max().unwrap_or(0),
        feed_mm_min: fastest_along(&made.routing.toolpath),
        plunge_mm_min: most(|cut| cut.plunge),
        spindle_rpm: spindle_rpm(&made.routing.toolpath),
    }
}

/// How deep the text cuts into the bed under the thinnest stock.
fn bed_cut(job: &Job, lowest: f64) -> Option<f64> {
    let underside = job.stock.thickness.map(|stock| match job.stock.zero {
        Zero::StockTop => -stock.thinnest,
        Zero::Bed => 0.0,
    });
    // Differences of decimal lengths, without the last bit's noise.
    underside.map(|underside| ((underside - lowest).max(0.0) * 1e9).round() / 1e9)
}

fn clamp(clamp: &job::Clamp) -> Clamp {
    Clamp { box_mm: sides(clamp.place), height_mm: clamp.height_mm }
}

fn sides(r: Rect) -> [f64; 4] {
    [r.x0, r.y0, r.x1, r.y1]
}

fn layout(job: &Job, plan: &Plan) -> Layout {
    let asked = job.layout;
    Layout {
        mirrored: asked.mirror,
        turn_deg: asked.turn_deg,
        columns: asked.copies.columns,
        rows: asked.copies.rows,
        gap_mm: asked.gap_mm,
        parts_mm: sides(plan.parts_box),
    }
}

/// The largest feed of the moves that go along, in mm/min.
fn fastest_along(toolpath: &Toolpath) -> f64 {
    let along = toolpath.moves.iter().filter(|m| m.from.xy != m.to.xy);
    along.filter_map(|m| m.feed).fold(0.0, f64::max)
}

/// Least x, y, z and largest x, y, z of the moves.
fn extents(toolpath: &Toolpath) -> [f64; 6] {
    let mut boxes = toolpath.moves.iter().map(|m| m.span().bbox());
    let plane = boxes.next().map_or(Rect::ZERO, |first| boxes.fold(first, |all, one| all.union(one)));
    let heights = || toolpath.moves.iter().flat_map(|m| [m.from.z, m.to.z]);
    let (low, high) = (heights().fold(f64::INFINITY, f64::min), heights().fold(f64::NEG_INFINITY, f64::max));
    [plane.x0, plane.y0, low, plane.x1, plane.y1, high]
}

/// `file` is the program's name as typed, `files` those that stand for it.
fn program_of(made: &CutterProgram, file: &str, files: &[String]) -> Program {
    let length = |wanted: fn(&Move) -> bool| {
        made.program.toolpath.moves.iter().filter(|m| wanted(m)).map(Move::length).sum()
    };
    let parts = parts_of(made, files);
    let blocks_of_parts = parts.iter().map(|part| part.blocks).sum();
    let bytes_of_parts = parts.iter().map(|part| part.bytes).sum();
    let motion_of_parts = made.parts.iter().map(|part| part.program.motion_blocks).sum();
    let of = |whole, parts| if made.parts.is_empty() { whole } else { parts };
    Program {
        file: if files.len() == 1 { files[0].clone() } else { file.into() },
        blocks: of(made.program.blocks, blocks_of_parts),
        motion_blocks: of(made.program.motion_blocks, motion_of_parts),
        bytes: of(made.text.len(), bytes_of_parts),
        parts,
        cut_length_mm: length(|m| !m.is_rapid()),
        rapid_length_mm: length(Move::is_rapid),
        time_s: made.times.time_s,
        cut_time_s: made.times.cut_time_s,
        starved_blocks: made.times.starved_blocks,
        mean_mm_min: made.times.mean_mm_min,
        slowest_mm_min: made.times.slowest_mm_min,
        highest_override: made.highest_override,
        restarts: made.restarts.iter().map(|place| restart(place, &files[place.part])).collect(),
        as_drawn: AsDrawn {
            motion_blocks: made.as_drawn.motion_blocks,
            time_s: made.as_drawn.times.time_s,
            cut_time_s: made.as_drawn.times.cut_time_s,
            starved_blocks: made.as_drawn.times.starved_blocks,
        },
    }
}

fn restart(place: &Place, file: &str) -> Restart {
    Restart {
        file: file.into(),
        line: place.line,
        block: place.block,
        cut: place.restart.cut,
        contour: place.restart.contour,
        below_mm: place.restart.below,
        at_mm: [place.at.x, place.at.y],
    }
}

/// The report of a dry run whose files have these names.
pub(super) fn dry_run(run: &DryRun, files: &[String]) -> report::DryRun {
    let file = |(k, file): (usize, &String)| Part {
        file: file.clone(),
        blocks: run.blocks[k],
        bytes: run.texts[k].len(),
    };
    report::DryRun {
        kind: run.kind.name().into(),
        files: files.iter().enumerate().map(file).collect(),
        claims: run.claims.iter().map(claim).collect(),
    }
}

/// The files of a program in parts.
fn parts_of(made: &CutterProgram, files: &[String]) -> Vec<Part> {
    let part = |(file, part): (&String, &super::Part)| Part {
        file: file.clone(),
        blocks: part.program.blocks,
        bytes: part.text.len(),
    };
    files.iter().zip(&made.parts).map(part).collect()
}

pub(super) fn check_of(verdict: &Verdict) -> Check {
    Check {
        holds: verdict.holds,
        deviation_mm: verdict.deviation.map(|deviation| deviation.mm),
        claims: verdict.claims.iter().map(claim).collect(),
        not_checked: verdict.not_checked.clone(),
    }
}

fn claim(claim: &check::Claim) -> Claim {
    Claim {
        name: claim.name.into(),
        state: match claim.state {
            check::State::Holds => State::Holds,
            check::State::Fails => State::Fails,
            check::State::NotChecked => State::NotChecked,
        },
        value: claim.value,
        limit: claim.limit,
        least: claim.least,
        unit: claim.unit.into(),
        at: claim.at.map(|spot| spot.to_string()),
        note: claim.note.clone(),
    }
}

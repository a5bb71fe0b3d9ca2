//! The table of `docs/slow-controller.md`: starved blocks and cut times of the real traces among the outlines that fit
//! `old-controller`: `cargo run --release --example starved > docs/slow-controller.md`.

#![allow(clippy::print_stdout, reason = "the table goes to standard output")]

use std::path::Path;

use rayon::prelude::*;
use ribband::job::{CutArgs, DrawingArgs, DrawingUnit, Job, JobFile, Settings};
use ribband::num::Length;
use ribband::run::{CutterProgram, Plan, Source, Unwatched, plan};
use serde_json::Value;

const HEAD: &str = "# Real traces on a slow controller

Written by `cargo run --release --example starved`: the outlines of `fixtures/outlines` that are no computed curves and
fit the machine, at the tolerance that the manifest gives for each, on `old-controller` (50 blocks a second, a queue of
8, 200 mm/s2 on each axis), 3 mm deep in one pass, at a process feed of 3000 mm/min. As drawn: the same job with every
vertex a straight block at the process feed. Times are planned by the motion model, not measured on a machine.
";

/// What may go wrong here.
type Failure = Box<dyn std::error::Error + Send + Sync>;

fn main() -> Result<(), Failure> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/outlines");
    let manifest: Value = serde_json::from_slice(&std::fs::read(folder.join("manifest.json"))?)?;
    let outlines = manifest["outlines"].as_array().ok_or("the manifest has no outlines")?;
    let real: Vec<&Value> = outlines.iter().filter(|entry| entry["category"] != "analytic").collect();
    let rows = real.par_iter().map(|entry| row(&folder, entry)).filter_map(Result::transpose);
    let rows: Vec<Row> = rows.collect::<Result<_, _>>()?;
    println!("{HEAD}");
    println!("| traces | number | starved as drawn | starved | median ratio of the cut times |");
    println!("|---|--:|--:|--:|--:|");
    for (kind, name) in [("coast", "coasts"), ("glyph", "letters"), ("traced", "traced images"), ("", "all")]
    {
        println!("{}", summed(name, rows.iter().filter(|row| row.id.starts_with(kind))));
    }
    println!("\n| trace | vertices | starved as drawn | starved | cut time as drawn | cut time | ratio |");
    println!("|---|--:|--:|--:|--:|--:|--:|");
    for Row { id, vertices, starved: [drawn, ours], cut_s: [drawn_s, ours_s] } in &rows {
        let ratio = ours_s / drawn_s;
        println!("| {id} | {vertices} | {drawn} | {ours} | {drawn_s:.1} s | {ours_s:.1} s | {ratio:.2} |");
    }
    Ok(())
}

/// Some rows in one.
fn summed<'a>(name: &str, rows: impl Iterator<Item = &'a Row> + Clone) -> String {
    let mut ratios: Vec<f64> = rows.clone().map(|row| row.cut_s[1] / row.cut_s[0]).collect();
    ratios.sort_by(f64::total_cmp);
    let starved = |k: usize| rows.clone().map(|row| row.starved[k]).sum::<usize>();
    let median = ratios.get(ratios.len() / 2).copied().unwrap_or(f64::NAN);
    format!("| {name} | {} | {} | {} | {median:.2} |", ratios.len(), starved(0), starved(1))
}

/// A trace: as drawn, and as cut.
struct Row {
    id: String,
    vertices: usize,
    starved: [usize; 2],
    cut_s: [f64; 2],
}

/// The row of an outline of the manifest; `None` where it is larger than the machine.
fn row(folder: &Path, entry: &Value) -> Result<Option<Row>, Failure> {
    let corner = |i: usize| entry["bbox_mm"][i].as_f64().unwrap_or(f64::INFINITY);
    let (id, csv) = (entry["id"].as_str().ok_or("no id")?, entry["csv"].as_str().ok_or("no file")?);
    let tolerance = entry["tolerance_mm"].as_f64().ok_or("no tolerance")?;
    let settings = Settings {
        machine: Some("old-controller".into()),
        cut: CutArgs {
            depth: Some(Length::from_mm(3.0)),
            feed: Some("3000mm/min".parse().map_err(|_| "no feed")?),
            ..CutArgs::default()
        },
        tolerance: Some(Length::from_mm(tolerance)),
        drawing: DrawingArgs { drawing_unit: Some(DrawingUnit::Mm), ..DrawingArgs::default() },
        ..Settings::default()
    };
    let job = Job::new(&settings, &JobFile::default()).map_err(|error| error.to_string())?;
    let travel = &job.machine.travel;
    // The cut may lie outside the trace by the tolerance.
    let room = 2.0 * tolerance;
    if corner(2) - corner(0) + room > travel.x || corner(3) - corner(1) + room > travel.y {
        return Ok(None);
    }
    let bytes = std::fs::read(folder.join(csv))?;
    let planned = plan(&job, Source { name: csv, bytes: &bytes }, &Unwatched);
    let Plan { programs, cleaned, .. } = planned.map_err(|error| error.to_string())?;
    let [CutterProgram { times, as_drawn, .. }] = &programs[..] else {
        return Err("one cutter is one program".into());
    };
    Ok(Some(Row {
        id: id.into(),
        vertices: cleaned.contours.iter().map(|contour| contour.path.vertices.len()).sum(),
        starved: [as_drawn.times.starved_blocks, times.starved_blocks],
        cut_s: [as_drawn.times.cut_time_s, times.cut_time_s],
    }))
}

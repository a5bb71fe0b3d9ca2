//! The table of starved blocks and cut times in the README: the real traces among the outlines that fit
//! `old-controller`, each cut 3 mm deep in one pass: `cargo run --release --example starved`.

#![allow(clippy::print_stdout, reason = "the table goes to standard output")]

use std::path::Path;

use rayon::prelude::*;
use ribband::job::{CutArgs, DrawingArgs, DrawingUnit, Job, JobFile, Settings};
use ribband::num::Length;
use ribband::run::{Plan, Source, Unwatched, plan};
use serde_json::Value;

/// What may go wrong here.
type Failure = Box<dyn std::error::Error + Send + Sync>;

fn main() -> Result<(), Failure> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/outlines");
    let manifest: Value = serde_json::from_slice(&std::fs::read(folder.join("manifest.json"))?)?;
    let outlines = manifest["outlines"].as_array().ok_or("the manifest has no outlines")?;
    let real: Vec<&Value> = outlines.iter().filter(|entry| entry["category"] != "analytic").collect();
    let rows: Vec<Row> = real
        .par_iter()
        .map(|entry| row(&folder, entry))
        .filter_map(|r| match r {
            Err(e) => {
                eprintln!("{e}");
                None
            }
            Ok(r) => r,
        })
        .collect();
    println!("| trace | vertices | starved as drawn | starved | cut time as drawn | cut time | ratio |");
    println!("|---|--:|--:|--:|--:|--:|--:|");
    for row in &rows {
        println!(
            "| {} | {} | {} | {} | {:.1} s | {:.1} s | {:.2} |",
            row.id,
            row.vertices,
            row.starved[0],
            row.starved[1],
            row.cut_s[0],
            row.cut_s[1],
            row.ratio()
        );
    }
    let mut ratios: Vec<f64> = rows.iter().map(Row::ratio).collect();
    ratios.sort_by(f64::total_cmp);
    let starved: usize = rows.iter().map(|row| row.starved[1]).sum();
    let median = ratios.get(ratios.len() / 2).ok_or("no trace fits the machine")?;
    println!(
        "\n{} traces; ours starve {starved} times; median ratio of the cut times {median:.2}",
        rows.len()
    );
    Ok(())
}

/// A trace: as drawn, and as cut.
struct Row {
    id: String,
    vertices: usize,
    starved: [usize; 2],
    cut_s: [f64; 2],
}

impl Row {
    fn ratio(&self) -> f64 {
        self.cut_s[1] / self.cut_s[0]
    }
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
    if corner(2) - corner(0) > travel.x || corner(3) - corner(1) > travel.y {
        return Ok(None);
    }
    let bytes = std::fs::read(folder.join(csv))?;
    let Plan { times, as_drawn, cleaned, .. } =
        plan(&job, Source { name: csv, bytes: &bytes }, &Unwatched).map_err(|error| error.to_string())?;
    Ok(Some(Row {
        id: id.into(),
        vertices: cleaned.contours.iter().map(|contour| contour.path.vertices.len()).sum(),
        starved: [as_drawn.times.starved_blocks, times.starved_blocks],
        cut_s: [as_drawn.times.cut_time_s, times.cut_time_s],
    }))
}

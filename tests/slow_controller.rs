//! The real traces on the slow controller: nothing starves, by a queue of this file's own that reads nothing but the
//! program's text, and the cut takes at most half the time of the drawing as it is.

use std::fs;
use std::path::Path;

use rayon::prelude::*;
use ribband::job::{CutArgs, DrawingArgs, DrawingUnit, Job, JobFile, Settings};
use ribband::machine;
use ribband::num::Length;
use ribband::run::{Source, Unwatched, plan};
use serde_json::Value;

/// The controller's fixed numbers: blocks that it holds, the one that runs included, and the time to read one, in s.
const QUEUE: usize = 8;
const READ_S: f64 = 1.0 / 50.0;
/// Its rapids and its feed at most, in mm/s on each axis.
const FASTEST: f64 = 50.0;

/// How long each motion block of a program lasts, in s, from end to end at its feed word, which is shorter than any
/// machine takes. Absolute mm, G0 to G3 in XY, arcs by radius.
fn block_times(program: &str, over: f64) -> Vec<f64> {
    let (mut at, mut motion, mut feed) = ([0.0_f64; 3], 0.0, f64::NAN);
    let mut times = Vec::new();
    for line in program.lines().map(|line| line.split('(').next().unwrap_or("")) {
        let words = words(line);
        let of = |letter| words.iter().rev().find(|word| word.0 == letter).map(|word| word.1);
        motion = words.iter().filter(|w| w.0 == 'G' && w.1 < 4.0).map(|w| w.1).next_back().unwrap_or(motion);
        feed = of('F').unwrap_or(feed);
        let to = [of('X').unwrap_or(at[0]), of('Y').unwrap_or(at[1]), of('Z').unwrap_or(at[2])];
        if !words.iter().any(|word| "XYZ".contains(word.0)) {
            continue;
        }
        let chord = (to[0] - at[0]).hypot(to[1] - at[1]);
        let flat = of('R').map_or(chord, |r| 2.0 * r * (chord / (2.0 * r)).min(1.0).asin());
        let length = flat.hypot(to[2] - at[2]);
        let longest = to.iter().zip(at).map(|(to, from)| (to - from).abs()).fold(0.0, f64::max);
        let rapid_s = longest / FASTEST;
        times.push(if motion == 0.0 { rapid_s } else { (60.0 * length / (feed * over)).max(rapid_s) });
        at = to;
    }
    times
}

fn words(line: &str) -> Vec<(char, f64)> {
    let starts: Vec<usize> =
        line.char_indices().filter(|(_, c)| c.is_ascii_alphabetic()).map(|(i, _)| i).collect();
    let ends = starts.iter().skip(1).copied().chain([line.len()]);
    let word = |(start, end): (usize, usize)| {
        Some((line[start..].chars().next()?, line[start + 1..end].trim().parse().ok()?))
    };
    starts.iter().copied().zip(ends).filter_map(word).collect()
}

/// How many blocks have to be waited for: block k is read once block k - 8 has left its place.
fn starved(times: &[f64]) -> usize {
    let (mut ends, mut read_at, mut starved): (Vec<f64>, f64, usize) = (Vec::new(), 0.0, 0);
    for (k, time) in times.iter().enumerate() {
        if k >= QUEUE {
            read_at = read_at.max(ends[k - QUEUE]) + READ_S;
        }
        let free = ends.last().copied().unwrap_or(0.0);
        starved += usize::from(read_at > free);
        ends.push(read_at.max(free) + time);
    }
    starved
}

/// One outline on the machine.
struct Cut {
    id: String,
    arcs: usize,
    drawn_starved: usize,
    ratio: f64,
}

/// The cut of an outline of the manifest on `machine`; `None` where it is larger than that, or a computed curve.
fn cut(folder: &Path, entry: &Value, machine: &str) -> Option<Cut> {
    let tolerance = entry["tolerance_mm"].as_f64().expect("a tolerance");
    let corner = |i: usize| entry["bbox_mm"][i].as_f64().expect("a corner");
    let size = (corner(2) - corner(0)).max(corner(3) - corner(1));
    if entry["category"] == "analytic" || size + 2.0 * tolerance > 600.0 {
        return None;
    }
    let (id, csv) = (entry["id"].as_str().expect("an id"), entry["csv"].as_str().expect("a file"));
    let settings = Settings {
        machine: Some(machine.into()),
        cut: CutArgs {
            depth: Some(Length::from_mm(3.0)),
            feed: Some("3000mm/min".parse().expect("a feed")),
            ..CutArgs::default()
        },
        tolerance: Some(Length::from_mm(tolerance)),
        drawing: DrawingArgs { drawing_unit: Some(DrawingUnit::Mm), ..DrawingArgs::default() },
        ..Settings::default()
    };
    let job = Job::new(&settings, &JobFile::default()).expect("a job");
    let bytes = fs::read(folder.join(csv)).expect("the outline");
    let planned = plan(&job, Source { name: csv, bytes: &bytes }, &Unwatched);
    let plan = planned.unwrap_or_else(|why| panic!("{id}: {why}"));
    let [made] = &plan.programs[..] else { panic!("{id}: one cutter is one program") };
    assert!(made.text.len() <= 32768 || made.parts.len() > 1, "{id}: {} bytes", made.text.len());
    for text in made.texts() {
        assert!(text.len() <= 32768, "{id}: a part of {} bytes", text.len());
        assert!(block_times(text, 1.0).len() > 5, "{id}: blocks are found");
        assert_eq!(starved(&block_times(text, 1.0)), 0, "{id}: by the text alone");
        let highest = f64::from(made.highest_override) / 100.0;
        assert!(highest >= 1.0, "{id}: {highest}");
        assert_eq!(starved(&block_times(text, highest)), 0, "{id}: at the override of {highest}");
    }
    assert_eq!(made.times.starved_blocks, 0, "{id}");
    let drawn = &made.as_drawn.times;
    Some(Cut {
        id: id.into(),
        arcs: made.text.lines().filter(|line| line.contains("G2X") || line.contains("G3X")).count(),
        drawn_starved: drawn.starved_blocks,
        ratio: made.times.cut_time_s / drawn.cut_time_s,
    })
}

/// Every `nth` outline of the manifest on `machine`.
fn cuts(machine: &str, nth: usize) -> Vec<Cut> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/outlines");
    let manifest = fs::read(folder.join("manifest.json")).expect("the manifest");
    let manifest: Value = serde_json::from_slice(&manifest).expect("JSON");
    let outlines: Vec<&Value> =
        manifest["outlines"].as_array().expect("a list").iter().step_by(nth).collect();
    outlines.par_iter().filter_map(|entry| cut(&folder, entry, machine)).collect()
}

/// A controller without arcs gets chords, and feeds that its queue sustains all the same.
#[test]
fn programs_of_chords_alone_starve_nowhere() {
    let folder = tempfile::tempdir().expect("a folder");
    let profile = folder.path().join("chords.toml");
    let text = machine::built_in("old-controller").expect("built in");
    fs::write(&profile, text.replace("style = \"radius\"", "style = \"none\"")).expect("a profile");
    let cuts = cuts(&profile.display().to_string(), 6);
    assert!(cuts.len() >= 10, "{} traces", cuts.len());
    assert!(cuts.iter().all(|cut| cut.arcs == 0), "no arcs are written");
    let drawn: usize = cuts.iter().map(|cut| cut.drawn_starved).sum();
    assert!(drawn > 2_000, "as drawn {drawn} blocks starve");
}

#[test]
fn ours_starve_nowhere_and_take_half_the_time() {
    let mut cuts = cuts("old-controller", 1);
    assert!(cuts.len() >= 75, "{} traces", cuts.len());
    let straight: Vec<&str> = cuts.iter().filter(|cut| cut.arcs == 0).map(|cut| cut.id.as_str()).collect();
    assert!(straight.is_empty(), "arcs are written for all but {straight:?}");
    let drawn: usize = cuts.iter().map(|cut| cut.drawn_starved).sum();
    assert!(drawn > 20_000, "as drawn {drawn} blocks starve");
    cuts.sort_by(|a, b| a.ratio.total_cmp(&b.ratio));
    let (median, worst) = (&cuts[cuts.len() / 2], &cuts[cuts.len() - 1]);
    println!("{} traces: median {:.3}, worst {} with {:.3}", cuts.len(), median.ratio, worst.id, worst.ratio);
    assert!(median.ratio <= 0.5, "median {}", median.ratio);
    // Where the drawing is smooth already there is little to win, and little to lose.
    assert!(worst.ratio <= 1.25, "{}: {}", worst.id, worst.ratio);
}

/// The queue by hand: full at the start, then a block each 20 ms.
#[test]
fn the_queue_of_this_file_by_hand() {
    assert_eq!(starved(&[0.02; 100]), 0, "as long as the reading");
    assert_eq!(starved(&[0.001; 8]), 0, "all held at the start");
    // Block 8 is read 20 ms after the first ended, at 21 ms; the eight before it last 8 ms.
    assert_eq!(starved(&[0.001; 9]), 1);
    // Block k is ready at 11 + 20 (k - 7) ms and wanted at 11 k ms: late from block 15 on.
    assert_eq!(starved(&[0.011; 100]), 85);
    let text = "G1X10F600\r\nG2X20Y10R10\r\nG0Z5\r\n(X99)\r\nM30\r\n";
    let quarter = std::f64::consts::FRAC_PI_2;
    let want = [1.0, quarter, 0.1];
    assert!(block_times(text, 1.0).iter().zip(want).all(|(a, b)| (a - b).abs() < 1e-12));
}

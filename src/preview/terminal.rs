//! The chord error on the terminal: a row for each contour, and one line that shows how the error is spread.

use comfy_table::{CellAlignment, Table, presets};

use super::Scene;
use super::chord::{Chord, Lap};
use super::figures::length;
use super::markup::number;
use super::palette::{STEPS, step};
use super::tour::stages;

/// More contours are summed up in one row.
const ROWS: usize = 20;

/// The chord error of the program in `scene` as text, with a line end.
pub fn terminal(scene: &Scene) -> String {
    let chord = Chord::of(scene, &stages(&scene.program.toolpath.moves, scene.stock_top));
    format!("{}\n{}\n", table(scene, &chord), spread(scene, &chord))
}

/// A row for each contour.
fn table(scene: &Scene, chord: &Chord) -> Table {
    let mut table = Table::new();
    table.load_style(presets::NOTHING);
    table.set_header(["Contour", "Layer", "Vertices", "Lines", "Arcs", "Length", "Chord error, mm"]);
    let contours = &scene.report.contours;
    for contour in contours.iter().take(ROWS) {
        let largest = chord.laps.iter().find(|lap| lap.contour == contour.id).map(Lap::largest);
        table.add_row([
            contour.id.to_string(),
            printable(&contour.layer),
            contour.vertices.to_string(),
            contour.lines.to_string(),
            contour.arcs.to_string(),
            length(contour.length_mm, scene.report.setup.unit == "in"),
            largest.map_or("not cut".into(), |mm| format!("{mm:.4}")),
        ]);
    }
    if contours.len() > ROWS {
        table.add_row([format!("and {} more", contours.len() - ROWS)]);
    }
    for column in table.column_iter_mut().skip(2) {
        column.set_cell_alignment(CellAlignment::Right);
    }
    table
}

/// A name without what a terminal would obey.
fn printable(name: &str) -> String {
    name.chars().map(|c| if c.is_control() { '\u{fffd}' } else { c }).collect()
}

/// The share of the way at each tenth of the tolerance, as bars one beside the other, and how much lies below which error.
fn spread(scene: &Scene, chord: &Chord) -> String {
    const BARS: [char; 9] = [' ', '▁', '▂', '▃', '▄', '▅', '▆', '▇', '█'];
    let ways = ways(scene, chord);
    let (whole, most) = (ways.iter().sum::<f64>(), ways.iter().copied().fold(0.0, f64::max));
    if whole <= 0.0 {
        return "Chord error: nothing is cut along the drawing".into();
    }
    let bar = |way: &f64| BARS[(way / most * 8.0).ceil() as usize];
    let bars: String = ways[..STEPS].iter().map(bar).collect();
    let within = |share: f64| {
        let mut below = 0.0;
        let full = |way: &f64| {
            below += way;
            below >= share * whole
        };
        ways.iter().position(full).map_or(STEPS, |tenth| tenth + 1)
    };
    let tolerance = scene.report.tolerance_mm;
    let at = |tenth: usize| number_mm(tolerance * tenth as f64 / STEPS as f64);
    let over = if ways[STEPS] > 0.0 {
        format!(", {:.1} % over it", 100.0 * ways[STEPS] / whole)
    } else {
        String::new()
    };
    format!(
        "Chord error 0 [{bars}] {} mm, the tolerance; half of the way within {} mm, nine tenths within {} mm{over}",
        number_mm(tolerance),
        at(within(0.5)),
        at(within(0.9)),
    )
}

fn number_mm(mm: f64) -> String {
    number(mm, 4)
}

/// The length of the way at each tenth of the tolerance, and over it.
fn ways(scene: &Scene, chord: &Chord) -> [f64; STEPS + 1] {
    let mut ways = [0.0; STEPS + 1];
    let pairs =
        chord.laps.iter().flat_map(|lap| lap.stations.windows(2)).filter(|pair| pair[0].of == pair[1].of);
    for pair in pairs {
        let span = scene.program.toolpath.moves[pair[0].of].span();
        let error = pair[0].error.abs().max(pair[1].error.abs());
        ways[step(error, scene.report.tolerance_mm)] += (pair[1].t - pair[0].t) * span.length();
    }
    ways
}

//! The moves and the chord error as the page's script reads them.

use super::Scene;
use super::chord::Lap;
use super::layers::Drawn;
use super::markup::number;
use super::pace::paces;
use super::tour::Kind;
use crate::feed;

/// JSON that may stand in a script element: no tag can begin in it.
pub(super) fn data(scene: &Scene, drawn: &Drawn, magnification: f64) -> String {
    let moves = &scene.program.toolpath.moves;
    let first = moves.first().map_or([0.0; 3], |m| [m.from.xy.x, m.from.xy.y, m.from.z]);
    let mut elapsed = 0.0;
    let spent = feed::spent(&scene.program.toolpath, &scene.limits);
    let ended = spent.into_iter().map(|time| {
        elapsed += time;
        elapsed
    });
    let kinds: String = drawn.stages.iter().map(|stage| kind_number(stage.kind).to_string()).collect();
    let names: Vec<&str> = Kind::ALL.into_iter().map(Kind::words).collect();
    let worst = scene.worst().map_or("null".into(), |at| list([at.x, at.y], 4));
    let around = scene.whole();
    let fields = [
        ("tolerance", number(scene.report.tolerance_mm, 6)),
        ("cutter", number(scene.report.setup.cutter_mm, 4)),
        ("inch", (scene.report.setup.unit == "in").to_string()),
        ("side", string(&scene.report.setup.side)),
        ("magnification", number(magnification, 3)),
        ("extent", list([around.x0, around.y0, around.x1, around.y1], 3)),
        ("worst", worst),
        ("from", list(first, 4)),
        ("x", list(moves.iter().map(|m| m.to.xy.x), 4)),
        ("y", list(moves.iter().map(|m| m.to.xy.y), 4)),
        ("z", list(moves.iter().map(|m| m.to.z), 4)),
        ("bulge", list(moves.iter().map(|m| m.bulge), 7)),
        ("feed", list(moves.iter().map(|m| m.feed.unwrap_or(0.0)), 2)),
        ("line", list(moves.iter().map(|m| m.line as f64), 0)),
        ("ended", list(ended, 3)),
        ("paces", paces(scene)),
        ("kinds", string(&kinds)),
        ("names", strings(&names)),
        ("laps", laps(scene, drawn)),
        ("program", string(scene.text)),
    ];
    let fields: Vec<String> = fields.iter().map(|(name, value)| format!("\"{name}\":{value}")).collect();
    format!("{{{}}}", fields.join(",\n")).replace('<', "\\u003c")
}

fn kind_number(kind: Kind) -> usize {
    Kind::ALL.into_iter().position(|one| one == kind).unwrap_or_default()
}

fn laps(scene: &Scene, drawn: &Drawn) -> String {
    let lap = |lap: &Lap| {
        let layer = scene.drawn.iter().find(|contour| contour.id == lap.contour);
        format!(
            "{{\"contour\":{},\"layer\":{},\"moves\":{},\"of\":{},\"at\":{},\"error\":{}}}",
            lap.contour,
            string(layer.map_or("", |contour| &contour.layer)),
            list(lap.moves.iter().map(|&i| i as f64), 0),
            list(lap.stations.iter().map(|station| station.of as f64), 0),
            list(lap.stations.iter().map(|station| station.t), 4),
            list(lap.stations.iter().map(|station| station.error), 5),
        )
    };
    let laps: Vec<String> = drawn.chord.laps.iter().map(lap).collect();
    format!("[{}]", laps.join(","))
}

fn list(values: impl IntoIterator<Item = f64>, places: usize) -> String {
    let values: Vec<String> = values.into_iter().map(|value| number(value, places)).collect();
    format!("[{}]", values.join(","))
}

fn string(text: &str) -> String {
    serde_json::to_string(text).unwrap_or_default()
}

fn strings(texts: &[&str]) -> String {
    serde_json::to_string(texts).unwrap_or_default()
}

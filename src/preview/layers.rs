//! What is drawn, layer by layer, in the order of the work.

use std::collections::HashSet;

use kurbo::{Point, Rect, Vec2};

use super::chord::{Chord, Lap};
use super::curvature::{Combs, combs};
use super::markup::{mm, paths, place};
use super::palette::{STEPS, step};
use super::setting::frame;
use super::tour::{Kind, Stage, restarts, stages};
use super::{Scene, figures, setting};
use crate::geom::Span;
use crate::toolpath::Move;

/// Everything that is drawn, ready to be laid out.
pub(super) struct Drawn {
    /// The layers, from the ground up.
    pub(super) layers: Vec<Layer>,
    /// The moves' stages.
    pub(super) stages: Vec<Stage>,
    /// The chord error.
    pub(super) chord: Chord,
    /// The bend with the longest tooth of the curvature combs, in 1/mm.
    pub(super) strongest: f64,
    /// Said where something is drawn coarser than it is.
    pub(super) note: Option<String>,
}

/// One layer.
pub(super) struct Layer {
    /// Its name in the markup.
    pub(super) id: &'static str,
    /// Its name in words.
    pub(super) name: &'static str,
    /// The step of the work that it is looked at for.
    pub(super) group: Group,
    /// True when it is shown unasked.
    pub(super) shown: bool,
    /// The class of the line that stands for it in the legend.
    pub(super) key: Option<&'static str>,
    /// Its elements.
    pub(super) svg: String,
}

/// The steps of the work, and what is looked at before it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Group {
    Zero,
    Hold,
    Cut,
    Compare,
}

impl Group {
    pub(super) const ALL: [Self; 4] = [Self::Zero, Self::Hold, Self::Cut, Self::Compare];

    /// The group's heading.
    pub(super) fn words(self) -> &'static str {
        match self {
            Self::Zero => "Set zero",
            Self::Hold => "Hold",
            Self::Cut => "Cut",
            Self::Compare => "Path against trace",
        }
    }
}

/// More vertices of the trace are thinned out.
const TRACE: usize = 60_000;

/// Draws the program in `scene`.
pub(super) fn draw(scene: &Scene) -> Drawn {
    let moves = &scene.program.toolpath.moves;
    let stages = stages(moves, scene.stock_top);
    let chord = Chord::of(scene, &stages);
    let combs = combs(scene, &chord);
    let (trace, note) = trace(scene);
    let strongest = combs.strongest;
    let mut layers = ground(scene, &stages);
    layers.extend(comparison(scene, &chord, combs, trace));
    layers.extend(marks(scene, &stages, &chord));
    Drawn { layers, stages, chord, strongest, note }
}

fn layer(id: &'static str, name: &'static str, group: Group, shown: bool, svg: String) -> Layer {
    Layer { id, name, group, shown, key: key(id), svg }
}

/// The line that stands for a layer in the legend; none for one that is no line.
fn key(layer: &str) -> Option<&'static str> {
    const KEYS: [(&str, &str); 14] = [
        ("stock", "stock"),
        ("clamps", "clamp"),
        ("part", "part"),
        ("extents", "extents"),
        ("zero", "zero"),
        ("cutter", "cutter"),
        ("rapids", "rapid"),
        ("entries", "entry"),
        ("uncut", "uncut"),
        ("tabs", "tab"),
        ("trace", "trace"),
        ("comb", "comb"),
        ("before", "before"),
        ("after", "after"),
    ];
    KEYS.into_iter().find(|(id, _)| *id == layer).map(|(_, class)| class)
}

/// The spans of the moves of some kinds.
fn of<'a>(
    scene: &'a Scene,
    stages: &'a [Stage],
    wanted: fn(Kind) -> bool,
) -> impl Iterator<Item = Span> + 'a {
    let moves = scene.program.toolpath.moves.iter().zip(stages);
    moves.filter(move |(_, stage)| wanted(stage.kind)).map(|(m, _)| m.span())
}

/// The spans without those that lie exactly below an earlier one, as passes one above another do.
fn distinct(spans: impl Iterator<Item = Span>) -> Vec<Span> {
    let mut seen = HashSet::new();
    let micrometres = |mm: f64| (mm * 1e3).round() as i64;
    let key = |span: &Span| {
        let place = |p: Point| (micrometres(p.x), micrometres(p.y));
        (place(span.start), place(span.end), micrometres(span.bulge * span.chord().hypot()))
    };
    spans.filter(|span| seen.insert(key(span))).collect()
}

/// What everything else lies on.
fn ground(scene: &Scene, stages: &[Stage]) -> Vec<Layer> {
    let inside = |kind: Kind| !matches!(kind, Kind::Rapid | Kind::Above);
    let seen_from_above = distinct(of(scene, stages, inside));
    let swept = format!(
        "<g style=\"stroke-width:{}\">{}</g>",
        mm(scene.report.setup.cutter_mm),
        paths(seen_from_above.iter().copied(), "swept")
    );
    let part = paths(frame(scene.part()), "part");
    let extents = paths(frame(path_box(&scene.program.toolpath.moves)), "extents");
    let cutter = paths(seen_from_above, "cutter");
    vec![
        layer("stock", "Stock", Group::Zero, true, setting::stock(scene)),
        layer("swept", "Width that the cutter sweeps", Group::Cut, true, swept),
        layer("part", "Box around the finished parts", Group::Zero, true, part),
        layer("extents", "Box around the cutter's path", Group::Zero, true, extents),
        layer("cutter", "Cutter's path, all passes", Group::Cut, true, cutter),
    ]
}

/// What lies on top.
fn marks(scene: &Scene, stages: &[Stage], chord: &Chord) -> Vec<Layer> {
    let plunges = of(scene, stages, |kind| kind == Kind::Plunge).map(|span| span.start);
    let ramps = of(scene, stages, |kind| kind == Kind::Ramp);
    let entries = format!("{}{}", paths(ramps, "entry"), dots(plunges, "plunge"));
    let rapids = paths(of(scene, stages, |kind| kind == Kind::Rapid), "rapid");
    let clamps = setting::clamps(scene, figures::diagonal(scene.extent()) / 50.0);
    let tabs = paths(of(scene, stages, |kind| kind == Kind::Tab), "tab");
    let uncut = paths(chord.laps.iter().flat_map(|lap| lap.uncut.iter().copied()), "uncut");
    vec![
        layer("rapids", "Rapids", Group::Cut, true, rapids),
        layer("entries", "Ways down into the stock", Group::Cut, true, entries),
        layer("uncut", "What stays uncut", Group::Cut, true, uncut),
        layer("tabs", "Tabs", Group::Hold, true, tabs),
        layer("clamps", "Clamps to keep clear of", Group::Hold, true, clamps),
        layer("starts", "Starts and directions", Group::Cut, true, starts(scene, stages)),
        layer("zero", "Zero", Group::Zero, true, zero(scene)),
        layer("worst", "Worst place", Group::Compare, true, worst(scene)),
    ]
}

/// The layers that hold the path against the trace.
fn comparison(scene: &Scene, chord: &Chord, combs: Combs, trace: String) -> Vec<Layer> {
    let group = Group::Compare;
    let has_fair = !combs.fair.is_empty();
    let fair = layer("fair", "Curvature of the fair curve", group, false, paths(combs.fair, "fair"));
    let mut layers = vec![
        layer("trace", "Trace as drawn", group, true, trace),
        layer("error", "Chord error by colour", group, true, error(scene, chord)),
        layer("spans", "Path by span, joints", group, false, spans(scene, chord)),
        layer("comb", "Chord error as a comb", group, false, String::new()),
        layer("before", "Curvature of the trace", group, false, paths(combs.before, "before")),
        layer("after", "Curvature of the path", group, false, paths(combs.after, "after")),
    ];
    layers.extend(has_fair.then_some(fair));
    layers
}

/// The drawing; where it has too many vertices, every so many of them, which is then told.
fn trace(scene: &Scene) -> (String, Option<String>) {
    let contours: Vec<_> = scene.drawn.iter().map(|c| &c.path).collect();
    let vertices: usize = contours.iter().map(|path| path.vertices.len()).sum();
    let every = vertices.div_ceil(TRACE);
    if every <= 1 {
        return (paths(contours.iter().flat_map(|path| path.spans()), "trace"), None);
    }
    let coarse = contours.iter().map(|path| {
        let last = path.vertices.last().filter(|_| !path.closed);
        let kept = path.vertices.iter().step_by(every).chain(last).map(|v| v.at);
        crate::geom::ArcSpline::polyline(kept, path.closed)
    });
    let coarse: Vec<_> = coarse.collect();
    let note = format!("The trace is drawn with one vertex in {every}; everything else uses them all.");
    (paths(coarse.iter().flat_map(|path| path.spans()), "trace"), Some(note))
}

/// The path that is cut last, in the colours of its chord error.
fn error(scene: &Scene, chord: &Chord) -> String {
    let mut pieces: Vec<Vec<Span>> = vec![Vec::new(); STEPS + 1];
    for lap in &chord.laps {
        for (span, error) in coloured(scene, lap) {
            pieces[step(error, scene.report.tolerance_mm)].push(span);
        }
    }
    pieces.into_iter().enumerate().map(|(i, spans)| paths(spans, &format!("e{i}"))).collect()
}

/// The spans of a lap, cut where their colour changes, each with an error of that colour.
fn coloured(scene: &Scene, lap: &Lap) -> Vec<(Span, f64)> {
    let tolerance = scene.report.tolerance_mm;
    let mut pieces: Vec<(Span, f64)> = Vec::new();
    for few in lap.stations.chunk_by(|a, b| a.of == b.of) {
        let span = scene.program.toolpath.moves[few[0].of].span();
        let (mut from, mut error) = (0.0, few[0].error);
        for pair in few.windows(2) {
            let next = pair[0].error.abs().max(pair[1].error.abs());
            if step(next, tolerance) != step(error, tolerance) && pair[0].t > from {
                pieces.push((span.part(from, pair[0].t), error));
                (from, error) = (pair[0].t, next);
            } else {
                error = error.abs().max(next);
            }
        }
        pieces.push((span.part(from, 1.0), error));
    }
    pieces
}

/// The path that is cut last, its spans by turns in two inks, with their joints.
fn spans(scene: &Scene, chord: &Chord) -> String {
    let moves = &scene.program.toolpath.moves;
    let by_turns = |odd: usize| {
        let chosen = chord.laps.iter().flat_map(move |lap| lap.moves.iter().skip(odd).step_by(2));
        chosen.map(|&i| moves[i].span())
    };
    let joints = chord.laps.iter().flat_map(|lap| &lap.moves).map(|&i| moves[i].from.xy);
    format!("{}{}{}", paths(by_turns(0), "span"), paths(by_turns(1), "other"), dots(joints, "joint"))
}

/// Where each cut starts, and arrows along the passes.
fn starts(scene: &Scene, stages: &[Stage]) -> String {
    let moves = &scene.program.toolpath.moves;
    let size = figures::diagonal(scene.extent()) / 110.0;
    let starts = restarts(moves, stages).into_iter().map(|i| moves[i].to.xy);
    let mut arrows = Vec::new();
    let mut since = f64::INFINITY;
    for (m, stage) in moves.iter().zip(stages) {
        if !stage.kind.is_pass() {
            since = 6.0 * size;
            continue;
        }
        since += m.span().length();
        if since > 14.0 * size {
            arrows.extend(arrow(&m.span(), size));
            since = 0.0;
        }
    }
    format!("{}{}", paths(arrows, "arrow"), dots(starts, "start"))
}

/// An open arrow head in the middle of a span.
fn arrow(span: &Span, size: f64) -> [Span; 2] {
    let (tip, along) = (span.at(0.5), span.tangent(0.5) * size);
    let side = Vec2::new(-along.y, along.x) * 0.45;
    [Span::line(tip - along + side, tip), Span::line(tip, tip - along - side)]
}

/// A point at each place.
fn dots(places: impl IntoIterator<Item = Point>, class: &str) -> String {
    let data: Vec<String> = places.into_iter().map(|p| format!("M{}h0", place(p))).collect();
    data.chunks(400).map(|few| format!("<path class=\"{class}\" d=\"{}\"/>\n", few.concat())).collect()
}

/// The program's zero: its axes, X the longer.
fn zero(scene: &Scene) -> String {
    let size = figures::diagonal(scene.extent()) / 22.0;
    let (x, y) = (Point::new(size * 1.4, 0.0), Point::new(0.0, size));
    let axes = paths([Span::line(Point::ORIGIN, x), Span::line(Point::ORIGIN, y)], "zero");
    let heads = [Span::line(Point::ORIGIN, x), Span::line(Point::ORIGIN, y)]
        .map(|axis| arrow(&Span::line(axis.start, axis.end + axis.chord()), size / 6.0));
    let ring = format!(
        "<path class=\"zero\" d=\"M{} 0a{r} {r} 0 1 0 {d} 0a{r} {r} 0 1 0 -{d} 0\"/>",
        mm(-size / 8.0),
        r = mm(size / 8.0),
        d = mm(size / 4.0)
    );
    let letter = |at: Point, name: &str| {
        format!("<text x=\"{}\" y=\"{}\" font-size=\"{}\">{name}</text>", mm(at.x), mm(-at.y), mm(size / 3.0))
    };
    let gap = size / 8.0;
    format!(
        "{axes}{}{ring}{}{}",
        paths(heads.into_iter().flatten(), "zero"),
        letter(x + Vec2::new(gap, -gap), "X"),
        letter(y + Vec2::new(-gap, gap), "Y")
    )
}

/// A ring around the worst place.
fn worst(scene: &Scene) -> String {
    let Some(at) = scene.worst() else { return String::new() };
    let r = figures::diagonal(scene.extent()) / 90.0;
    format!(
        "<path class=\"worst\" d=\"M{}a{r} {r} 0 1 0 {d} 0a{r} {r} 0 1 0 -{d} 0\"/>",
        place(at - Vec2::new(r, 0.0)),
        r = mm(r),
        d = mm(2.0 * r)
    )
}

/// The box around the moves.
fn path_box(moves: &[Move]) -> Rect {
    moves.iter().map(|m| m.span().bbox()).reduce(|a, b| a.union(b)).unwrap_or(Rect::ZERO)
}

//! The setup sheet: what the person at the machine takes along, on two sheets of A4 or Letter at most, black on white.

use kurbo::{Point, Rect, Vec2};
use sha2::{Digest, Sha256};

use super::chord::Chord;
use super::figures::length;
use super::markup::{escaped, mm, paths, place};
use super::tour::{Stage, restarts, stages};
use super::{Scene, setting};
use crate::cautions::CAUTIONS;
use crate::gcode::read::What;
use crate::geom::Span;
use crate::report::{Claim, Restart, State};
use crate::summary::{duration, side_words};

const LOOKS: &str = include_str!("sheet.css");

/// The largest size of the picture on paper, in mm.
const PICTURE: (f64, f64) = (186.0, 98.0);
/// Lists that could run over the paper end after so many items, and say so.
const RESTARTS: usize = 14;
const NOTES: usize = 6;
const CLAMPS: usize = 4;
/// Longer texts are cut off there.
const LONGEST: usize = 150;

/// The setup sheet of a job's programs, those in `scenes` in the order in which they are run, as a page of its own.
pub fn setup_sheet(scenes: &[Scene]) -> String {
    let sheet = |scene: &Scene| {
        let stages = stages(&scene.program.toolpath.moves, scene.stock_top);
        leaves(scene, &stages, &Chord::of(scene, &stages))
    };
    let name = scenes.first().map_or("", |scene| &scene.report.drawing.file);
    format!(
        "<!doctype html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n\
         <meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n\
         <meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; style-src 'unsafe-inline'; \
         img-src data:; base-uri 'none'; form-action 'none'\">\n<link rel=\"icon\" href=\"data:,\">\n\
         <title>{}: setup sheet</title>\n<style>\n{LOOKS}</style>\n</head>\n<body>\n{}</body>\n</html>\n",
        escaped(name),
        scenes.iter().map(sheet).collect::<String>()
    )
}

/// The sheet's looks, for a page that holds one.
pub(super) fn looks() -> &'static str {
    LOOKS
}

/// Both sheets.
pub(super) fn leaves(scene: &Scene, stages: &[Stage], chord: &Chord) -> String {
    format!(
        "<article class=\"sheet\" aria-label=\"Setup sheet\">\n<section class=\"leaf\">\n{title}{picture}\
         <div class=\"columns\">{setting}{cutting}</div>\n{ticks}</section>\n<section class=\"leaf\">\n\
         <div class=\"columns\">{checked}{open}</div>\n{restarts}{notes}{cautions}</section>\n</article>\n",
        title = title(scene),
        picture = picture(scene, stages, chord),
        setting = setting(scene),
        cutting = cutting(scene),
        ticks = ticks(scene),
        checked = checked(scene),
        open = not_checked(scene),
        restarts = restart_list(scene),
        notes = notes(scene),
        cautions = cautions(),
    )
}

/// `text` escaped, and cut off where it would run over the paper.
fn short(text: &str) -> String {
    shorter(text, LONGEST)
}

fn shorter(text: &str, longest: usize) -> String {
    if text.chars().count() <= longest {
        return escaped(text);
    }
    let kept: String = text.chars().take(longest).collect();
    format!("{}&hellip;", escaped(&kept))
}

fn title(scene: &Scene) -> String {
    let report = scene.report;
    let digest: String =
        Sha256::digest(scene.text.as_bytes()).iter().map(|byte| format!("{byte:02x}")).collect();
    format!(
        "<h1>Setup sheet: {}{}</h1>\n<p class=\"names\">Program {}, {} bytes, SHA-256 {digest}; made by ribband {}</p>\n",
        short(&report.drawing.file),
        match scene.cutters_mm.len() {
            0 | 1 => String::new(),
            of => format!(", program {} of {of}", scene.number + 1),
        },
        short(&report.program.file),
        report.program.bytes,
        escaped(&report.ribband)
    )
}

/// A list of terms under a heading.
fn terms(heading: &str, rows: &[(&str, String)]) -> String {
    let rows = rows.iter().map(|(term, told)| format!("<dt>{term}</dt><dd>{told}</dd>\n"));
    format!("<div><h2>{heading}</h2>\n<dl>\n{}</dl></div>\n", rows.collect::<String>())
}

fn setting(scene: &Scene) -> String {
    let setup = &scene.report.setup;
    let show = |mm: f64| length(mm, setup.unit == "in");
    let [x0, y0, z0, x1, y1, z1] = setup.extents_mm.map(show);
    let mut rows = vec![("Machine", short(&setup.machine)), ("Program in", setup.unit.clone())];
    rows.extend(setting::terms(setup, CLAMPS).into_iter().map(|(term, told)| (term, escaped(&told))));
    rows.extend([
        ("Cutter's path", format!("X {x0} to {x1}<br>Y {y0} to {y1}<br>from that zero")),
        ("Lowest Z", z0),
        ("Highest Z", z1),
        (
            "Part as drawn",
            format!("{} x {}", show(scene.report.drawing.width_mm), show(scene.report.drawing.height_mm)),
        ),
    ]);
    rows.extend(laid_out(scene).map(|told| ("Laid out", told)));
    terms("Setting up", &rows)
}

/// How the drawing is laid out, where it is not once as drawn.
fn laid_out(scene: &Scene) -> Option<String> {
    let setup = &scene.report.setup;
    let words = setup.layout.words(|mm| length(mm, setup.unit == "in"));
    (!words.is_empty()).then_some(words)
}

fn cutting(scene: &Scene) -> String {
    let (setup, program) = (&scene.report.setup, &scene.report.program);
    let inch = setup.unit == "in";
    let show = |mm: f64| length(mm, inch);
    let feed =
        |feed: f64| if inch { format!("{:.1} in/min", feed / 25.4) } else { format!("{feed:.0} mm/min") };
    let cutter = match cutter_numbers(scene).as_slice() {
        [] => show(setup.cutter_mm),
        numbers => format!("{}, number {}", show(setup.cutter_mm), numbers.join(", ")),
    };
    let direction = setup.direction.as_deref().map_or(String::new(), |direction| format!(", {direction}"));
    let cutters = match scene.cutters_mm.len() {
        0 | 1 => cutter,
        _ => {
            let all: Vec<String> = scene.cutters_mm.iter().map(|&mm| show(mm)).collect();
            format!("{cutter}<br>of {}, in this order, all from one zero", all.join(", "))
        }
    };
    terms(
        "Cutting",
        &[
            ("Cutter", cutters),
            ("Spindle", format!("{:.0} rev/min", setup.spindle_rpm)),
            ("Feed", format!("up to {}", feed(setup.feed_mm_min))),
            ("Feed straight down", format!("up to {}", feed(setup.plunge_mm_min))),
            (
                "Depth",
                format!(
                    "{} in {} {}",
                    show(setup.depth_mm),
                    setup.passes,
                    if setup.passes == 1 { "pass" } else { "passes" }
                ),
            ),
            ("Side", format!("{}{direction}", escaped(side_words(&setup.side)))),
            ("Tolerance", format!("{} mm", scene.report.tolerance_mm)),
            ("Blocks", format!("{}, of which {} move", program.blocks, program.motion_blocks)),
            ("Planned time", duration(program.time_s)),
            ("Way at feed", show(program.cut_length_mm)),
        ],
    )
}

/// The numbers of the cutters that the program changes to.
fn cutter_numbers(scene: &Scene) -> Vec<String> {
    let changes = scene.program.events.iter().filter_map(|event| match event.what {
        What::CutterChange { number } => number,
        _ => None,
    });
    let mut numbers: Vec<String> = changes.map(|number| number.to_string()).collect();
    numbers.dedup();
    numbers
}

/// What is done, in the order in which it is done, to be ticked.
fn ticks(scene: &Scene) -> String {
    let (setup, program) = (&scene.report.setup, &scene.report.program);
    let show = |mm: f64| length(mm, setup.unit == "in");
    let [x0, y0, z0, x1, y1, _] = setup.extents_mm.map(show);
    // On the line the part comes out smaller than it is drawn.
    let measured = if setup.side == "on" {
        String::new()
    } else {
        let drawing = &scene.report.drawing;
        format!(", {} x {}", show(drawing.width_mm), show(drawing.height_mm))
    };
    let clamps =
        (!setup.clamps.is_empty()).then(|| "Clamps stand as drawn, no nearer and no higher".to_owned());
    let before = [
        "Spindle warmed up as its maker says".to_owned(),
        format!("Program {} loaded, {} bytes", shorter(&program.file, 60), program.bytes),
        format!("Cutter {} fitted: sharp, clean collet, tight", show(setup.cutter_mm)),
        "Stock flat and held: it can neither lift nor slide, to the end of the last pass".to_owned(),
    ];
    let after = [
        format!("X and Y zero set at {}, checked a second time", setup.origin.words()),
        format!("Z zero set at {}, checked a second time", setup.zero.words()),
        format!("X {x0} to {x1} and Y {y0} to {y1} are on the stock and clear of every clamp and screw"),
        format!("Lowest Z {z0}: what lies under the stock may be cut so deep"),
        "Extraction on; eyes, ears and lungs protected; everybody clear; hand at the stop".to_owned(),
        dry_runs(scene),
        "Cut, staying with the machine".to_owned(),
        format!("Power off before touching the cutter; part measured{measured}"),
    ];
    let items: String =
        before.iter().chain(&clamps).chain(&after).map(|item| format!("<li>{item}</li>\n")).collect();
    format!("<h2>In this order</h2>\n<ol class=\"ticks\">\n{items}</ol>\n")
}

/// The dry runs to make, those that were written by their names.
fn dry_runs(scene: &Scene) -> String {
    let named = scene.report.dry_runs.iter().flat_map(|run| {
        run.files.iter().map(move |file| format!("{} {}", run.kind, shorter(&file.file, 60)))
    });
    let named: Vec<String> = named.collect();
    if named.is_empty() {
        return "Air cut run through: spindle off, or zero set well above the stock".into();
    }
    format!("Run through with the spindle off: {}", named.join(", "))
}

fn checked(scene: &Scene) -> String {
    let claims = scene.report.check.claims.iter().filter(|claim| claim.state != State::NotChecked);
    let told = |claim: &Claim| {
        let fails = if claim.state == State::Fails { "<b>Does not hold:</b> " } else { "" };
        format!("<li>{fails}{}</li>\n", short(&claim.name))
    };
    let all: String = claims.map(told).collect();
    format!("<div><h2>Checked against the drawing</h2>\n<ul class=\"held\">\n{all}</ul></div>\n")
}

fn not_checked(scene: &Scene) -> String {
    let check = &scene.report.check;
    let claims = check.claims.iter().filter(|claim| claim.state == State::NotChecked);
    let open = claims.map(|claim| format!("that {}: {}", claim.name, claim.note));
    let all: String = open
        .chain(check.not_checked.iter().cloned())
        .map(|said| format!("<li>{}</li>\n", short(&said)))
        .collect();
    format!("<div><h2>Not checked: see to it yourself</h2>\n<ul class=\"open\">\n{all}</ul></div>\n")
}

/// The places from which the program can be taken up again after a stop.
fn restart_list(scene: &Scene) -> String {
    let places = &scene.report.program.restarts;
    let show = |mm: f64| length(mm, scene.report.setup.unit == "in");
    let several = scene.report.program.parts.len() > 1;
    let told = |place: &Restart| {
        let file = if several { format!("{}, ", escaped(&place.file)) } else { String::new() };
        let block = place.block.map_or(String::new(), |block| format!(" (N{block})"));
        let below = place.below_mm.map_or(String::new(), |z| format!(" below Z {}", show(z)));
        let [x, y] = place.at_mm.map(show);
        format!("<li>cut {}{below}: {file}line {}{block}, from X {x}, Y {y}</li>\n", place.cut, place.line)
    };
    let listed: String = places.iter().take(RESTARTS).map(told).collect();
    let more = match places.len().saturating_sub(RESTARTS) {
        0 => String::new(),
        more => format!("<li>and {more} more in the report</li>\n"),
    };
    format!(
        "<h2>Places to take it up again</h2>\n<p>After a stop: raise the cutter, find zero again, and have a program \
         written that starts there, with the same settings and --resume-at LINE. The first cut is the program's \
         start.</p>\n<ul class=\"lines\">\n{listed}{more}</ul>\n"
    )
}

fn notes(scene: &Scene) -> String {
    let warnings = &scene.report.warnings;
    if warnings.is_empty() {
        return String::new();
    }
    let listed: String =
        warnings.iter().take(NOTES).map(|note| format!("<li>{}</li>\n", short(note))).collect();
    let more = match warnings.len().saturating_sub(NOTES) {
        0 => String::new(),
        more => format!("<li>and {more} more in the summary</li>\n"),
    };
    format!("<h2>Notes</h2>\n<ul>\n{listed}{more}</ul>\n")
}

fn cautions() -> String {
    let all: String = CAUTIONS.iter().map(|caution| format!("<li>{caution}</li>\n")).collect();
    format!("<h2>Cautions</h2>\n<ol class=\"cautions\">\n{all}</ol>\n")
}

/// The part from above with its size, the starts numbered in the order of the cuts, and zero.
fn picture(scene: &Scene, stages: &[Stage], chord: &Chord) -> String {
    let around = scene.whole();
    let scale = (around.width() / (PICTURE.0 - 24.0)).max(around.height() / (PICTURE.1 - 16.0));
    let pad = 12.0 * scale;
    let (width, height) = (around.width() + 2.0 * pad, around.height() + 1.4 * pad);
    let part = scene.part();
    format!(
        "<svg class=\"drawing\" role=\"img\" aria-label=\"{}\" \
         viewBox=\"{} {} {} {}\" font-size=\"{}\" style=\"width:{}mm;height:{}mm\">\n{}{}{}{}{}{}</svg>\n",
        picture_words(scene),
        mm(around.x0 - pad),
        mm(-around.y1 - 0.4 * pad),
        mm(width),
        mm(height),
        mm(3.2 * scale),
        mm(width / scale),
        mm(height / scale),
        setting::stock(scene),
        setting::clamps(scene, 2.8 * scale),
        outline(scene, chord, scale),
        dimensions(scene, part, around, scale),
        start_numbers(scene, stages, scale),
        zero(scale),
    )
}

/// What the picture shows, for those who hear it.
fn picture_words(scene: &Scene) -> String {
    let setup = &scene.report.setup;
    let stock = if setup.stock.is_some() { ", on its stock" } else { "" };
    let clamps = match setup.clamps.len() {
        0 => String::new(),
        1 => ", with a clamp".into(),
        count => format!(", with {count} clamps"),
    };
    format!("The part from above with its size and zero{stock}{clamps}")
}

/// The paths that are cut last, no finer than paper shows.
fn outline(scene: &Scene, chord: &Chord, scale: f64) -> String {
    let step = 0.4 * scale;
    let mut spans = Vec::new();
    for lap in &chord.laps {
        let mut last: Option<Point> = None;
        for &i in &lap.moves {
            let span = scene.program.toolpath.moves[i].span();
            let pieces = if span.is_line() { 1 } else { (span.length() / step).ceil().max(1.0) as usize };
            let from = *last.get_or_insert(span.start);
            // A pass that starts elsewhere is a new line.
            let mut pen = if from.distance(span.start) > step { span.start } else { from };
            for k in 1..=pieces {
                let at = span.at(k as f64 / pieces as f64);
                if pen.distance(at) >= step {
                    spans.push(Span::line(pen, at));
                    pen = at;
                }
            }
            last = Some(pen);
        }
    }
    paths(spans, "cut")
}

/// The finished part's width and height.
fn dimensions(scene: &Scene, part: Rect, around: Rect, scale: f64) -> String {
    let inch = scene.report.setup.unit == "in";
    let (low, right, tick) = (around.y0 - 5.0 * scale, around.x1 + 5.0 * scale, 1.5 * scale);
    let (a, b) = (Point::new(part.x0, low), Point::new(part.x1, low));
    let (c, d) = (Point::new(right, part.y0), Point::new(right, part.y1));
    let (up, across) = (Vec2::new(0.0, tick), Vec2::new(tick, 0.0));
    let lines = [
        (a, b),
        (a - up, a + up),
        (b - up, b + up),
        (c, d),
        (c - across, c + across),
        (d - across, d + across),
    ];
    let middle = |p: Point, q: Point| p.midpoint(q);
    let (m, n) = (middle(a, b), middle(c, d) + Vec2::new(3.4 * scale, 0.0));
    format!(
        "{}<text text-anchor=\"middle\" x=\"{}\" y=\"{}\">{}</text>\n\
         <text text-anchor=\"middle\" transform=\"translate({}) rotate(-90)\">{}</text>\n",
        paths(lines.map(|(p, q)| Span::line(p, q)), "size"),
        mm(m.x),
        mm(-m.y + 3.8 * scale),
        length(part.width(), inch),
        place(n),
        length(part.height(), inch)
    )
}

/// How many starts are numbered at most.
const NUMBERED: usize = 60;

fn start_numbers(scene: &Scene, stages: &[Stage], scale: f64) -> String {
    let moves = &scene.program.toolpath.moves;
    let first = restarts(moves, stages).first().map(|&i| (1, moves[i].to.xy));
    let begun = scene.report.program.restarts.iter().filter(|place| place.below_mm.is_none());
    let begun = begun.map(|place| (place.cut, Point::from((place.at_mm[0], place.at_mm[1]))));
    let marks = first.into_iter().chain(begun).take(NUMBERED).map(|(cut, at)| {
        let label = at + Vec2::new(1.2, 1.2) * scale;
        format!(
            "<path class=\"start\" d=\"M{}h0\"/><text x=\"{}\" y=\"{}\">{cut}</text>\n",
            place(at),
            mm(label.x),
            mm(-label.y),
        )
    });
    marks.collect()
}

/// The axes at zero.
fn zero(scale: f64) -> String {
    let size = 9.0 * scale;
    let (x, y) = (Point::new(size, 0.0), Point::new(0.0, size));
    let head = 1.6 * scale;
    let lines = [
        (Point::ORIGIN, x),
        (x, x + Vec2::new(-head, head / 2.0)),
        (x, x + Vec2::new(-head, -head / 2.0)),
        (Point::ORIGIN, y),
        (y, y + Vec2::new(head / 2.0, -head)),
        (y, y + Vec2::new(-head / 2.0, -head)),
    ];
    format!(
        "{}<text x=\"{}\" y=\"{}\">X</text><text x=\"{}\" y=\"{}\">Y</text>\n",
        paths(lines.map(|(p, q)| Span::line(p, q)), "axis"),
        mm(size + scale),
        mm(-scale),
        mm(scale),
        mm(-size - scale)
    )
}

//! The still: a picture in real size, printable 1 : 1.

use kurbo::{Point, Rect, Vec2};

use super::layers::draw;
use super::markup::{escaped, mm, paths};
use super::palette::{Medium, STEPS, light, style};
use super::{Scene, figures};
use crate::geom::Span;
use crate::summary;

/// Space around the drawing, in mm.
const MARGIN: f64 = 8.0;
/// The least width of the sheet, in mm: what the legend takes.
const LEAST_WIDTH: f64 = 150.0;
/// The height of the legend, in mm.
const LEGEND: f64 = 34.0;
/// The longest tooth of the comb that stays inside the tolerance, as a share of the diagonal.
const TOOTH: f64 = 0.02;
/// How many teeth the comb has at most.
const TEETH: usize = 4000;

/// The program in `scene` as an SVG picture whose millimetres are millimetres.
pub fn still(scene: &Scene) -> String {
    let drawn = draw(scene);
    let around = scene.whole().inflate(MARGIN, MARGIN);
    let (width, height) = (around.width().max(LEAST_WIDTH), around.height() + LEGEND);
    let name = escaped(&scene.report.drawing.file);
    let mut svg = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{w}mm\" height=\"{h}mm\" viewBox=\"{x} {y} {w} {h}\" \
         font-family=\"sans-serif\" font-size=\"3.6\" fill=\"{text}\" role=\"img\">\n\
         <title>Chord error of {name}</title>\n<style>{css}path.swept{{stroke:{swept}}}</style>\n\
         <rect x=\"{x}\" y=\"{y}\" width=\"{w}\" height=\"{h}\" fill=\"{ground}\"/>\n",
        w = mm(width),
        h = mm(height),
        x = mm(around.x0),
        y = mm(-around.y1),
        css = style(Medium::Paper),
        swept = light("swept"),
        ground = light("ground"),
        text = light("text"),
    );
    for layer in drawn.layers.iter().filter(|layer| layer.shown || layer.id == "comb") {
        let body = if layer.id == "comb" { comb(scene, &drawn.chord) } else { layer.svg.clone() };
        svg += &format!("<g id=\"{}\">\n<title>{}</title>\n{body}</g>\n", layer.id, layer.name);
    }
    svg += &legend(scene, Rect::new(around.x0 + MARGIN, around.y0 - LEGEND, around.x0 + width, around.y0));
    svg + "</svg>\n"
}

/// How much the comb enlarges the chord error: a round number.
fn magnification(scene: &Scene) -> f64 {
    figures::round(TOOTH * figures::diagonal(scene.part()) / scene.report.tolerance_mm)
}

/// The chord error as a comb.
fn comb(scene: &Scene, chord: &super::Chord) -> String {
    let scale = magnification(scene);
    let every = chord.stations().count().div_ceil(TEETH).max(1);
    let stations: Vec<_> = chord.stations().copied().collect();
    let strong = stations
        .chunks(every)
        .filter_map(|few| few.iter().max_by(|a, b| a.error.abs().total_cmp(&b.error.abs())));
    let tooth = |station: &super::Station| {
        let span = scene.program.toolpath.moves[station.of].span();
        let (at, along) = (span.at(station.t), span.tangent(station.t));
        Span::line(at, at + Vec2::new(-along.y, along.x) * station.error * scale)
    };
    paths(strong.map(tooth), "comb")
}

/// Name, figures, the scale of colours, and a length to hold a ruler against.
fn legend(scene: &Scene, space: Rect) -> String {
    let report = scene.report;
    let line = |row: f64, said: &str| {
        format!("<text x=\"{}\" y=\"{}\">{}</text>\n", mm(space.x0), mm(-space.y1 + 5.5 * row), escaped(said))
    };
    let deviation =
        report.check.deviation_mm.map_or("not found".into(), |mm| format!("{mm:.4} mm certified"));
    let mut text = line(1.0, &format!("{}, program {}", report.drawing.file, report.program.file));
    text += &line(
        2.0,
        &format!(
            "within {} mm, as allowed ({deviation}); {} motion blocks, {}; comb enlarged {} times",
            report.tolerance_mm,
            report.program.motion_blocks,
            summary::duration(report.program.time_s),
            magnification(scene)
        ),
    );
    for i in 0..STEPS {
        text += &format!(
            "<rect x=\"{}\" y=\"{}\" width=\"7\" height=\"3\" fill=\"{}\"/>\n",
            mm(space.x0 + 7.0 * i as f64),
            mm(-space.y1 + 13.5),
            light(&format!("e{i}"))
        );
    }
    text += &line(3.85, &format!("0 to {} mm, a tenth of the tolerance a step", report.tolerance_mm));
    let ruler = Point::new(space.x0, space.y1 - 27.0);
    let ends = [ruler, ruler + Vec2::new(50.0, 0.0)];
    let tick = Vec2::new(0.0, 1.5);
    let bars = [
        Span::line(ends[0], ends[1]),
        Span::line(ends[0] - tick, ends[0] + tick),
        Span::line(ends[1] - tick, ends[1] + tick),
    ];
    text + &paths(bars, "zero")
        + &format!(
            "<text x=\"{}\" y=\"{}\">50 mm when printed in real size</text>\n",
            mm(space.x0 + 53.0),
            mm(-ruler.y + 1.2)
        )
}

//! The page: a drawing to look around in, with its figures, its layers and the chord error along the path. It stands
//! alone: no other file, no request.

use sha2::{Digest, Sha256};

use super::layers::{Drawn, Group, draw};
use super::markup::{escaped, mm};
use super::palette::{Medium, STEPS, style, variables};
use super::{Scene, data, figures, setting, sheet};
use crate::error::{Error, Kind};

/// A page shows programs of up to so many moves. It then takes some 300 bytes a move, the program's own text and 2 MB.
pub const MOST_MOVES: usize = 100_000;

const SCRIPT: &str = include_str!("page.js");
const LOOKS: &str = include_str!("page.css");

/// The longest tooth of the comb inside the tolerance at first, as a share of the part's diagonal.
const TOOTH: f64 = 0.02;

/// The program in `scene` as a page of its own.
///
/// # Errors
/// Refused for a program of more than [`MOST_MOVES`] moves.
pub fn page(scene: &Scene) -> Result<String, Error> {
    let moves = scene.program.toolpath.moves.len();
    if moves > MOST_MOVES {
        let what = format!("the program has {moves} moves, and a page shows {MOST_MOVES} at most");
        return Err(Error::new(Kind::Refused, what).remedy("ask for a still, with a name that ends in .svg"));
    }
    let drawn = draw(scene);
    let magnification = figures::round(TOOTH * figures::diagonal(scene.part()) / scene.report.tolerance_mm);
    Ok(format!(
        "<!doctype html>\n<html lang=\"en\">\n{head}<body>\n{header}<main>\n{view}{side}{plot}{time}</main>\n{sheet}\
         <script type=\"application/json\" id=\"data\">{data}</script>\n<script>{SCRIPT}</script>\n</body>\n</html>\n",
        head = head(scene),
        header = header(scene),
        view = view(scene, &drawn),
        side = side(scene, &drawn),
        plot = PLOT,
        time = TIME,
        sheet = sheet::leaves(scene, &drawn.stages, &drawn.chord),
        data = data::data(scene, &drawn, magnification),
    ))
}

/// The head. The policy lets this script run and no other, and nothing be fetched.
fn head(scene: &Scene) -> String {
    format!(
        "<head>\n<meta charset=\"utf-8\">\n<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n\
         <meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; style-src 'unsafe-inline'; \
         script-src 'sha256-{hash}'; img-src data:; base-uri 'none'; form-action 'none'\">\n\
         <link rel=\"icon\" href=\"data:,\">\n<title>{name}: chord error</title>\n<style>\n\
         :root{{color-scheme:light;{light}}}\n\
         @media screen and (prefers-color-scheme:dark){{:root:not([data-theme=light]){{color-scheme:dark;{dark}}}}}\n\
         @media screen{{:root[data-theme=dark]{{color-scheme:dark;{dark}}}}}\n{lines}{sheet}{LOOKS}</style>\n</head>\n",
        hash = base64(&Sha256::digest(SCRIPT.as_bytes())),
        name = escaped(&scene.report.drawing.file),
        light = variables(false),
        dark = variables(true),
        lines = style(Medium::Screen),
        sheet = sheet::looks(),
    )
}

fn header(scene: &Scene) -> String {
    let report = scene.report;
    let open =
        report.check.claims.iter().filter(|claim| claim.state == crate::report::State::NotChecked).count();
    let held =
        if report.check.holds { "Read back and checked against the drawing" } else { "Fails its check" };
    let rest = match open {
        0 => String::new(),
        1 => ", 1 claim not checked".into(),
        open => format!(", {open} claims not checked"),
    };
    format!(
        "<header>\n<h1>{}</h1>\n<p>Within {} mm, as allowed. {held}{rest}; what no program can check is on the setup \
         sheet.</p>\n<button type=\"button\" id=\"theme\">Dark or light</button>\n</header>\n",
        escaped(&report.drawing.file),
        report.tolerance_mm
    )
}

/// The drawing with its controls.
fn view(scene: &Scene, drawn: &Drawn) -> String {
    let around = scene.whole();
    let layers = drawn.layers.iter().map(|layer| {
        let hidden = if layer.shown { "" } else { " style=\"display:none\"" };
        format!("<g id=\"layer-{}\"{hidden}>\n{}</g>\n", layer.id, layer.svg)
    });
    format!(
        "<section id=\"view\" aria-label=\"Drawing\">\n<div id=\"frame\"><svg id=\"picture\" tabindex=\"0\" role=\"application\" \
         aria-label=\"Cutter's path over the trace; arrow keys move, plus and minus zoom, N and P step through the \
         spans, W goes to the worst place\" viewBox=\"{} {} {} {}\">\n\
         {}<g id=\"live\" aria-hidden=\"true\"><path id=\"chosen\" class=\"chosen\"/><path id=\"place\" \
         class=\"place\"/><circle id=\"disc\" r=\"{}\"/></g>\n</svg></div>\n\
         <div class=\"tools\"><button type=\"button\" id=\"closer\" aria-label=\"Closer\">+</button>\
         <button type=\"button\" id=\"farther\" aria-label=\"Farther\">&minus;</button>\
         <button type=\"button\" id=\"whole\">Whole part</button>\
         <button type=\"button\" id=\"go-worst\">Worst place</button></div>\n\
         <p id=\"told\" role=\"status\" aria-live=\"polite\">Point at the path, or press N, to read a span.</p>\n\
         </section>\n",
        mm(around.x0),
        mm(-around.y1),
        mm(around.width()),
        mm(around.height()),
        layers.collect::<String>(),
        mm(scene.report.setup.cutter_mm / 2.0),
    )
}

/// Scale of colours, layers, figures and keys.
fn side(scene: &Scene, drawn: &Drawn) -> String {
    let swatches = (0..STEPS).map(|i| format!("<i style=\"background:var(--e{i})\"></i>"));
    let bends = if drawn.strongest > 0.0 {
        format!(
            "<p>Curvature combs: the longest tooth is a bend of {} radius or tighter.</p>\n",
            figures::length(drawn.strongest.recip(), scene.report.setup.unit == "in")
        )
    } else {
        String::new()
    };
    let notes =
        drawn.note.iter().chain(&scene.report.warnings).map(|note| format!("<li>{}</li>\n", escaped(note)));
    format!(
        "<aside aria-label=\"Layers and figures\">\n\
         <section><h2>Chord error</h2>\n<div class=\"scale\" role=\"img\" aria-label=\"Colours of the chord error, a tenth \
         of the tolerance a step\">{}<i style=\"background:var(--over)\"></i></div>\n\
         <p class=\"ends\"><span>0</span><span>{} mm, the tolerance</span><span>over</span></p>\n\
         <label for=\"enlarge\">Comb, enlarged <span id=\"enlarged\"></span> times\
         <input type=\"range\" id=\"enlarge\" min=\"0\" max=\"3.5\" step=\"0.05\"></label>\n{bends}</section>\n\
         <section><h2>Layers</h2>\n{}</section>\n<section><h2>Setting up</h2>\n<dl class=\"setting\">\n{}</dl></section>\n<section><h2>Figures</h2>\n{}</section>\n\
         <section><h2>Notes</h2>\n<ul>{}</ul></section>\n<section><h2>Keys</h2>\n{KEYS}</section>\n</aside>\n",
        swatches.collect::<String>(),
        scene.report.tolerance_mm,
        Group::ALL.iter().map(|&group| switches(group, drawn)).collect::<String>(),
        setting::terms(&scene.report.setup, usize::MAX)
            .iter()
            .map(|(term, told)| format!("<dt>{term}</dt><dd>{}</dd>\n", escaped(told)))
            .collect::<String>(),
        figures::list(scene.report),
        notes.collect::<String>(),
    )
}

/// A switch for each layer of a group that shows anything.
fn switches(group: Group, drawn: &Drawn) -> String {
    let of_group = drawn.layers.iter().filter(|layer| layer.group == group);
    let filled: Vec<_> = of_group.filter(|layer| !layer.svg.is_empty() || layer.id == "comb").collect();
    if filled.is_empty() {
        return String::new();
    }
    let boxes = filled.iter().map(|layer| {
        let checked = if layer.shown { " checked" } else { "" };
        format!(
            "<label><input type=\"checkbox\" data-layer=\"{}\"{checked}> {}{}</label>\n",
            layer.id,
            layer.key.map_or_else(String::new, key),
            layer.name
        )
    });
    format!("<fieldset><legend>{}</legend>\n{}</fieldset>\n", group.words(), boxes.collect::<String>())
}

/// A sample of a layer's line.
fn key(class: &str) -> String {
    format!(
        "<svg class=\"key\" viewBox=\"0 0 28 12\" aria-hidden=\"true\"><path class=\"{class}\" d=\"M2 6h24\"/></svg> "
    )
}

const KEYS: &str = "<dl class=\"keys\"><dt>Arrows</dt><dd>move</dd><dt>+ and &minus;</dt><dd>closer, farther</dd>\
    <dt>0</dt><dd>whole part</dd><dt>W</dt><dd>worst place</dd><dt>N and P</dt><dd>next, previous span</dd>\
    <dt>Space</dt><dd>run or stop the cutter</dd></dl>\n";

const PLOT: &str = "<section id=\"along\"><h2>Chord error along the path</h2>\n\
    <svg id=\"plot\" tabindex=\"0\" role=\"slider\" aria-label=\"Place along the path\" aria-valuemin=\"0\" \
    preserveAspectRatio=\"none\"></svg>\n<p class=\"ends\"><span id=\"plot-from\">0</span><span id=\"plot-told\">Click to \
    find the place</span><span id=\"plot-to\"></span></p></section>\n";

const TIME: &str = "<section id=\"time\"><h2>Planned time</h2>\n<button type=\"button\" id=\"run\" \
    aria-pressed=\"false\">Run</button>\n<label>at <select id=\"pace\"><option value=\"1\">planned speed</option>\
    <option value=\"4\">4 times</option><option value=\"16\">16 times</option></select></label>\n\
    <input type=\"range\" id=\"now\" min=\"0\" value=\"0\" step=\"any\" aria-label=\"Time\">\n\
    <span id=\"clock\"></span></section>\n";

/// Base 64 (RFC 4648, section 4).
fn base64(bytes: &[u8]) -> String {
    const DIGITS: &[u8; 64] = b"ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";
    let mut text = String::new();
    for three in bytes.chunks(3) {
        let bits =
            three.iter().fold(0_u32, |bits, &byte| bits << 8 | u32::from(byte)) << (8 * (3 - three.len()));
        for digit in 0..=three.len() {
            text.push(char::from(DIGITS[(bits >> (18 - 6 * digit)) as usize & 63]));
        }
        text.push_str(&"="[..].repeat(3 - three.len()));
    }
    text
}

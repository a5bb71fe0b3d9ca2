//! Inks, strokes and the colours of the chord error.
//!
//! The error's scale goes from slate to amber, a way that every kind of colour vision can tell apart, and by lightness
//! alone in print.

/// How many steps the error's scale has: a tenth of the tolerance each.
pub(super) const STEPS: usize = 10;

/// Where a drawing is shown.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Medium {
    /// On a page: inks by name, widths in pixels at any zoom.
    Screen,
    /// In a file of its own: light inks, widths in mm.
    Paper,
}

/// An ink on a light and on a dark ground.
struct Ink {
    name: &'static str,
    light: &'static str,
    dark: &'static str,
}

const fn ink(name: &'static str, light: &'static str, dark: &'static str) -> Ink {
    Ink { name, light, dark }
}

const INKS: &[Ink] = &[
    ink("ground", "#faf7f0", "#15191f"),
    ink("panel", "#f1ecdf", "#1e242c"),
    ink("rule", "#cfc7b4", "#3a434f"),
    ink("text", "#1c2430", "#ece7da"),
    ink("soft", "#555046", "#b5ae9f"),
    ink("accent", "#14406f", "#9cc7f5"),
    ink("swept", "#ebe3d0", "#272e38"),
    ink("trace", "#7d7566", "#a79f8f"),
    ink("cutter", "#8796a5", "#64748a"),
    ink("span", "#14406f", "#9cc7f5"),
    ink("other", "#2a9089", "#3f9f98"),
    ink("rapid", "#8a4fa0", "#c79ad2"),
    ink("entry", "#00625a", "#5fd8c8"),
    ink("mark", "#1c2430", "#ece7da"),
    ink("over", "#c2007a", "#ff5cc0"),
];

/// How a class of lines is drawn.
struct Stroke {
    class: &'static str,
    ink: &'static str,
    /// In CSS pixels, 1/96 inch.
    width: f64,
    /// Dashes and gaps, in the same unit; empty for a line without.
    dash: &'static [f64],
}

const fn stroke(class: &'static str, ink: &'static str, width: f64, dash: &'static [f64]) -> Stroke {
    Stroke { class, ink, width, dash }
}

const STROKES: &[Stroke] = &[
    stroke("trace", "trace", 1.0, &[]),
    stroke("cutter", "cutter", 1.2, &[]),
    stroke("span", "span", 2.4, &[]),
    stroke("other", "other", 2.4, &[]),
    stroke("joint", "mark", 4.5, &[]),
    stroke("rapid", "rapid", 1.2, &[7.0, 4.0]),
    stroke("entry", "entry", 3.0, &[2.0, 3.0]),
    stroke("plunge", "entry", 9.0, &[]),
    stroke("tab", "mark", 6.0, &[3.0, 2.0]),
    stroke("start", "mark", 11.0, &[]),
    stroke("arrow", "mark", 1.6, &[]),
    stroke("zero", "mark", 1.6, &[]),
    stroke("part", "mark", 0.8, &[2.0, 3.0]),
    stroke("stock", "soft", 2.2, &[]),
    stroke("clamp", "over", 1.8, &[]),
    stroke("extents", "rapid", 0.8, &[8.0, 3.0, 2.0, 3.0]),
    stroke("uncut", "over", 6.0, &[1.5, 2.5]),
    stroke("comb", "accent", 0.8, &[]),
    stroke("before", "trace", 0.8, &[]),
    stroke("after", "accent", 1.0, &[]),
    stroke("fair", "mark", 1.0, &[4.0, 2.0]),
    stroke("worst", "over", 2.0, &[]),
];

/// CSS pixels to mm.
const PIXEL: f64 = 25.4 / 96.0;

/// The style sheet of the drawing's lines.
pub(super) fn style(medium: Medium) -> String {
    let mut css = String::from("svg path,svg circle{fill:none;stroke-linecap:round;stroke-linejoin:round}\n");
    // Where very many spans meet, plain joins are drawn in less time.
    css.push_str("svg path.trace,svg path.cutter{stroke-linecap:butt;stroke-linejoin:bevel}\n");
    let errors = (0..STEPS).map(|i| (format!("e{i}"), format!("e{i}"), 3.4, &[][..]));
    let over = (format!("e{STEPS}"), "over".to_owned(), 6.0, &[][..]);
    let named = STROKES.iter().map(|s| (s.class.to_owned(), s.ink.to_owned(), s.width, s.dash));
    for (class, ink, width, dash) in named.chain(errors).chain([over]) {
        let (scale, unit, fixed) = match medium {
            Medium::Screen => (1.0, "px", "vector-effect:non-scaling-stroke;"),
            Medium::Paper => (PIXEL, "", ""),
        };
        let colour = match medium {
            Medium::Screen => format!("var(--{ink})"),
            Medium::Paper => light(&ink),
        };
        let dashes: Vec<String> = dash.iter().map(|d| format!("{:.2}", d * scale)).collect();
        let dashes = if dash.is_empty() {
            String::new()
        } else {
            format!("stroke-dasharray:{};stroke-linecap:butt;", dashes.join(" "))
        };
        css += &format!(
            "path.{class}{{stroke:{colour};stroke-width:{:.3}{unit};{dashes}{fixed}}}\n",
            width * scale
        );
    }
    css
}

/// The inks as CSS variables.
pub(super) fn variables(dark: bool) -> String {
    let inks = INKS.iter().map(|i| format!("--{}:{};", i.name, if dark { i.dark } else { i.light }));
    inks.chain((0..STEPS).map(|i| format!("--e{i}:{};", shade(dark, i)))).collect()
}

/// The colour of an ink on a light ground.
pub(super) fn light(name: &str) -> String {
    let named = INKS.iter().find(|ink| ink.name == name).map(|ink| ink.light.to_owned());
    let step = || name.strip_prefix('e')?.parse().ok();
    named.or_else(|| Some(shade(false, step()?))).unwrap_or_default()
}

/// The step of an error: 0 below a tenth of the tolerance, 9 up to the whole, 10 above it.
pub(super) fn step(error: f64, tolerance: f64) -> usize {
    let tenths = error.abs() / tolerance * STEPS as f64;
    // An error of exactly the tolerance is still inside it.
    if tenths <= STEPS as f64 { (tenths as usize).min(STEPS - 1) } else { STEPS }
}

/// An sRGB colour.
type Colour = [u8; 3];

/// On a light ground the worst is the darkest.
const LIGHT: [Colour; 3] = [[0xa9, 0xc0, 0xd6], [0xb8, 0x83, 0x46], [0x6b, 0x1f, 0x00]];
/// On a dark ground the worst is the lightest.
const DARK: [Colour; 3] = [[0x3c, 0x58, 0x74], [0xb8, 0x85, 0x50], [0xff, 0xd0, 0x8a]];

/// Step `i` of the error's scale.
fn shade(dark: bool, i: usize) -> String {
    let stops = if dark { DARK } else { LIGHT };
    let along = 2.0 * i as f64 / (STEPS - 1) as f64;
    let (a, b, t) =
        if along <= 1.0 { (stops[0], stops[1], along) } else { (stops[1], stops[2], along - 1.0) };
    let mixed = |k: usize| (f64::from(a[k]) + (f64::from(b[k]) - f64::from(a[k])) * t).round() as u8;
    format!("#{:02x}{:02x}{:02x}", mixed(0), mixed(1), mixed(2))
}

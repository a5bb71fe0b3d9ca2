//! A small writer of programs, apart from the project's own: what other people's programs may look like.

use kurbo::Vec2;
use ribband::geom::{ArcSpline, Span};

/// How arcs are given.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum Arcs {
    Centre,
    CentreFromZero,
    Radius,
}

/// The form of the text.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Form {
    pub(crate) inches: bool,
    pub(crate) incremental: bool,
    pub(crate) arcs: Arcs,
}

impl Form {
    pub(crate) const PLAIN: Self = Self { inches: false, incremental: false, arcs: Arcs::Centre };

    fn unit(self) -> f64 {
        if self.inches { 25.4 } else { 1.0 }
    }

    fn decimals(self) -> usize {
        if self.inches { 5 } else { 3 }
    }

    /// `mm` on the grid of the text, in its unit.
    fn round(self, mm: f64) -> f64 {
        let grid = 10_f64.powi(self.decimals() as i32);
        (mm / self.unit() * grid).round() / grid
    }
}

/// Text under way, and the place it has led to, in its unit.
struct Writer {
    form: Form,
    text: String,
    at: [f64; 3],
}

/// A program that cuts every path in passes of 2 mm down to 6 mm below the stock's top.
pub(crate) fn program(paths: &[ArcSpline], form: Form) -> String {
    let mut w = Writer { form, text: String::new(), at: [0.0; 3] };
    let unit = if form.inches { "G20" } else { "G21" };
    let centre = if form.arcs == Arcs::CentreFromZero { "G90.1" } else { "G91.1" };
    w.line(&format!("G17 {unit} G40 G90 G94 {centre}"));
    let clearance = form.round(5.0);
    let first = w.words([form.round(0.0), form.round(0.0), clearance]);
    w.line(&format!("G0 Z{clearance}"));
    w.line("G0 X0 Y0");
    drop(first);
    w.at = [0.0, 0.0, clearance];
    if form.incremental {
        w.line("G91");
    }
    w.line("S18000 M3");
    for path in paths {
        w.cut(path);
    }
    w.line("M5");
    w.line("M30");
    w.text
}

impl Writer {
    fn line(&mut self, line: &str) {
        self.text.push_str(line);
        self.text.push('\n');
    }

    /// Axis words that lead to `to`, in the unit of the text.
    fn words(&mut self, to: [f64; 3]) -> String {
        let mut words = String::new();
        for (axis, letter) in ['X', 'Y', 'Z'].into_iter().enumerate() {
            let moved = to[axis] - self.at[axis];
            if moved != 0.0 {
                let value = if self.form.incremental { moved } else { to[axis] };
                words.push_str(&format!(" {letter}{value:.*}", self.form.decimals()));
            }
        }
        self.at = to;
        words
    }

    fn go(&mut self, code: &str, to: [f64; 3], rest: &str) {
        let words = self.words(to);
        if !words.is_empty() {
            self.line(&format!("{code}{words}{rest}"));
        }
    }

    fn cut(&mut self, path: &ArcSpline) {
        let start = path.vertices[0].at;
        let clearance = self.form.round(5.0);
        let place = |p: kurbo::Point, z: f64, form: Form| [form.round(p.x), form.round(p.y), z];
        for z in [-2.0, -4.0, -6.0] {
            let z = self.form.round(z);
            self.go("G0", place(start, clearance, self.form), "");
            let plunge = format!(" F{}", self.form.round(600.0));
            self.go("G1", place(start, z, self.form), &plunge);
            for span in path.spans() {
                let from = self.at;
                let to = place(span.end, z, self.form);
                let feed = format!(" F{}", self.form.round(1800.0));
                let (code, centre) = self.arc_words(span, from);
                self.go(code, to, &(centre + &feed));
            }
            let up = [self.at[0], self.at[1], clearance];
            self.go("G0", up, "");
        }
    }

    fn arc_words(&self, span: Span, from: [f64; 3]) -> (&'static str, String) {
        let Some(centre) = span.centre() else { return ("G1", String::new()) };
        let code = if span.bulge > 0.0 { "G3" } else { "G2" };
        let digits = self.form.decimals();
        let unit = self.form.unit();
        let words = match self.form.arcs {
            Arcs::Radius => format!(" R{:.*}", digits, span.radius() / unit),
            Arcs::CentreFromZero => {
                format!(" I{:.*} J{:.*}", digits, centre.x / unit, digits, centre.y / unit)
            }
            Arcs::Centre => {
                let away = centre.to_vec2() / unit - Vec2::new(from[0], from[1]);
                format!(" I{:.*} J{:.*}", digits, away.x, digits, away.y)
            }
        };
        (code, words)
    }
}

//! A comparison as a picture: blocks and time over the tolerance, the knee marked.

use std::fmt::Write;
use std::path::Path;

use super::{Comparison, Figures};
use crate::preview::escaped;

const WIDTH: f64 = 720.0;
const HEIGHT: f64 = 640.0;
/// The sides of both panels.
const LEFT: f64 = 84.0;
const RIGHT: f64 = 690.0;
/// The tops and bottoms of the panels.
const BLOCKS: (f64, f64) = (102.0, 312.0);
const TIME: (f64, f64) = (372.0, 568.0);

const STYLE: &str = "text{font:13px sans-serif;fill:#1c2430}.head{font-size:17px}.soft{fill:#555046}\
.grid{stroke:#cfc7b4;stroke-width:1}.curve{fill:none;stroke:#14406f;stroke-width:2.5}.dot{fill:#14406f}\
.drawn{stroke:#7d7566;stroke-width:1.5;stroke-dasharray:6 4}.knee{stroke:#c2007a;stroke-width:1.5}\
.told{fill:#c2007a}.end{text-anchor:end}.mid{text-anchor:middle}";

/// Values on a line of the page, as logarithms.
#[derive(Clone, Copy)]
struct Scale {
    least: f64,
    most: f64,
    from: f64,
    to: f64,
}

impl Scale {
    /// The scale that holds all of the values, on the page from `from` to `to`; a lone value stands in the middle.
    fn holding(values: impl Iterator<Item = f64> + Clone, (from, to): (f64, f64)) -> Self {
        let least = values.clone().fold(f64::INFINITY, f64::min);
        let most = values.fold(0.0, f64::max);
        let (least, most) = if least < most { (least, most) } else { (least / 2.0, most * 2.0) };
        Self { least, most, from, to }
    }

    fn at(&self, value: f64) -> f64 {
        let share = (value / self.least).ln() / (self.most / self.least).ln();
        self.from + (self.to - self.from) * share
    }

    /// The round values on the scale: 1, 2 and 5 times the powers of ten.
    fn ticks(&self) -> impl Iterator<Item = f64> + '_ {
        let decades = self.least.log10().floor() as i32..=self.most.log10().ceil() as i32;
        let round = decades.flat_map(|decade| [1.0, 2.0, 5.0].map(|digit| digit * 10_f64.powi(decade)));
        round.filter(|tick| (self.least..=self.most).contains(tick))
    }
}

impl Comparison {
    /// The comparison as an SVG picture.
    pub fn plot(&self) -> String {
        let tolerances = Scale::holding(self.rows.iter().map(|row| row.tolerance_mm), (LEFT, RIGHT));
        let file =
            Path::new(&self.drawing).file_name().map_or_else(|| "-".into(), |name| name.to_string_lossy());
        let title = escaped(&format!("What accuracy costs: {file} on {}", self.machine));
        let mut svg = format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {WIDTH} {HEIGHT}\" width=\"{WIDTH}\" \
             height=\"{HEIGHT}\" role=\"img\"><title>{title}</title><desc>{}</desc><style>{STYLE}</style>\
             <rect width=\"{WIDTH}\" height=\"{HEIGHT}\" fill=\"#faf7f0\"/>\
             <text class=\"head\" x=\"{LEFT}\" y=\"30\">{title}</text>\n",
            escaped(&self.reason())
        );
        let blocks: fn(&Figures) -> f64 = |f| f.motion_blocks as f64;
        let time: fn(&Figures) -> f64 = |f| f.cut_time_s;
        for (name, place, drawn, figure) in [
            ("motion blocks", BLOCKS, self.as_drawn.motion_blocks as f64, blocks),
            ("time along the contours, s", TIME, self.as_drawn.cut_time_s, time),
        ] {
            svg.push_str(&self.panel(tolerances, name, place, (drawn, figure)));
        }
        svg.push_str(&self.foot(tolerances));
        svg.push_str("</svg>\n");
        svg
    }

    /// One figure over the tolerance, with a line for the drawing as it is.
    fn panel(
        &self,
        tolerances: Scale,
        name: &str,
        (top, bottom): (f64, f64),
        (drawn, figure): (f64, fn(&Figures) -> f64),
    ) -> String {
        let points = self.rows.iter().filter_map(|row| Some((row.tolerance_mm, row.program.as_ref()?)));
        let values = points.clone().map(|(_, figures)| figure(figures)).chain([drawn]);
        let scale = Scale::holding(values, (bottom, top));
        let mut svg = format!("<g><text x=\"{LEFT}\" y=\"{:.1}\">{name}</text>\n", top - 10.0);
        // A string takes everything that is written to it.
        for tick in scale.ticks() {
            let y = scale.at(tick);
            let _ = writeln!(
                svg,
                "<path class=\"grid\" d=\"M{LEFT} {y:.1}H{RIGHT}\"/><text class=\"soft end\" x=\"{:.1}\" \
                 y=\"{:.1}\">{tick}</text>",
                LEFT - 8.0,
                y + 4.0
            );
        }
        let y = scale.at(drawn);
        let _ = writeln!(
            svg,
            "<path class=\"drawn\" d=\"M{LEFT} {y:.1}H{RIGHT}\"/><text class=\"soft end\" x=\"{RIGHT}\" \
             y=\"{:.1}\">as drawn {drawn:.0}</text>",
            y + 15.0
        );
        let mut curve = String::new();
        for (mm, figures) in points {
            let (x, y) = (tolerances.at(mm), scale.at(figure(figures)));
            let _ = write!(curve, "{}{x:.1} {y:.1}", if curve.is_empty() { 'M' } else { 'L' });
            let _ = writeln!(svg, "<circle class=\"dot\" cx=\"{x:.1}\" cy=\"{y:.1}\" r=\"4\"/>");
        }
        let _ = writeln!(svg, "<path class=\"curve\" d=\"{curve}\"/></g>");
        svg
    }

    /// The tolerances below the panels, the knee across both, and the words.
    fn foot(&self, tolerances: Scale) -> String {
        let mut svg = String::from("<g>\n");
        for tick in tolerances.ticks() {
            let x = tolerances.at(tick);
            let _ = writeln!(
                svg,
                "<path class=\"grid\" d=\"M{x:.1} {:.1}v6M{x:.1} {:.1}v6\"/>\
                 <text class=\"soft mid\" x=\"{x:.1}\" y=\"{:.1}\">{tick}</text>",
                BLOCKS.1,
                TIME.1,
                TIME.1 + 21.0
            );
        }
        if let Some(knee) = &self.knee {
            let x = tolerances.at(knee.tolerance_mm);
            let _ = writeln!(
                svg,
                "<path class=\"knee\" d=\"M{x:.1} {:.1}V{:.1}M{x:.1} {:.1}V{:.1}\"/>",
                BLOCKS.0, BLOCKS.1, TIME.0, TIME.1
            );
        }
        let starved: usize = self
            .rows
            .iter()
            .filter_map(|row| row.program.as_ref())
            .map(|figures| figures.starved_blocks)
            .sum();
        let _ = writeln!(
            svg,
            "<text x=\"{LEFT}\" y=\"{:.1}\">tolerance, mm; starved blocks: {starved} of ours in all, {} as \
             drawn</text>",
            TIME.1 + 46.0,
            self.as_drawn.starved_blocks,
        );
        for (line, y) in self.reason().split_inclusive("; ").zip([50.0, 68.0]) {
            let _ = writeln!(
                svg,
                "<text class=\"told\" x=\"{LEFT}\" y=\"{y}\">{}</text>",
                escaped(line.trim_end())
            );
        }
        svg.push_str("</g>");
        svg
    }
}

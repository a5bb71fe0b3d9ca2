//! One set of contours written as a point list, an SVG and a DXF, by the plainest means each format has.

use std::fmt::Write;

use kurbo::Point;

/// Contours of straight pieces; a closed one does not repeat its first point.
pub(crate) struct Contours(pub(crate) Vec<(Vec<Point>, bool)>);

impl Contours {
    /// Reads `x,y` lines; a blank line ends a contour, a repeated first point closes it.
    pub(crate) fn from_csv(text: &str) -> Self {
        let mut contours = vec![Vec::new()];
        for line in text.lines() {
            let numbers: Vec<f64> = line.split(',').filter_map(|n| n.trim().parse().ok()).collect();
            match (numbers[..].as_ref(), line.trim().is_empty()) {
                (&[x, y], _) => contours.last_mut().expect("never empty").push(Point::new(x, y)),
                (_, true) => contours.push(Vec::new()),
                _ => {}
            }
        }
        contours.retain(|points| !points.is_empty());
        let closing = |mut points: Vec<Point>| {
            let closed = points.len() > 2 && points.first() == points.last();
            if closed {
                points.pop();
            }
            (points, closed)
        };
        Self(contours.into_iter().map(closing).collect())
    }

    /// As `x,y` lines with a header.
    pub(crate) fn csv(&self) -> String {
        let mut text = String::from("x,y\n");
        for (i, (points, closed)) in self.0.iter().enumerate() {
            text.push_str(if i == 0 { "" } else { "\n" });
            for p in points.iter().chain(points.iter().take(usize::from(*closed))) {
                writeln!(text, "{},{}", p.x, p.y).expect("a string takes all");
            }
        }
        text
    }

    /// As one SVG path a contour, in mm, y down as SVG has it.
    pub(crate) fn svg(&self) -> String {
        let all = || self.0.iter().flat_map(|(points, _)| points);
        let width = all().fold(0.0_f64, |far, p| far.max(p.x)).ceil();
        let height = all().fold(0.0_f64, |far, p| far.max(p.y)).ceil();
        let mut text = format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{width}mm\" height=\"{height}mm\" \
             viewBox=\"0 0 {width} {height}\">\n<g transform=\"matrix(1 0 0 -1 0 {height})\" fill=\"none\" stroke=\"black\">\n"
        );
        for (points, closed) in &self.0 {
            let pairs: Vec<String> = points.iter().map(|p| format!("{},{}", p.x, p.y)).collect();
            let end = if *closed { "Z" } else { "" };
            writeln!(text, "<path d=\"M{}{end}\"/>", pairs.join(" ")).expect("a string takes all");
        }
        text + "</g>\n</svg>\n"
    }

    /// As one LWPOLYLINE a contour, with `$INSUNITS` 4 (mm).
    pub(crate) fn dxf(&self) -> String {
        self.dxf_on(std::iter::repeat("cut"))
    }

    /// The same, each contour on its layer.
    pub(crate) fn dxf_on<'a>(&self, layers: impl Iterator<Item = &'a str>) -> String {
        let mut text =
            String::from("0\nSECTION\n2\nHEADER\n9\n$INSUNITS\n70\n4\n0\nENDSEC\n0\nSECTION\n2\nENTITIES\n");
        for ((points, closed), layer) in self.0.iter().zip(layers) {
            let flags = u8::from(*closed);
            write!(text, "0\nLWPOLYLINE\n8\n{layer}\n90\n{}\n70\n{flags}\n", points.len())
                .expect("a string takes all");
            for p in points {
                write!(text, "10\n{}\n20\n{}\n", p.x, p.y).expect("a string takes all");
            }
        }
        text + "0\nENDSEC\n0\nEOF\n"
    }
}

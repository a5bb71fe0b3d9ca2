//! Draws a drawing's vertices and the spans that replace them: `cargo run --release --example picture -- DRAWING >
//! picture.svg`.

#![allow(clippy::print_stdout, reason = "the picture goes to standard output")]

use std::fmt::Write;

use ribband::geom::Span;
use ribband::job::{CutArgs, DrawingArgs, DrawingUnit, Job, JobFile, Settings};
use ribband::num::Length;
use ribband::run::{Plan, Source, Unwatched, plan};

/// Space around the part, in mm.
const MARGIN: f64 = 6.0;

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let name = std::env::args().nth(1).ok_or("name a drawing")?;
    let settings = Settings {
        cut: CutArgs { depth: Some(Length::from_mm(3.0)), ..CutArgs::default() },
        drawing: DrawingArgs { drawing_unit: Some(DrawingUnit::Mm), ..DrawingArgs::default() },
        ..Settings::default()
    };
    let job = Job::new(&settings, &JobFile::default())?;
    let bytes = std::fs::read(&name)?;
    println!("{}", picture(&plan(&job, Source { name: &name, bytes: &bytes }, &Unwatched)?)?);
    Ok(())
}

/// Lines and arcs in two colours by turns, joints as dots, and the trace's own vertices under them.
fn picture(plan: &Plan) -> Result<String, std::fmt::Error> {
    let (width, height) = (plan.part.width() + 2.0 * MARGIN, plan.part.height() + 2.0 * MARGIN);
    let mut svg = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {width:.1} {height:.1}\" width=\"900\">\n\
         <rect width=\"100%\" height=\"100%\" fill=\"#fffdf7\"/>\n\
         <g transform=\"matrix(1 0 0 -1 {:.3} {:.3})\" fill=\"none\" stroke-linecap=\"round\">\n",
        MARGIN - plan.part.x0,
        plan.part.y1 + MARGIN
    );
    for contour in &plan.cleaned.contours {
        let dots = contour.path.vertices.iter().map(|v| format!("M{:.2} {:.2}h0", v.at.x, v.at.y));
        writeln!(svg, "<path stroke=\"#9a9284\" stroke-width=\".5\" d=\"{}\"/>", dots.collect::<String>())?;
    }
    for fitted in &plan.fitted {
        for (i, span) in fitted.path.spans().enumerate() {
            let colour = if i % 2 == 0 { "#0b5fa5" } else { "#d2601a" };
            writeln!(svg, "<path stroke=\"{colour}\" stroke-width=\".8\" d=\"{}\"/>", path_data(&span))?;
        }
        for joint in &fitted.path.vertices {
            writeln!(
                svg,
                "<circle fill=\"#1c1c1c\" cx=\"{:.3}\" cy=\"{:.3}\" r=\".9\"/>",
                joint.at.x, joint.at.y
            )?;
        }
    }
    svg.push_str("</g>\n</svg>");
    Ok(svg)
}

fn path_data(span: &Span) -> String {
    let (from, to) = (span.start, span.end);
    if span.is_line() {
        return format!("M{:.3} {:.3}L{:.3} {:.3}", from.x, from.y, to.x, to.y);
    }
    let (radius, large, turn) = (span.radius(), u8::from(span.bulge.abs() > 1.0), u8::from(span.bulge > 0.0));
    format!("M{:.3} {:.3}A{radius:.3} {radius:.3} 0 {large} {turn} {:.3} {:.3}", from.x, from.y, to.x, to.y)
}

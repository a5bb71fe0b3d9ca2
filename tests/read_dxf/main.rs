//! The DXF reader, through its public door.

#![allow(clippy::unwrap_used, reason = "a test may panic")]

mod blocks;
mod curves;
mod drawings;
mod entities;
mod hostile;
mod text;

use kurbo::Rect;
use ribband::error::Error;
use ribband::geom::Span;
use ribband::read::{Scale, Unit, read};
use ribband::sketch::Sketch;

/// Group codes and values on one line, apart by `|`, as the lines of a DXF file.
fn lines(groups: &str) -> String {
    groups.split('|').map(|line| line.trim().to_owned() + "\n").collect()
}

/// A DXF file in mm with the given ENTITIES section.
fn drawing(entities: &str) -> String {
    sections("", "", entities)
}

/// A DXF file in mm with the given TABLES, BLOCKS and ENTITIES sections; empty ones are left out.
fn sections(tables: &str, blocks: &str, entities: &str) -> String {
    let section = |name: &str, contents: &str| {
        if contents.is_empty() {
            String::new()
        } else {
            lines(&format!("0|SECTION|2|{name}|{contents}|0|ENDSEC"))
        }
    };
    let header = section("HEADER", "9|$ACADVER|1|AC1015|9|$INSUNITS|70|4");
    header
        + &section("TABLES", tables)
        + &section("BLOCKS", blocks)
        + &section("ENTITIES", entities)
        + "0\nEOF\n"
}

/// The sketch of a file whose bare numbers, where it says nothing, are mm.
fn try_sketch(dxf: &str) -> Result<Sketch, Error> {
    let scale = Scale { drawing_unit: Some(Unit::Mm), ..Scale::default() };
    read("part.dxf", dxf.as_bytes(), &scale)
}

/// The sketch of a file that can be read.
fn sketch(dxf: &str) -> Sketch {
    try_sketch(dxf).unwrap_or_else(|e| panic!("{e}\n{dxf}"))
}

/// Total length in mm.
fn length(sketch: &Sketch) -> f64 {
    sketch.contours.iter().map(|c| c.path.length()).sum()
}

/// All spans of all contours.
fn spans(sketch: &Sketch) -> Vec<Span> {
    sketch.contours.iter().flat_map(|c| c.path.spans()).collect()
}

/// The largest difference between the bounds of the sketch's box and `wanted`.
fn box_error(sketch: &Sketch, wanted: [f64; 4]) -> f64 {
    let Rect { x0, y0, x1, y1 } = sketch.bbox().unwrap();
    [x0, y0, x1, y1].iter().zip(wanted).map(|(got, wanted)| (got - wanted).abs()).fold(0.0, f64::max)
}

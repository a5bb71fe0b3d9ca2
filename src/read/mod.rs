//! Text to [`Sketch`]: SVG, DXF and point lists, told apart by their content.
//!
//! A reader turns a file into a [`Drawing`] in the file's own units, y up, every curve exact. The scale is settled
//! afterwards, in one place, and the curves become lines and arcs in mm.

mod curve;
mod dxf;
mod limits;
mod number;
mod points;
mod sample;
mod scale;
mod svg;
mod text;

use kurbo::Rect;
use rayon::prelude::*;

pub use curve::{Chain, Curve, Drawing, Element, EllipseArc, Nurbs};
pub use limits::{Limits, WAY_OUT};
pub use scale::{FileUnit, MM_PER_INCH, Scale, Unit};

use crate::error::{Error, Kind};
use crate::geom::Vertex;
use crate::sketch::{Contour, Place, Sketch};
use sample::{Sampled, sample, sampling_tolerance};
use text::Content;

/// Reads a drawing. `name` is only what messages call the file; what it is, its content tells.
///
/// ```
/// use ribband::read::{Scale, Unit, read};
///
/// let inches = Scale { drawing_unit: Some(Unit::Inch), ..Scale::default() };
/// let sketch = read("blade.csv", b"x,y\n0,0\n4,0\n4,1\n0,0\n", &inches)?;
/// assert!(sketch.contours[0].path.closed);
/// assert_eq!(sketch.contours[0].path.vertices.len(), 3);
/// assert_eq!(sketch.mm_per_unit, 25.4);
/// # Ok::<(), ribband::error::Error>(())
/// ```
///
/// # Errors
/// `Kind::Input` when the content is no drawing or a broken one, `Kind::Refused` when its scale is unknown,
/// `Kind::Settings` when `scale` itself is wrong or names a layer that the drawing does not have.
pub fn read(name: &str, bytes: &[u8], scale: &Scale) -> Result<Sketch, Error> {
    scale
        .checked()
        .and_then(|()| read_drawing(bytes))
        .and_then(|d| to_sketch(d, scale))
        .map_err(|e| if e.kind == Kind::Settings { e } else { e.in_file(name) })
}

/// The drawing in the file's own units.
///
/// # Errors
/// `Kind::Input` when the content is no drawing or a broken one.
pub fn read_drawing(bytes: &[u8]) -> Result<Drawing, Error> {
    match text::tell(bytes)? {
        Content::Xml(text) => svg::read(&text),
        Content::Dxf(bytes) => dxf::read(&bytes),
        Content::Points(text) => points::read(&text),
    }
}

/// Settles the scale and turns every element into lines and arcs in mm.
///
/// # Errors
/// `Kind::Refused` when the scale is unknown, `Kind::Settings` for a layer that is not there, `Kind::Input` for a
/// drawing without geometry, with coordinates beyond reason or beyond the limits.
pub fn to_sketch(mut drawing: Drawing, scale: &Scale) -> Result<Sketch, Error> {
    if let Some(layers) = &scale.layers {
        keep_layers(&mut drawing, layers)?;
    }
    let bbox = checked_box(&drawing)?;
    let settled = scale.settle(&drawing, bbox)?;
    check_extent(bbox, settled.mm_per_unit)?;
    let Drawing { elements, notes, .. } = drawing;
    let mut sketch =
        Sketch { mm_per_unit: settled.mm_per_unit, scale_from: settled.from, ..Sketch::default() };
    sketch.notes.extend(settled.note.into_iter().chain(notes));
    fill(&mut sketch, elements, sampling_tolerance(bbox, settled.mm_per_unit));
    scale.limits.hold(&sketch)?;
    sketch.contours.iter().try_for_each(within_reason)?;
    if sketch.contours.is_empty() { Err(nothing_drawn(&sketch.notes)) } else { Ok(sketch) }
}

/// Turns the elements into contours, those that are single points into a note.
fn fill(sketch: &mut Sketch, elements: Vec<Element>, tolerance_mm: f64) {
    let mm_per_unit = sketch.mm_per_unit;
    let sampled: Vec<_> = elements
        .into_par_iter()
        .map(|e| (sample(e.chain, mm_per_unit, tolerance_mm), e.layer, e.colour, e.place))
        .collect();
    let mut without_length = Vec::new();
    for (Sampled { path, error_mm }, layer, colour, place) in sampled {
        if path.vertices.iter().all(|v| v.at == path.vertices[0].at) {
            without_length.push(place);
            continue;
        }
        sketch.sampling_mm = sketch.sampling_mm.max(error_mm);
        sketch.contours.push(Contour { id: sketch.contours.len() + 1, layer, colour, place, path });
    }
    sketch.notes.extend(left_out(&without_length));
}

/// The box of a drawing in its own units, in which every number is finite.
fn checked_box(drawing: &Drawing) -> Result<Rect, Error> {
    if let Some(e) = drawing.elements.iter().find(|e| !e.chain.is_finite()) {
        let what = format!("{}: its coordinates grow beyond all numbers", e.place.element);
        return Err(Error::new(Kind::Input, what)
            .on_line(e.place.line)
            .remedy("check its transforms and scales"));
    }
    let bbox = drawing.elements.iter().filter_map(|e| e.chain.bbox()).reduce(|a, b| a.union(b));
    let bbox = bbox.ok_or_else(|| nothing_drawn(&drawing.notes))?;
    if bbox.width() == 0.0 && bbox.height() == 0.0 {
        let places: Vec<Place> = drawing.elements.iter().map(|e| e.place.clone()).collect();
        let notes: Vec<String> = drawing.notes.iter().cloned().chain(left_out(&places)).collect();
        return Err(nothing_drawn(&notes));
    }
    if drawing.unit.is_none() {
        // In the smallest of the units that the user may name.
        check_extent(bbox, Unit::Px.mm())?;
    }
    Ok(bbox)
}

/// A note on elements that are single points.
fn left_out(places: &[Place]) -> Option<String> {
    let first = places.first()?;
    let elements = if places.len() == 1 { "element" } else { "elements" };
    Some(format!(
        "{} {elements} without length left out, the first a {} on line {}",
        places.len(),
        first.element,
        first.line
    ))
}

/// A curve whose numbers cancel can have a small box and yet go astray: what it became is looked at, point by point.
fn within_reason(contour: &Contour) -> Result<(), Error> {
    let sound = |v: &Vertex| v.at.x.abs() <= LARGEST_MM && v.at.y.abs() <= LARGEST_MM && v.bulge.is_finite();
    if contour.path.vertices.iter().all(sound) {
        return Ok(());
    }
    let what = format!("contour {} leaves every reasonable size, which cannot be meant", contour.id);
    Err(Error::new(Kind::Input, what).on_line(contour.place.line).remedy("look for a stray number in it"))
}

/// Coordinates beyond 10 km are a wrong scale or a damaged file, and would leave the grid that coordinates keep to.
const LARGEST_MM: f64 = 1e7;

fn check_extent(bbox: Rect, mm_per_unit: f64) -> Result<(), Error> {
    let largest = [bbox.x0, bbox.y0, bbox.x1, bbox.y1].iter().fold(0.0_f64, |most, c| most.max(c.abs()));
    let largest_mm = largest * mm_per_unit;
    if largest_mm <= LARGEST_MM {
        return Ok(());
    }
    let what = format!("the drawing reaches {largest_mm:.3e} mm from its zero, which cannot be meant");
    Err(Error::new(Kind::Input, what).remedy("check its unit and look for a stray point far away"))
}

fn nothing_drawn(notes: &[String]) -> Error {
    let what = match notes {
        [] => "the drawing holds nothing that can be cut".to_owned(),
        notes => format!("the drawing holds nothing that can be cut ({})", notes.join("; ")),
    };
    Error::new(Kind::Input, what).remedy("draw paths, polylines, lines or circles and save it again")
}

/// Keeps the elements of the named layers; layer names do not tell capitals from small letters.
fn keep_layers(drawing: &mut Drawing, layers: &[String]) -> Result<(), Error> {
    let named = |layer: &str, wanted: &str| layer.to_lowercase() == wanted.to_lowercase();
    let missing = layers.iter().find(|w| !drawing.elements.iter().any(|e| named(&e.layer, w)));
    if let Some(missing) = missing {
        let mut present: Vec<&str> = drawing.elements.iter().map(|e| e.layer.as_str()).collect();
        present.sort_unstable();
        present.dedup();
        present.retain(|layer| !layer.is_empty());
        let remedy = match present.as_slice() {
            [] => "the drawing has no layers: leave --layers out".to_owned(),
            present => format!("its layers are {}", present.join(", ")),
        };
        let what = format!("the drawing has no layer \"{missing}\" with anything to cut");
        return Err(Error::new(Kind::Settings, what).remedy(remedy));
    }
    drawing.elements.retain(|e| layers.iter().any(|w| named(&e.layer, w)));
    Ok(())
}

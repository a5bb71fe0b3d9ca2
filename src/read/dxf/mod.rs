//! ASCII DXF, from R12 on: first the groups as they stand, then records and sections, then geometry.
//!
//! Entities, group codes and the arbitrary axis rule are those of the published DXF reference.

mod document;
mod geometry;
mod groups;
mod notes;
mod placement;
mod spline;
mod text;
mod units;
mod walk;

use super::curve::Drawing;
use super::scale::FileUnit;
use crate::error::Error;
use document::Document;
use units::length_unit;
use walk::Walk;

/// Reads an ASCII DXF drawing, without byte order mark.
///
/// # Errors
/// `Kind::Input` with the line when the file is cut short or broken, holds a number that is none, or has
/// blocks that contain themselves or stand for too many entities.
pub(super) fn read(bytes: &[u8]) -> Result<Drawing, Error> {
    let text = text::decode(bytes);
    let groups = groups::groups(&text)?;
    let records = groups::records(&groups)?;
    let document = Document::new(&records)?;
    let mut walk = Walk::through(&document)?;
    if !document.ended {
        walk.notes.sentences.push("the file has no end mark (EOF), so something may be missing".to_owned());
    }
    let unit = unit(&document, &mut walk.notes.sentences)?;
    Ok(Drawing { elements: walk.elements, unit, assumed: None, notes: walk.notes.into_sentences() })
}

/// The unit that `$INSUNITS` states; `None` when it states none.
fn unit(document: &Document, notes: &mut Vec<String>) -> Result<Option<FileUnit>, Error> {
    let Some(group) = document.variable("$INSUNITS") else { return Ok(None) };
    let code = group.whole()?;
    match length_unit(code) {
        Some(unit) => {
            Ok(Some(FileUnit { mm: unit.mm, said_by: format!("$INSUNITS {code} ({})", unit.name) }))
        }
        None if code == 0 => Ok(None),
        None => {
            notes.push(format!("$INSUNITS {code} is not a unit of the DXF reference: the scale is unknown"));
            Ok(None)
        }
    }
}

//! Static SVG 1.1 and 2 to a [`Drawing`]: what would be drawn as outlines, in the page's units, y up.

mod arc;
mod inherit;
mod path;
mod shape;
mod source;
mod style;
mod tally;
mod transform;
mod viewport;
mod walk;

use roxmltree::Node;

use super::curve::Drawing;
use crate::error::{Error, Kind};
use shape::Flaw;
use source::Source;
use style::{Declared, Sheets};
use viewport::{Length, Page, Stated, ViewBox};
use walk::Walk;

/// Reads an SVG document.
pub(super) fn read(text: &str) -> Result<Drawing, Error> {
    let document = source::parse(text)?;
    let source = Source::new(&document);
    let root = document.root_element();
    if root.tag_name().name() != "svg" || !source.is_svg(root) {
        let what = format!("this is XML, but its root is <{}>, not <svg>", root.tag_name().name());
        return Err(Error::new(Kind::Input, what)
            .on_line(source.line(root))
            .remedy("save the drawing as SVG"));
    }
    let (texts, unread) = style::sheet_texts(&document);
    let sheets = Sheets::new(&texts);
    let page =
        page(root, &sheets.declared(root)).map_err(|what| source.error(root, &Flaw { what, at: None }))?;
    let mut walk = Walk::new(&source, &sheets);
    walk.run(&page)?;
    let (elements, tally) = (walk.elements, walk.tally);
    let mm_per_unit = page.unit.as_ref().or(page.assumed.as_ref()).map(|u| u.mm);
    let notes = unread.into_iter().chain(tally.notes(mm_per_unit)).collect();
    Ok(Drawing { elements, unit: page.unit, assumed: page.assumed, notes })
}

/// The page that the root element describes.
fn page(root: Node<'_, '_>, style: &Declared<'_, '_>) -> Result<Page, String> {
    let stated = |name: &str| match style.get(name).filter(|t| *t != "auto").map(Length::parse).transpose()? {
        Some(Length::Share(_)) | None => Ok(None),
        Some(Length::Bare(v) | Length::Px(v)) if v <= 0.0 => Err(format!("its {name} is not above zero")),
        length => Ok(length),
    };
    let written = ["width", "height"].map(|name| style.get(name).unwrap_or("auto"));
    let words = format!("page size {}", written.join(" x "));
    let stated = Stated { width: stated("width")?, height: stated("height")?, words };
    let view_box = match root.attribute("viewBox") {
        None => None,
        Some(text) => Some(ViewBox::parse(text)?.ok_or("its viewBox has no size")?),
    };
    Ok(Page::new(stated, view_box, viewport::aspect(root.attribute("preserveAspectRatio"))?))
}

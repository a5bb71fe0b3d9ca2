//! The walk through the elements that are drawn, with what each inherits: place, visibility, layer, colour.

use kurbo::{Affine, Size, Vec2};
use roxmltree::Node;

use super::super::curve::{Chain, Element};
use super::inherit::{Inherited, deeper};
use super::shape::{Flaw, Shape};
use super::source::Source;
use super::style::{Declared, Sheets};
use super::tally::Tally;
use super::viewport::{Length, Page, ViewBox, aspect};
use super::{transform, viewport};
use crate::error::{Error, Kind};
use crate::sketch::Place;

/// So many elements and curves may come out of `use` before the drawing is refused: far more than any shop cuts, and
/// still read in a second.
const MOST_USED: usize = 1_000_000;

/// An element waiting to be drawn.
struct Waiting<'a, 'n> {
    node: Node<'a, 'a>,
    inherited: Inherited<'n>,
    /// The size that a `use` gives the viewport of its target, if it led straight here.
    used: Option<UsedSize>,
}

/// Width and height on a `use`, in user units.
#[derive(Clone, Copy)]
struct UsedSize {
    width: Option<f64>,
    height: Option<f64>,
}

/// The drawn elements of a document, and a tally of the others. The stack is ours, so that no depth of nesting
/// overflows the program's.
pub(super) struct Walk<'a, 'n> {
    source: &'n Source<'a>,
    sheets: &'n Sheets<'n>,
    waiting: Vec<Waiting<'a, 'n>>,
    used: usize,
    pub(super) elements: Vec<Element>,
    pub(super) tally: Tally,
}

impl<'a: 'n, 'n> Walk<'a, 'n> {
    pub(super) fn new(source: &'n Source<'a>, sheets: &'n Sheets<'n>) -> Self {
        Self { source, sheets, waiting: Vec::new(), used: 0, elements: Vec::new(), tally: Tally::default() }
    }

    /// Draws everything under the root.
    pub(super) fn run(&mut self, page: &Page) -> Result<(), Error> {
        let root = self.source.document.root_element();
        let style = self.sheets.declared(root);
        let mut inherited = Inherited::of(page);
        if style.get("display").is_some_and(|d| d.eq_ignore_ascii_case("none")) {
            return Ok(());
        }
        if style.get("transform").is_some_and(|t| transform::parse(t) != Ok(Affine::IDENTITY)) {
            let what = "a transform of the whole page, which programs draw differently".to_owned();
            return Err(self.source.error(root, &what.into()));
        }
        inherited.take(&style);
        self.enter(root, &inherited);
        while let Some(next) = self.waiting.pop() {
            let node = next.node;
            self.visit(next).map_err(|stop| match stop {
                Stop::Flaw(flaw) => self.source.error(node, &flaw),
                Stop::Error(error) => error.on_line(self.source.line(node)),
            })?;
        }
        Ok(())
    }

    /// Puts the children of an element on the stack, the first on top.
    fn enter(&mut self, node: Node<'a, 'a>, inherited: &Inherited<'n>) {
        let first = self.waiting.len();
        let children = node.children().filter(Node::is_element);
        self.waiting.extend(children.map(|node| Waiting { node, inherited: inherited.clone(), used: None }));
        self.waiting[first..].reverse();
    }

    fn visit(&mut self, waiting: Waiting<'a, 'n>) -> Result<(), Stop> {
        let Waiting { node, mut inherited, used } = waiting;
        self.count_used(&inherited, 1)?;
        let name = node.tag_name().name();
        if !self.source.is_svg(node) || NEVER_DRAWN.contains(&name) || !conditions_hold(node) {
            return Ok(());
        }
        let style = self.sheets.declared(node);
        if style.get("display").is_some_and(|d| d.eq_ignore_ascii_case("none")) {
            self.tally_hidden(node);
            return Ok(());
        }
        inherited.take(&style);
        inherited.map *= own_transform(&style)?;
        if ["clip-path", "mask"].iter().any(|p| style.get(p).is_some_and(|v| v != "none")) {
            self.tally.clipped();
        }
        match name {
            "g" | "a" => {
                inherited.layer = inherited.layer.or_else(|| group_name(node));
                self.enter(node, &inherited);
            }
            "switch" => self.choose(node, inherited),
            "svg" => self.nested(node, &style, inherited, used)?,
            "symbol" if used.is_some() => self.nested(node, &style, inherited, used)?,
            "symbol" => {}
            "use" => self.follow(node, &style, inherited)?,
            _ => self.shape(node, &style, &inherited)?,
        }
        Ok(())
    }

    /// Counts what comes out of `use`, so that a small file cannot become a drawing without end.
    fn count_used(&mut self, inherited: &Inherited<'n>, parts: usize) -> Result<(), Stop> {
        if inherited.uses.is_some() {
            self.used += parts;
        }
        if self.used <= MOST_USED {
            return Ok(());
        }
        let what =
            format!("its use elements multiply the drawing into more than {MOST_USED} elements and curves");
        Err(Error::new(Kind::Input, what).remedy("draw fewer copies").into())
    }

    /// Counts a hidden subtree once for each shape in it.
    fn tally_hidden(&mut self, node: Node<'a, 'a>) {
        node.descendants()
            .filter(|n| SHAPES.contains(&n.tag_name().name()))
            .for_each(|_| self.tally.hidden());
    }

    /// Draws the first child of a `switch` whose conditions hold.
    fn choose(&mut self, node: Node<'a, 'a>, inherited: Inherited<'n>) {
        let mut children = node.children().filter(|n| n.is_element() && self.source.is_svg(*n));
        if let Some(node) = children.find(|n| conditions_hold(*n)) {
            self.waiting.push(Waiting { node, inherited, used: None });
        }
    }

    /// A viewport within the drawing.
    fn nested(
        &mut self,
        node: Node<'a, 'a>,
        style: &Declared<'a, 'n>,
        mut inherited: Inherited<'n>,
        used: Option<UsedSize>,
    ) -> Result<(), Stop> {
        let outer = inherited.viewport;
        let length = |name: &str, whole: Option<f64>| length(style, name, whole);
        let x = length("x", outer.map(|v| v.width))?.unwrap_or(0.0);
        let y = length("y", outer.map(|v| v.height))?.unwrap_or(0.0);
        let width = match used.and_then(|u| u.width) {
            Some(width) => Some(width),
            None => length("width", outer.map(|v| v.width))?.or(outer.map(|v| v.width)),
        };
        let height = match used.and_then(|u| u.height) {
            Some(height) => Some(height),
            None => length("height", outer.map(|v| v.height))?.or(outer.map(|v| v.height)),
        };
        let size = width.zip(height).map(|(w, h)| Size::new(w, h));
        if size.is_some_and(|s| s.width <= 0.0 || s.height <= 0.0) {
            return Ok(());
        }
        inherited.map *= Affine::translate(Vec2::new(x, y));
        inherited.viewport = size;
        if let Some(text) = node.attribute("viewBox") {
            let Some(view_box) = ViewBox::parse(text)? else { return Ok(()) };
            let size = size.ok_or_else(|| "a view box in a page whose size is not given".to_owned())?;
            inherited.map *= view_box.fit(aspect(node.attribute("preserveAspectRatio"))?, size);
            inherited.viewport = Some(view_box.size);
        }
        self.enter(node, &inherited);
        Ok(())
    }

    /// Draws the target of a `use` in its place.
    fn follow(
        &mut self,
        node: Node<'a, 'a>,
        style: &Declared<'a, 'n>,
        mut inherited: Inherited<'n>,
    ) -> Result<(), Stop> {
        let href =
            node.attribute("href").or_else(|| node.attribute(("http://www.w3.org/1999/xlink", "href")));
        let href = href.unwrap_or_default();
        let Some(target) = self.source.target(href) else {
            self.tally.lost_reference(href);
            return Ok(());
        };
        let outer = inherited.viewport;
        let (whole_x, whole_y) = (outer.map(|v| v.width), outer.map(|v| v.height));
        let x = length(style, "x", whole_x)?.unwrap_or(0.0);
        let y = length(style, "y", whole_y)?.unwrap_or(0.0);
        let used =
            UsedSize { width: length(style, "width", whole_x)?, height: length(style, "height", whole_y)? };
        inherited.map *= Affine::translate(Vec2::new(x, y));
        inherited.uses = Some(deeper(inherited.uses.take(), target.id())?);
        self.waiting.push(Waiting { node: target, inherited, used: Some(used) });
        Ok(())
    }

    /// Draws a shape, or counts what is none.
    fn shape(
        &mut self,
        node: Node<'a, 'a>,
        style: &Declared<'a, 'n>,
        inherited: &Inherited<'n>,
    ) -> Result<(), Stop> {
        let name = node.tag_name().name();
        let Some(chains) = (Shape { name, style, viewport: inherited.viewport }).chains() else {
            self.tally.not_drawn(name);
            return Ok(());
        };
        if !inherited.visible {
            self.tally.hidden();
            return Ok(());
        }
        let (chains, remark) = chains.map_err(Stop::Flaw)?;
        self.count_used(inherited, chains.iter().map(Chain::len).sum())?;
        let line = self.source.line(node);
        if let Some(remark) = remark {
            self.tally.remark(format!("{name} on line {line}: {remark}"));
        }
        if MARKERS.iter().any(|m| style.get(m).is_some_and(|v| v != "none")) {
            self.tally.markers();
        }
        inherited.tally_stroke(&mut self.tally);
        self.elements.extend(chains.into_iter().map(|chain| Element {
            chain: chain.transformed(inherited.map),
            layer: inherited.layer.unwrap_or_default().to_owned(),
            colour: inherited.colour().to_owned(),
            place: Place { line, element: name.to_owned() },
        }));
        Ok(())
    }
}

/// The basic shapes, in which hidden ones are counted.
const SHAPES: [&str; 7] = ["path", "polyline", "polygon", "line", "rect", "circle", "ellipse"];

/// The properties that put markers on a shape.
const MARKERS: [&str; 4] = ["marker", "marker-start", "marker-mid", "marker-end"];

/// Elements that describe and are not drawn themselves.
const NEVER_DRAWN: [&str; 25] = [
    "animate",
    "animateColor",
    "animateMotion",
    "animateTransform",
    "clipPath",
    "color-profile",
    "cursor",
    "defs",
    "desc",
    "discard",
    "filter",
    "font",
    "font-face",
    "hatch",
    "linearGradient",
    "marker",
    "mask",
    "metadata",
    "pattern",
    "radialGradient",
    "script",
    "set",
    "style",
    "title",
    "view",
];

/// Why the walk stops at an element.
enum Stop {
    Flaw(Flaw),
    Error(Error),
}

impl From<String> for Stop {
    fn from(what: String) -> Self {
        Self::Flaw(what.into())
    }
}

impl From<Error> for Stop {
    fn from(error: Error) -> Self {
        Self::Error(error)
    }
}

fn own_transform(style: &Declared<'_, '_>) -> Result<Affine, String> {
    let Some(text) = style.get("transform") else { return Ok(Affine::IDENTITY) };
    let map = transform::parse(text)?;
    let Some(origin) = style.get("transform-origin") else { return Ok(map) };
    let parts: Result<Vec<f64>, String> =
        origin.split_ascii_whitespace().map(|p| Length::parse(p)?.resolve(None)).collect();
    match parts.as_deref() {
        Ok(&[x, y] | &[x, y, _]) => {
            let origin = Vec2::new(x, y);
            Ok(Affine::translate(origin) * map * Affine::translate(-origin))
        }
        _ => Err(format!("transform-origin \"{origin}\" is not understood")),
    }
}

/// A length of an element; `None` where it is absent or `auto`.
fn length(style: &Declared<'_, '_>, name: &str, whole: Option<f64>) -> Result<Option<f64>, String> {
    let Some(text) = style.get(name).filter(|t| *t != "auto") else { return Ok(None) };
    let length = viewport::Length::parse(text).and_then(|l| l.resolve(whole));
    length.map(Some).map_err(|what| format!("{name}: {what}"))
}

/// The conditional attributes: no extensions are known, and of languages a drawing's English is taken, so that the
/// same file gives the same program on every machine.
fn conditions_hold(node: Node<'_, '_>) -> bool {
    let extensions = node.attribute("requiredExtensions").is_none_or(|e| e.trim().is_empty());
    let english = |list: &str| list.split(',').any(|l| l.trim().split('-').next() == Some("en"));
    extensions && node.attribute("systemLanguage").is_none_or(english)
}

/// The name of a group: the label that drawing programs put beside the id, else the id.
fn group_name<'a>(node: Node<'a, 'a>) -> Option<&'a str> {
    let label = node.attributes().find(|a| a.name() == "label" && !a.value().trim().is_empty());
    label.map(|a| a.value()).or_else(|| node.attribute("id"))
}

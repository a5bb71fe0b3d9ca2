//! What elements hand down to their children, and the way through `use` that led to them.

use std::rc::Rc;

use kurbo::{Affine, Size};
use roxmltree::NodeId;

use super::style::Declared;
use super::tally::Tally;
use super::viewport::{Length, Page};

/// `use` inside `use` inside `use`: beyond this nobody drew it by hand.
const DEEPEST_USE: usize = 64;

/// What an element hands down to its children.
#[derive(Clone)]
pub(super) struct Inherited<'n> {
    /// From user space to file units.
    pub(super) map: Affine,
    pub(super) viewport: Option<Size>,
    pub(super) visible: bool,
    pub(super) stroke: Option<&'n str>,
    pub(super) fill: Option<&'n str>,
    pub(super) stroke_width: Option<&'n str>,
    /// The name of the outermost named group.
    pub(super) layer: Option<&'n str>,
    /// The `use` elements that led here.
    pub(super) uses: Option<Rc<Use>>,
}

/// One step through a `use`.
pub(super) struct Use {
    target: NodeId,
    depth: usize,
    before: Option<Rc<Use>>,
}

impl<'n> Inherited<'n> {
    /// What the root hands down: everything is visible, nothing is said of colours.
    pub(super) fn of(page: &Page) -> Self {
        Self {
            map: page.map,
            viewport: page.viewport,
            visible: true,
            stroke: None,
            fill: None,
            stroke_width: None,
            layer: None,
            uses: None,
        }
    }

    /// Takes over what an element says of the inherited properties.
    pub(super) fn take<'a: 'n>(&mut self, style: &Declared<'a, 'n>) {
        if let Some(visibility) = style.get("visibility") {
            match visibility.to_ascii_lowercase().as_str() {
                "visible" => self.visible = true,
                "hidden" | "collapse" => self.visible = false,
                _ => {}
            }
        }
        let said = |name| style.get(name).filter(|v| *v != "inherit");
        self.stroke = said("stroke").or(self.stroke);
        self.fill = said("fill").or(self.fill);
        self.stroke_width = said("stroke-width").or(self.stroke_width);
    }

    /// The stroke's colour as written, else the fill's, else nothing.
    pub(super) fn colour(&self) -> &'n str {
        [self.stroke, self.fill].into_iter().flatten().find(|c| *c != "none").unwrap_or_default()
    }

    pub(super) fn tally_stroke(&self, tally: &mut Tally) {
        if self.stroke.is_none_or(|s| s == "none") {
            return;
        }
        let width = self.stroke_width.and_then(|w| Length::parse(w).ok()?.resolve(None).ok()).unwrap_or(1.0);
        tally.stroke(width * self.map.determinant().abs().sqrt());
    }
}

/// One step deeper into `use`; refused when the target is already being drawn.
pub(super) fn deeper(before: Option<Rc<Use>>, target: NodeId) -> Result<Rc<Use>, String> {
    let mut step = before.as_deref();
    while let Some(at) = step {
        if at.target == target {
            return Err("it draws itself within itself, without end".to_owned());
        }
        step = at.before.as_deref();
    }
    let depth = before.as_ref().map_or(0, |u| u.depth) + 1;
    if depth > DEEPEST_USE {
        return Err(format!("use within use, more than {DEEPEST_USE} deep"));
    }
    Ok(Rc::new(Use { target, depth, before }))
}

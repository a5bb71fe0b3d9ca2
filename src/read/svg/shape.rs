//! The basic shapes (SVG 2, "Basic Shapes") as chains in user space.

use std::f64::consts::{FRAC_PI_2, PI, TAU};

use kurbo::{Point, Rect, Size, Vec2};

use super::super::curve::{Chain, Curve, EllipseArc};
use super::super::number::Fault;
use super::path;
use super::style::Declared;
use super::viewport::Length;

/// What is wrong with an element: a word for the message, and where in which attribute.
pub(super) struct Flaw {
    pub(super) what: String,
    /// The attribute, and how many of its bytes were left when reading stopped.
    pub(super) at: Option<(&'static str, usize)>,
}

impl From<String> for Flaw {
    fn from(what: String) -> Self {
        Self { what, at: None }
    }
}

/// A shape element being read.
pub(super) struct Shape<'s, 'a, 'n> {
    pub(super) name: &'a str,
    pub(super) style: &'s Declared<'a, 'n>,
    pub(super) viewport: Option<Size>,
}

/// Which length of the viewport a percentage is of.
#[derive(Clone, Copy)]
enum Along {
    X,
    Y,
    Diagonal,
}

/// The chains of a shape, and a remark on what was wrong but harmless.
pub(super) type Drawn = (Vec<Chain>, Option<&'static str>);

impl<'a: 'n, 'n> Shape<'_, 'a, 'n> {
    /// The geometry; empty where the standard draws nothing. `None` when the element is no shape.
    pub(super) fn chains(&self) -> Option<Result<Drawn, Flaw>> {
        Some(match self.name {
            "path" => self.path(),
            "polyline" => self.points(false),
            "polygon" => self.points(true),
            "line" => self.line(),
            "rect" => self.rect(),
            "circle" => self.circle(),
            "ellipse" => self.ellipse(),
            _ => return None,
        })
    }

    fn path(&self) -> Result<Drawn, Flaw> {
        let data = self.style.get("d").unwrap_or_default();
        if data == "none" {
            return Ok((Vec::new(), None));
        }
        let chains = path::subpaths(unwrapped(data)).map_err(|fault| broken("d", "path data", &fault))?;
        Ok((chains, None))
    }

    fn points(&self, closed: bool) -> Result<Drawn, Flaw> {
        let data = self.style.get("points").unwrap_or_default();
        let (points, odd) = path::points(data).map_err(|fault| broken("points", "list of points", &fault))?;
        let odd = odd.then_some("an x without a y at the end of its points");
        let chain = Chain::of(Curve::polyline(points.iter().copied()), closed);
        Ok((if points.is_empty() { Vec::new() } else { vec![chain] }, odd))
    }

    fn line(&self) -> Result<Drawn, Flaw> {
        let from = Point::new(self.length("x1", Along::X)?, self.length("y1", Along::Y)?);
        let to = Point::new(self.length("x2", Along::X)?, self.length("y2", Along::Y)?);
        Ok((vec![Chain::of(Curve::line(from, to), false)], None))
    }

    fn rect(&self) -> Result<Drawn, Flaw> {
        let corner = Point::new(self.length("x", Along::X)?, self.length("y", Along::Y)?);
        let size = Size::new(self.length("width", Along::X)?, self.length("height", Along::Y)?);
        if size.width < 0.0 || size.height < 0.0 {
            return Ok((Vec::new(), Some("a width or height below zero")));
        }
        if size.width == 0.0 || size.height == 0.0 {
            return Ok((Vec::new(), None));
        }
        let radii = self.radii()?;
        let radii = Vec2::new(radii.x.min(size.width / 2.0), radii.y.min(size.height / 2.0));
        Ok((vec![rounded(Rect::from_origin_size(corner, size), radii)], None))
    }

    fn circle(&self) -> Result<Drawn, Flaw> {
        let r = self.length("r", Along::Diagonal)?;
        self.whole_ellipse(Vec2::new(r, r))
    }

    fn ellipse(&self) -> Result<Drawn, Flaw> {
        let radii = self.radii()?;
        self.whole_ellipse(radii)
    }

    fn whole_ellipse(&self, radii: Vec2) -> Result<Drawn, Flaw> {
        let centre = Point::new(self.length("cx", Along::X)?, self.length("cy", Along::Y)?);
        if radii.x < 0.0 || radii.y < 0.0 {
            return Ok((Vec::new(), Some("a radius below zero")));
        }
        if radii.x == 0.0 || radii.y == 0.0 {
            return Ok((Vec::new(), None));
        }
        Ok((vec![Chain::of(corner_arc(centre, radii, 0.0, TAU), true)], None))
    }

    /// rx and ry; one that is not given, or `auto`, is as the other.
    fn radii(&self) -> Result<Vec2, Flaw> {
        let given = |name, along| match self.style.get(name) {
            None | Some("auto") => Ok(None),
            Some(_) => self.length(name, along).map(Some),
        };
        let (x, y) = (given("rx", Along::X)?, given("ry", Along::Y)?);
        // Outside an ellipse a negative radius counts as not given.
        let (x, y) =
            if self.name == "rect" { (x.filter(|r| *r >= 0.0), y.filter(|r| *r >= 0.0)) } else { (x, y) };
        Ok(Vec2::new(x.or(y).unwrap_or(0.0), y.or(x).unwrap_or(0.0)))
    }

    /// A length in user units; 0 where it is not given.
    fn length(&self, name: &'static str, along: Along) -> Result<f64, Flaw> {
        let Some(text) = self.style.get(name).filter(|t| *t != "auto") else { return Ok(0.0) };
        let whole = self.viewport.map(|v| match along {
            Along::X => v.width,
            Along::Y => v.height,
            Along::Diagonal => v.width.hypot(v.height) / 2.0_f64.sqrt(),
        });
        let length = Length::parse(text).and_then(|l| l.resolve(whole));
        length.map_err(|what| Flaw { what: format!("{name}: {what}"), at: Some((name, text.len())) })
    }
}

/// Path data out of the `path("...")` that a style writes around it.
fn unwrapped(data: &str) -> &str {
    let inner = data.strip_prefix("path(").and_then(|d| d.strip_suffix(')')).map(str::trim);
    inner.map_or(data, |d| d.trim_matches(['"', '\'']))
}

fn broken(attribute: &'static str, name: &str, fault: &Fault<'_>) -> Flaw {
    let found = match fault.rest {
        "" => "ends".to_owned(),
        rest => format!("breaks off at {}", super::super::number::excerpt(rest)),
    };
    let what = match fault.what {
        "" => format!("the {name} {found}"),
        what if what.starts_with("a number too") => format!("the {name} {found}: {what}"),
        what => format!("the {name} {found} where {what} is wanted"),
    };
    Flaw { what, at: Some((attribute, fault.rest.len())) }
}

fn corner_arc(centre: Point, radii: Vec2, start: f64, sweep: f64) -> Curve {
    let (u, v) = (Vec2::new(radii.x, 0.0), Vec2::new(0.0, radii.y));
    Curve::Ellipse(EllipseArc { centre, u, v, start, sweep })
}

/// The rectangle in the order the standard draws it: from the left end of the top edge, x first.
fn rounded(rect: Rect, radii: Vec2) -> Chain {
    let Rect { x0, y0, x1, y1 } = rect;
    if radii.x == 0.0 || radii.y == 0.0 {
        let corners = [Point::new(x0, y0), Point::new(x1, y0), Point::new(x1, y1), Point::new(x0, y1)];
        return Chain::of(Curve::polyline(corners), true);
    }
    let (x0i, x1i, y0i, y1i) = (x0 + radii.x, x1 - radii.x, y0 + radii.y, y1 - radii.y);
    let line = |ax, ay, bx, by| Curve::line(Point::new(ax, ay), Point::new(bx, by));
    let arc = |x, y, start| corner_arc(Point::new(x, y), radii, start, FRAC_PI_2);
    let curves = vec![
        line(x0i, y0, x1i, y0),
        arc(x1i, y0i, -FRAC_PI_2),
        line(x1, y0i, x1, y1i),
        arc(x1i, y1i, 0.0),
        line(x1i, y1, x0i, y1),
        arc(x0i, y1i, FRAC_PI_2),
        line(x0, y1i, x0, y0i),
        arc(x0i, y0i, PI),
    ];
    Chain { curves, closed: true }
}

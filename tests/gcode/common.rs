//! Toolpaths and shorthand for the tests of programs.

use kurbo::Point;
use ribband::gcode::{self, Dialect, Header, Program};
use ribband::machine::Machine;
use ribband::toolpath::{Move, Position, Toolpath};

/// The built-in machine called `name`.
pub(crate) fn machine(name: &str) -> Machine {
    Machine::named(name).expect("built in")
}

/// A place.
pub(crate) fn at(x: f64, y: f64, z: f64) -> Position {
    Position { xy: Point::new(x, y), z }
}

/// Builds a toolpath move by move.
pub(crate) struct Path {
    moves: Vec<Move>,
    here: Position,
    rpm: f64,
}

impl Path {
    pub(crate) fn from(here: Position) -> Self {
        Self { moves: Vec::new(), here, rpm: 18_000.0 }
    }

    pub(crate) fn go(mut self, to: Position, bulge: f64, feed: Option<f64>) -> Self {
        self.moves.push(Move { from: self.here, to, bulge, feed, spindle_rpm: self.rpm, line: 0 });
        self.here = to;
        self
    }

    pub(crate) fn rapid(self, x: f64, y: f64, z: f64) -> Self {
        self.go(at(x, y, z), 0.0, None)
    }

    pub(crate) fn cut(self, x: f64, y: f64, z: f64) -> Self {
        self.go(at(x, y, z), 0.0, Some(1200.0))
    }

    pub(crate) fn plunge(self, z: f64) -> Self {
        let (x, y) = (self.here.xy.x, self.here.xy.y);
        self.go(at(x, y, z), 0.0, Some(400.0))
    }

    pub(crate) fn arc(self, x: f64, y: f64, bulge: f64) -> Self {
        let z = self.here.z;
        self.go(at(x, y, z), bulge, Some(1200.0))
    }

    pub(crate) fn done(self) -> Toolpath {
        Toolpath { moves: self.moves }
    }
}

/// A header with a clearance of 15 mm.
pub(crate) fn header() -> Header {
    Header {
        title: "name plate".into(),
        xy_zero: "lower left of the finished parts".into(),
        z_zero: "top of the stock".into(),
        cutter: "6 mm, 2 flutes".into(),
        clearance: 15.0,
        notes: vec!["on the line: the part comes out smaller by the cutter's radius".into()],
        ..Header::default()
    }
}

/// What `text` says on `machine`.
pub(crate) fn understood(text: &str, machine: &Machine) -> Program {
    let words = gcode::read(text).unwrap_or_else(|e| panic!("{e}\n{text}"));
    gcode::interpret(&words, &Dialect::of(machine)).unwrap_or_else(|e| panic!("{e}\n{text}"))
}

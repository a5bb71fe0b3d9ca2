//! Decimal numbers as whole counts of their last place, so that rounding happens once and is seen.

use kurbo::Point;

use crate::machine::Machine;
use crate::toolpath::Position;

/// The grid of numbers that a program can hold.
#[derive(Clone, Copy, Debug)]
pub(super) struct Grid {
    /// Decimals of a number.
    pub(super) decimals: u32,
    /// Counts of the last place in one unit.
    per_unit: f64,
    /// The unit, in mm.
    unit_mm: f64,
}

/// A place on the grid, in counts.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Place {
    pub(super) x: i64,
    pub(super) y: i64,
    pub(super) z: i64,
}

impl Grid {
    /// The grid of coordinates on `machine`.
    pub(super) fn of(machine: &Machine) -> Self {
        let decimals = machine.program.decimals;
        Self { decimals, per_unit: 10_f64.powi(decimals as i32), unit_mm: machine.unit.mm() }
    }

    /// `mm` in counts and parts of a count.
    pub(super) fn exact(self, mm: f64) -> f64 {
        mm * self.per_unit / self.unit_mm
    }

    /// The count nearest to `mm`.
    pub(super) fn count(self, mm: f64) -> i64 {
        self.exact(mm).round() as i64
    }

    /// What `count` is in mm.
    pub(super) fn mm(self, count: f64) -> f64 {
        count * self.unit_mm / self.per_unit
    }

    /// The place on the grid nearest to `at`.
    pub(super) fn place(self, at: Position) -> Place {
        Place { x: self.count(at.xy.x), y: self.count(at.xy.y), z: self.count(at.z) }
    }

    /// `at` in counts and parts of a count.
    pub(super) fn point(self, at: Point) -> Point {
        Point::new(self.exact(at.x), self.exact(at.y))
    }
}

impl Place {
    /// The place in the plane, in counts.
    pub(super) fn xy(self) -> Point {
        Point::new(self.x as f64, self.y as f64)
    }

    /// True when both stand at the same X and Y.
    pub(super) fn same_xy(self, other: Self) -> bool {
        self.x == other.x && self.y == other.y
    }
}

/// Appends `count` of the last of `decimals` places to `text`, without exponent, negative zero or trailing
/// zeros.
pub(super) fn push(text: &mut String, count: i64, decimals: u32) {
    const ZERO: u8 = b'0';
    if count == 0 {
        return text.push('0');
    }
    let mut digits = [ZERO; 24];
    let mut first = digits.len();
    let mut rest = count.unsigned_abs();
    while rest > 0 {
        first -= 1;
        digits[first] = ZERO + (rest % 10) as u8;
        rest /= 10;
    }
    let point = digits.len() - decimals as usize;
    let end = (point..digits.len()).rev().find(|&i| digits[i] != ZERO).map_or(point, |i| i + 1);
    if count < 0 {
        text.push('-');
    }
    let mut append = |part: &[u8]| part.iter().for_each(|&digit| text.push(char::from(digit)));
    append(&digits[first.min(point - 1)..point]);
    if end > point {
        append(b".");
        append(&digits[point..end]);
    }
}

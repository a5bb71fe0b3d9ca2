//! Drilling: the cycles G81 to G83 (NISTIR 6556, 3.5.16).

use super::block::{Codes, wrong};
use super::interpret::{Controller, Plane};
use super::moves::position;
use super::program::What;
use crate::error::Error;

/// How far above the hole's bottom the rapid back into it ends, in mm (0.010 in).
const BACK_OFF: f64 = 0.254;

/// More than this many pecks or repeats are a slip of the pen.
const MOST: f64 = 10_000.0;

/// The numbers that stay in force from one hole to the next, in mm and seconds.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Hole {
    /// Whether they were given from zero.
    absolute: Option<bool>,
    level: Option<f64>,
    bottom: Option<f64>,
    dwell: Option<f64>,
    peck: Option<f64>,
}

/// One hole to drill: levels from the program's zero, in mm.
struct Depths {
    level: f64,
    bottom: f64,
    clear: f64,
    peck: f64,
    feed: f64,
}

impl Controller<'_> {
    /// G81, G82 (with a dwell) and G83 (in pecks), `code` times ten, L times.
    pub(super) fn drill(&mut self, code: u16, codes: &mut Codes) -> Result<(), Error> {
        if self.arc_plane() != Plane::Xy {
            return Err(wrong("drilling is read in the XY plane only"));
        }
        if self.in_inverse_time() {
            return Err(wrong("drilling in inverse time (G93) has no feed"));
        }
        self.program.motion_blocks += 1;
        let repeats = codes.count(b'L')?.unwrap_or(1);
        if repeats == 0 || f64::from(repeats) > MOST {
            return Err(wrong(format!("L{repeats} is not a number of holes from 1 to {MOST}")));
        }
        let depths = self.depths(code, codes)?;
        let first = self.program.toolpath.moves.len();
        let step = if self.is_absolute() { None } else { Some(self.step(codes)) };
        let [mut x, mut y] = self.hole_xy(codes)?;
        self.level_up(depths.level);
        for k in 0..repeats {
            if let (Some((dx, dy)), true) = (step, k > 0) {
                (x, y) = (x + dx, y + dy);
            }
            self.rapid_to([Some(x), Some(y), self.at[2]]);
            self.hole(&depths, code);
        }
        let moves = first..self.program.toolpath.moves.len();
        self.happens(What::Drilling { moves });
        Ok(())
    }

    /// Where the hole is; the Z word is the hole's bottom and does not count.
    fn hole_xy(&mut self, codes: &mut Codes) -> Result<[f64; 2], Error> {
        let z = self.at[2];
        let mut to = self.target(codes)?;
        to[2] = z;
        let to = position(to).ok_or_else(|| {
            let what = "a drilling cycle starts from a place that the program has not stated";
            wrong(what).remedy("state X, Y and Z before it")
        })?;
        Ok([to.xy.x, to.xy.y])
    }

    /// The distance from one hole to the next, for repeats by increments.
    fn step(&mut self, codes: &mut Codes) -> (f64, f64) {
        let unit = self.unit().mm();
        (codes.value(b'X').unwrap_or(0.0) * unit, codes.value(b'Y').unwrap_or(0.0) * unit)
    }

    /// The levels of the line, with those that stay in force.
    fn depths(&mut self, code: u16, codes: &mut Codes) -> Result<Depths, Error> {
        let unit = self.unit().mm();
        let hole = self.hole;
        let absolute = self.is_absolute();
        let restated = codes.has(b'R') && codes.has(b'Z');
        if !restated && hole.absolute.is_some_and(|was| was != absolute) {
            let what = "G90 or G91 came between the cycle's R and Z and this hole";
            return Err(wrong(what).remedy("controllers differ in what they mean now: state R and Z again"));
        }
        self.hole = Hole {
            absolute: Some(absolute),
            level: codes.value(b'R').map(|r| r * unit).or(hole.level),
            bottom: codes.value(b'Z').map(|z| z * unit).or(hole.bottom),
            dwell: if code == 820 { codes.value(b'P').or(hole.dwell) } else { None },
            peck: if code == 830 { codes.value(b'Q').map(|q| q * unit).or(hole.peck) } else { None },
        };
        let need =
            |number: Option<f64>, letter| number.ok_or_else(|| wrong(format!("the cycle needs {letter}")));
        let (level, bottom) = (need(self.hole.level, "R")?, need(self.hole.bottom, "Z")?);
        let start = need(self.at[2], "a stated height to start from")?;
        let (level, bottom) = if absolute {
            (level + self.offset(2), bottom + self.offset(2))
        } else {
            (start + level, start + level + bottom)
        };
        let peck = if code == 830 { need(self.hole.peck, "Q")? } else { level - bottom };
        if code == 820 {
            need(self.hole.dwell.filter(|p| *p >= 0.0), "a P from zero")?;
        }
        if bottom > level {
            return Err(wrong("the bottom Z of the cycle is above its level R"));
        }
        if bottom < level && (peck <= 0.0 || (level - bottom) / peck > MOST) {
            return Err(wrong("Q is not a depth that reaches the bottom"));
        }
        let back_to_start = self.back_to_start.unwrap_or_else(|| {
            self.assume("cycles end at the height where they began (G98)");
            *self.back_to_start.insert(true)
        });
        let clear = if back_to_start { start.max(level) } else { level };
        Ok(Depths { level, bottom, clear, peck, feed: self.feed.unwrap_or(0.0) })
    }

    /// Up to the level, when the cutter is below it.
    fn level_up(&mut self, level: f64) {
        if self.at[2].is_some_and(|z| z < level) {
            self.rapid_to([self.at[0], self.at[1], Some(level)]);
        }
    }

    /// One hole, where the cutter stands.
    fn hole(&mut self, depths: &Depths, code: u16) {
        let [x, y, _] = self.at;
        let at = |z| [x, y, Some(z)];
        self.rapid_to(at(depths.level));
        let mut depth = depths.level;
        while depth > depths.bottom {
            let next = (depth - depths.peck).max(depths.bottom);
            self.straight([false, false, true], at(next), Some(depths.feed));
            if next > depths.bottom {
                self.rapid_to(at(depths.level));
                self.rapid_to(at((next + BACK_OFF).min(depths.level)));
            }
            depth = next;
        }
        if code == 820 {
            let seconds = self.dwell_seconds(self.hole.dwell);
            self.happens(What::Dwell { seconds });
        }
        self.rapid_to(at(depths.clear));
    }

    /// A rapid to a stated place.
    fn rapid_to(&mut self, to: [Option<f64>; 3]) {
        let moved = std::array::from_fn(|axis| self.at[axis] != to[axis]);
        self.straight(moved, to, None);
    }
}

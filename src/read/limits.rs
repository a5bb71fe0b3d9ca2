//! How large a drawing may be. What is larger is a slip or an attack far more often than a drawing.

use crate::error::{Error, Kind};
use crate::sketch::Sketch;

/// What a drawing may hold at most: 256 MiB of file, 200 000 contours, 5 000 000 vertices, or so many times that.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Limits {
    times: f64,
}

impl Default for Limits {
    fn default() -> Self {
        Self::times(None)
    }
}

const BYTES: f64 = 268_435_456.0;
const CONTOURS: f64 = 200_000.0;
const VERTICES: f64 = 5_000_000.0;

impl Limits {
    /// So many times the usual limits; once for `None`.
    pub fn times(times: Option<f64>) -> Self {
        Self { times: times.unwrap_or(1.0) }
    }

    /// Bytes of a file.
    pub fn bytes(self) -> u64 {
        (BYTES * self.times) as u64
    }

    /// Refuses a sketch that is larger.
    pub(super) fn hold(self, sketch: &Sketch) -> Result<(), Error> {
        let vertices: usize = sketch.contours.iter().map(|contour| contour.path.vertices.len()).sum();
        for (count, most, what) in
            [(sketch.contours.len(), CONTOURS, "contours"), (vertices, VERTICES, "vertices")]
        {
            let most = most * self.times;
            if count as f64 > most {
                let flaw = format!("the drawing has {count} {what}, and {most:.0} is the limit");
                return Err(Error::new(Kind::Input, flaw).remedy(WAY_OUT));
            }
        }
        Ok(())
    }
}

/// What to do about a file that is too large.
pub const WAY_OUT: &str = "split it, or raise the limits with --size-limit 4 if memory and time allow";

//! Where asking for more accuracy begins to cost much.

use serde::Serialize;

use super::Row;

/// The tolerance from which on less accuracy saves little.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Knee {
    /// The tolerance in mm.
    pub tolerance_mm: f64,
    /// What is saved on either side of it, in one sentence without a full stop.
    pub reason: String,
}

/// A bend of less than this is none, in powers of the tolerance.
const LEAST_BEND: f64 = 0.5;

/// A tolerance in mm and the blocks at it.
type Point = (f64, f64);

impl Knee {
    /// The knee of the blocks over the tolerances: where the curve, both ways in logarithms, bends most from steep to
    /// flat. `None` where it bends nowhere by much.
    pub fn of(rows: &[Row]) -> Option<Self> {
        let point = |row: &Row| Some((row.tolerance_mm, row.program?.motion_blocks as f64));
        let points: Vec<Point> = rows.iter().filter_map(point).collect();
        let bend = |three: &&[Point]| slope(three[1], three[2]) - slope(three[0], three[1]);
        let knee = points.windows(3).max_by(|a, b| bend(a).total_cmp(&bend(b)))?;
        if bend(&knee) < LEAST_BEND {
            return None;
        }
        let reason = format!(
            "below it, twice the tolerance {}; above it, it {}",
            effect(slope(knee[0], knee[1])),
            effect(slope(knee[1], knee[2]))
        );
        Some(Self { tolerance_mm: knee[1].0, reason })
    }
}

/// The power of the tolerance that the blocks go with from one point to another; below zero where they get fewer.
fn slope(from: Point, to: Point) -> f64 {
    (to.1 / from.1).ln() / (to.0 / from.0).ln()
}

/// What doubling the tolerance does to the blocks.
fn effect(slope: f64) -> String {
    let change = 100.0 * (2_f64.powf(slope) - 1.0);
    match change {
        ..=-0.5 => format!("saves {:.0} % of the blocks", -change),
        0.5.. => format!("costs {change:.0} % more blocks"),
        _ => "saves no blocks".into(),
    }
}

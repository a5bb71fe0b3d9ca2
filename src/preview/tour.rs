//! The program's moves sorted by what they do.

use crate::toolpath::Move;

/// What a move does.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// Travels by rapid.
    Rapid,
    /// Goes at feed above the stock.
    Above,
    /// Goes straight down into the stock.
    Plunge,
    /// Goes down along the way.
    Ramp,
    /// Cuts at the depth of its pass.
    Cut,
    /// Climbs over, crosses or leaves a tab.
    Tab,
    /// Rises straight up at feed.
    Lift,
}

impl Kind {
    /// The kind in words.
    pub fn words(self) -> &'static str {
        match self {
            Self::Rapid => "rapid",
            Self::Above => "above the stock",
            Self::Plunge => "plunge",
            Self::Ramp => "ramp",
            Self::Cut => "cut",
            Self::Tab => "over a tab",
            Self::Lift => "lift",
        }
    }

    /// All kinds, in the order of their numbers in the page's data.
    pub(super) const ALL: [Self; 7] =
        [Self::Rapid, Self::Above, Self::Plunge, Self::Ramp, Self::Cut, Self::Tab, Self::Lift];

    /// True for a move along a pass.
    pub(super) fn is_pass(self) -> bool {
        matches!(self, Self::Cut | Self::Tab)
    }
}

/// A move's kind, and the pass that it belongs to.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Stage {
    /// What it does.
    pub kind: Kind,
    /// The number of its pass, from 0, for a move along one.
    pub pass: Option<usize>,
    /// The lowest height of the cutter since it entered the stock.
    pub floor: f64,
}

/// The stage of every move, with the stock's top at the height `top`. A pass is a run of moves that go no deeper than the
/// first of them.
pub(super) fn stages(moves: &[Move], top: f64) -> Vec<Stage> {
    let mut stages = Vec::with_capacity(moves.len());
    let (mut floor, mut passes, mut open) = (f64::INFINITY, 0, false);
    for m in moves {
        let inside = m.from.z.min(m.to.z) < top;
        if m.is_rapid() || !inside {
            (floor, open) = (f64::INFINITY, false);
            let kind = if m.is_rapid() { Kind::Rapid } else { Kind::Above };
            stages.push(Stage { kind, pass: None, floor });
            continue;
        }
        let (deeper, along) = (m.to.z < floor.min(m.from.z), m.from.xy != m.to.xy);
        floor = floor.min(m.from.z).min(m.to.z);
        let kind = match (deeper, along) {
            (true, true) => Kind::Ramp,
            (true, false) => Kind::Plunge,
            (false, false) => Kind::Lift,
            (false, true) if m.from.z.max(m.to.z) > floor => Kind::Tab,
            (false, true) => Kind::Cut,
        };
        passes += usize::from(kind.is_pass() && !open);
        open = open && !deeper || kind.is_pass();
        let pass = kind.is_pass().then(|| passes - 1);
        stages.push(Stage { kind, pass, floor });
    }
    stages
}

/// Moves where the cutter enters the stock after travelling by rapid, one each: the number of the travelling rapid, from
/// which the program can be taken up again.
pub(super) fn restarts(moves: &[Move], stages: &[Stage]) -> Vec<usize> {
    let mut restarts = Vec::new();
    let mut travelled = None;
    for (i, (m, stage)) in moves.iter().zip(stages).enumerate() {
        match stage.kind {
            Kind::Rapid if m.from.xy != m.to.xy => travelled = Some(i),
            Kind::Rapid | Kind::Above => travelled = travelled.or(Some(i)),
            _ => restarts.extend(travelled.take()),
        }
    }
    restarts
}

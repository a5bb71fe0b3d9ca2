//! One thing that is wrong with a drawing: what, where, how much, and what the user can do.

use std::cmp::Ordering;
use std::fmt;

use kurbo::Point;

/// What sort of thing is wrong. In order of how much harm it does, worst first.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum FlawKind {
    /// Two parts of the drawing cross.
    Crossing,
    /// A contour is open by a gap that is small beside its length.
    NearlyClosed,
    /// Three or more ends meet at a point.
    Junction,
    /// Two contours run over the same line.
    Overlap,
    /// A contour turns back on itself.
    Spike,
    /// A line or contour was drawn again over another; the second was removed.
    Duplicate,
    /// A part of a line was drawn again over another; that part was removed.
    PartDuplicate,
    /// A gap between two ends was closed.
    Gap,
    /// A contour without any length was dropped.
    NoLength,
}

/// One thing that is wrong with a drawing.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Flaw {
    /// What sort.
    pub kind: FlawKind,
    /// The contour's number in the drawing, from 1.
    pub contour: usize,
    /// The vertex of that contour, from 1, at which or after which the flaw stands.
    pub vertex: usize,
    /// Where, in mm, in the drawing's coordinates.
    pub at: Point,
    /// How large: in mm the gap, the length that is doubled, the length of the spike; of a junction, how many ends
    /// meet; 0 where nothing is to be measured.
    pub size: f64,
    /// The other contour that has a part in it.
    pub other: Option<usize>,
}

impl FlawKind {
    /// The flaw's name in the report.
    pub fn name(self) -> &'static str {
        match self {
            Self::Crossing => "crossing",
            Self::NearlyClosed => "nearly closed",
            Self::Junction => "junction",
            Self::Overlap => "overlap",
            Self::Spike => "spike",
            Self::Duplicate => "duplicate",
            Self::PartDuplicate => "part duplicate",
            Self::Gap => "gap",
            Self::NoLength => "no length",
        }
    }
}

impl Flaw {
    /// What is wrong: what a sentence says of the contour, without the place and the full stop.
    pub fn what(&self) -> String {
        let size = self.size;
        let other = self.other.filter(|&o| o != self.contour);
        let with = |word: &str, alone: &str| match other {
            Some(o) => format!("{word} contour {o}"),
            None => alone.to_string(),
        };
        match self.kind {
            FlawKind::Crossing => with("crosses", "crosses itself"),
            FlawKind::NearlyClosed => format!("is open: its ends are {size:.3} mm apart"),
            FlawKind::Junction => {
                format!("is one of {size:.0} ends that meet; the straightest pairs were joined")
            }
            FlawKind::Overlap => {
                format!("runs over {} for {size:.3} mm", with("", "itself").trim_start())
            }
            FlawKind::Spike => format!("turns back on itself for {size:.3} mm"),
            FlawKind::Duplicate => {
                format!("is drawn over {} ({size:.3} mm); removed", with("", "itself").trim_start())
            }
            FlawKind::PartDuplicate => {
                format!(
                    "is drawn over {} for {size:.3} mm; that part removed",
                    with("", "itself").trim_start()
                )
            }
            FlawKind::Gap => format!("had a gap of {size:.3} mm{}; closed", with(" to", "")),
            FlawKind::NoLength => "has no length; dropped".to_string(),
        }
    }

    /// What the user can do, in a sentence without its full stop.
    pub fn remedy(&self) -> String {
        match self.kind {
            FlawKind::Crossing => {
                "redraw it without the crossing, or cut it on the line: a contour that crosses has no inside"
                    .into()
            }
            FlawKind::NearlyClosed => format!(
                "close it in the drawing, or pass --join {}mm if the gap is a slip; open, it has no inside to cut",
                rounded_up(self.size)
            ),
            FlawKind::Junction => "take away the lines that do not belong to the outline".into(),
            FlawKind::Overlap => "draw the shared line once, or the cutter passes there twice".into(),
            FlawKind::Spike => "take away the point at its tip, unless a cut out and back is meant".into(),
            FlawKind::Duplicate | FlawKind::PartDuplicate => {
                "nothing need be done; delete the second line to be rid of this note".into()
            }
            FlawKind::Gap => {
                "look whether these ends belong together; a smaller --join leaves them apart".into()
            }
            FlawKind::NoLength => "draw a hole to be drilled as a circle; delete stray points".into(),
        }
    }
}

/// `mm` rounded up to the third decimal, so that a length typed from a message is enough.
fn rounded_up(mm: f64) -> f64 {
    (mm * 1e3).ceil() / 1e3
}

impl fmt::Display for Flaw {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "contour {} at vertex {} ", self.contour, self.vertex)?;
        write!(f, "(X {:.3} Y {:.3}) {}\n  {}", self.at.x, self.at.y, self.what(), self.remedy())
    }
}

/// Sorts by kind, then the largest first, then by place in the drawing.
pub fn worst_first(flaws: &mut [Flaw]) {
    flaws.sort_by(|a, b| {
        let size = |a: &Flaw, b: &Flaw| b.size.partial_cmp(&a.size).unwrap_or(Ordering::Equal);
        a.kind.cmp(&b.kind).then(size(a, b)).then((a.contour, a.vertex).cmp(&(b.contour, b.vertex)))
    });
}

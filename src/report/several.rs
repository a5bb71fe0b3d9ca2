//! One report of several programs, each for a cutter of its own.

use super::{AsDrawn, Check, CutterProgram, Program, Report, Setup};

impl Report {
    /// The report of a job whose programs have the reports `each`, in the order in which they are run: sums and worst
    /// values, and each program by itself. One program's report is the job's; nothing for none.
    pub fn together(each: &[Self]) -> Option<Self> {
        let (first, rest) = each.split_first()?;
        if rest.is_empty() {
            return Some(first.clone());
        }
        let mut whole = rest.iter().fold(first.clone(), |whole, one| Self {
            contours: [whole.contours, one.contours.clone()].concat(),
            setup: whole.setup.with(&one.setup),
            program: whole.program.with(&one.program),
            check: whole.check.with(&one.check),
            ..whole
        });
        whole.contours.sort_by_key(|contour| contour.id);
        whole.program.parts = each.iter().flat_map(|one| one.program.files()).collect();
        whole.programs = each.iter().map(Self::of_cutter).collect();
        Some(whole)
    }

    fn of_cutter(&self) -> CutterProgram {
        CutterProgram {
            contours: self.contours.iter().map(|contour| contour.id).collect(),
            setup: self.setup.clone(),
            program: self.program.clone(),
            check: self.check.clone(),
        }
    }
}

/// `one` where both say the same, else "by layer".
fn shared(one: String, other: &str) -> String {
    if one == other { one } else { "by layer".into() }
}

impl Setup {
    fn with(self, other: &Self) -> Self {
        let (a, b) = (self.extents_mm, other.extents_mm);
        let reach = |i: usize| if i < 3 { a[i].min(b[i]) } else { a[i].max(b[i]) };
        let direction = match (self.direction, &other.direction) {
            (Some(one), Some(other)) => Some(shared(one, other)),
            (one, other) => one.or(other.clone()),
        };
        Self {
            bed_cut_mm: self.bed_cut_mm.zip(other.bed_cut_mm).map(|(one, other)| one.max(other)),
            extents_mm: std::array::from_fn(reach),
            cutter_mm: self.cutter_mm.max(other.cutter_mm),
            side: shared(self.side, &other.side),
            direction,
            depth_mm: self.depth_mm.max(other.depth_mm),
            passes: self.passes.max(other.passes),
            feed_mm_min: self.feed_mm_min.max(other.feed_mm_min),
            plunge_mm_min: self.plunge_mm_min.max(other.plunge_mm_min),
            spindle_rpm: self.spindle_rpm.max(other.spindle_rpm),
            ..self
        }
    }
}

impl Program {
    /// The files that stand for it.
    fn files(&self) -> Vec<super::Part> {
        let whole = super::Part { file: self.file.clone(), blocks: self.blocks, bytes: self.bytes };
        if self.parts.is_empty() { vec![whole] } else { self.parts.clone() }
    }

    fn with(self, other: &Self) -> Self {
        let cut_time_s = self.cut_time_s + other.cut_time_s;
        let way = self.mean_mm_min * self.cut_time_s + other.mean_mm_min * other.cut_time_s;
        Self {
            blocks: self.blocks + other.blocks,
            motion_blocks: self.motion_blocks + other.motion_blocks,
            bytes: self.bytes + other.bytes,
            cut_length_mm: self.cut_length_mm + other.cut_length_mm,
            rapid_length_mm: self.rapid_length_mm + other.rapid_length_mm,
            time_s: self.time_s + other.time_s,
            cut_time_s,
            starved_blocks: self.starved_blocks + other.starved_blocks,
            mean_mm_min: if cut_time_s > 0.0 { way / cut_time_s } else { 0.0 },
            slowest_mm_min: self.slowest_mm_min.min(other.slowest_mm_min),
            restarts: [self.restarts, other.restarts.clone()].concat(),
            highest_override: self.highest_override.min(other.highest_override),
            as_drawn: self.as_drawn.with(&other.as_drawn),
            ..self
        }
    }
}

impl AsDrawn {
    fn with(self, other: &Self) -> Self {
        Self {
            motion_blocks: self.motion_blocks + other.motion_blocks,
            time_s: self.time_s + other.time_s,
            cut_time_s: self.cut_time_s + other.cut_time_s,
            starved_blocks: self.starved_blocks + other.starved_blocks,
        }
    }
}

impl Check {
    fn with(mut self, other: &Self) -> Self {
        self.holds &= other.holds;
        self.deviation_mm = match (self.deviation_mm, other.deviation_mm) {
            (Some(one), Some(other)) => Some(one.max(other)),
            _ => None,
        };
        self.claims.extend(other.claims.iter().cloned());
        let unsaid = other.not_checked.iter().filter(|said| !self.not_checked.contains(said));
        self.not_checked = self.not_checked.iter().chain(unsaid).cloned().collect();
        self
    }
}

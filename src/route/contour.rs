//! One contour's moves: down to each pass, along it, and out.

use kurbo::{Point, Vec2};

use crate::geom::Span;
use crate::job::Entry;

use super::course::Course;
use super::cut::Cut;
use super::profile::Profile;
use super::tabs::Placed;
use super::track::Track;

/// A ramp that would go to and fro more often than this on its contour gives way to a plunge.
const MOST_RAMP_TURNS: f64 = 40.0;

/// A circle that the cutter can run on the waste side, tangent to the track at its start.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lead {
    /// Its radius, in mm.
    pub radius_mm: f64,
    /// True when it is on the left of the track.
    pub left: bool,
    /// True when the whole circle is free; else only the two quarters next to the start.
    pub whole: bool,
}

/// A contour as it is cut: its track and what goes with it.
pub(super) struct Job<'a> {
    pub(super) track: Track,
    pub(super) cut: &'a Cut,
    pub(super) tabs: Option<Placed>,
    pub(super) lead: Option<Lead>,
}

/// Consecutive passes: the height to begin from and the heights to cut at, going down.
pub(super) struct Levels {
    pub(super) from: f64,
    pub(super) levels: Vec<f64>,
}

impl Job<'_> {
    /// Cuts some passes, from a rapid to the start to a retract.
    pub(super) fn cut(&self, course: &mut Course, passes: &Levels) {
        course.spin(self.cut.spindle_rpm);
        match (self.track.is_closed(), self.entry(passes)) {
            (false, Entry::Plunge) => self.to_and_fro(course, passes, false),
            (false, _) => self.to_and_fro(course, passes, true),
            (true, Entry::Plunge) => self.plunged(course, passes),
            (true, Entry::Ramp) => self.ramped(course, passes),
            (true, Entry::Helix) => self.spiralled(course, passes),
        }
        course.retract();
    }

    /// The entry that there is room for.
    fn entry(&self, passes: &Levels) -> Entry {
        let whole_lead = self.lead.is_some_and(|lead| lead.whole);
        let deepest = passes.steps().map(|(above, z)| above - z).fold(0.0, f64::max);
        let turns = self.cut.ramp_length(deepest) / self.track.length();
        match self.cut.entry {
            Entry::Helix if whole_lead && self.track.is_closed() => Entry::Helix,
            Entry::Ramp | Entry::Helix if turns <= MOST_RAMP_TURNS => Entry::Ramp,
            _ => Entry::Plunge,
        }
    }

    /// A profile raised over the tabs between two ways.
    fn over_tabs(&self, profile: Profile, (from, to): (f64, f64)) -> Profile {
        match &self.tabs {
            Some(tabs) => profile.over(&tabs.profile(&self.track, from, to)),
            None => profile,
        }
    }

    /// Once round at one height.
    fn round(&self, course: &mut Course, from: f64, z: f64) {
        let ways = (from, from + self.track.length());
        course.follow(&self.track, ways, &self.over_tabs(Profile::level(z), ways), self.cut);
    }

    /// Straight down at the start, once round, for every pass; in and out on the lead where there is one.
    fn plunged(&self, course: &mut Course, passes: &Levels) {
        let lead = self.lead.map(|lead| Arcs::new(lead, &self.track));
        let start = self.track.place(0.0);
        course.travel_to(lead.as_ref().map_or(start, |lead| lead.into.start));
        for &z in &passes.levels {
            if let Some(lead) = &lead {
                course.line_to(lead.into.start, self.cut);
            }
            course.height_to(z, self.cut);
            lead.iter().for_each(|lead| course.along(lead.into, z, self.cut));
            self.round(course, 0.0, z);
            lead.iter().for_each(|lead| course.along(lead.out, z, self.cut));
        }
    }

    /// Down along the contour and once round, pass by pass without leaving it; the ramps begin so far ahead that the
    /// last round ends at the start.
    fn ramped(&self, course: &mut Course, passes: &Levels) {
        let ways: Vec<f64> = passes.steps().map(|(above, z)| self.cut.ramp_length(above - z)).collect();
        let ahead: f64 = ways.iter().sum();
        let reach = 2.0 * course.step_mm();
        let mut s = self.track.at_joint(-ahead, reach);
        let ahead = -s;
        let mut done = 0.0;
        let begin = self.over_tabs(Profile::level(passes.from), (s, s)).at(s);
        course.travel_to(self.track.place(s));
        course.height_to(begin, self.cut);
        for ((above, z), way) in passes.steps().zip(&ways) {
            done += way;
            let to = if *way == 0.0 {
                s
            } else {
                self.track.at_joint(self.rounds(passes, z) - ahead + done, reach)
            };
            if to > s {
                let ramp = Profile::through(vec![(s, above), (to, z)]);
                course.follow(&self.track, (s, to), &self.over_tabs(ramp, (s, to)), self.cut);
            }
            self.round(course, to, z);
            s = to + self.track.length();
        }
        // Below the first pass the way out runs through material that no pass has cut.
        if passes.levels.len() == 1 {
            self.lead_out(course);
        }
    }

    /// The length of all rounds before the pass at `z`.
    fn rounds(&self, passes: &Levels, z: f64) -> f64 {
        let before = passes.levels.iter().filter(|&&level| level > z).count();
        self.track.length() * before as f64
    }

    /// Down on the lead's circle, once round, for every pass.
    fn spiralled(&self, course: &mut Course, passes: &Levels) {
        let Some(lead) = self.lead else { return };
        course.travel_to(self.track.place(0.0));
        course.height_to(passes.from, self.cut);
        let circle = Arcs::new(lead, &self.track).circle();
        for (above, z) in passes.steps() {
            let way = self.cut.ramp_length(above - z);
            let turns = (way / (2.0 * circle[0].length())).ceil().max(1.0) as usize;
            for k in 0..2 * turns {
                let share = (k + 1) as f64 / (2 * turns) as f64;
                let to = if k + 1 == 2 * turns { z } else { above + (z - above) * share };
                course.along(circle[k % 2], to, self.cut);
            }
            self.round(course, 0.0, z);
        }
        self.lead_out(course);
    }

    /// Out on the lead, from the start.
    fn lead_out(&self, course: &mut Course) {
        if let Some(lead) = self.lead {
            let out = Arcs::new(lead, &self.track).out;
            let z = course.height();
            course.along(out, z, self.cut);
        }
    }

    /// An open contour: along it and, on the next pass, back. A ramp goes down to and fro at the end where it begins.
    fn to_and_fro(&self, course: &mut Course, passes: &Levels, ramped: bool) {
        let back = self.track.reversed();
        course.travel_to(self.track.place(0.0));
        course.height_to(passes.from, self.cut);
        for (k, (above, z)) in passes.steps().enumerate() {
            let (track, other) = if k % 2 == 0 { (&self.track, &back) } else { (&back, &self.track) };
            let length = track.length();
            if ramped {
                self.zigzag(course, (track, other), (above, z));
            }
            course.height_to(z, self.cut);
            course.follow(track, (0.0, length), &Profile::level(z), self.cut);
        }
    }

    /// Down from one height to another to and fro at the start of an open track; `other` is the track reversed.
    fn zigzag(&self, course: &mut Course, (track, other): (&Track, &Track), (above, z): (f64, f64)) {
        let length = track.length();
        let way = self.cut.ramp_length(above - z);
        let window = track.at_joint(length.min(way / 2.0), 2.0 * course.step_mm());
        let turns = (way / (2.0 * window)).ceil().max(1.0) as usize;
        for turn in 0..turns {
            let share = |half: usize| half as f64 / (2 * turns) as f64;
            let height = |half| if half == 2 * turns { z } else { above + (z - above) * share(half) };
            let (top, middle, low) = (height(2 * turn), height(2 * turn + 1), height(2 * turn + 2));
            let out = Profile::through(vec![(0.0, top), (window, middle)]);
            course.follow(track, (0.0, window), &out, self.cut);
            let home = Profile::through(vec![(length - window, middle), (length, low)]);
            course.follow(other, (length - window, length), &home, self.cut);
        }
    }

    /// One pass at full depth beside a rough cut that is done: down within the rough cut, across, round, and back.
    pub(super) fn finish(&self, course: &mut Course, rough: &Track, z: f64) {
        let start = self.track.place(0.0);
        let beside = rough.place(rough.way_of(start));
        course.travel_to(beside);
        course.height_to(z, self.cut);
        course.line_to(start, self.cut);
        self.round(course, 0.0, z);
        course.line_to(beside, self.cut);
        course.retract();
    }
}

impl Levels {
    /// Each pass with the height that it goes down from.
    fn steps(&self) -> impl Iterator<Item = (f64, f64)> + Clone + '_ {
        std::iter::once(self.from).chain(self.levels.iter().copied()).zip(self.levels.iter().copied())
    }
}

/// The lead's arcs at a track's start.
struct Arcs {
    into: Span,
    out: Span,
    opposite: Point,
}

impl Arcs {
    fn new(lead: Lead, track: &Track) -> Self {
        let (start, heading) = (track.place(0.0), track.heading());
        let side = if lead.left { 1.0 } else { -1.0 };
        let across = Vec2::new(-heading.y, heading.x) * side * lead.radius_mm;
        let centre = start + across;
        let along = heading * lead.radius_mm;
        let quarter = (std::f64::consts::PI / 8.0).tan() * side;
        Self {
            into: Span::arc(centre - along, start, quarter),
            out: Span::arc(start, centre + along, quarter),
            opposite: centre + across,
        }
    }

    /// The whole circle from the start to the start, in two halves.
    fn circle(&self) -> [Span; 2] {
        let half = self.out.bulge.signum();
        [Span::arc(self.out.start, self.opposite, half), Span::arc(self.opposite, self.out.start, half)]
    }
}

/// A hole of the cutter's own size, drilled in pecks: up to the clearance height after each, so that chips come out.
pub(super) fn drill(course: &mut Course, at: Point, cut: &Cut) {
    course.spin(cut.spindle_rpm);
    course.travel_to(at);
    let top = course.heights().top;
    for depth in cut.passes() {
        course.height_to(top - depth, cut);
        course.retract();
    }
}

//! How widely the search looks about.

/// How much time a fit may take.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Pace {
    /// About a hundred microseconds for each vertex: the fewest spans.
    Thorough,
    /// A few microseconds for each vertex, with a tenth more spans or so: for drawings of very many vertices.
    Brisk,
}

impl Pace {
    /// What is tried first, and what where that fails.
    pub(super) fn efforts(self) -> (Effort, &'static [Effort]) {
        match self {
            Self::Thorough => (Effort::FULL, &[Effort::POINT_BY_POINT]),
            Self::Brisk => (Effort::BRISK, &[Effort::FULL]),
        }
    }
}

/// What the search looks at, keeps and tries.
#[derive(Clone, Copy, Debug)]
pub(super) struct Effort {
    /// Longest group of points of which only the outermost become beads, in tolerances.
    pub(super) group: f64,
    /// How many states of a level go on by a tangent arc.
    pub(super) tangent: usize,
    /// How many states of a level may turn a corner.
    pub(super) corner: usize,
    /// How many states of a level are kept for the straight path behind them.
    pub(super) lines: usize,
    /// How many ends of a level are refined.
    pub(super) refined: usize,
    /// How often the steps of refinement are halved.
    pub(super) halvings: usize,
    /// How many beads of a reach are tried as its end.
    pub(super) ends: usize,
    /// Places in the fan at a bead that are tried, from the lowest curvature to the highest.
    pub(super) places: &'static [f64],
    /// How many places to start from are tried on a closed trace.
    pub(super) tries: usize,
    /// How often the search is repeated before spans that stray are given up.
    pub(super) attempts: usize,
    /// True where another search is not worth its time for the few spans given up.
    pub(super) gives_up: bool,
}

impl Effort {
    /// Everything that was found to save spans.
    pub(super) const FULL: Self = Self {
        group: 3.0,
        tangent: 48,
        corner: 6,
        lines: 8,
        refined: 24,
        halvings: 8,
        ends: 12,
        places: &[0.0, 0.25, 0.5, 0.75, 1.0],
        tries: 3,
        attempts: 8,
        gives_up: false,
    };
    /// The same with every point a bead.
    const POINT_BY_POINT: Self = Self { group: 0.0, ..Self::FULL };
    /// The least that seldom fails.
    pub(super) const BRISK: Self = Self {
        group: 5.0,
        tangent: 4,
        corner: 1,
        lines: 1,
        refined: 4,
        halvings: 5,
        ends: 4,
        places: &[0.2, 0.8],
        tries: 1,
        attempts: 4,
        gives_up: true,
    };

    /// For the run that only looks for a place to start from.
    pub(super) fn warming_up(self) -> Self {
        let least = |full: usize, part: usize| full.div_ceil(part);
        Self {
            tangent: least(self.tangent, 6),
            corner: least(self.corner, 3),
            lines: least(self.lines, 4),
            refined: least(self.refined, 6),
            halvings: least(2 * self.halvings, 3),
            ends: least(self.ends, 2),
            places: &[0.0, 0.5, 1.0],
            ..self
        }
    }
}

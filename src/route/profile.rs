//! Height as a function of the way along a contour: straight between breaks.

/// Breaks of a height profile: (way, height), the way rising; level beyond the ends.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Profile(Vec<(f64, f64)>);

impl Profile {
    /// The same height everywhere.
    pub(super) fn level(z: f64) -> Self {
        Self(vec![(0.0, z)])
    }

    /// The profile with these breaks, in order of the way.
    pub(super) fn through(breaks: Vec<(f64, f64)>) -> Self {
        Self(breaks)
    }

    /// The height at `s`.
    pub(super) fn at(&self, s: f64) -> f64 {
        let after = self.0.partition_point(|&(way, _)| way < s);
        match (after.checked_sub(1).and_then(|i| self.0.get(i)), self.0.get(after)) {
            (Some(&(s0, z0)), Some(&(s1, z1))) => z0 + (z1 - z0) * ((s - s0) / (s1 - s0)),
            (Some(&(_, z)), None) | (None, Some(&(_, z))) => z,
            (None, None) => 0.0,
        }
    }

    /// The ways at which the slope breaks.
    pub(super) fn breaks(&self) -> impl Iterator<Item = f64> + '_ {
        self.0.iter().map(|&(s, _)| s)
    }

    /// The higher of two profiles everywhere.
    pub(super) fn over(&self, other: &Self) -> Self {
        let mut ways: Vec<f64> = self.breaks().chain(other.breaks()).collect();
        ways.sort_by(f64::total_cmp);
        ways.dedup();
        let crossings = ways.windows(2).filter_map(|pair| self.crossing(other, pair));
        let mut breaks: Vec<(f64, f64)> = crossings.collect();
        // A break of the lower one is none of both.
        breaks.extend(self.0.iter().filter(|&&(s, z)| z >= other.at(s)));
        breaks.extend(other.0.iter().filter(|&&(s, z)| z >= self.at(s)));
        breaks.sort_by(|a, b| a.0.total_cmp(&b.0));
        breaks.dedup();
        Self(breaks)
    }

    /// Where two profiles cross between two neighbouring breaks. Where one of them is level, the height is its own, free
    /// of rounding.
    fn crossing(&self, other: &Self, pair: &[f64]) -> Option<(f64, f64)> {
        let (s0, s1) = (pair[0], pair[1]);
        let (d0, d1) = (self.at(s0) - other.at(s0), self.at(s1) - other.at(s1));
        if d0 * d1 >= 0.0 {
            return None;
        }
        let s = s0 + (s1 - s0) * (d0 / (d0 - d1));
        let slope = |profile: &Self| (profile.at(s1) - profile.at(s0)).abs();
        Some((s, if slope(self) < slope(other) { self.at(s) } else { other.at(s) }))
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::float_cmp, reason = "halves and quarters are exact")]
    use super::Profile;

    #[test]
    fn the_higher_of_a_ramp_and_a_tab() {
        let ramp = Profile::through(vec![(0.0, 0.0), (8.0, -4.0)]);
        let tab = Profile::through(vec![(3.0, -4.0), (4.0, -1.0), (6.0, -1.0), (7.0, -4.0)]);
        let both = ramp.over(&tab);
        for k in 0..40 {
            let s = f64::from(k) / 4.0;
            let expected = ramp.at(s).max(tab.at(s));
            assert!((both.at(s) - expected).abs() < 1e-12, "at {s}: {} for {expected}", both.at(s));
        }
        assert_eq!((both.at(-5.0), both.at(5.0), both.at(99.0)), (0.0, -1.0, -4.0));
    }
}

//! How long the stages take.

use std::collections::BTreeMap;
use std::time::Instant;

/// The time each stage took, in milliseconds, by its name.
#[derive(Clone, Debug, Default)]
pub(super) struct Clock(BTreeMap<String, f64>);

impl Clock {
    /// Carries out a stage and notes its time.
    pub(super) fn time<T>(&mut self, stage: &str, work: impl FnOnce() -> T) -> T {
        let begun = Instant::now();
        let done = work();
        *self.0.entry(stage.to_owned()).or_default() += begun.elapsed().as_secs_f64() * 1e3;
        done
    }

    /// The times noted.
    pub(super) fn times(self) -> BTreeMap<String, f64> {
        self.0
    }
}

//! A bar on the terminal while long work goes on.

use std::io::IsTerminal;
use std::sync::Mutex;

use indicatif::{ProgressBar, ProgressStyle};

use crate::run::Progress;

/// Drawings with fewer vertices are done before a bar would be seen.
const LONG_WORK: usize = 20_000;

/// A bar on standard error; none where that is no terminal.
#[derive(Default)]
pub(super) struct Bar {
    bar: Mutex<Option<ProgressBar>>,
    quiet: bool,
}

impl Bar {
    /// A bar that shows itself once long work begins, unless `quiet`.
    pub(super) fn new(quiet: bool) -> Self {
        Self { bar: Mutex::new(None), quiet }
    }

    fn with_bar(&self, act: impl FnOnce(&mut Option<ProgressBar>)) {
        // A poisoned lock means that the work itself has failed: no bar is needed then.
        if let Ok(mut bar) = self.bar.lock() {
            act(&mut bar);
        }
    }
}

impl Progress for Bar {
    fn begin(&self, vertices: usize) {
        if self.quiet || vertices < LONG_WORK || !std::io::stderr().is_terminal() {
            return;
        }
        let bar = ProgressBar::new(vertices as u64);
        if let Ok(style) =
            ProgressStyle::with_template("{wide_bar} {human_pos} of {human_len} vertices, {eta} left")
        {
            bar.set_style(style);
        }
        self.with_bar(|shown| *shown = Some(bar));
    }

    fn done(&self, vertices: usize) {
        self.with_bar(|shown| {
            if let Some(bar) = shown {
                bar.inc(vertices as u64);
                if bar.length() == Some(bar.position()) {
                    bar.finish_and_clear();
                    *shown = None;
                }
            }
        });
    }
}

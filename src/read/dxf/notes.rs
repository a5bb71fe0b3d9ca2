//! What was left out of a DXF drawing or needs a word, counted while it is read.

use std::collections::BTreeMap;

use super::geometry::Remark;

/// Counts by name.
type Counts = BTreeMap<String, usize>;

/// The counts, told at the end as sentences.
#[derive(Debug, Default)]
pub(super) struct Notes {
    not_read: Counts,
    empty: Counts,
    hidden: Counts,
    unplotted: Counts,
    undefined: Counts,
    external: Counts,
    invisible: usize,
    paper: usize,
    sloped: usize,
    fitted: usize,
    unclosed: usize,
    /// Sentences that stand for themselves.
    pub(super) sentences: Vec<String>,
}

impl Notes {
    /// An entity of a kind that is no outline.
    pub(super) fn not_read(&mut self, kind: String) {
        *self.not_read.entry(kind).or_default() += 1;
    }

    /// An entity without length.
    pub(super) fn empty(&mut self, kind: &str) {
        count(&mut self.empty, kind);
    }

    /// An entity on a layer that is off or frozen.
    pub(super) fn hidden(&mut self, layer: &str) {
        count(&mut self.hidden, layer);
    }

    /// An entity that was read though its layer is left out of plots.
    pub(super) fn unplotted(&mut self, layer: &str) {
        count(&mut self.unplotted, layer);
    }

    /// An INSERT of a block that the file does not have.
    pub(super) fn undefined(&mut self, block: &str) {
        count(&mut self.undefined, block);
    }

    /// An INSERT of a block that stands in another file.
    pub(super) fn external(&mut self, block: &str) {
        count(&mut self.external, block);
    }

    /// An invisible entity.
    pub(super) fn invisible(&mut self) {
        self.invisible += 1;
    }

    /// An entity in paper space.
    pub(super) fn paper(&mut self) {
        self.paper += 1;
    }

    /// What is to be said of a chain that was read.
    pub(super) fn remark(&mut self, remark: Remark) {
        self.sloped += usize::from(remark.sloped);
        self.fitted += usize::from(remark.fitted);
        self.unclosed += usize::from(remark.unclosed);
    }

    /// All of it in sentences.
    pub(super) fn into_sentences(self) -> Vec<String> {
        let mut told = self.sentences;
        let mut tell = |counts: &Counts, sentence: &dyn Fn(&str, usize) -> String| {
            told.extend(counts.iter().map(|(name, &n)| sentence(name, n)));
        };
        tell(&self.not_read, &|kind, n| format!("{} not read", entities(n, kind)));
        tell(&self.empty, &|kind, n| format!("{} without length and not read", entities(n, kind)));
        tell(&self.hidden, &|layer, n| {
            format!("{} not read: layer “{layer}” is off or frozen", entities(n, ""))
        });
        tell(&self.unplotted, &|layer, n| {
            format!("{} read from layer “{layer}”, which is not plotted", entities(n, ""))
        });
        tell(&self.undefined, &|block, n| {
            format!("{} not read: the file has no block “{block}”", entities(n, "INSERT"))
        });
        tell(&self.external, &|block, n| {
            format!("{} not read: block “{block}” stands in another file", entities(n, "INSERT"))
        });
        let counted = [
            (self.invisible, "", "not read: marked invisible"),
            (self.paper, "", "not read: in paper space"),
            (self.sloped, "", "not level, and read as seen from above"),
            (self.fitted, "SPLINE", "given by fit points alone, and read as the cubic spline through them"),
            (self.unclosed, "SPLINE", "said to be closed, but left open: the ends do not meet"),
        ];
        let counted = counted.iter().filter(|(n, ..)| *n > 0);
        told.extend(counted.map(|&(n, kind, what)| format!("{} {what}", entities(n, kind))));
        told
    }
}

fn count(counts: &mut Counts, name: &str) {
    match counts.get_mut(name) {
        Some(n) => *n += 1,
        None => {
            counts.insert(name.to_owned(), 1);
        }
    }
}

/// "1 TEXT entity is", "2 TEXT entities are".
fn entities(n: usize, kind: &str) -> String {
    let blank = if kind.is_empty() { "" } else { " " };
    let noun = if n == 1 { "entity is" } else { "entities are" };
    format!("{n} {kind}{blank}{noun}")
}

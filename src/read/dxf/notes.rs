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
        let each = |counts: &Counts, told: &mut Vec<String>, tell: &dyn Fn(&str, usize) -> String| {
            told.extend(counts.iter().map(|(name, &n)| tell(name, n)));
        };
        each(&self.not_read, &mut told, &|kind, n| format!("{n} {kind} {} not read", verb(n)));
        each(&self.empty, &mut told, &|kind, n| format!("{n} {kind} without length {} not read", verb(n)));
        each(&self.hidden, &mut told, &|layer, n| {
            format!("{} on layer “{layer}”, which is off or frozen, {} not read", entities(n), verb(n))
        });
        each(&self.unplotted, &mut told, &|layer, n| {
            format!("{} on layer “{layer}”, which is not plotted, {} read all the same", entities(n), verb(n))
        });
        each(&self.undefined, &mut told, &|block, n| {
            format!("block “{block}” is not in the file: {n} INSERT of it {} not read", verb(n))
        });
        each(&self.external, &mut told, &|block, n| {
            format!("block “{block}” stands in another file: {n} INSERT of it {} not read", verb(n))
        });
        let counted: [(usize, &str); 5] = [
            (self.invisible, "marked invisible, not read"),
            (self.paper, "in paper space, not read"),
            (self.sloped, "not level: read as seen from above"),
            (
                self.fitted,
                "SPLINE of fit points alone: read as the cubic spline through them by chord length",
            ),
            (self.unclosed, "SPLINE said to be closed whose ends do not meet: left open"),
        ];
        let counted = counted.iter().filter(|(n, _)| *n > 0);
        told.extend(counted.map(|&(n, what)| format!("{} {what}", entities(n))));
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

fn entities(n: usize) -> String {
    format!("{n} {}", if n == 1 { "entity" } else { "entities" })
}

fn verb(n: usize) -> &'static str {
    if n == 1 { "is" } else { "are" }
}

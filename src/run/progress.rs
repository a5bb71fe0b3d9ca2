//! How far the long part of the work has come, for whoever watches.

/// Told how far the fitting has come. It works on many contours at once.
pub trait Progress: Sync {
    /// The fitting of so many vertices begins.
    fn begin(&self, vertices: usize);
    /// So many more of them are done.
    fn done(&self, vertices: usize);
}

/// Progress that nobody watches.
#[derive(Clone, Copy, Debug, Default)]
pub struct Unwatched;

impl Progress for Unwatched {
    fn begin(&self, _: usize) {}
    fn done(&self, _: usize) {}
}

//! fair: not built yet.

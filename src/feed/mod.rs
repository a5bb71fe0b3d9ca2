//! feed: not built yet.

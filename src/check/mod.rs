//! check: not built yet.

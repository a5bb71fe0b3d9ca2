//! job: not built yet.

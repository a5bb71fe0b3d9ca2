//! report: not built yet.

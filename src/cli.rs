//! cli: not built yet.

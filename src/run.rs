//! run: not built yet.

//! fit: not built yet.

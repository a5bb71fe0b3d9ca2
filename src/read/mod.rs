//! read: not built yet.

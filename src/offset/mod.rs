//! offset: not built yet.

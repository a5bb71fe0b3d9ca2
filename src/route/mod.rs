//! route: not built yet.

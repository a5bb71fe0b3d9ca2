//! clean: not built yet.

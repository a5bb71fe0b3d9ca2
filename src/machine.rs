//! machine: not built yet.

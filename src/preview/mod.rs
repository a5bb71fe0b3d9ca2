//! preview: not built yet.

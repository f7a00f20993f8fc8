//! The room `random`.

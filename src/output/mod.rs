//! The room `output`.

//! The room `environment`.

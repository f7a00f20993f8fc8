//! The room `demography`.

//! The room `outcome`.

//! Checks of samplers.

//! Checks of environment.

//! Checks of demography.

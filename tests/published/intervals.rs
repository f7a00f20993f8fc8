//! Checks of intervals.

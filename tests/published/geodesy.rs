//! Checks of geodesy.

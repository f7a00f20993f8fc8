//! Checks of network.

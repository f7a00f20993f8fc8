//! The engine against exact solutions: absorbing Markov chains, branching processes, moments, closed forms.
//!
//! The values were computed outside this crate, and most of them again by a second method. Every statistical check states
//! its null in its table; it runs 20,000 replicates with a seed made from the test's own name, and passes within 4
//! standard errors of the null (a false alarm has chance 6e-5 a number). Where fewer than ten replicates are expected on
//! one side, the count is held against the binomial distribution instead, two-sided tail at least 1e-4.

mod branching;
mod capacity;
mod catastrophes;
mod chains;
mod lifehistory;
mod moments;
mod movement;
mod occupancy;
mod removal;
mod support;
mod weather;
mod years;

//! Kernels, settlement, the dispersal matrix, and the structure of the graph.

mod links;

pub use links::{Link, Network};

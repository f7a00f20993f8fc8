//! Kernels, settlement, the dispersal matrix, and the structure of the graph.

pub mod kernel;
mod links;

pub use kernel::Kernel;
pub use links::{Link, Network};

//! Kernels, settlement, the dispersal matrix, and the structure of the graph.

mod build;
mod capacity;
mod connectivity;
mod crowding;
mod graph;
pub mod kernel;
mod links;
mod losses;
mod measured;
mod notes;
mod open;
mod outline;
mod reach;
mod settlement;
mod sources;
mod sparse;
mod structure;
mod table;

pub use capacity::Capacity;
pub use connectivity::Connectivity;
pub use crowding::CrowdingResponse;
pub use graph::Graph;
pub use kernel::Kernel;
pub use links::{Link, Network};
pub use measured::Measured;
pub use reach::Distances;
pub use sources::{LEFT_OUT, Sources};
pub use sparse::Sparse;
pub use structure::Structure;
pub use table::{DispersalTable, KernelDispersal, Movement, Settlement};

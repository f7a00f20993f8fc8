//! A study compiled to dense arrays, its replicates run in parallel, and the integers they leave.

mod tally;

pub use tally::{PatchTally, Record, Tallies};

//! A study compiled to dense arrays, its replicates run in parallel, and the integers they leave.
//!
//! [`prepare`] alone meets the study: it reads, checks, links and compiles. What it hands on, a [`Model`], is valid: the
//! yearly loop has no error path, no strings, no files and no geometry.

mod capacity;
mod compile;
mod crowded;
mod full_or_empty;
mod model;
mod movement;
mod occupancy;
mod prepare;
mod realise;
pub mod removal;
mod replicate;
mod run;
mod tally;
mod year;

pub use compile::start_counts;
pub use model::{Model, Threshold};
pub use prepare::{Overrides, Prepared, prepare};
pub use removal::RemovalTable;
pub use run::{Progress, Run, Stopping, run};
pub use tally::{PatchTally, Record, RemovedTally, Tallies};

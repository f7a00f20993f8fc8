//! `eyot run`: the landscape as it is.

use std::path::PathBuf;

use clap::Args;

use super::interrupt::stop_flag;
use super::progress::Bar;
use super::{DONE, FAILED, complain, say, warn};
use crate::engine::{Overrides, Stopping, Tallies, prepare, run};
use crate::mistake::Failure;
use crate::outcome::{Estimate, Outcome};
use crate::output::Folder;
use crate::study::Effort;

/// Runs the landscape as it is and writes an outcome folder.
#[derive(Debug, Args)]
#[command(after_help = "Examples:\n  \
    eyot run study.toml\n  \
    eyot run study.toml --out results --replicates 10000\n  \
    eyot run study.toml --quiet --json > answer.json")]
pub(super) struct Arguments {
    /// The study file
    study: PathBuf,
    /// The folder to write; by default `outcome` beside the study
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    /// Replace the outcome that the folder holds
    #[arg(long)]
    replace: bool,
    /// Threads to run on; by default as many as there are processors
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    threads: Option<u16>,
    /// Replicates to run, in place of what the study says
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u32).range(1..=10_000_000))]
    replicates: Option<u32>,
    /// Seed, in place of the study's
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(0..=i64::MAX as u64))]
    seed: Option<u64>,
    /// No warnings, progress or summary
    #[arg(long)]
    quiet: bool,
    /// Print the outcome as JSON instead of the summary
    #[arg(long)]
    json: bool,
}

pub(super) fn main(arguments: &Arguments) -> Result<u8, Failure> {
    todo!()
}

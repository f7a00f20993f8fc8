//! `eyot check`: what the study is understood to say, before any run.

use std::path::PathBuf;

use clap::Args;

use super::{DONE, say};
use crate::engine::{Overrides, prepare};
use crate::mistake::Failure;

/// Reads everything, says what it understood, warns; no simulation.
#[derive(Debug, Args)]
#[command(after_help = "Example:\n  eyot check study.toml")]
pub(super) struct Arguments {
    /// The study file
    study: PathBuf,
    /// Print what was understood as JSON
    #[arg(long)]
    json: bool,
    /// Say nothing but mistakes
    #[arg(long)]
    quiet: bool,
}

pub(super) fn main(arguments: &Arguments) -> Result<u8, Failure> {
    todo!()
}

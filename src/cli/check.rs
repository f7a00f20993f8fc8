//! `eyot check`: what the study is understood to say, before any run.

use std::path::PathBuf;

use clap::Args;

use super::{DONE, say, warn};
use crate::engine::{Overrides, prepare};
use crate::mistake::Failure;
use crate::output::{OccupancyUnderstood, Understood};

/// Read everything, say what was understood, and warn; no simulation.
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
    let checked = prepare(&arguments.study, Overrides::default())?;
    let (json, text) = match OccupancyUnderstood::new(&checked.value, &checked.warnings) {
        Some(understood) => (understood.json(), understood.text()),
        None => {
            let understood = Understood::new(&checked.value, &checked.warnings);
            (understood.json(), understood.text())
        }
    };
    if arguments.json {
        say(&json);
    } else if !arguments.quiet {
        warn(&checked.warnings);
        say(&text);
        say(&format!("\nnothing is missing; next:  eyot run {}", super::quoted(&arguments.study)));
    }
    Ok(DONE)
}

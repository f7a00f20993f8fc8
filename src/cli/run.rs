//! `eyot run`: the landscape as it is.

use std::path::{Path, PathBuf};

use clap::Args;

use super::interrupt::stop_flag;
use super::progress::Bar;
use super::{DONE, FAILED, complain, say, warn};
use crate::engine::{self, Overrides, Prepared, Run, Stopping, Tallies, prepare};
use crate::mistake::{Failure, Mistake};
use crate::network::Structure;
use crate::outcome::{Counted, Estimate, Outcome};
use crate::output::{Account, Existing, Folder, json, summary, write_run};
use crate::study::Effort;

/// Run the landscape as it is, and write an outcome folder.
#[derive(Debug, Args)]
#[command(after_help = "Examples:\n  \
    eyot run study.toml\n  \
    eyot run study.toml --out results --replicates 10000\n  \
    eyot run study.toml --quiet --json > answer.json\n\n\
    Ctrl-C stops after the replicates that have begun, and writes what they say.")]
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
    let beside = arguments.study.parent().unwrap_or(Path::new(""));
    let out = arguments.out.clone().unwrap_or_else(|| beside.join("outcome"));
    let checked = prepare(&arguments.study, arguments.overrides())?;
    // Claimed before the work, so that a folder that cannot be written costs no hour of it.
    let folder = Folder::claim(&out, if arguments.replace { Existing::Replace } else { Existing::Keep })?;
    if !arguments.quiet {
        warn(&checked.warnings);
    }
    let run = simulate(&checked.value, arguments).map_err(|error| Failure::system(&out, "listen for Ctrl-C", error))?;
    let account = arguments.account(&checked.value, checked.warnings, run.complete, beside);
    let Some(outcome) = outcome(&checked.value, &run.tallies) else {
        complain("stopped before the first replicate was done: nothing is written");
        return Ok(FAILED);
    };
    write_run(&folder, &outcome, &checked.value.landscape, &account)?;
    if arguments.json {
        let mut text = Vec::new();
        json::write(&outcome, &account, &mut text).expect("memory takes all that is written");
        say(&String::from_utf8_lossy(&text));
    } else if !arguments.quiet {
        say(&summary(&outcome, &account));
        say(&format!("\nwritten to {}", folder.path().display()));
    }
    if run.complete {
        return Ok(DONE);
    }
    complain(&format!("stopped: the outcome holds the {} replicates that were done", run.tallies.n_replicates()));
    Ok(FAILED)
}

impl Arguments {
    fn overrides(&self) -> Overrides {
        Overrides { seed: self.seed, replicates: self.replicates }
    }

    fn account(&self, prepared: &Prepared, warnings: Vec<Mistake>, complete: bool, beside: &Path) -> Account {
        let seen = |warning: Mistake| Mistake { place: warning.place.seen_from(beside), ..warning };
        Account {
            command: self.canonical_command(),
            title: prepared.settings.title.clone(),
            seed: prepared.settings.seed,
            effort: prepared.settings.effort,
            complete,
            inputs: prepared.inputs.clone(),
            warnings: warnings.into_iter().map(seen).collect(),
        }
    }

    /// The command that gives this outcome again: without what does not change it.
    fn canonical_command(&self) -> String {
        let file = self.study.file_name().unwrap_or_default().to_string_lossy();
        let seed = self.seed.map(|seed| format!(" --seed {seed}")).unwrap_or_default();
        let replicates = self.replicates.map(|replicates| format!(" --replicates {replicates}")).unwrap_or_default();
        format!("eyot run {file}{seed}{replicates}")
    }
}

fn simulate(prepared: &Prepared, arguments: &Arguments) -> std::io::Result<Run> {
    let stop = stop_flag()?;
    let bar = Bar::new(arguments.quiet);
    let threads = arguments.threads.map_or(0, usize::from);
    let precise = |precision: f64| {
        move |tallies: &Tallies| {
            Estimate::proportion(tallies.persisting, tallies.n_replicates() as u64).is_within(precision)
        }
    };
    let show = |done: u32, planned: Option<u32>| bar.show(done, planned);
    let run = match prepared.settings.effort {
        Effort::Replicates(replicates) => {
            engine::run(&prepared.model, &Stopping::After(replicates), threads, &stop, &show)
        }
        Effort::Precision(precision) => {
            engine::run(&prepared.model, &Stopping::Once(&precise(precision)), threads, &stop, &show)
        }
    };
    bar.clear();
    Ok(run)
}

fn outcome(prepared: &Prepared, tallies: &Tallies) -> Option<Outcome> {
    let Prepared { landscape, network, dispersal, settings, model, life_history, .. } = prepared;
    let exponent = life_history.extinction_exponent();
    let structure = dispersal.as_ref().map(|dispersal| Structure::new(landscape, dispersal, network, exponent));
    let threshold = settings.quasi_extinction.as_ref();
    let counted = if life_history.occupancy.is_some() { Counted::OccupiedPatches } else { Counted::Individuals };
    Outcome::from_tallies(tallies, landscape, network, &model.start_totals(), threshold, structure)
        .map(|outcome| outcome.counting(counted))
}

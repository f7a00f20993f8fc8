//! A study read, checked against itself, linked and compiled: everything that `check` speaks of and `run` needs.

use std::path::Path;

use super::compile::{compile, start_counts};
use super::model::Model;
use super::removal::{Removal, RemovalTable};
use crate::demography::LifeHistory;
use crate::environment::EnvironmentTable;
use crate::landscape::{Landscape, LandscapeTable, Neighbours};
use crate::mistake::{Checked, Failure, Mistake};
use crate::network::{DispersalTable, Network};
use crate::study::{Document, Effort, Input, Settings, Table};

/// What a call changes of a study.
#[derive(Debug, Clone, Copy, Default)]
pub struct Overrides {
    /// another seed
    pub seed: Option<u64>,
    /// another number of replicates, in place of a precision too
    pub replicates: Option<u32>,
}

/// A study ready to run.
#[derive(Debug)]
pub struct Prepared {
    /// the top of the study, overrides applied
    pub settings: Settings,
    /// the patches
    pub landscape: Landscape,
    /// how individuals disperse, if they do
    pub dispersal: Option<DispersalTable>,
    /// the dispersal matrix; without links where nobody disperses
    pub network: Network,
    /// the species
    pub life_history: LifeHistory,
    /// who is taken out, and when
    pub removals: Vec<RemovalTable>,
    /// how years vary
    pub environment: EnvironmentTable,
    /// the compiled model
    pub model: Model,
    /// the files that went into it
    pub inputs: Vec<Input>,
}

/// Reads the study, notes every mistake in it and in the files that it names, and compiles it.
///
/// # Errors
/// All mistakes found; or the system's reason why the study cannot be read.
///
/// # Panics
/// Never: whatever cannot be read leaves a mistake, which is returned first.
pub fn prepare(file: &Path, overrides: Overrides) -> Result<Checked<Prepared>, Failure> {
    let document = Document::open(file)?;
    let read = read(&document, overrides);
    let warnings = document.verdict()?;
    let value = read.expect("what could not be read has left a mistake");
    Ok(Checked { value, warnings })
}

/// `None` leaves at least one mistake in the document.
fn read(document: &Document, overrides: Overrides) -> Option<Prepared> {
    let root = document.root();
    let settings = Settings::read(&root);
    let life_history = required(&root, "life_history", "the species: its stages and rates").and_then(LifeHistory::read);
    let environment = match root.table("environment") {
        Some(table) => EnvironmentTable::read(table),
        None => Some(EnvironmentTable::default()).filter(|_| !root.has("environment")),
    };
    let dispersal = root.table("dispersal").map(DispersalTable::read);
    let removals = RemovalTable::read_all(&root);
    let landscape_table =
        required(&root, "landscape", "the patches: their file, capacity and start").and_then(LandscapeTable::read);
    let stage_names = life_history.as_ref().map(LifeHistory::stage_names).unwrap_or_default();
    let landscape = landscape_table.and_then(|table| Landscape::read(&table, document, &stage_names));
    root.finish();

    let mut settings = settings?;
    let (life_history, environment, landscape) = (life_history?, environment?, landscape?);
    let dispersal = match dispersal {
        Some(read) => Some(read?),
        None => None,
    };
    let removals = removals?;
    settings.seed = overrides.seed.unwrap_or(settings.seed);
    settings.effort = overrides.replicates.map_or(settings.effort, Effort::Replicates);
    check_dispersal(document, &life_history, dispersal.as_ref());
    check_correlation(document, &life_history, &environment, &landscape);
    check_weather(document, &life_history, &environment, settings.horizon);
    let counted_stages = counted_stages(document, &settings, &life_history);
    let compiled_removals = compile_removals(document, &removals, &landscape, &life_history, settings.horizon);
    let start = start(document, &landscape, &life_history);
    let network = link(document, &landscape, dispersal.as_ref());
    let (counted_stages, start, network) = (counted_stages?, start?, network?);
    if !document.is_clean() {
        return None;
    }
    let model = compile(&settings, &landscape, &life_history, &environment, &network, start, counted_stages);
    let model = match model {
        Ok(model) => model
            .heeding(dispersal.as_ref().map_or_else(Default::default, |table| table.crowding))
            .with_removals(compiled_removals),
        Err(reason) => {
            let place =
                environment.correlation.as_ref().map_or(document.root().place().clone(), |said| said.place.clone());
            document.mistake(Mistake::new(place, "environment.correlation", reason));
            return None;
        }
    };
    warn_of_growth(document, &life_history, &model);
    Some(Prepared {
        settings,
        landscape,
        dispersal,
        network,
        life_history,
        removals,
        environment,
        model,
        inputs: document.inputs(),
    })
}

fn required<'d>(root: &Table<'d>, key: &str, meaning: &str) -> Option<Table<'d>> {
    if !root.has(key) {
        root.missing(key, format!("a table [{key}], {meaning}"));
    }
    root.table(key)
}

fn check_dispersal(document: &Document, life_history: &LifeHistory, dispersal: Option<&DispersalTable>) {
    match (&life_history.emigration_said, dispersal) {
        (Some(said), None) => {
            let expected = "a table [dispersal] that says where emigrants go";
            document.mistake(said.mistake(expected).advise("add [dispersal], or take the emigration out"));
        }
        (None, Some(_)) => document.warning(Mistake::new(
            document.root().place().clone(),
            "[dispersal] without emigration",
            "nobody leaves a patch, so the network plays no part",
        )),
        _ => {}
    }
}

/// Independent years between patches flatter a network and common ones condemn it: the study must say which.
fn check_correlation(
    document: &Document,
    life_history: &LifeHistory,
    environment: &EnvironmentTable,
    landscape: &Landscape,
) {
    let says = environment.correlation.is_some() || environment.recorded.is_some();
    if life_history.varies() && landscape.patches.len() > 1 && !says {
        let varying = life_history.rates.iter().find(|rate| rate.sd > 0.0).map_or("a rate", |rate| &rate.address);
        let expected = format!(
            "correlation under [environment], since {varying} varies from year to year: \
             {{ reach_km = .. }}, \"none\" or \"full\""
        );
        let mistake = Mistake::new(document.root().place().clone(), "environment.correlation is missing", expected);
        document.mistake(mistake.advise(
            "independent years between patches make the network look safer, common years less safe; \
             say how far years are alike",
        ));
    }
}

/// A record must reach the horizon, and stages can only go apart where there are several.
fn check_weather(document: &Document, life_history: &LifeHistory, environment: &EnvironmentTable, horizon: u32) {
    if let Some(mistake) = environment.recorded.as_ref().and_then(|record| record.too_short(horizon)) {
        document.mistake(mistake);
    }
    if let Some(record) = environment.recorded.as_ref().filter(|_| !life_history.varies()) {
        document.warning(record.table.mistake("a rate with an sd, or recorded years play no part"));
    }
    if environment.between_stages < 1.0 && life_history.stages.len() == 1 {
        let found = format!("environment.between_stages = {}", environment.between_stages);
        let note = "nothing to correlate, as there is one stage";
        document.warning(Mistake::new(document.root().place().clone(), found, note));
    }
}

fn counted_stages(document: &Document, settings: &Settings, life_history: &LifeHistory) -> Option<Vec<usize>> {
    let names = life_history.stage_names();
    let names: Vec<&str> = names.iter().map(String::as_str).collect();
    match settings.counted_stages(&names) {
        Ok(stages) => Some(stages),
        Err(mistakes) => {
            mistakes.into_iter().for_each(|mistake| document.mistake(mistake));
            None
        }
    }
}

fn compile_removals(
    document: &Document,
    removals: &[RemovalTable],
    landscape: &Landscape,
    life_history: &LifeHistory,
    horizon: u32,
) -> Vec<Removal> {
    let stages = life_history.stage_names();
    removals.iter().for_each(|removal| removal.warn_of_idle_years(document, horizon));
    removals.iter().filter_map(|removal| removal.compile(document, landscape, &stages)).collect()
}

fn start(document: &Document, landscape: &Landscape, life_history: &LifeHistory) -> Option<Vec<u32>> {
    match start_counts(landscape, life_history) {
        Ok((counts, warnings)) => {
            warnings.into_iter().for_each(|warning| document.warning(warning));
            if counts.iter().all(|count| *count == 0) {
                let place = document.root().place().clone();
                let expected = "at least one individual in at least one patch";
                document.mistake(Mistake::new(place, "landscape.start leaves every patch empty", expected));
                return None;
            }
            Some(counts)
        }
        Err(mistakes) => {
            mistakes.into_iter().for_each(|mistake| document.mistake(mistake));
            None
        }
    }
}

fn link(document: &Document, landscape: &Landscape, dispersal: Option<&DispersalTable>) -> Option<Network> {
    match dispersal {
        None => Some(Network::unlinked(landscape.patches.len())),
        Some(table) => match Network::build(landscape, table, &Neighbours::new(landscape)) {
            Ok(checked) => {
                checked.warnings.into_iter().for_each(|warning| document.warning(warning));
                Some(checked.value)
            }
            Err(mistakes) => {
                mistakes.into_vec().into_iter().for_each(|mistake| document.mistake(mistake));
                None
            }
        },
    }
}

/// Warns where mean growth passes what can be counted before the horizon.
fn warn_of_growth(document: &Document, life_history: &LifeHistory, model: &Model) {
    if life_history.density.form != "none" && !life_history.density.is_idle() {
        return;
    }
    let growth = life_history.matrix.growth();
    let largest = model.start_totals().into_iter().max().unwrap_or(0).max(1);
    let years = crate::num::ln(f64::from(u32::MAX) / largest as f64) / crate::num::ln(growth);
    if growth > 1.0 && years < f64::from(model.horizon()) {
        let found = format!("growth of {growth:.3} a year without density dependence");
        let note = format!(
            "mean numbers in one patch pass {}, the most that can be counted, about year {years:.0}; \
             counts stop there and the outcome says in how many replicates",
            u32::MAX
        );
        document.warning(Mistake::new(document.root().place().clone(), found, note));
    }
}

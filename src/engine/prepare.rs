//! A study read, checked against itself, linked and compiled: everything that `check` speaks of and `run` needs.

use std::path::Path;

use super::compile::{Years, compile, start_counts};
use super::full_or_empty::{self, Linked};
use super::model::Model;
use super::removal::{Removal, RemovalTable};
use crate::demography::LifeHistory;
use crate::environment::{Catastrophe, Correlation, EnvironmentTable};
use crate::landscape::{Landscape, LandscapeTable, Neighbours};
use crate::mistake::{Checked, Failure, Mistake, Place};
use crate::network::{DispersalTable, Movement, Network};
use crate::study::{Document, Effort, Input, Said, Settings, Table};

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
    /// in an occupancy study, pairs of patches too far apart for the links
    pub n_left_out: u64,
    /// the species
    pub life_history: LifeHistory,
    /// who is taken out, and when
    pub removals: Vec<RemovalTable>,
    /// how years vary
    pub environment: EnvironmentTable,
    /// what strikes now and then
    pub catastrophes: Vec<Catastrophe>,
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
    let full_or_empty = full_or_empty::is_asked_for(&root);
    let life_history = required(&root, "life_history", "the species: its stages and rates").and_then(LifeHistory::read);
    let environment = match root.table("environment") {
        Some(table) => EnvironmentTable::read(table),
        None => Some(EnvironmentTable::default()).filter(|_| !root.has("environment")),
    };
    let (kind, horizon) = (life_history.as_ref().map(|read| read.kind), settings.as_ref().map(|read| read.horizon));
    let catastrophes = Catastrophe::read_all(&root, kind, horizon);
    let dispersal = root.table("dispersal").map(if full_or_empty {
        DispersalTable::read_for_occupancy
    } else {
        DispersalTable::read
    });
    let removals = RemovalTable::read_all(&root);
    let landscape_table = required(&root, "landscape", "the patches: their file, capacity and start")
        .and_then(if full_or_empty { LandscapeTable::read_full_or_empty } else { LandscapeTable::read });
    let stage_names = life_history.as_ref().map(LifeHistory::stage_names).unwrap_or_default();
    let landscape = landscape_table.and_then(|table| Landscape::read(&table, document, &stage_names));
    root.finish();

    if document.has_faults() {
        // A table may stand behind a fault: nothing can be said of what is missing.
        return None;
    }
    // Every check is made whose own inputs could be read, so that one run shows as much as it can.
    if let (Some(life_history), Some(environment)) = (&life_history, &environment) {
        match life_history.occupancy {
            Some(_) => full_or_empty::check(document, settings.as_ref(), dispersal.is_some()),
            None => check_dispersal(document, life_history, &dispersal),
        }
        check_correlation(document, life_history, environment, landscape.as_ref());
    }
    if life_history.as_ref().is_some_and(|life_history| life_history.occupancy.is_some()) {
        for removal in removals.iter().flatten() {
            document.mistake(removal.name.mistake("no removals in an occupancy study, which counts nobody"));
        }
    }
    let settings = settings.and_then(|settings| override_settings(document, settings, overrides));
    let counted_stages = both(&settings, &life_history).and_then(|(a, b)| counted_stages(document, a, b));
    if let (Some(settings), Some(life_history), Some(environment)) = (&settings, &life_history, &environment) {
        check_weather(document, life_history, environment, settings.horizon);
    }
    let start = both(&landscape, &life_history).and_then(|(a, b)| start(document, a, b));
    let occupancy = life_history.as_ref().and_then(|life_history| life_history.occupancy);
    let linked = landscape.as_ref().and_then(|landscape| match (&dispersal, occupancy) {
        (Some(table), Some(occupancy)) => full_or_empty::link(document, landscape, table.as_ref()?, occupancy),
        (Some(table), None) => link(document, landscape, table.as_ref()?).map(Linked::for_movement),
        (None, Some(_)) => None,
        (None, None) => Some(Linked::for_movement(Network::unlinked(landscape.patches.len()))),
    });
    let (settings, life_history, environment, landscape) = (settings?, life_history?, environment?, landscape?);
    let (counted_stages, start, linked) = (counted_stages?, start?, linked?);
    let (catastrophes, removals) = (catastrophes?, removals?);
    let compiled_removals = compile_removals(document, &removals, &landscape, &life_history, settings.horizon);
    let Linked { network, turnovers, n_left_out } = linked;
    let dispersal = dispersal.flatten();
    if !document.is_clean() {
        return None;
    }
    let years = Years { environment: &environment, catastrophes: &catastrophes };
    let model = compile(&settings, &landscape, &life_history, &years, &network, start, counted_stages);
    let model = match model {
        Ok(model) => Model { turnovers, ..model }
            .heeding(dispersal.as_ref().map_or_else(Default::default, |table| table.crowding))
            .with_removals(compiled_removals),
        Err(reason) => {
            let place =
                environment.correlation.as_ref().map_or(document.root().place().clone(), |said| said.place.clone());
            document.mistake(Mistake::new(place, "environment.correlation", reason));
            return None;
        }
    };
    if life_history.occupancy.is_none() {
        warn_of_growth(document, &life_history, &model);
        warn_of_density(document, &life_history);
        warn_of_generation(document, &settings, &life_history);
        warn_of_lost_emigrants(document, &life_history, &landscape, &network, &model);
    }
    warn_of_scales(document, &landscape, dispersal.as_ref(), &environment, &network);
    Some(Prepared {
        settings,
        landscape,
        dispersal,
        network,
        n_left_out,
        life_history,
        removals,
        environment,
        catastrophes,
        model,
        inputs: document.inputs(),
    })
}

fn both<'a, A, B>(a: &'a Option<A>, b: &'a Option<B>) -> Option<(&'a A, &'a B)> {
    a.as_ref().zip(b.as_ref())
}

/// The most bytes that totals by replicate and year may take.
const MOST_BYTES: u64 = 8 << 30;

/// Applies what the call changes, and refuses more replicates than their totals could be kept of.
fn override_settings(document: &Document, mut settings: Settings, overrides: Overrides) -> Option<Settings> {
    settings.seed = overrides.seed.unwrap_or(settings.seed);
    settings.effort = overrides.replicates.map_or(settings.effort, Effort::Replicates);
    let most = MOST_BYTES / 8 / (u64::from(settings.horizon) + 1);
    if let Effort::Replicates(replicates) = settings.effort
        && u64::from(replicates) > most
    {
        let found = format!("{replicates} replicates of {} years", settings.horizon);
        let expected = format!("at most {most} replicates over such a horizon: each year's total of each is kept");
        let place = if overrides.replicates.is_some() { Place::Call } else { document.root().place().clone() };
        document.mistake(Mistake::new(place, found, expected));
        return None;
    }
    Some(settings)
}

fn required<'d>(root: &Table<'d>, key: &str, meaning: &str) -> Option<Table<'d>> {
    if !root.has(key) {
        root.missing(key, format!("a table [{key}], {meaning}"));
    }
    root.table(key)
}

/// `dispersal` is `None` where the study has no such table, and holds `None` where the table is wrong.
fn check_dispersal(document: &Document, life_history: &LifeHistory, dispersal: &Option<Option<DispersalTable>>) {
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
    landscape: Option<&Landscape>,
) {
    // A landscape that could not be read is taken for one of several patches.
    let several = landscape.is_none_or(|landscape| landscape.patches.len() > 1);
    let says = environment.correlation.is_some() || environment.recorded.is_some();
    if life_history.varies() && several && !says {
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
    if life_history.occupancy.is_some() {
        return Some(Vec::new());
    }
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
                let (expected, advice) = match life_history.occupancy {
                    Some(_) => ("at least one occupied patch", "look at the property or table that start comes from"),
                    None => (
                        "at least one individual in at least one patch",
                        "look at the property or table that start comes from; a share of a small capacity rounds to 0",
                    ),
                };
                let mistake = Mistake::new(place, "landscape.start leaves every patch empty", expected);
                document.mistake(mistake.advise(advice));
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

fn link(document: &Document, landscape: &Landscape, table: &DispersalTable) -> Option<Network> {
    match Network::build(landscape, table, &Neighbours::new(landscape)) {
        Ok(checked) => {
            checked.warnings.into_iter().for_each(|warning| document.warning(warning));
            Some(checked.value)
        }
        Err(mistakes) => {
            mistakes.into_vec().into_iter().for_each(|mistake| document.mistake(mistake));
            None
        }
    }
}

/// Warns where capacity plays no part, or hardly any.
fn warn_of_density(document: &Document, life_history: &LifeHistory) {
    let growth = life_history.matrix.growth();
    let density = &life_history.density;
    let warn = |found: String, note: &str| {
        let place = document.root().place().clone();
        document
            .warning(Mistake::new(place, found, note).advise("form = \"ceiling\" caps numbers whatever their growth"));
    };
    if density.is_idle() {
        let found = format!("growth of {growth:.4} in an average year, under the form {}", density.form);
        warn(found, "numbers do not grow, so that there is nothing to scale: capacity plays no part");
    } else if density.curve.is_some() && growth < 1.05 {
        let found = format!("growth of {growth:.4} in an average year, under the form {}", density.form);
        warn(found, "so little presses on numbers near capacity that they can run far above it");
    }
    if density.curve.is_some() && life_history.stages.iter().all(|stage| stage.toward_capacity <= 0.0) {
        let found = format!("no stage counts toward capacity, under the form {}", density.form);
        warn(found, "capacity plays no part");
    }
}

/// Generation time has one source: the stages where there are some.
fn warn_of_generation(document: &Document, settings: &Settings, life_history: &LifeHistory) {
    if let (Some(stated), Some(years)) = (settings.generation_years, life_history.generation_time()) {
        let found = format!("generation_years = {stated}");
        let note = format!("the stages give {years:.2} years, which is used instead");
        document
            .warning(Mistake::new(document.root().place().clone(), found, note).advise("take generation_years out"));
    }
}

/// Warns of the emigrants that patches without any link lose.
fn warn_of_lost_emigrants(
    document: &Document,
    life_history: &LifeHistory,
    landscape: &Landscape,
    network: &Network,
    model: &Model,
) {
    if life_history.emigration_said.is_none() || network.links.is_empty() && landscape.patches.len() == 1 {
        return;
    }
    let isolated = (0..network.n_patches()).filter(|patch| network.row(*patch).is_empty());
    let shares = life_history.matrix.stable_distribution();
    let leaving: f64 = life_history.stages.iter().zip(&shares).map(|(stage, share)| stage.emigration * share).sum();
    let starts = model.start_totals();
    let (count, lost) =
        isolated.fold((0, 0.0), |(count, lost), patch| (count + 1, lost + leaving * starts[patch] as f64));
    if count > 0 {
        let found = format!("{count} of {} patches have no link", landscape.patches.len());
        let note = format!("about {lost:.1} of their individuals leave and are lost in the first year");
        document.warning(Mistake::new(document.root().place().clone(), found, note));
    }
}

/// Warns where a distance is so wide beside the landscape that metres may have been meant for kilometres.
fn warn_of_scales(
    document: &Document,
    landscape: &Landscape,
    dispersal: Option<&DispersalTable>,
    environment: &EnvironmentTable,
    network: &Network,
) {
    let [east, north] = landscape.extent_km();
    let extent_km = east.max(north);
    let warn = |place: &Place, found: String, note: String| {
        let warning = Mistake::new(place.clone(), found, note);
        document.warning(warning.advise("look at the unit: kilometres, not metres"));
    };
    if landscape.patches.len() < 2 {
        return;
    }
    if let Some(DispersalTable { movement: Movement::Kernel(by), place, .. }) = dispersal {
        let mean_km = by.kernel.mean_km();
        if mean_km > 3.0 * extent_km {
            let note = format!("more than three times as far as the landscape is wide ({extent_km:.1} km)");
            warn(place, format!("a mean dispersal distance of {mean_km} km"), note);
        }
    }
    if let Some(Said { value: Correlation::Reach { reach_km, .. }, place, .. }) = &environment.correlation
        && *reach_km > 100.0 * extent_km
    {
        let note = format!("a hundred times as far as the landscape is wide ({extent_km:.1} km): all years are alike");
        warn(place, format!("correlation over {reach_km} km"), note);
    }
    if let Some(dispersal) = dispersal
        && network.lost.iter().all(|lost| *lost > 0.99)
    {
        let found = "emigrants of every patch die on the way or land nowhere, more than 99 in 100";
        document.warning(Mistake::new(dispersal.place.clone(), found, "the network plays next to no part"));
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
        let found = format!("growth by a factor of {growth:.3} a year without density dependence");
        let note = format!(
            "mean numbers in one patch pass {}, the most that can be counted, about year {years:.0}; \
             counts stop there and the outcome says in how many replicates",
            u32::MAX
        );
        document.warning(Mistake::new(document.root().place().clone(), found, note));
    }
}

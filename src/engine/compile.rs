//! From what was read to arrays.

use super::capacity::ChangingCapacity;
use super::model::{Crowding, Model, Threshold};
use super::movement::Movement;
use super::realise::Rates;
use crate::demography::{LifeHistory, ceiling_cut, split_total};
use crate::environment::{Catastrophe, Catastrophes, EnvironmentTable};
use crate::landscape::{Landscape, Patch, Start};
use crate::mistake::Mistake;
use crate::network::Network;
use crate::random::patch_key;
use crate::study::Settings;

/// Whole individuals at census 0, `[patch][stage]`, and what had to be changed to make them so.
///
/// A total is rounded half up and split over the stable stage distribution by largest remainders; under a ceiling, what
/// exceeds capacity is cut.
///
/// # Errors
/// Mistakes where a patch would start with more than can be counted.
pub fn start_counts(
    landscape: &Landscape,
    life_history: &LifeHistory,
) -> Result<(Vec<u32>, Vec<Mistake>), Vec<Mistake>> {
    let weights: Vec<f64> = life_history.stages.iter().map(|stage| stage.toward_capacity).collect();
    let shares = life_history.matrix.stable_distribution();
    let mut counts = Vec::with_capacity(landscape.patches.len() * shares.len());
    let mut mistakes = Vec::new();
    let mut cut = Vec::new();
    for patch in &landscape.patches {
        let mut stages = match stage_counts(patch, &shares, &weights) {
            Ok(stages) => stages,
            Err(mistake) => {
                mistakes.push(*mistake);
                continue;
            }
        };
        if life_history.density.ceiling
            && let Some(kept) = ceiling_cut(&stages, &weights, patch.capacity)
        {
            cut.push(patch);
            stages = kept;
        }
        counts.extend(stages);
    }
    if mistakes.is_empty() { Ok((counts, cut_warning(&cut).into_iter().collect())) } else { Err(mistakes) }
}

fn stage_counts(patch: &Patch, shares: &[f64], weights: &[f64]) -> Result<Vec<u32>, Box<Mistake>> {
    let total = match &patch.start {
        Start::ByStage(counts) => return Ok(counts.clone()),
        Start::Total(total) => *total,
        Start::ShareOfCapacity(share) => {
            let counted: f64 = shares.iter().zip(weights).map(|(share, weight)| share * weight).sum();
            if counted <= 0.0 {
                let expected = "a stage with toward_capacity above 0, of which capacity could hold a share";
                return Err(Mistake::new(patch.place.clone(), "start = { share_of_capacity = .. }", expected).into());
            }
            share * patch.capacity / counted
        }
    };
    let rounded = (total + 0.5).floor();
    if rounded > f64::from(u32::MAX) {
        let found = format!("{rounded} individuals to start with in {}", patch.name);
        return Err(Mistake::new(patch.place.clone(), found, format!("at most {} in one patch", u32::MAX)).into());
    }
    Ok(split_total(rounded as u32, shares))
}

fn cut_warning(cut: &[&Patch]) -> Option<Mistake> {
    let first = cut.first()?;
    let others = if cut.len() > 1 { format!(" and {} more patches", cut.len() - 1) } else { String::new() };
    let found = format!("{}{others} would start above capacity", first.name);
    Some(Mistake::new(first.place.clone(), found, "start numbers cut to the whole part of capacity"))
}

/// How years differ: the weather, and what strikes now and then.
pub(super) struct Years<'a> {
    pub(super) environment: &'a EnvironmentTable,
    pub(super) catastrophes: &'a [Catastrophe],
}

/// Compiles a study that has been read and checked.
///
/// # Errors
/// The reason why the weather of so many patches cannot be drawn.
pub(super) fn compile(
    settings: &Settings,
    landscape: &Landscape,
    life_history: &LifeHistory,
    years: &Years<'_>,
    network: &Network,
    start: Vec<u32>,
    counted_stages: Vec<usize>,
) -> Result<Model, String> {
    let patch_keys: Vec<u64> = landscape.patches.iter().map(|patch| patch_key(&patch.name)).collect();
    let centroids: Vec<[f64; 2]> = landscape.patches.iter().map(|patch| patch.centroid_km).collect();
    let density = &life_history.density;
    let n_stages = life_history.stages.len();
    Ok(Model {
        seed: settings.seed,
        horizon: settings.horizon,
        n_stages,
        rates: Rates::compile(&life_history.rates, years.environment, &centroids, &patch_keys, n_stages)?,
        catastrophes: Catastrophes::compile(years.catastrophes, &centroids, &patch_keys),
        changing_capacity: ChangingCapacity::compile(landscape),
        patch_keys,
        start,
        capacity: landscape.patches.iter().map(|patch| patch.capacity).collect(),
        toward_capacity: life_history.stages.iter().map(|stage| stage.toward_capacity).collect(),
        local: life_history.model.clone(),
        crowding: Crowding {
            curve: density.curve.clone(),
            on_survival: density.on_survival,
            on_fecundity: density.on_fecundity,
        },
        ceiling: density.ceiling,
        removals: Vec::new(),
        movement: Movement::compile(network, &life_history.stages),
        turnovers: None,
        n_links: network.links.len(),
        threshold: settings.quasi_extinction.as_ref().map(|threshold| Threshold {
            below: u64::from(threshold.below),
            stages: if counted_stages.is_empty() { (0..n_stages).collect() } else { counted_stages },
            in_each_patch: threshold.in_each_patch.map_or(0, u64::from),
        }),
    })
}

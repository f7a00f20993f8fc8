//! A compiled model: dense arrays indexed by patch and stage, and nothing that could fail.

use std::sync::Arc;

use super::capacity::ChangingCapacity;
use super::movement::Movement;
use super::occupancy::Turnovers;
use super::realise::Rates;
use super::removal::Removal;
use crate::demography::density::Curve;
use crate::demography::local::LocalModel;
use crate::environment::Catastrophes;
use crate::network::CrowdingResponse;

/// The threshold of quasi-extinction.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Threshold {
    /// quasi-extinct where a census counts fewer than this
    pub below: u64,
    /// the stages that are counted, by position
    pub stages: Vec<usize>,
    /// a patch is quasi-extinct where a census counts fewer than this in it; 0 where that was not asked for
    pub in_each_patch: u64,
}

/// How numbers press on rates.
#[derive(Debug, Clone)]
pub(super) struct Crowding {
    /// none where the form multiplies nothing, or has nothing to scale
    pub(super) curve: Option<Arc<dyn Curve>>,
    pub(super) on_survival: bool,
    pub(super) on_fecundity: bool,
}

/// A study compiled for simulation. Patches stand in canonical order (by name), stages in the order of the life history.
#[derive(Debug)]
pub struct Model {
    pub(super) seed: u64,
    pub(super) horizon: u32,
    pub(super) n_stages: usize,
    /// one key a patch, from its name alone
    pub(super) patch_keys: Vec<u64>,
    /// individuals at census 0, `[patch][stage]`
    pub(super) start: Vec<u32>,
    /// carrying capacity by patch at census 0
    pub(super) capacity: Vec<f64>,
    pub(super) changing_capacity: Option<ChangingCapacity>,
    pub(super) catastrophes: Option<Catastrophes>,
    /// what an individual of each stage counts toward capacity
    pub(super) toward_capacity: Vec<f64>,
    pub(super) local: Arc<dyn LocalModel>,
    pub(super) crowding: Crowding,
    /// whether surplus over capacity is removed at the end of the year
    pub(super) ceiling: bool,
    pub(super) rates: Rates,
    pub(super) movement: Option<Movement>,
    /// where patches are full or empty, what takes the place of local dynamics and dispersal
    pub(super) turnovers: Option<Turnovers>,
    /// links of the network, whether anybody moves along them or not
    pub(super) n_links: usize,
    pub(super) removals: Vec<Removal>,
    pub(super) threshold: Option<Threshold>,
}

impl Model {
    /// Patches.
    pub fn n_patches(&self) -> usize {
        self.patch_keys.len()
    }

    /// Stages.
    pub fn n_stages(&self) -> usize {
        self.n_stages
    }

    /// Years from census 0 to the last.
    pub fn horizon(&self) -> u32 {
        self.horizon
    }

    /// Individuals of each patch at census 0.
    pub fn start_totals(&self) -> Vec<u64> {
        self.start.chunks(self.n_stages).map(|stages| stages.iter().map(|count| u64::from(*count)).sum()).collect()
    }

    /// The same model with dispersal that answers to crowding.
    pub(super) fn heeding(mut self, crowding: CrowdingResponse) -> Self {
        if let Some(movement) = &mut self.movement {
            movement.crowding = crowding;
        }
        self
    }

    /// The same model with removals, which act in this order.
    pub(super) fn with_removals(mut self, removals: Vec<Removal>) -> Self {
        self.removals = removals;
        self
    }

    /// What crowding does to dispersal.
    pub(super) fn crowding_response(&self) -> CrowdingResponse {
        self.movement.as_ref().map_or_else(CrowdingResponse::default, |movement| movement.crowding)
    }

    /// Where patches are full or empty: the number that would be occupied at rest in average years, if chance made no patch
    /// unlike its mean. `None` also where that state is approached too slowly to be told.
    pub fn occupied_at_rest(&self) -> Option<f64> {
        let [e, y] = *self.rates.means() else { return None };
        self.turnovers.as_ref()?.occupied_at_rest(e, y)
    }

    /// Links of the network.
    pub fn n_links(&self) -> usize {
        self.n_links
    }
}

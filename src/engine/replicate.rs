//! One replicate: the state that a thread carries through the years, reused from replicate to replicate.

use super::crowded::Crowd;
use super::model::Model;
use super::realise;
use super::tally::{PatchTally, Record, Tallies};
use super::year;
use crate::environment::{CatastropheState, Catastrophes, WeatherState};
use crate::random::ReplicateKey;

/// One patch's numbers within one replicate.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Own {
    /// individuals at the last census
    now: u64,
    /// the fewest at any census, the first included
    fewest: u64,
    abundance: u64,
    years_occupied: u32,
    local_extinctions: u32,
    recolonisations: u32,
    pub(super) immigrants: u64,
    pub(super) emigrants: u64,
    pub(super) arrived_elsewhere: u64,
    pub(super) removed: u64,
}

impl Own {
    /// Takes down a census.
    pub(super) fn see(&mut self, here: u64) {
        self.local_extinctions += u32::from(self.now > 0 && here == 0);
        self.recolonisations += u32::from(self.now == 0 && here > 0);
        self.years_occupied += u32::from(here > 0);
        self.abundance += here;
        self.fewest = self.fewest.min(here);
        self.now = here;
    }

    /// `threshold` is that of quasi-extinction in a patch, 0 for none.
    fn add_to(&self, tally: &mut PatchTally, threshold: u64) {
        let square = |number: u64| u128::from(number) * u128::from(number);
        let net_export = i128::from(self.arrived_elsewhere) - i128::from(self.immigrants);
        tally.occupied_at_end += u64::from(self.now > 0);
        tally.years_occupied += u64::from(self.years_occupied);
        tally.abundance += u128::from(self.abundance);
        tally.abundance_squares += square(self.abundance);
        tally.abundance_at_end += self.now;
        tally.abundance_at_end_squares += square(self.now);
        tally.local_extinctions += u64::from(self.local_extinctions);
        tally.recolonisations += u64::from(self.recolonisations);
        tally.immigrants += self.immigrants;
        tally.emigrants += self.emigrants;
        tally.arrived_elsewhere += self.arrived_elsewhere;
        tally.removed += self.removed;
        tally.quasi_extinct += u64::from(self.fewest < threshold);
        tally.net_export += net_export;
        tally.net_export_squares += net_export.unsigned_abs().pow(2);
    }
}

/// The arrays of one thread.
#[derive(Debug)]
pub(super) struct State {
    pub(super) replicate: ReplicateKey,
    /// individuals, `[patch][stage]`
    pub(super) counts: Vec<u32>,
    /// arrivals of the year, `[patch][stage]`, all 0 between years
    pub(super) arrivals: Vec<u32>,
    pub(super) crowd: Crowd,
    pub(super) weather: Option<WeatherState>,
    pub(super) catastrophes: Option<CatastropheState>,
    /// the year's capacity by patch
    pub(super) capacity: Vec<f64>,
    /// one patch's realised rates; those that do not vary never change
    pub(super) rates: Vec<f64>,
    /// where patches are full or empty, the year's connectivity of each
    pub(super) connectivity: Vec<f64>,
    /// one number a stage
    pub(super) scratch: Vec<u32>,
    pub(super) own: Vec<Own>,
    pub(super) saturated: bool,
    totals: Vec<u64>,
    occupied_at_end: u32,
    quasi_extinct_in: Option<u32>,
    pub(super) tallies: Tallies,
}

impl State {
    /// The arrays of a thread that has run nothing.
    pub(super) fn new(model: &Model) -> Self {
        let cells = model.n_patches() * model.n_stages;
        Self {
            replicate: ReplicateKey::new(model.seed, 0),
            counts: vec![0; cells],
            arrivals: vec![0; cells],
            crowd: Crowd::new(model.crowding_response(), model.n_patches()),
            weather: model.rates.weather_state(),
            catastrophes: model.catastrophes.as_ref().map(Catastrophes::state),
            capacity: model.capacity.clone(),
            rates: model.rates.means().to_vec(),
            connectivity: model.turnovers.as_ref().map_or_else(Vec::new, |_| vec![0.0; model.n_patches()]),
            scratch: vec![0; model.n_stages],
            own: vec![Own::default(); model.n_patches()],
            saturated: false,
            totals: Vec::new(),
            occupied_at_end: 0,
            quasi_extinct_in: None,
            tallies: Tallies::empty(model.horizon, model.n_patches(), model.n_links()),
        }
    }

    /// Runs one replicate and adds it to this thread's tallies.
    pub(super) fn run(&mut self, model: &Model, replicate: u32) {
        self.begin(model, replicate);
        for year in 0..model.horizon {
            year::step(model, self, year);
        }
        let threshold = model.threshold.as_ref().map_or(0, |threshold| threshold.in_each_patch);
        for (own, tally) in self.own.iter().zip(&mut self.tallies.patches) {
            own.add_to(tally, threshold);
        }
        if !model.removals.is_empty() {
            let removed = self.own.iter().map(|own| own.removed).sum();
            self.tallies.removed.get_or_insert_default().add(removed);
        }
        self.tallies.add_record(Record {
            replicate,
            totals: std::mem::take(&mut self.totals),
            quasi_extinct_in: self.quasi_extinct_in,
            occupied_at_end: self.occupied_at_end,
            saturated: self.saturated,
        });
    }

    fn begin(&mut self, model: &Model, replicate: u32) {
        self.replicate = ReplicateKey::new(model.seed, replicate);
        self.counts.copy_from_slice(&model.start);
        realise::begin(&mut self.weather, self.replicate);
        self.saturated = false;
        self.quasi_extinct_in = None;
        // The one allocation of a replicate: its row of totals, which outlives it.
        self.totals = Vec::with_capacity(model.horizon as usize + 1);
        let mut total = 0;
        let mut occupied = 0;
        for (counts, own) in self.counts.chunks(model.n_stages).zip(&mut self.own) {
            let here: u64 = counts.iter().map(|count| u64::from(*count)).sum();
            *own = Own { now: here, fewest: here, ..Own::default() };
            total += here;
            occupied += u32::from(here > 0);
        }
        self.note(model, 0, total, occupied);
    }

    /// Takes down what a census says of the whole network.
    pub(super) fn note(&mut self, model: &Model, census: u32, total: u64, occupied: u32) {
        self.totals.push(total);
        self.tallies.occupied_patches[census as usize] += u64::from(occupied);
        self.occupied_at_end = occupied;
        if let Some(threshold) = model.threshold.as_ref().filter(|_| self.quasi_extinct_in.is_none()) {
            let counted = if threshold.stages.len() == model.n_stages {
                total
            } else {
                let rows = self.counts.chunks(model.n_stages);
                rows.map(|row| threshold.stages.iter().map(|stage| u64::from(row[*stage])).sum::<u64>()).sum()
            };
            if counted < threshold.below {
                self.quasi_extinct_in = Some(census);
            }
        }
    }
}

//! The year of a model whose patches are full or empty: all are updated at once from the last census.

use super::model::Model;
use super::replicate::State;
use crate::demography::local::{Occupancy, Pressure};
use crate::landscape::Landscape;
use crate::network::Sources;
use crate::num;
use crate::random::YearKey;

/// How often the state at rest is approached before it is given up.
const SWEEPS: usize = 1_000;
/// It is reached when a sweep changes no more than this many patches in all.
const AT_REST: f64 = 1e-9;

/// What is needed of areas and distances, compiled: the loop takes no power and no exponential.
#[derive(Debug)]
pub(super) struct Turnovers {
    occupancy: Occupancy,
    /// A^x by patch, A in hectares
    area_to_x: Vec<f64>,
    /// `targets[row_start[j]..row_start[j + 1]]` are the patches that patch j may colonise
    row_start: Vec<usize>,
    targets: Vec<u32>,
    /// shape(d) A^b of the source, one a target
    contributions: Vec<f64>,
}

impl Turnovers {
    pub(super) fn compile(occupancy: Occupancy, landscape: &Landscape, sources: &Sources) -> Self {
        let area_to_x = |area_ha: f64| num::pow(area_ha, occupancy.extinction_exponent);
        let links = &sources.network.links;
        Self {
            occupancy,
            area_to_x: landscape.patches.iter().map(|patch| area_to_x(patch.area_ha)).collect(),
            row_start: sources.network.row_start.clone(),
            targets: links.iter().map(|link| link.to).collect(),
            contributions: links.iter().map(|link| link.probability * sources.sizes[link.from as usize]).collect(),
        }
    }

    /// Steps 3 and 4 of the year: who dies out and who is colonised, by what was occupied at the last census.
    pub(super) fn step(&self, model: &Model, state: &mut State, key: YearKey) {
        self.connect(state);
        for patch in 0..model.n_patches() {
            let connectivity = state.connectivity[patch];
            if state.counts[patch] == 0 && connectivity <= 0.0 {
                continue;
            }
            model.rates.realise(state.weather.as_ref(), patch, &mut state.rates);
            let [e, y] = [state.rates[0], state.rates[1]];
            let turnover = self.occupancy.turnover(e, y, self.area_to_x[patch], connectivity);
            // Rescue has acted; what a catastrophe leaves of survival then bears on those who would have stayed.
            let survival = state.catastrophes.as_ref().map_or(1.0, |catastrophes| catastrophes.left(patch).survival);
            let extinction = 1.0 - (1.0 - turnover.extinction) * survival;
            let chances = [extinction, turnover.colonisation];
            let place = key.patch(model.patch_keys[patch]);
            let counts = &mut state.counts[patch..=patch];
            model.local.step(counts, &chances, Pressure::NONE, place, &mut state.scratch);
        }
    }

    /// The number of patches that would be occupied at rest, if each patch met the mean of the others: the greatest solution
    /// of p = C / (C + E), C and E at the connectivity that the sources have with chance p. The map rises with p, so that
    /// its repetition from all patches full falls to that solution. `None` where it is not near in [`SWEEPS`].
    pub(super) fn occupied_at_rest(&self, e: f64, y: f64) -> Option<f64> {
        let mut occupied = vec![1.0; self.area_to_x.len()];
        let mut connectivity = vec![0.0; occupied.len()];
        for _ in 0..SWEEPS {
            connectivity.fill(0.0);
            for (patch, occupied) in occupied.iter().enumerate() {
                let row = self.row_start[patch]..self.row_start[patch + 1];
                for (target, contribution) in self.targets[row.clone()].iter().zip(&self.contributions[row]) {
                    connectivity[*target as usize] += contribution * occupied;
                }
            }
            let mut change = 0.0;
            for ((occupied, connectivity), area_to_x) in occupied.iter_mut().zip(&connectivity).zip(&self.area_to_x) {
                let turnover = self.occupancy.turnover(e, y, *area_to_x, *connectivity);
                let sum = turnover.colonisation + turnover.extinction;
                let next = if sum > 0.0 { turnover.colonisation / sum } else { *occupied };
                change += (*occupied - next).abs();
                *occupied = next;
            }
            if change < AT_REST {
                return Some(occupied.iter().sum());
            }
        }
        None
    }

    /// The connectivity of every patch, summed over the occupied ones in canonical order.
    fn connect(&self, state: &mut State) {
        state.connectivity.fill(0.0);
        for (patch, _) in state.counts.iter().enumerate().filter(|(_, count)| **count > 0) {
            let row = self.row_start[patch]..self.row_start[patch + 1];
            for (target, contribution) in self.targets[row.clone()].iter().zip(&self.contributions[row]) {
                state.connectivity[*target as usize] += contribution;
            }
        }
    }
}

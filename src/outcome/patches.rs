//! What becomes of each patch.

use super::interval::{Estimate, Sums};
use crate::engine::{PatchTally, Tallies};
use crate::landscape::{Landscape, Patch};
use crate::network::Structure;

/// How far from 0 the whole interval of net export, in individuals a year for each individual of the patch's mean
/// abundance, must lie for a patch to be called a source or a sink.
pub const ROLE_MARGIN: f64 = 0.01;

/// What a patch is to the others.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Role {
    /// it sends out more than it takes in, beyond [`ROLE_MARGIN`]
    Source,
    /// it takes in more than it sends out, beyond [`ROLE_MARGIN`]
    Sink,
    /// it is not told apart from a patch that does neither
    Neither,
}

impl Role {
    /// The word for it.
    pub fn word(self) -> &'static str {
        match self {
            Self::Source => "source",
            Self::Sink => "sink",
            Self::Neither => "neither",
        }
    }

    fn of(net_export: &Estimate, mean_abundance: f64) -> Self {
        let margin = ROLE_MARGIN * mean_abundance;
        if net_export.low > margin {
            Self::Source
        } else if net_export.high < -margin {
            Self::Sink
        } else {
            Self::Neither
        }
    }
}

/// One patch, over all replicates. Means, rates and shares run over the censuses from 1 to the horizon.
#[derive(Debug, Clone, PartialEq)]
pub struct PatchRow {
    /// its name
    pub patch: String,
    /// area in hectares
    pub area_ha: f64,
    /// carrying capacity in individuals
    pub capacity: f64,
    /// individuals at census 0
    pub start: u64,
    /// probability of being occupied at the last census
    pub occupied_at_end: Estimate,
    /// share of censuses at which it is occupied
    pub share_of_years_occupied: f64,
    /// mean individuals over censuses
    pub mean_abundance: Estimate,
    /// mean individuals at the last census
    pub mean_abundance_at_end: Estimate,
    /// times in a hundred years that it is occupied at one census and empty at the next
    pub local_extinctions_per_century: f64,
    /// times in a hundred years that it is empty at one census and occupied at the next
    pub recolonisations_per_century: f64,
    /// arrivals alive from other patches a year, before the ceiling
    pub immigrants_per_year: f64,
    /// all who leave, a year
    pub emigrants_per_year: f64,
    /// those who left and arrived elsewhere alive, less the immigrants, a year
    pub net_export_per_year: Estimate,
    /// individuals taken out by removals, a year; `None` where the study has none
    pub removed_per_year: Option<f64>,
    /// probability of being below the patch's own threshold at least once, where there is one
    pub quasi_extinction: Option<Estimate>,
    /// source, sink or neither
    pub role: Role,
    /// what the patch is to the structure of the network, where individuals disperse
    pub place: Option<PlaceInNetwork>,
}

/// What a patch is to the structure of the network.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PlaceInNetwork {
    /// the component that it belongs to, from 1
    pub component: u32,
    /// whether its loss splits that component
    pub splits: bool,
    /// its share of the metapopulation capacity, 0 to 1; 0 where there is none
    pub capacity_share: f64,
    /// percentage of the probability of connectivity that goes with it; `None` in networks too large for it
    pub connectivity_loss_percent: Option<f64>,
}

impl PlaceInNetwork {
    fn new(structure: &Structure, patch: usize) -> Self {
        let whole = structure.capacity.value;
        Self {
            component: structure.graph.component[patch] + 1,
            splits: structure.graph.cut_patches.binary_search(&patch).is_ok(),
            capacity_share: if whole > 0.0 { structure.capacity.shares[patch] / whole } else { 0.0 },
            connectivity_loss_percent: structure.connectivity.loss_percent.as_ref().map(|losses| losses[patch]),
        }
    }
}

/// A row for every patch, in canonical order. At least one replicate is done; `starts` has a number for each patch.
pub(super) fn by_patch(
    tallies: &Tallies,
    landscape: &Landscape,
    starts: &[u64],
    structure: Option<&Structure>,
    has_threshold: bool,
) -> Vec<PatchRow> {
    debug_assert_eq!(landscape.patches.len(), tallies.patches.len());
    debug_assert_eq!(landscape.patches.len(), starts.len());
    let effort = Effort { replicates: tallies.records.len() as u64, years: f64::from(tallies.horizon) };
    let patches = landscape.patches.iter().zip(&tallies.patches).zip(starts);
    let removes = tallies.removed.is_some();
    let rows = patches.map(|((patch, tally), start)| PatchRow {
        removed_per_year: removes.then(|| effort.yearly(tally.removed)),
        quasi_extinction: has_threshold.then(|| Estimate::proportion(tally.quasi_extinct, effort.replicates)),
        ..effort.row(patch, tally, *start)
    });
    let placed = |(position, row): (usize, PatchRow)| PatchRow {
        place: structure.map(|structure| PlaceInNetwork::new(structure, position)),
        ..row
    };
    rows.enumerate().map(placed).collect()
}

/// What sums over replicates and years are divided by.
struct Effort {
    replicates: u64,
    years: f64,
}

impl Effort {
    fn row(&self, patch: &Patch, tally: &PatchTally, start: u64) -> PatchRow {
        let mean_abundance = self.mean(tally.abundance.cast_signed(), tally.abundance_squares, self.years);
        let net_export = self.mean(tally.net_export, tally.net_export_squares, self.years);
        PatchRow {
            patch: patch.name.clone(),
            area_ha: patch.area_ha,
            capacity: patch.capacity,
            start,
            occupied_at_end: Estimate::proportion(tally.occupied_at_end, self.replicates),
            share_of_years_occupied: self.yearly(tally.years_occupied),
            mean_abundance,
            mean_abundance_at_end: self.mean(i128::from(tally.abundance_at_end), tally.abundance_at_end_squares, 1.0),
            local_extinctions_per_century: 100.0 * self.yearly(tally.local_extinctions),
            recolonisations_per_century: 100.0 * self.yearly(tally.recolonisations),
            immigrants_per_year: self.yearly(tally.immigrants),
            emigrants_per_year: self.yearly(tally.emigrants),
            net_export_per_year: net_export,
            removed_per_year: None,
            quasi_extinction: None,
            role: Role::of(&net_export, mean_abundance.value),
            place: None,
        }
    }

    fn mean(&self, sum: i128, squares: u128, per: f64) -> Estimate {
        Estimate::mean(&Sums { n: self.replicates, sum, squares }, per)
    }

    fn yearly(&self, sum: u64) -> f64 {
        sum as f64 / self.replicates as f64 / self.years
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_role_needs_the_whole_interval_beyond_the_margin() {
        let between = |low, high| Estimate { value: (low + high) / 2.0, low, high, n: 100 };
        assert_eq!(Role::of(&between(0.51, 0.9), 50.0), Role::Source);
        assert_eq!(Role::of(&between(0.49, 0.9), 50.0), Role::Neither);
        assert_eq!(Role::of(&between(-0.9, -0.51), 50.0), Role::Sink);
        assert_eq!(Role::of(&between(-0.9, -0.49), 50.0), Role::Neither);
        assert_eq!(Role::of(&between(0.0, 0.0), 0.0), Role::Neither);
        assert_eq!(Role::of(&between(f64::NEG_INFINITY, f64::INFINITY), 50.0), Role::Neither);
    }
}

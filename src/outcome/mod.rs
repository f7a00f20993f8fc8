//! What replicates say: curves by year, tables by patch, link and replicate, the answer, and how sure they are.
//!
//! An [`Outcome`] is made of [`Tallies`], which are integers, so it is the same whatever the order in which the
//! replicates ran. Estimates from replicates leave as [`Estimate`]s, with their 95 % Monte Carlo interval.

mod curve;
#[cfg(test)]
pub(crate) mod example;
mod interval;
mod links;
mod patches;
mod replicates;
mod standard;
mod summary;
#[cfg(test)]
mod tests;

pub use curve::{QUANTILES, YearRow};
pub use interval::{Estimate, Sums, Z, replicates_needed};
pub use links::LinkRow;
pub use patches::{PatchRow, PlaceInNetwork, ROLE_MARGIN, Role};
pub use replicates::ReplicateRow;
pub use standard::{CUSTOMARY_PERSISTENCE, CUSTOMARY_YEARS, Standing};
pub use summary::{Customary, Summary};

use crate::engine::Tallies;
use crate::landscape::Landscape;
use crate::network::{Network, Structure};
use crate::study::QuasiExtinction;

/// What the numbers of a census count.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Counted {
    /// individuals of the species
    Individuals,
    /// occupied patches, each of which counts as one: what is called abundance here is their number
    OccupiedPatches,
}

/// What one set of replicates says.
#[derive(Debug, Clone, PartialEq)]
pub struct Outcome {
    /// years from census 0 to the last
    pub horizon: u32,
    /// what is counted
    pub counted: Counted,
    /// the threshold of quasi-extinction, if one was asked for
    pub quasi_extinction: Option<QuasiExtinction>,
    /// the answer and the numbers beside it
    pub summary: Summary,
    /// a row for every census, from 0 to the horizon
    pub by_year: Vec<YearRow>,
    /// a row for every patch, in canonical order
    pub by_patch: Vec<PatchRow>,
    /// a row for every link, in the order of the network
    pub by_link: Vec<LinkRow>,
    /// a row for every replicate that is done, at least one
    pub by_replicate: Vec<ReplicateRow>,
    /// what holds the network together, where individuals disperse
    pub structure: Option<Structure>,
}

impl Outcome {
    /// What the replicates done so far say; `None` if none is done.
    ///
    /// The tallies are those of a model compiled from `landscape` and `network`; `starts` are the individuals of each
    /// patch at census 0.
    pub fn from_tallies(
        tallies: &Tallies,
        landscape: &Landscape,
        network: &Network,
        starts: &[u64],
        quasi_extinction: Option<&QuasiExtinction>,
        structure: Option<Structure>,
    ) -> Option<Self> {
        if tallies.records.is_empty() {
            return None;
        }
        let in_each_patch = quasi_extinction.is_some_and(|threshold| threshold.in_each_patch.is_some());
        let by_year = curve::by_year(tallies, quasi_extinction.is_some());
        let by_replicate: Vec<ReplicateRow> = tallies.records.iter().map(ReplicateRow::from).collect();
        Some(Self {
            horizon: tallies.horizon,
            counted: Counted::Individuals,
            quasi_extinction: quasi_extinction.cloned(),
            summary: Summary::new(tallies, &by_year, &by_replicate),
            by_patch: patches::by_patch(tallies, landscape, starts, structure.as_ref(), in_each_patch),
            by_link: links::by_link(tallies, network, structure.as_ref()),
            by_year,
            by_replicate,
            structure,
        })
    }

    /// The same, where the numbers count something else than individuals.
    #[must_use]
    pub fn counting(self, counted: Counted) -> Self {
        Self { counted, ..self }
    }

    /// How many replicates it rests on.
    pub fn replicates_done(&self) -> u64 {
        self.by_replicate.len() as u64
    }
}

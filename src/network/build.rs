//! Building the dispersal matrix from a landscape and the table `[dispersal]`.

use rayon::prelude::*;

use super::links::{Link, Network};
use super::measured::Measured;
use super::notes::Notes;
use super::open::Ground;
use super::reach::{Candidate, Distances, Reach};
use super::settlement::{Division, Row, index};
use super::table::{DispersalTable, KernelDispersal, Movement, Settlement};
use crate::landscape::Landscape;
use crate::mistake::{Checked, Mistakes};
use crate::num;

/// Below this probability of leaving, nobody of a patch lands outside.
const NOBODY: f64 = 1e-12;

impl Network {
    /// Links the patches of a landscape. The rows are the same for any number of threads, and a landscape whose patches
    /// stand in another order has the same rows in that order.
    ///
    /// Warnings tell of patches without a link, of nearest neighbours too far to be likely, and of rows scaled to 1.
    ///
    /// # Errors
    /// Rows of a measured table that name no patch of the landscape.
    pub fn build(
        landscape: &Landscape,
        dispersal: &DispersalTable,
        distances: &dyn Distances,
    ) -> Result<Checked<Self>, Mistakes> {
        let mut notes = Notes::new(landscape, dispersal.place.clone());
        let rows = match &dispersal.movement {
            Movement::Measured(measured) => measured_rows(landscape, measured, distances)?,
            Movement::Kernel(kernel) => match kernel.settlement {
                Settlement::Shared => shared_rows(landscape, kernel, dispersal.area_exponent, distances, &mut notes),
                Settlement::Open => open_rows(landscape, kernel, distances, &mut notes),
            },
        };
        let isolated = rows.iter().enumerate().filter(|(_, row)| row.links.is_empty()).map(|(patch, _)| patch);
        notes.isolated(&isolated.collect::<Vec<_>>());
        Ok(Checked { value: Self::of_rows(rows), warnings: notes.into_warnings() })
    }

    fn of_rows(rows: Vec<Row>) -> Self {
        let mut network = Self { links: Vec::new(), row_start: vec![0], lost: Vec::new(), cut_share: Vec::new() };
        network.links.reserve_exact(rows.iter().map(|row| row.links.len()).sum());
        for row in rows {
            network.links.extend(row.links);
            network.row_start.push(network.links.len());
            network.lost.push(row.lost);
            network.cut_share.push(row.cut_share);
        }
        network
    }
}

fn shared_rows(
    landscape: &Landscape,
    dispersal: &KernelDispersal,
    area_exponent: f64,
    distances: &dyn Distances,
    notes: &mut Notes<'_>,
) -> Vec<Row> {
    let attraction: Vec<f64> = landscape.patches.iter().map(|patch| num::pow(patch.area_ha, area_exponent)).collect();
    let ln_attraction: Vec<f64> = attraction.iter().map(|attraction| num::ln(*attraction)).collect();
    let reach = Reach::new(landscape, distances, dispersal, attraction, false);
    let far_km = 3.0 * dispersal.kernel.mean_km();
    let rows: Vec<(Row, bool)> = (0..landscape.patches.len())
        .into_par_iter()
        .map(|from| {
            let weigh = |to: usize, km: f64| dispersal.kernel.ln_density(km) + ln_attraction[to];
            let candidates = reach.candidates(from, 0.0, weigh);
            if candidates.is_empty() {
                return (Row::isolated(), false);
            }
            let division = Division::new(&candidates, dispersal.tail);
            let row = Row::shared(from, &candidates, &division, dispersal.path_mortality_per_km);
            (row, nearest_km(&candidates) > far_km)
        })
        .collect();
    notes.far(&flagged(&rows), far_km);
    rows.into_iter().map(|(row, _)| row).collect()
}

fn open_rows(
    landscape: &Landscape,
    dispersal: &KernelDispersal,
    distances: &dyn Distances,
    notes: &mut Notes<'_>,
) -> Vec<Row> {
    let ground = Ground::new(landscape, &dispersal.kernel);
    let reach = Reach::new(landscape, distances, dispersal, ground.areas_km2(), true);
    // Only between edges of outlines is the distance that of the nearest ground.
    let slack_km = |patch: usize| {
        let between_edges = !landscape.between_centroids && !landscape.patches[patch].outline_km.0.is_empty();
        if between_edges { 0.0 } else { ground.radius_km(patch) }
    };
    let n_patches = landscape.patches.len();
    let most_slack_km = (0..n_patches).map(slack_km).fold(0.0, f64::max);
    let rows: Vec<(Row, bool)> = (0..n_patches)
        .into_par_iter()
        .map(|from| {
            let weigh = |to: usize, _: f64| num::ln(ground.landing(from, to));
            let candidates = reach.candidates(from, slack_km(from) + most_slack_km, weigh);
            let leaving = ground.leaving(from);
            if candidates.is_empty() || leaving < NOBODY {
                return (Row::isolated(), false);
            }
            let division = Division::new(&candidates, dispersal.tail);
            let landing = num::exp(division.ln_total) / leaving;
            let row = Row::open(from, &candidates, &division, landing.min(1.0), dispersal.path_mortality_per_km);
            (row, landing > 1.0)
        })
        .collect();
    notes.scaled(&flagged(&rows));
    notes.coarse(&(0..n_patches).filter(|patch| ground.is_coarse(*patch)).collect::<Vec<_>>());
    rows.into_iter().map(|(row, _)| row).collect()
}

pub(super) fn measured_rows(
    landscape: &Landscape,
    measured: &Measured,
    distances: &dyn Distances,
) -> Result<Vec<Row>, Mistakes> {
    let by_source = measured.by_source(landscape.patches.iter().map(|patch| patch.name.as_str()))?;
    let row = |(from, targets): (usize, Vec<(usize, f64)>)| {
        let sum: f64 = targets.iter().map(|(_, probability)| probability).sum();
        let links = targets
            .into_iter()
            .filter(|(_, probability)| *probability > 0.0)
            .map(|(to, probability)| Link {
                from: index(from),
                to: index(to),
                distance_km: distances.distance_km(from, to),
                // A sum above 1 by the rounding that reading admits must not make a negative loss.
                probability: probability / sum.max(1.0),
            })
            .collect();
        Row { links, lost: (1.0 - sum).max(0.0), cut_share: 0.0 }
    };
    Ok(by_source.into_par_iter().enumerate().map(row).collect())
}

fn nearest_km(candidates: &[Candidate]) -> f64 {
    candidates.iter().map(|candidate| candidate.distance_km).fold(f64::INFINITY, f64::min)
}

fn flagged(rows: &[(Row, bool)]) -> Vec<usize> {
    rows.iter().enumerate().filter(|(_, (_, flag))| *flag).map(|(patch, _)| patch).collect()
}

//! What the network looks like at every census.

use rayon::prelude::*;

use super::interval::{Estimate, Sums};
use crate::engine::{Record, Tallies};
use crate::num::quantile;

/// The probabilities at which abundance is told.
pub const QUANTILES: [f64; 5] = [0.05, 0.25, 0.5, 0.75, 0.95];

/// One census, over all replicates.
#[derive(Debug, Clone, PartialEq)]
pub struct YearRow {
    /// the census, from 0
    pub year: u32,
    /// probability that at least one individual is there
    pub persistence: Estimate,
    /// probability of having been below the threshold at least once up to this census, if a threshold was asked for
    pub quasi_extinction: Option<Estimate>,
    /// mean of the individuals in the network, replicates that have gone extinct included
    pub mean_abundance: Estimate,
    /// their sample standard deviation between replicates; `None` of one replicate
    pub sd_abundance: Option<f64>,
    /// their quantiles at [`QUANTILES`]
    pub abundance: [f64; QUANTILES.len()],
    /// mean number of occupied patches
    pub mean_occupied_patches: f64,
}

/// A row for every census from 0 to the horizon. At least one replicate is done.
pub(super) fn by_year(tallies: &Tallies, with_threshold: bool) -> Vec<YearRow> {
    (0..=tallies.horizon).into_par_iter().map(|year| row(year, tallies, with_threshold)).collect()
}

fn row(year: u32, tallies: &Tallies, with_threshold: bool) -> YearRow {
    let records = &tallies.records;
    let census = year as usize;
    let totals = || records.iter().map(|record| record.totals[census]);
    let sums: Sums = totals().collect();
    let mut sorted: Vec<f64> = totals().map(|total| total as f64).collect();
    sorted.sort_unstable_by(f64::total_cmp);
    YearRow {
        year,
        persistence: share(records, |record| record.totals[census] > 0),
        quasi_extinction: with_threshold
            .then(|| share(records, |record| record.quasi_extinct_in.is_some_and(|first| first <= year))),
        mean_abundance: Estimate::mean(&sums, 1.0),
        sd_abundance: sums.variance().map(f64::sqrt),
        abundance: QUANTILES.map(|p| quantile(&sorted, p)),
        mean_occupied_patches: tallies.occupied_patches[census] as f64 / records.len() as f64,
    }
}

fn share(records: &[Record], is_so: impl Fn(&Record) -> bool) -> Estimate {
    let seen = records.iter().filter(|record| is_so(record)).count();
    Estimate::proportion(seen as u64, records.len() as u64)
}

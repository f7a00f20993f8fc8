//! The answer, and the few numbers of the whole network beside it.

use super::curve::YearRow;
use super::interval::{Estimate, Sums};
use super::replicates::ReplicateRow;
use super::standard::{CUSTOMARY_PERSISTENCE, CUSTOMARY_YEARS, Standing};
use crate::engine::{Record, Tallies};
use crate::num::{pow, quantile};

/// Persistence over a hundred years against the customary target.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Customary {
    /// persistence at census [`CUSTOMARY_YEARS`]
    pub persistence: Estimate,
    /// where it lies, seen from [`CUSTOMARY_PERSISTENCE`]
    pub standing: Standing,
}

/// The network as a whole, over all replicates.
#[derive(Debug, Clone, PartialEq)]
pub struct Summary {
    /// the answer: probability that at least one individual is there at the last census
    pub persistence: Estimate,
    /// probability of having been below the threshold at least once, if one was asked for
    pub quasi_extinction: Option<Estimate>,
    /// mean over replicates of the fewest individuals at any census, census 0 included (expected minimum abundance,
    /// McCarthy & Thompson 2001, Animal Conservation 4)
    pub expected_minimum_abundance: Estimate,
    /// median over replicates of (N_T / N_0)^(1/T), those that end empty counted as 0; `None` where nobody is there at
    /// the start
    pub realised_growth: Option<f64>,
    /// median years to extinction, if at least half of the replicates end empty
    pub median_time_to_extinction: Option<f64>,
    /// share of all emigrants that died on the way or landed nowhere; `None` if nobody emigrated
    pub lost_emigrants_share: Option<f64>,
    /// individuals taken out by removals, a year; `None` where the study has none
    pub removed_per_year: Option<Estimate>,
    /// replicates in which a count reached the largest that can be held and was stopped there
    pub saturated_replicates: u64,
    /// the customary target, where the horizon reaches that far
    pub customary: Option<Customary>,
}

impl Summary {
    /// From the tallies and the rows made of them: at least one replicate, and the years from 0 to the horizon.
    pub(super) fn new(tallies: &Tallies, years: &[YearRow], replicates: &[ReplicateRow]) -> Self {
        let last = &years[years.len() - 1];
        let lowest: Sums = replicates.iter().map(|row| row.lowest_abundance).collect();
        Self {
            persistence: last.persistence,
            quasi_extinction: last.quasi_extinction,
            expected_minimum_abundance: Estimate::mean(&lowest, 1.0),
            realised_growth: realised_growth(&tallies.records, tallies.horizon),
            median_time_to_extinction: median_time_to_extinction(replicates),
            lost_emigrants_share: lost_emigrants_share(tallies),
            removed_per_year: removed_per_year(tallies),
            saturated_replicates: tallies.records.iter().filter(|record| record.saturated).count() as u64,
            customary: years.get(CUSTOMARY_YEARS as usize).map(|year| Customary {
                persistence: year.persistence,
                standing: Standing::of(&year.persistence, CUSTOMARY_PERSISTENCE),
            }),
        }
    }
}

fn realised_growth(records: &[Record], horizon: u32) -> Option<f64> {
    let growth = |record: &Record| {
        let (start, end) = (*record.totals.first()?, *record.totals.last()?);
        (start > 0).then(|| pow(end as f64 / start as f64, 1.0 / f64::from(horizon)))
    };
    let mut sorted = records.iter().map(growth).collect::<Option<Vec<f64>>>()?;
    sorted.sort_unstable_by(f64::total_cmp);
    Some(quantile(&sorted, 0.5))
}

/// The median over all replicates, those that persist counted as later than any. Where exactly half end empty, the upper
/// of the two middle times is not known, and the lower one stands for both.
fn median_time_to_extinction(replicates: &[ReplicateRow]) -> Option<f64> {
    let mut times: Vec<u32> = replicates.iter().filter_map(|row| row.extinct_in_year).collect();
    if times.len() * 2 < replicates.len() {
        return None;
    }
    times.sort_unstable();
    let lower = *times.get((replicates.len() - 1) / 2)?;
    let upper = times.get(replicates.len() / 2).copied().unwrap_or(lower);
    Some(f64::midpoint(f64::from(lower), f64::from(upper)))
}

fn lost_emigrants_share(tallies: &Tallies) -> Option<f64> {
    let sum = |of: fn(&crate::engine::PatchTally) -> u64| {
        tallies.patches.iter().map(|patch| u128::from(of(patch))).sum::<u128>()
    };
    let (left, arrived) = (sum(|patch| patch.emigrants), sum(|patch| patch.arrived_elsewhere));
    (left > 0).then(|| left.saturating_sub(arrived) as f64 / left as f64)
}

fn removed_per_year(tallies: &Tallies) -> Option<Estimate> {
    let removed = tallies.removed?;
    let n = tallies.records.len() as u64;
    let sums = Sums { n, sum: removed.sum.cast_signed(), squares: removed.squares };
    Some(Estimate::mean(&sums, f64::from(tallies.horizon)))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn ending(times: &[Option<u32>]) -> Vec<ReplicateRow> {
        let row = |extinct_in_year: &Option<u32>| ReplicateRow {
            replicate: 1,
            extinct_in_year: *extinct_in_year,
            quasi_extinct_in_year: None,
            lowest_abundance: 0,
            abundance_at_end: 0,
            occupied_at_end: 0,
        };
        times.iter().map(row).collect()
    }

    #[test]
    fn the_median_time_needs_half_of_the_replicates() {
        let median = |times: &[Option<u32>]| median_time_to_extinction(&ending(times));
        assert_eq!(median(&[Some(9), Some(3), Some(4)]), Some(4.0));
        assert_eq!(median(&[Some(9), Some(3), Some(4), Some(5)]), Some(4.5));
        assert_eq!(median(&[Some(9), None, Some(4)]), Some(9.0));
        assert_eq!(median(&[Some(9), None, Some(4), Some(5)]), Some(7.0));
        assert_eq!(median(&[Some(9), None, None, Some(5)]), Some(9.0), "half, and the upper middle is not known");
        assert_eq!(median(&[None, None, Some(4)]), None);
        assert_eq!(median(&[None]), None);
    }

    #[test]
    fn growth_is_the_yearly_factor_and_0_for_the_extinct() {
        let record = |end| Record {
            replicate: 1,
            totals: vec![16, 0, end],
            quasi_extinct_in: None,
            occupied_at_end: 0,
            saturated: false,
        };
        let median = |ends: [u64; 3]| realised_growth(&ends.map(record), 2);
        assert_eq!(median([4, 64, 16]), Some(1.0));
        assert_eq!(median([0, 0, 64]), Some(0.0));
        let empty = Record { totals: vec![0, 0, 5], ..record(0) };
        assert_eq!(realised_growth(&[empty], 2), None);
    }
}

//! An outcome against numbers worked out by hand from its tallies.

#![expect(clippy::float_cmp, reason = "values that binary fractions hold exactly")]

use super::example::{STARTS, landscape, network, outcome, tallies, threshold};
use super::*;
use crate::num::pow;

fn near(found: f64, expected: f64) {
    assert!((found - expected).abs() < 1e-12, "{found} is not {expected}");
}

#[test]
fn the_curve_counts_replicates_at_every_census() {
    let outcome = outcome(Some(&threshold()));
    let years: Vec<u32> = outcome.by_year.iter().map(|row| row.year).collect();
    assert_eq!(years, [0, 1, 2, 3, 4]);
    let persistence: Vec<f64> = outcome.by_year.iter().map(|row| row.persistence.value).collect();
    assert_eq!(persistence, [1.0, 1.0, 0.75, 0.75, 0.5]);
    let quasi: Vec<f64> = outcome.by_year.iter().map(|row| row.quasi_extinction.unwrap().value).collect();
    assert_eq!(quasi, [0.0, 0.0, 0.5, 0.75, 0.75], "it never falls, though replicate 4 recovers");
    let last = &outcome.by_year[4];
    assert_eq!(last.persistence, Estimate::proportion(2, 4));
    assert_eq!(last.mean_abundance.value, 11.5);
    near(last.sd_abundance.unwrap(), 209f64.sqrt());
    near(last.mean_abundance.high, 11.5 + Z * 209f64.sqrt() / 2.0);
    // Type 7 on 0, 0, 16, 30.
    [0.0, 0.0, 8.0, 19.5, 27.9].iter().zip(last.abundance).for_each(|(expected, found)| near(found, *expected));
    assert_eq!(last.mean_occupied_patches, 1.25);
}

#[test]
fn without_a_threshold_there_is_no_quasi_extinction() {
    let outcome = outcome(None);
    assert!(outcome.by_year.iter().all(|row| row.quasi_extinction.is_none()));
    assert_eq!(outcome.summary.quasi_extinction, None);
}

#[test]
fn the_summary_answers_for_the_network() {
    let summary = outcome(Some(&threshold())).summary;
    assert_eq!(summary.persistence, Estimate::proportion(2, 4));
    assert_eq!(summary.quasi_extinction, Some(Estimate::proportion(3, 4)));
    // The fewest are 0, 20 (at census 0), 0 and 4: mean 6, variance 272 / 3.
    assert_eq!(summary.expected_minimum_abundance.value, 6.0);
    near(summary.expected_minimum_abundance.low, 6.0 - Z * (272.0f64 / 3.0 / 4.0).sqrt());
    near(summary.realised_growth.unwrap(), pow(0.8, 0.25) / 2.0);
    assert_eq!(summary.median_time_to_extinction, Some(4.0));
    assert_eq!(summary.lost_emigrants_share, Some(63.0 / 120.0));
    assert_eq!(summary.saturated_replicates, 1);
    assert_eq!(summary.customary, None, "the horizon is 4 years");
}

#[test]
fn patches_are_told_by_the_year() {
    let outcome = outcome(None);
    let [carr, reed, pool] = &outcome.by_patch[..] else { panic!("three patches") };
    assert_eq!((carr.patch.as_str(), carr.area_ha, carr.capacity, carr.start), ("Ash Carr", 12.5, 30.0, 12));
    assert_eq!(carr.occupied_at_end, Estimate::proportion(2, 4));
    assert_eq!(carr.share_of_years_occupied, 0.75);
    // 20, 60, 10, 30 over four years each: mean 7.5, variance 1400 / 3 / 16.
    assert_eq!(carr.mean_abundance.value, 7.5);
    near(carr.mean_abundance.high, 7.5 + Z * (1400.0f64 / 3.0 / 16.0 / 4.0).sqrt());
    assert_eq!(carr.mean_abundance_at_end.value, 6.0);
    assert_eq!((carr.local_extinctions_per_century, carr.recolonisations_per_century), (18.75, 6.25));
    assert_eq!((carr.immigrants_per_year, carr.emigrants_per_year), (0.5, 6.25));
    // 10, 12, 8, 10 over four years each: mean 2.5, variance 8 / 3 / 16; the margin is 0.075.
    assert_eq!(carr.net_export_per_year.value, 2.5);
    near(carr.net_export_per_year.low, 2.5 - Z * (8.0f64 / 3.0 / 16.0 / 4.0).sqrt());
    assert_eq!([carr.role, reed.role, pool.role], [Role::Source, Role::Sink, Role::Neither]);
    assert_eq!(reed.net_export_per_year.value, -2.0);
}

#[test]
fn movers_are_told_by_the_year() {
    let movers: Vec<f64> = outcome(None).by_link.iter().map(|row| row.movers_per_year).collect();
    assert_eq!(movers, [3.0, 0.5, 0.0625]);
}

#[test]
fn nothing_done_says_nothing() {
    let none = Tallies { records: Vec::new(), ..tallies() };
    assert_eq!(Outcome::from_tallies(&none, &landscape(), &network(), &STARTS, None, None), None);
}

#[test]
fn the_order_of_replicates_changes_no_estimate() {
    let mut shuffled = tallies();
    shuffled.records.rotate_left(3);
    let other = Outcome::from_tallies(&shuffled, &landscape(), &network(), &STARTS, None, None).unwrap();
    let outcome = outcome(None);
    assert_eq!(other.by_year, outcome.by_year);
    assert_eq!(other.summary, outcome.summary);
}

#[test]
fn the_customary_target_is_read_at_a_hundred_years() {
    let mut long = tallies();
    long.horizon = 120;
    long.occupied_patches = vec![0; 121];
    for (position, record) in long.records.iter_mut().enumerate() {
        record.totals = vec![1; 121];
        let empty_from = if position == 0 { 100 } else { 101 };
        record.totals[empty_from..].fill(0);
    }
    let summary = Outcome::from_tallies(&long, &landscape(), &network(), &STARTS, None, None).unwrap().summary;
    let customary = summary.customary.unwrap();
    assert_eq!(customary.persistence, Estimate::proportion(3, 4));
    assert_eq!(customary.standing, Standing::NotToldApart);
    assert_eq!(summary.persistence.value, 0.0);
}

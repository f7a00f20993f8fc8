//! The answer in `outcome.json`.

use serde::Serialize;

use super::super::json::{Interval, Target};
use crate::outcome::Summary;

#[derive(Serialize)]
pub(in crate::output) struct Answer {
    sentence: String,
    persistence: Interval,
    quasi_extinction: Option<Interval>,
    expected_minimum_occupied_patches: Interval,
    median_time_to_extinction: Option<f64>,
    customary_target: Option<Target>,
}

impl Answer {
    pub(in crate::output) fn new(summary: &Summary, sentence: String) -> Self {
        Self {
            sentence,
            persistence: summary.persistence.into(),
            quasi_extinction: summary.quasi_extinction.map(Interval::from),
            expected_minimum_occupied_patches: summary.expected_minimum_abundance.into(),
            median_time_to_extinction: summary.median_time_to_extinction,
            customary_target: summary.customary.map(Target::from),
        }
    }
}

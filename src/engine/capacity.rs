//! The capacities of a year, where they change.

use super::model::Model;
use super::replicate::State;
use crate::landscape::{CapacityOverTime, Landscape};
use crate::num;
use crate::random::{Purpose, YearKey, standard_normal};

/// How capacities change, compiled.
#[derive(Debug)]
pub(super) struct ChangingCapacity {
    over_time: CapacityOverTime,
    /// sd of the logarithm of a patch's own factor of the year; 0 for none
    log_sd: f64,
}

impl ChangingCapacity {
    /// `None` where every capacity is the same in every year.
    pub(super) fn compile(landscape: &Landscape) -> Option<Self> {
        let over_time = landscape.capacity_over_time.clone();
        let variation = over_time.variation;
        (!over_time.is_constant()).then(|| Self { over_time, log_sd: num::ln_1p(variation * variation).sqrt() })
    }

    /// The capacity of a patch in a year: its mean, times a lognormal factor of mean 1 that is independent between patches
    /// and years.
    fn of_patch(&self, patch: usize, year: u32, base: f64, key: YearKey, patch_key: u64) -> f64 {
        let mean = self.over_time.mean_in(patch, year, base);
        if self.log_sd <= 0.0 || mean <= 0.0 {
            return mean;
        }
        let deviate = standard_normal(&mut key.patch(patch_key).draw(Purpose::OwnCapacity));
        (mean * num::exp(self.log_sd * deviate - self.log_sd * self.log_sd / 2.0)).min(f64::MAX)
    }
}

/// Sets the capacities of the year: what they are by then, and of that what catastrophes leave. Where nothing changes them
/// they stay as they were compiled.
pub(super) fn of_the_year(model: &Model, state: &mut State, key: YearKey, year: u32) {
    let taken = model.catastrophes.as_ref().filter(|catastrophes| catastrophes.take_capacity());
    match &model.changing_capacity {
        Some(changing) => {
            for (patch, capacity) in state.capacity.iter_mut().enumerate() {
                *capacity = changing.of_patch(patch, year, model.capacity[patch], key, model.patch_keys[patch]);
            }
        }
        None if taken.is_some() => state.capacity.copy_from_slice(&model.capacity),
        None => return,
    }
    if let (Some(_), Some(catastrophes)) = (taken, &state.catastrophes) {
        for (patch, capacity) in state.capacity.iter_mut().enumerate() {
            *capacity *= catastrophes.left(patch).capacity;
        }
    }
}

//! Local models: what one year does to the individuals of one patch.
//!
//! A new kind is one file and one line in `KINDS`.

mod counts;
mod occupancy;
mod stages;
mod young;

pub use occupancy::{Occupancy, Turnover};

use std::fmt::Debug;

use super::LifeHistory;
use crate::random::PlaceKey;
use crate::study::Table;

/// Multipliers on the year's realised rates.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Pressure {
    /// on survival
    pub survival: f64,
    /// on fecundity, or on growth
    pub fecundity: f64,
}

impl Pressure {
    /// Leaves the rates as they are.
    pub const NONE: Self = Self { survival: 1.0, fecundity: 1.0 };
}

/// The step of a local model. All draws are exact in distribution.
pub trait LocalModel: Debug + Send + Sync {
    /// Takes one patch through births, survival and advance.
    ///
    /// `counts` holds the individuals by stage, before and after; `rates` the year's realised rates in the order of
    /// [`LifeHistory::rates`]; `scratch` is as long as `counts` and may be overwritten. Returns whether a count passed the
    /// largest that can be held and was stopped there.
    fn step(&self, counts: &mut [u32], rates: &[f64], pressure: Pressure, place: PlaceKey, scratch: &mut [u32])
    -> bool;

    /// How young are born, in words.
    fn young_in_words(&self) -> String;
}

/// Reads the rest of `[life_history]` for one kind.
pub(super) type ReadKind = fn(&Table<'_>) -> Option<LifeHistory>;

/// The kinds of life history, by the words that the study uses.
pub(super) const KINDS: &[(&str, ReadKind)] =
    &[("stages", stages::read), ("counts", counts::read), ("occupancy", occupancy::read)];

/// Adds without passing the largest count; says whether it had to stop.
fn add(count: &mut u32, more: u32) -> bool {
    let (sum, over) = count.overflowing_add(more);
    *count = if over { u32::MAX } else { sum };
    over
}

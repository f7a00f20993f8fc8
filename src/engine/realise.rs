//! The year's realised rates of a patch.

use crate::demography::{Law, Rate, RateGroup};
use crate::environment::{EnvironmentTable, RateTable, Weather, WeatherState, Deviate};
use crate::random::ReplicateKey;

/// The weather of the replicate at hand.
pub(super) type WeatherNow = WeatherState;

/// All rates of the life history, compiled.
#[derive(Debug)]
pub(super) struct Rates {
    means: Vec<f64>,
    varying: Option<Varying>,
}

#[derive(Debug)]
struct Varying {
    weather: Weather,
    n_groups: usize,
    /// the rates that vary: position, group, and value as a function of the deviate
    rates: Vec<(usize, usize, RateTable)>,
}

//! The year's realised rates of a patch.

use crate::demography::{Law, Rate, RateGroup};
use crate::environment::{EnvironmentTable, RateCurves, Weather, WeatherState, YearlyRate};
use crate::random::ReplicateKey;

/// All rates of the life history, compiled.
#[derive(Debug)]
pub(super) struct Rates {
    means: Vec<f64>,
    varying: Option<Varying>,
}

/// What is needed where any rate varies.
#[derive(Debug)]
struct Varying {
    weather: Weather,
    curves: RateCurves,
    /// the rates that vary, by position, those of the first group first
    moving: [Vec<usize>; 2],
}

impl Rates {
    /// Where no rate varies, no weather is drawn.
    ///
    /// # Errors
    /// Why the weather of these patches cannot be drawn.
    pub(super) fn compile(
        rates: &[Rate],
        environment: &EnvironmentTable,
        centroids_km: &[[f64; 2]],
        patch_keys: &[u64],
    ) -> Result<Self, String> {
        let means = rates.iter().map(|rate| rate.mean).collect();
        let moving = [0, 1].map(|group| moving(rates, group));
        if moving.iter().all(Vec::is_empty) {
            return Ok(Self { means, varying: None });
        }
        // The first group is drawn in any case: the second follows it as far as they are correlated.
        let n_groups = if moving[1].is_empty() { 1 } else { 2 };
        let yearly: Vec<YearlyRate> = rates.iter().map(yearly).collect();
        let weather = Weather::compile(environment, centroids_km, patch_keys, n_groups)?;
        Ok(Self { means, varying: Some(Varying { weather, curves: RateCurves::new(&yearly), moving }) })
    }

    /// The rates of an average year.
    pub(super) fn means(&self) -> &[f64] {
        &self.means
    }

    /// Room for the weather of one replicate at a time, where there is weather.
    pub(super) fn weather_state(&self) -> Option<WeatherState> {
        self.varying.as_ref().map(|varying| varying.weather.state())
    }

    /// Goes on to the next year of a replicate.
    pub(super) fn advance(&self, state: &mut Option<WeatherState>) {
        if let (Some(varying), Some(state)) = (&self.varying, state) {
            state.advance(&varying.weather);
        }
    }

    /// The year's rates in a patch. `rates` holds the means where rates do not vary, and is filled in where they do.
    #[inline]
    pub(super) fn realise(&self, state: Option<&WeatherState>, patch: usize, rates: &mut [f64]) {
        let (Some(varying), Some(state)) = (&self.varying, state) else { return };
        for (group, moving) in varying.moving.iter().enumerate() {
            if moving.is_empty() {
                continue;
            }
            let located = varying.curves.locate(state.deviates(group)[patch]);
            for rate in moving {
                rates[*rate] = varying.curves.rate(*rate, &located);
            }
        }
    }
}

/// Begins a replicate.
pub(super) fn begin(state: &mut Option<WeatherState>, replicate: ReplicateKey) {
    if let Some(state) = state {
        state.start(replicate);
    }
}

fn moving(rates: &[Rate], group: usize) -> Vec<usize> {
    let in_group = |rate: &Rate| match rate.group {
        RateGroup::Survival | RateGroup::Growth => group == 0,
        RateGroup::Fecundity => group == 1,
    };
    (0..rates.len()).filter(|position| rates[*position].sd > 0.0 && in_group(&rates[*position])).collect()
}

fn yearly(rate: &Rate) -> YearlyRate {
    let checked = match rate.law {
        Law::Beta => YearlyRate::beta(rate.mean, rate.sd),
        Law::Lognormal => YearlyRate::lognormal(rate.mean, rate.sd),
    };
    checked.expect("means and sds were checked where they were read")
}

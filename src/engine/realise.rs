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
    moving: Vec<Moving>,
}

/// Rates that follow the same deviates.
#[derive(Debug)]
struct Moving {
    group: usize,
    stage: usize,
    /// their positions
    rates: Vec<usize>,
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
        n_stages: usize,
    ) -> Result<Self, String> {
        let means = rates.iter().map(|rate| rate.mean).collect();
        if rates.iter().all(|rate| rate.sd <= 0.0) {
            return Ok(Self { means, varying: None });
        }
        // The first group is drawn in any case: the second follows it as far as they are correlated.
        let n_groups = if rates.iter().any(|rate| rate.sd > 0.0 && group(rate) == 1) { 2 } else { 1 };
        let yearly: Vec<YearlyRate> = rates.iter().map(yearly).collect();
        let weather = Weather::compile(environment, centroids_km, patch_keys, n_groups)?.with_stages(n_stages);
        let moving = moving(rates, weather.n_kinds_of_stages());
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
        for moving in &varying.moving {
            let located = varying.curves.locate(state.stage_deviates(moving.group, moving.stage)[patch]);
            for rate in &moving.rates {
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

/// The rates that vary, by the deviates that they follow: of a group, and of one of so many stages.
fn moving(rates: &[Rate], n_stages: usize) -> Vec<Moving> {
    let of = |the_group: usize, stage: usize| Moving {
        group: the_group,
        stage,
        // Rates stand group by group, each in the order of the stages.
        rates: (0..rates.len())
            .filter(|at| rates[*at].sd > 0.0 && group(&rates[*at]) == the_group && at % n_stages == stage)
            .collect(),
    };
    let all = [0, 1].into_iter().flat_map(|group| (0..n_stages).map(move |stage| of(group, stage)));
    all.filter(|moving| !moving.rates.is_empty()).collect()
}

fn group(rate: &Rate) -> usize {
    match rate.group {
        RateGroup::Survival | RateGroup::Growth => 0,
        RateGroup::Fecundity => 1,
    }
}

fn yearly(rate: &Rate) -> YearlyRate {
    let checked = match rate.law {
        Law::Beta => YearlyRate::beta(rate.mean, rate.sd),
        Law::Lognormal => YearlyRate::lognormal(rate.mean, rate.sd),
    };
    checked.expect("means and sds were checked where they were read")
}

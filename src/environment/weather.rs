//! The weather of a replicate: standard normal deviates by patch, year and rate group.

use super::field::FieldState;
use super::{Correlation, EnvironmentTable, Field};
use crate::random::{Purpose, ReplicateKey, standard_normal};

/// The weather as the study states it, over the patches of a landscape: what all replicates share.
///
/// Deviates are standard normal in every year, the first included. From year to year they keep what `autocorrelation` says
/// (a first-order autoregressive series, in its stationary state from the start); between patches they are correlated as
/// the field says; the deviates of the second rate group are correlated with those of the first by `between_rates`.
#[derive(Debug, Clone)]
pub struct Weather {
    field: Field,
    patch_keys: Vec<u64>,
    /// share of the variance that is a patch's own
    nugget: f64,
    autocorrelation: f64,
    between_rates: f64,
    n_groups: usize,
}

/// The weather of one replicate at one year. Made once a thread, it serves one replicate after another and allocates nothing.
#[derive(Debug, Clone)]
pub struct WeatherState {
    replicate: ReplicateKey,
    /// the year that comes next
    next_year: u32,
    series: Vec<Series>,
    /// the second group's deviates, where they are not the first's
    second: Vec<f64>,
    innovations: Vec<f64>,
}

/// An autoregressive series in every patch, independent of any other.
#[derive(Debug, Clone)]
struct Series {
    field: FieldState,
    deviates: Vec<f64>,
}

impl Weather {
    /// The weather of patches with these centroids (kilometres in a plane) and keys, for one rate group or two.
    ///
    /// Patches stand in canonical order, those as is before the ones that a proposal adds; a patch that is made from another
    /// one has that one's centroid and key, if it is to have its weather. A table without correlation means that there is one
    /// patch alone.
    ///
    /// # Errors
    /// Why it cannot be, in words: more than one patch without a correlation, or more than
    /// [`super::MOST_CORRELATED_PLACES`] places for one by distance.
    pub fn compile(
        table: &EnvironmentTable,
        centroids_km: &[[f64; 2]],
        patch_keys: &[u64],
        n_groups: usize,
    ) -> Result<Self, String> {
        let correlation = match &table.correlation {
            Some(said) => said.value,
            None if patch_keys.len() <= 1 => Correlation::None,
            None => return Err("the correlation of the weather between patches".to_owned()),
        };
        let nugget = if let Correlation::Reach { nugget, .. } = correlation { nugget } else { 0.0 };
        Ok(Self {
            field: Field::new(correlation, centroids_km, patch_keys)?,
            patch_keys: patch_keys.to_vec(),
            nugget,
            autocorrelation: table.autocorrelation,
            between_rates: table.between_rates,
            n_groups,
        })
    }

    /// Which field was taken.
    pub fn field(&self) -> &Field {
        &self.field
    }

    /// Room for one replicate at a time.
    pub fn state(&self) -> WeatherState {
        let zeros = || vec![0.0; self.patch_keys.len()];
        let series = Series { field: self.field.state(), deviates: zeros() };
        WeatherState {
            replicate: ReplicateKey::new(0, 0),
            next_year: 0,
            series: vec![series; if self.second_has_its_own() { 2 } else { 1 }],
            second: if self.n_groups > 1 { zeros() } else { Vec::new() },
            innovations: zeros(),
        }
    }

    /// Whether the second group's weather is not the first's alone.
    fn second_has_its_own(&self) -> bool {
        self.n_groups > 1 && self.between_rates.abs() < 1.0
    }
}

impl WeatherState {
    /// Begins a replicate, before its first year.
    pub fn start(&mut self, replicate: ReplicateKey) {
        self.replicate = replicate;
        self.next_year = 0;
    }

    /// Goes on to the next year. The first of a replicate is year 0, the step from census 0 to census 1.
    pub fn advance(&mut self, weather: &Weather) {
        for (group, series) in (0..).zip(&mut self.series) {
            let innovations = &mut self.innovations;
            weather.field.draw(
                &mut series.field,
                self.replicate,
                self.next_year,
                group,
                &weather.patch_keys,
                innovations,
            );
            add_own(weather, self.replicate, self.next_year, group, innovations);
            series.step(self.next_year, weather.autocorrelation, innovations);
        }
        if weather.n_groups > 1 {
            self.combine(weather.between_rates);
        }
        self.next_year += 1;
    }

    /// The year's deviates of a rate group (0 or 1), by patch.
    pub fn deviates(&self, group: usize) -> &[f64] {
        if group == 0 { &self.series[0].deviates } else { &self.second }
    }

    fn combine(&mut self, between_rates: f64) {
        match self.series.as_slice() {
            [first, own] => {
                let own_share = (1.0 - between_rates * between_rates).sqrt();
                for ((second, first), own) in self.second.iter_mut().zip(&first.deviates).zip(&own.deviates) {
                    *second = between_rates * first + own_share * own;
                }
            }
            [first, ..] => {
                for (second, first) in self.second.iter_mut().zip(&first.deviates) {
                    *second = between_rates * first;
                }
            }
            [] => {}
        }
    }
}

impl Series {
    fn step(&mut self, year: u32, autocorrelation: f64, innovations: &[f64]) {
        if year == 0 {
            self.deviates.copy_from_slice(innovations);
            return;
        }
        let fresh = (1.0 - autocorrelation * autocorrelation).sqrt();
        for (deviate, innovation) in self.deviates.iter_mut().zip(innovations) {
            *deviate = autocorrelation * *deviate + fresh * innovation;
        }
    }
}

/// Puts a patch's own innovations in the place of their share of the field's.
fn add_own(weather: &Weather, replicate: ReplicateKey, year: u32, group: u32, innovations: &mut [f64]) {
    if weather.nugget <= 0.0 {
        return;
    }
    let year = replicate.year(year);
    let (shared, own) = ((1.0 - weather.nugget).sqrt(), weather.nugget.sqrt());
    for (innovation, patch) in innovations.iter_mut().zip(&weather.patch_keys) {
        let noise = standard_normal(&mut year.patch(*patch).draw(Purpose::OwnWeather(group)));
        *innovation = shared * *innovation + own * noise;
    }
}

//! The weather of a replicate: standard normal deviates by patch, year, rate group and stage.

use super::field::FieldState;
use super::{Correlation, EnvironmentTable, Field, Record};
use crate::random::{Purpose, ReplicateKey, standard_normal};

/// The weather as the study states it, over the patches of a landscape: what all replicates share.
///
/// Deviates are standard normal in every year, the first included. From year to year they keep what `autocorrelation` says
/// (a first-order autoregressive series, in its stationary state from the start); between patches they are correlated as
/// the field says; the deviates of the second rate group are correlated with those of the first by `between_rates`, and
/// those of one stage with another's by `between_stages`, and across both by the product. A record takes the place of what
/// the first group's stages have in common.
#[derive(Debug, Clone)]
pub struct Weather {
    field: Field,
    patch_keys: Vec<u64>,
    /// share of the variance that is a patch's own
    nugget: f64,
    autocorrelation: f64,
    between_rates: f64,
    n_groups: usize,
    between_stages: f64,
    /// stages with deviates of their own; none where all have the same
    n_stages_apart: usize,
    record: Option<Record>,
}

/// The weather of one replicate at one year. Made once a thread, it serves one replicate after another and allocates nothing.
#[derive(Debug, Clone)]
pub struct WeatherState {
    replicate: ReplicateKey,
    /// the year that comes next
    next_year: u32,
    /// what all stages have in common
    common: Groups,
    stages: Vec<StageWeather>,
    innovations: Vec<f64>,
}

/// The deviates of a stage that has its own.
#[derive(Debug, Clone)]
struct StageWeather {
    own: Groups,
    /// by rate group: its own and the common ones together
    deviates: [Vec<f64>; 2],
}

/// Deviates of the rate groups.
#[derive(Debug, Clone)]
struct Groups {
    /// the purpose of the first series; each has its own
    first_purpose: u32,
    series: Vec<Series>,
    /// the second group's deviates, where they are not the first's
    second: Vec<f64>,
}

/// An autoregressive series in every patch, independent of any other.
#[derive(Debug, Clone)]
struct Series {
    field: FieldState,
    deviates: Vec<f64>,
}

impl Weather {
    /// The weather of patches with these centroids (kilometres in a plane) and keys, for one rate group or two, the stages
    /// all alike.
    ///
    /// Patches stand in canonical order, those as is before the ones that a proposal adds; a patch that is made from another
    /// one has that one's centroid and key, if it is to have its weather. A table without correlation means that there is one
    /// patch alone, or a record.
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
            _ if table.recorded.is_some() => Correlation::Full,
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
            between_stages: table.between_stages,
            n_stages_apart: 0,
            record: table.recorded.clone(),
        })
    }

    /// The same for so many stages, which go together as the table says.
    pub fn with_stages(mut self, n_stages: usize) -> Self {
        self.n_stages_apart = if self.between_stages < 1.0 && n_stages > 1 { n_stages } else { 0 };
        self
    }

    /// Stages with deviates of their own: as many as there are, or one that stands for all.
    pub fn n_kinds_of_stages(&self) -> usize {
        self.n_stages_apart.max(1)
    }

    /// Which field was taken.
    pub fn field(&self) -> &Field {
        &self.field
    }

    /// Room for one replicate at a time.
    pub fn state(&self) -> WeatherState {
        let stage = |stage: usize| StageWeather {
            own: Groups::new(self, 2 * (stage as u32 + 1)),
            deviates: [0, 1].map(|group| vec![0.0; if group < self.n_groups { self.patch_keys.len() } else { 0 }]),
        };
        WeatherState {
            replicate: ReplicateKey::new(0, 0),
            next_year: 0,
            common: Groups::new(self, 0),
            stages: (0..self.n_stages_apart).map(stage).collect(),
            innovations: vec![0.0; self.patch_keys.len()],
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
        let (replicate, year) = (self.replicate, self.next_year);
        let recorded = weather.record.as_ref().map(|record| record.deviate(replicate, year));
        self.common.advance(weather, replicate, year, recorded, &mut self.innovations);
        for stage in &mut self.stages {
            stage.own.advance(weather, replicate, year, None, &mut self.innovations);
            stage.mix(&self.common, weather.between_stages);
        }
        self.next_year += 1;
    }

    /// The year's deviates of a rate group (0 or 1) that all stages have in common, by patch: all that there is where
    /// stages are alike.
    pub fn deviates(&self, group: usize) -> &[f64] {
        self.common.deviates(group)
    }

    /// The year's deviates of a rate group (0 or 1) of a stage, by patch.
    #[inline]
    pub fn stage_deviates(&self, group: usize, stage: usize) -> &[f64] {
        self.stages.get(stage).map_or_else(|| self.common.deviates(group), |stage| &stage.deviates[group])
    }
}

impl StageWeather {
    /// Whatever two stages have in common makes up `between_stages` of the variance of each.
    fn mix(&mut self, common: &Groups, between_stages: f64) {
        let (shared, own_share) = (between_stages.sqrt(), (1.0 - between_stages).sqrt());
        for (group, mixed) in self.deviates.iter_mut().enumerate().filter(|(_, mixed)| !mixed.is_empty()) {
            let parts = common.deviates(group).iter().zip(self.own.deviates(group));
            for (mixed, (common, own)) in mixed.iter_mut().zip(parts) {
                *mixed = shared * common + own_share * own;
            }
        }
    }
}

impl Groups {
    fn new(weather: &Weather, first_purpose: u32) -> Self {
        let zeros = || vec![0.0; weather.patch_keys.len()];
        let series = Series { field: weather.field.state(), deviates: zeros() };
        Self {
            first_purpose,
            series: vec![series; if weather.second_has_its_own() { 2 } else { 1 }],
            second: if weather.n_groups > 1 { zeros() } else { Vec::new() },
        }
    }

    fn deviates(&self, group: usize) -> &[f64] {
        if group == 0 { &self.series[0].deviates } else { &self.second }
    }

    /// Draws the year's deviates; `recorded` takes the place of the first group's.
    fn advance(
        &mut self,
        weather: &Weather,
        replicate: ReplicateKey,
        year: u32,
        recorded: Option<f64>,
        innovations: &mut [f64],
    ) {
        for (group, series) in (0..).zip(&mut self.series) {
            if let Some(recorded) = recorded.filter(|_| group == 0) {
                series.deviates.fill(recorded);
                continue;
            }
            let purpose = self.first_purpose + group;
            weather.field.draw(&mut series.field, replicate, year, purpose, &weather.patch_keys, innovations);
            add_own(weather, replicate, year, purpose, innovations);
            series.step(year, weather.autocorrelation, innovations);
        }
        if weather.n_groups > 1 {
            self.combine(weather.between_rates);
        }
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

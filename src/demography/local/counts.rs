//! Counts: one stage; each individual leaves a number of individuals, itself included if it lives.

use std::sync::Arc;

use super::{LocalModel, Pressure};
use crate::demography::allee::{self, AlleeEffect};
use crate::demography::density::Density;
use crate::demography::{Law, LifeHistory, ProjectionMatrix, Rate, RateGroup, Stage};
use crate::random::{PlaceKey, Purpose, gamma, poisson};
use crate::study::{Numbers, PROBABILITY, Table};

/// The name of the only stage.
const STAGE: &str = "all";

#[derive(Debug)]
struct Counts {
    /// variance over mean of the number that an individual leaves, less 1; `None` where it is Poisson
    excess: Option<f64>,
}

impl LocalModel for Counts {
    fn step(&self, counts: &mut [u32], rates: &[f64], pressure: Pressure, place: PlaceKey, _: &mut [u32]) -> bool {
        let mean = f64::from(counts[0]) * rates[0] * pressure.fecundity;
        let mean = match self.excess {
            None => mean,
            // Negative binomial numbers of one variance over mean add up to such a number, and each is a Poisson number
            // whose mean is a gamma variable (Greenwood & Yule 1920, J. R. Stat. Soc. 83).
            Some(excess) => excess * gamma(&mut place.draw(Purpose::Heterogeneity), mean / excess),
        };
        counts[0] = poisson(&mut place.draw(Purpose::Young(0)), mean);
        counts[0] == u32::MAX
    }

    fn young_in_words(&self) -> String {
        let law = match self.excess {
            None => "Poisson number".to_owned(),
            Some(excess) => format!("negative binomial number (variance {} times the mean)", 1.0 + excess),
        };
        format!("each individual leaves a {law} of individuals at the next census, itself included if it lives")
    }
}

/// Variance over mean of what an individual leaves: 1 or above.
const FROM_1: Numbers = Numbers { low: 1.0, high: f64::MAX, above_low: false, below_high: false };

/// Reads `growth`, `offspring_variance`, `emigration` and `density_dependence`.
pub(super) fn read(table: &Table<'_>) -> Option<LifeHistory> {
    let growth = Rate::read(table, "growth", RateGroup::Growth, Law::Lognormal);
    if !table.has("growth") {
        table.missing("growth", "mean growth a year at low numbers, as a number or { mean = .., sd = .. }");
    }
    let spread = table.number("offspring_variance", FROM_1);
    let emigration = table.number("emigration", PROBABILITY);
    let matrix = growth.as_ref().map(|growth| {
        let mut matrix = ProjectionMatrix::zero(1);
        matrix.young[(0, 0)] = growth.mean;
        matrix
    });
    let density = Density::read(table, matrix.as_ref(), true);
    let allee_effect = AlleeEffect::read(table, Some(vec![0]));
    let (growth, matrix, density) = (growth?, matrix?, density?);
    let leaving = emigration.as_ref().map_or(0.0, |said| said.value);
    let excess = spread.map(|said| said.value - 1.0).filter(|excess| *excess > 0.0);
    Some(LifeHistory {
        kind: "counts",
        individuals: "individuals".to_owned(),
        stages: vec![Stage { name: STAGE.to_owned(), emigration: leaving, toward_capacity: 1.0 }],
        rates: vec![growth],
        matrix,
        density,
        model: allee::under(allee_effect.as_ref(), Arc::new(Counts { excess })),
        allee_effect,
        census: None,
        emigration_said: emigration.filter(|said| said.value > 0.0),
        occupancy: None,
    })
}

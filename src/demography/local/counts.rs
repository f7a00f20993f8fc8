//! Counts: one stage; each individual leaves a number of individuals, itself included if it lives.

use std::sync::Arc;

use super::{LocalModel, Pressure};
use crate::demography::density::Density;
use crate::demography::{Law, LifeHistory, ProjectionMatrix, Rate, RateGroup, Stage};
use crate::random::{PlaceKey, Purpose, poisson};
use crate::study::{PROBABILITY, Table};

/// The name of the only stage.
const STAGE: &str = "all";

#[derive(Debug)]
struct Counts;

impl LocalModel for Counts {
    fn step(&self, counts: &mut [u32], rates: &[f64], pressure: Pressure, place: PlaceKey, _: &mut [u32]) -> bool {
        let mean = f64::from(counts[0]) * rates[0] * pressure.fecundity;
        counts[0] = poisson(&mut place.draw(Purpose::Young(0)), mean);
        counts[0] == u32::MAX
    }

    fn young_in_words(&self) -> String {
        "each individual leaves a Poisson number of individuals at the next census, itself included if it lives"
            .to_owned()
    }
}

/// Reads `growth`, `emigration` and `density_dependence`.
pub(super) fn read(table: &Table<'_>) -> Option<LifeHistory> {
    let growth = Rate::read(table, "growth", RateGroup::Growth, Law::Lognormal);
    if !table.has("growth") {
        table.missing("growth", "mean growth a year at low numbers, as a number or { mean = .., sd = .. }");
    }
    let emigration = table.number("emigration", PROBABILITY);
    let matrix = growth.as_ref().map(|growth| {
        let mut matrix = ProjectionMatrix::zero(1);
        matrix.young[(0, 0)] = growth.mean;
        matrix
    });
    let density = Density::read(table, matrix.as_ref(), true);
    let (growth, matrix, density) = (growth?, matrix?, density?);
    let leaving = emigration.as_ref().map_or(0.0, |said| said.value);
    Some(LifeHistory {
        kind: "counts",
        individuals: "individuals".to_owned(),
        stages: vec![Stage { name: STAGE.to_owned(), emigration: leaving, toward_capacity: 1.0 }],
        rates: vec![growth],
        matrix,
        density,
        model: Arc::new(Counts),
        emigration_said: emigration.filter(|said| said.value > 0.0),
        occupancy: None,
    })
}

//! Occupancy: patches are full or empty, and all are updated at once from the last census.
//!
//! # Source
//! The incidence function model: Hanski 1994, Journal of Animal Ecology 63.

use std::sync::Arc;

use super::{LocalModel, Pressure};
use crate::demography::density::Density;
use crate::demography::{Law, LifeHistory, ProjectionMatrix, Rate, RateGroup, Stage};
use crate::random::{PlaceKey, Purpose};
use crate::study::{Numbers, Table};

/// What is counted.
const PATCHES: &str = "occupied patches";
/// The values that e and y may have: y has the unit of S, whose areas may be large.
const SCALES: Numbers = Numbers { low: 0.0, high: 1e12, above_low: true, below_high: false };
/// The exponents that x may be: beyond, areas raised to it are no numbers any more.
const EXPONENTS: Numbers = Numbers { low: 0.0, high: 10.0, above_low: false, below_high: false };
/// Standard deviations of the factors of a year.
const FACTOR_SDS: Numbers = Numbers { low: 0.0, high: 100.0, above_low: false, below_high: false };

/// How the turnover of a patch follows from its area and its connectivity.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Occupancy {
    /// exponent x with which extinction falls with area
    pub extinction_exponent: f64,
    /// whether colonists save a population that would have died out
    pub rescue: bool,
}

/// The chances of a patch in one year.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Turnover {
    /// that it is empty at the next census if it is occupied now
    pub extinction: f64,
    /// that it is occupied at the next census if it is empty now
    pub colonisation: f64,
}

impl Occupancy {
    /// The year's chances of a patch: E = min(1, e / A^x), or E (1 - C) with rescue, and C = S^2 / (S^2 + y^2).
    ///
    /// `area_to_x` is A^x, A in hectares; `connectivity` is S, in the unit of `y`.
    #[inline]
    pub fn turnover(&self, e: f64, y: f64, area_to_x: f64, connectivity: f64) -> Turnover {
        // Written with y / S, no square of a small or large number vanishes or overflows where C itself does not.
        let relative = y / connectivity;
        let colonisation = if connectivity > 0.0 { 1.0 / (1.0 + relative * relative) } else { 0.0 };
        let extinction = (e / area_to_x).min(1.0);
        Turnover { extinction: if self.rescue { extinction * (1.0 - colonisation) } else { extinction }, colonisation }
    }
}

#[derive(Debug)]
struct FullOrEmpty;

impl LocalModel for FullOrEmpty {
    /// One draw decides, whichever state the patch is in: it is full at the next census if the draw lies below the chance
    /// of that. So a patch that is full keeps the better luck under every proposal that makes it full.
    ///
    /// `rates` are the year's chances of extinction and of colonisation, which hang on all patches.
    #[inline]
    fn step(&self, counts: &mut [u32], rates: &[f64], _: Pressure, place: PlaceKey, _: &mut [u32]) -> bool {
        let chance = if counts[0] > 0 { 1.0 - rates[0] } else { rates[1] };
        counts[0] = u32::from(place.draw(Purpose::Turnover).uniform() < chance);
        false
    }

    fn young_in_words(&self) -> String {
        "patches are full or empty, and all are updated at once from the last census".to_owned()
    }
}

/// Reads `extinction`, `colonisation`, `rescue` and `weather`.
pub(super) fn read(table: &Table<'_>) -> Option<LifeHistory> {
    let extinction = read_extinction(table);
    let y = read_colonisation(table);
    let rescue = if table.has("rescue") { table.flag("rescue").map(|said| said.value) } else { Some(false) };
    let sds = read_weather(table);
    let ((e, extinction_exponent), y, rescue, [e_sd, y_sd]) = (extinction?, y?, rescue?, sds?);
    let mut matrix = ProjectionMatrix::zero(1);
    matrix.fates[(0, 0)] = 1.0;
    Some(LifeHistory {
        kind: "occupancy",
        individuals: PATCHES.to_owned(),
        stages: vec![Stage { name: PATCHES.to_owned(), emigration: 0.0, toward_capacity: 1.0 }],
        // A factor of mean 1 makes the rate itself lognormal with the rate's mean. Both are of one group: a bad year
        // raises e and y alike.
        rates: vec![
            rate(table.address("extinction.e"), e, e_sd * e),
            rate(table.address("colonisation.y"), y, y_sd * y),
        ],
        matrix,
        density: Density::none(),
        model: Arc::new(FullOrEmpty),
        allee_effect: None,
        census: None,
        emigration_said: None,
        occupancy: Some(Occupancy { extinction_exponent, rescue }),
    })
}

fn rate(address: String, mean: f64, sd: f64) -> Rate {
    Rate { address, mean, sd, group: RateGroup::Growth, law: Law::Lognormal }
}

fn read_extinction(table: &Table<'_>) -> Option<(f64, f64)> {
    let inner =
        required(table, "extinction", "{ e = 0.1, x = 0.8 }: extinction is e / area^x a year, area in hectares")?;
    let e = required_number(&inner, "e", SCALES, "the chance that a patch of one hectare dies out in a year");
    let x = required_number(&inner, "x", EXPONENTS, "the exponent with which extinction falls with area");
    inner.finish();
    Some((e?, x?))
}

fn read_colonisation(table: &Table<'_>) -> Option<f64> {
    let inner =
        required(table, "colonisation", "{ y = 2.5 }: the connectivity S at which half of the patches are colonised")?;
    let y = required_number(&inner, "y", SCALES, "the connectivity S at which colonisation has chance 1/2 a year");
    inner.finish();
    y
}

/// The sds of the yearly factors on e and y.
fn read_weather(table: &Table<'_>) -> Option<[f64; 2]> {
    if !table.has("weather") {
        return Some([0.0; 2]);
    }
    let inner = table.table("weather")?;
    let sds = ["e_sd", "y_sd"]
        .map(|key| if inner.has(key) { inner.number(key, FACTOR_SDS).map(|said| said.value) } else { Some(0.0) });
    inner.finish();
    let [e_sd, y_sd] = sds;
    Some([e_sd?, y_sd?])
}

fn required<'d>(table: &Table<'d>, key: &str, such_as: &str) -> Option<Table<'d>> {
    if !table.has(key) {
        table.missing(key, such_as);
    }
    table.table(key)
}

fn required_number(table: &Table<'_>, key: &str, numbers: Numbers, meaning: &str) -> Option<f64> {
    if !table.has(key) {
        table.missing(key, format!("{numbers}: {meaning}"));
    }
    table.number(key, numbers).map(|said| said.value)
}

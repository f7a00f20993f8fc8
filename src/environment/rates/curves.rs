//! Rates as tables of the deviate, for the yearly loop.
//!
//! All tables of a model stand on one grid of deviates, so that a deviate is located once and then read in as many tables
//! as there are rates. Between knots runs the cubic through both values and slopes; slopes are held to three times the
//! rise on either side, which keeps every cubic monotone (Fritsch & Carlson 1980, SIAM J. Numer. Anal. 17).

use super::YearlyRate;

/// Rates as functions of the deviate, in the order in which they were given.
#[derive(Debug, Clone, PartialEq)]
pub struct RateCurves {
    knots_per_unit: f64,
    curves: Vec<Curve>,
}

/// A deviate's place on the grid.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Located {
    z: f64,
    knot: usize,
    /// of the value and slope at the knot, and of those at the next
    weights: [f64; 4],
}

#[derive(Debug, Clone, PartialEq)]
enum Curve {
    Fixed(f64),
    /// value and slope at each knot, the slope per step of the grid
    Table(Vec<[f64; 2]>),
    /// a rate too steep for any table
    Exact(YearlyRate),
}

/// The deviates that tables cover are -8.5 to 8.5; beyond, which has chance 2e-17, they stay what they are at the end.
const END: f64 = 8.5;

/// Knots per unit that are tried, until the curve is within [`TOLERANCE`] half-way between all knots.
const GRIDS: [u32; 7] = [16, 32, 64, 128, 256, 512, 1024];

/// Relative to the rate's mean, or to its value where that is greater.
const TOLERANCE: f64 = 2.5e-7;

impl RateCurves {
    /// Tables for these rates, on the coarsest grid that serves them all. A rate that none serves, which is next to an
    /// impossible sd, is computed each time.
    pub fn new(rates: &[YearlyRate]) -> Self {
        let needs: Vec<Option<u32>> = rates.iter().map(coarsest_grid).collect();
        let knots_per_unit = needs.iter().flatten().copied().max().unwrap_or(GRIDS[0]);
        let curves = rates.iter().zip(needs).map(|(rate, need)| match (rate, need) {
            (YearlyRate::Fixed(rate), _) => Curve::Fixed(*rate),
            (_, Some(_)) => Curve::Table(table(rate, knots_per_unit)),
            (_, None) => Curve::Exact(*rate),
        });
        Self { knots_per_unit: f64::from(knots_per_unit), curves: curves.collect() }
    }

    /// The place of a deviate, to read any of the rates at.
    #[inline]
    pub fn locate(&self, z: f64) -> Located {
        let z = z.clamp(-END, END);
        let position = (z + END) * self.knots_per_unit;
        // The last knot is the end of a step, not the beginning of one.
        let knot = (position as usize).min((2.0 * END * self.knots_per_unit) as usize - 1);
        Located { z, knot, weights: hermite(position - knot as f64) }
    }

    /// A rate in a year with the located deviate: within 1e-6 of [`YearlyRate::at`].
    #[inline]
    pub fn rate(&self, rate: usize, located: &Located) -> f64 {
        match &self.curves[rate] {
            Curve::Fixed(rate) => *rate,
            Curve::Table(table) => read(table, located),
            Curve::Exact(rate) => rate.at(located.z),
        }
    }
}

#[inline]
fn read(table: &[[f64; 2]], located: &Located) -> f64 {
    let [here, next] = [table[located.knot], table[located.knot + 1]];
    let [w0, w1, w2, w3] = located.weights;
    let value = here[0] * w0 + here[1] * w1 + next[0] * w2 + next[1] * w3;
    // Rounding may overstep a knot, and so the end of what the rate can be. No value is NaN, for which `max` and `min` would
    // have to look.
    let value = if value > here[0] { value } else { here[0] };
    if value < next[0] { value } else { next[0] }
}

/// What value and slope at both ends of a step count for at a fraction of it.
#[inline]
fn hermite(fraction: f64) -> [f64; 4] {
    let rest = 1.0 - fraction;
    [
        (1.0 + 2.0 * fraction) * rest * rest,
        fraction * rest * rest,
        fraction * fraction * (3.0 - 2.0 * fraction),
        -fraction * fraction * rest,
    ]
}

fn n_knots(knots_per_unit: u32) -> u32 {
    17 * knots_per_unit + 1
}

fn deviate(position: f64, knots_per_unit: u32) -> f64 {
    position / f64::from(knots_per_unit) - END
}

fn table(rate: &YearlyRate, knots_per_unit: u32) -> Vec<[f64; 2]> {
    let knots = 0..n_knots(knots_per_unit);
    let mut table: Vec<[f64; 2]> = knots
        .map(|knot| {
            let (value, slope) = rate.value_and_slope(deviate(f64::from(knot), knots_per_unit));
            [value, slope / f64::from(knots_per_unit)]
        })
        .collect();
    for knot in 0..table.len() - 1 {
        table[knot + 1][0] = table[knot + 1][0].max(table[knot][0]);
        let most = 3.0 * (table[knot + 1][0] - table[knot][0]);
        table[knot][1] = table[knot][1].min(most);
        table[knot + 1][1] = table[knot + 1][1].min(most);
    }
    table
}

fn coarsest_grid(rate: &YearlyRate) -> Option<u32> {
    if let YearlyRate::Fixed(_) = rate {
        return Some(GRIDS[0]);
    }
    GRIDS.into_iter().find(|knots_per_unit| serves(rate, *knots_per_unit))
}

fn serves(rate: &YearlyRate, knots_per_unit: u32) -> bool {
    let table = table(rate, knots_per_unit);
    let weights = hermite(0.5);
    let scale = rate.mean();
    (0..n_knots(knots_per_unit) - 1).all(|knot| {
        let z = deviate(f64::from(knot) + 0.5, knots_per_unit);
        let exact = rate.at(z);
        let found = read(&table, &Located { z, knot: knot as usize, weights });
        (found - exact).abs() <= TOLERANCE * exact.max(scale)
    })
}

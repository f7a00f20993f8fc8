//! The exponential-power kernel.

use std::f64::consts::TAU;

use super::{Kernel, Scale, Shape, halfway};
use crate::num;
use crate::study::{Numbers, Table};

/// Exponents that the arithmetic carries and that fits to data come near.
const EXPONENTS: Numbers = Numbers { low: 0.1, high: 20.0, above_low: false, below_high: false };

/// k(r) = c exp(-(r/a)^c) / (2 pi a2 Gamma(2/c)), fat-tailed below c = 1 (Austerlitz et al. 2004).
#[derive(Debug, Clone)]
pub struct ExponentialPower {
    a_km: f64,
    c: f64,
    mean_km: f64,
    /// ln k(0)
    ln_top: f64,
}

/// Mean distance at a = 1: Gamma(3/c) / Gamma(2/c).
fn mean_at_1(c: f64) -> f64 {
    num::exp(num::ln_gamma(3.0 / c) - num::ln_gamma(2.0 / c))
}

/// P(distance > r) at a = 1.
fn beyond(c: f64, r: f64) -> f64 {
    num::gamma::upper(2.0 / c, num::pow(r, c))
}

impl ExponentialPower {
    /// The kernel of exponent `c`, from 0.1 to 20, and a given mean, a Gamma(3/c) / Gamma(2/c), or median (numeric).
    pub fn new(c: f64, scale: Scale) -> Self {
        let a_km = scale.length_km(mean_at_1(c), || halfway(|r| beyond(c, r), mean_at_1(c)));
        let ln_top = num::ln(c) - num::ln(TAU) - 2.0 * num::ln(a_km) - num::ln_gamma(2.0 / c);
        Self { a_km, c, mean_km: a_km * mean_at_1(c), ln_top }
    }
}

pub(super) fn read(table: &Table<'_>, scale: Option<Scale>) -> Option<Kernel> {
    if !table.has("c") {
        table.missing("c", "the exponent of the exponential-power kernel, below 1 for a fat tail");
    }
    let c = table.number("c", EXPONENTS);
    Some(Kernel::new(ExponentialPower::new(c?.value, scale?)))
}

impl Shape for ExponentialPower {
    fn ln_density(&self, km: f64) -> f64 {
        self.ln_top - num::pow(km / self.a_km, self.c)
    }

    fn beyond(&self, km: f64) -> f64 {
        beyond(self.c, km / self.a_km)
    }

    fn relative(&self, km: f64) -> Option<f64> {
        Some(num::exp(-num::pow(km / self.a_km, self.c)))
    }

    fn mean_km(&self) -> f64 {
        self.mean_km
    }
}

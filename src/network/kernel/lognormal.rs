//! The lognormal kernel.

use std::f64::consts::TAU;

use super::{Kernel, Scale, Shape};
use crate::num;
use crate::study::{Numbers, Table};

/// Spreads of ln distance: from a thin ring to a tail so fat that one disperser in 160 goes beyond the mean.
const SPREADS: Numbers = Numbers { low: 0.01, high: 5.0, above_low: false, below_high: false };

/// k(r) = exp(-ln2(r/a) / (2 s2)) / ((2 pi)^1.5 s r2): ln distance is normal, with spread s around ln a.
///
/// The density is 0 at distance 0, where neighbours that touch would never exchange anybody; it is therefore read no
/// nearer than a hundredth of the mean.
#[derive(Debug, Clone)]
pub struct Lognormal {
    a_km: f64,
    s: f64,
    mean_km: f64,
}

impl Lognormal {
    /// The kernel of spread `s`, from 0.01 to 5, and a given mean, a exp(s2 / 2), or median, a.
    pub fn new(s: f64, scale: Scale) -> Self {
        let mean_at_1 = num::exp(s * s / 2.0);
        let a_km = scale.length_km(mean_at_1, || 1.0);
        Self { a_km, s, mean_km: a_km * mean_at_1 }
    }

    fn nearest_km(&self) -> f64 {
        self.mean_km / 100.0
    }
}

pub(super) fn read(table: &Table<'_>, scale: Option<Scale>) -> Option<Kernel> {
    if !table.has("s") {
        table.missing("s", "the standard deviation of ln distance");
    }
    let s = table.number("s", SPREADS);
    Some(Kernel::new(Lognormal::new(s?.value, scale?)))
}

impl Shape for Lognormal {
    fn ln_density(&self, km: f64) -> f64 {
        let km = km.max(self.nearest_km());
        let deviate = num::ln(km / self.a_km) / self.s;
        -deviate * deviate / 2.0 - 1.5 * num::ln(TAU) - num::ln(self.s * km * km)
    }

    fn beyond(&self, km: f64) -> f64 {
        num::normal::cdf(-num::ln(km / self.a_km) / self.s)
    }

    fn relative(&self, _: f64) -> Option<f64> {
        None
    }

    fn mean_km(&self) -> f64 {
        self.mean_km
    }

    /// Where d ln k / d ln r = -ln(r/a) / s2 - 2 is 0.
    fn peak_km(&self) -> f64 {
        self.a_km * num::exp(-2.0 * self.s * self.s)
    }
}

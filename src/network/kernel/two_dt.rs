//! The 2Dt kernel.

use std::f64::consts::PI;

use super::{Kernel, Scale, Shape};
use crate::num;
use crate::study::{Numbers, Table};

/// Above 3/2 the mean exists; far above, the kernel is the gaussian and the arithmetic loses digits.
const EXPONENTS: Numbers = Numbers { low: 1.5, high: 1000.0, above_low: true, below_high: false };

/// k(r) = (b - 1) / (pi a2) (1 + r2/a2)^-b, a power law far out (Clark et al. 1999).
#[derive(Debug, Clone)]
pub struct TwoDt {
    a_km: f64,
    b: f64,
    /// ln k(0)
    ln_top: f64,
}

/// Mean distance at a = 1: sqrt(pi) / 2 Gamma(b - 3/2) / Gamma(b - 1).
fn mean_at_1(b: f64) -> f64 {
    PI.sqrt() / 2.0 * num::exp(num::ln_gamma(b - 1.5) - num::ln_gamma(b - 1.0))
}

/// Median distance at a = 1, from (1 + r2)^(1 - b) = 1/2.
fn median_at_1(b: f64) -> f64 {
    num::exp_m1(std::f64::consts::LN_2 / (b - 1.0)).sqrt()
}

impl TwoDt {
    /// The kernel of exponent `b`, above 3/2, and a given mean or median.
    pub fn new(b: f64, scale: Scale) -> Self {
        let a_km = scale.length_km(mean_at_1(b), || median_at_1(b));
        Self { a_km, b, ln_top: num::ln((b - 1.0) / (PI * a_km * a_km)) }
    }

    /// ln(1 + r2/a2)
    fn ln_base(&self, km: f64) -> f64 {
        let r = km / self.a_km;
        num::ln_1p(r * r)
    }
}

pub(super) fn read(table: &Table<'_>, scale: Option<Scale>) -> Option<Kernel> {
    if !table.has("b") {
        table.missing("b", "the exponent of the 2Dt kernel, above 1.5, where its mean exists");
    }
    let b = table.number("b", EXPONENTS);
    Some(Kernel::new(TwoDt::new(b?.value, scale?)))
}

impl Shape for TwoDt {
    fn ln_density(&self, km: f64) -> f64 {
        self.ln_top - self.b * self.ln_base(km)
    }

    fn beyond(&self, km: f64) -> f64 {
        num::exp((1.0 - self.b) * self.ln_base(km))
    }

    fn relative(&self, km: f64) -> Option<f64> {
        Some(num::exp(-self.b * self.ln_base(km)))
    }

    fn mean_km(&self) -> f64 {
        self.a_km * mean_at_1(self.b)
    }
}

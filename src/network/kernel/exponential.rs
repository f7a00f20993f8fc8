//! The exponential kernel.

use std::f64::consts::TAU;

use super::{Kernel, Scale, Shape, halfway};
use crate::num;
use crate::study::Table;

/// k(r) = exp(-r/a) / (2 pi a2): the density falls by the same share with every kilometre.
#[derive(Debug, Clone)]
pub struct Exponential {
    a_km: f64,
    /// ln k(0)
    ln_top: f64,
}

/// P(distance > r) at a = 1.
fn beyond(r: f64) -> f64 {
    (1.0 + r) * num::exp(-r)
}

impl Exponential {
    /// The kernel of a given mean (2 a) or median (numeric).
    pub fn new(scale: Scale) -> Self {
        let a_km = scale.length_km(2.0, || halfway(beyond, 2.0));
        Self { a_km, ln_top: -num::ln(TAU * a_km * a_km) }
    }
}

pub(super) fn read(_: &Table<'_>, scale: Option<Scale>) -> Option<Kernel> {
    Some(Kernel::new(Exponential::new(scale?)))
}

impl Shape for Exponential {
    fn ln_density(&self, km: f64) -> f64 {
        self.ln_top - km / self.a_km
    }

    fn beyond(&self, km: f64) -> f64 {
        beyond(km / self.a_km)
    }

    fn relative(&self, km: f64) -> Option<f64> {
        Some(num::exp(-km / self.a_km))
    }

    fn mean_km(&self) -> f64 {
        2.0 * self.a_km
    }
}

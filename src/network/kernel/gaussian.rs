//! The gaussian kernel.

use std::f64::consts::{LN_2, PI};

use super::{Kernel, Scale, Shape};
use crate::num;
use crate::study::Table;

/// k(r) = exp(-r2/a2) / (pi a2): diffusion for a fixed time.
#[derive(Debug, Clone)]
pub struct Gaussian {
    a_km: f64,
    /// ln k(0)
    ln_top: f64,
}

impl Gaussian {
    /// The kernel of a given mean, a sqrt(pi) / 2, or median, a sqrt(ln 2).
    pub fn new(scale: Scale) -> Self {
        let a_km = scale.length_km(PI.sqrt() / 2.0, || LN_2.sqrt());
        Self { a_km, ln_top: -num::ln(PI * a_km * a_km) }
    }

    /// (r/a)2
    fn square(&self, km: f64) -> f64 {
        let r = km / self.a_km;
        r * r
    }
}

pub(super) fn read(_: &Table<'_>, scale: Option<Scale>) -> Option<Kernel> {
    Some(Kernel::new(Gaussian::new(scale?)))
}

impl Shape for Gaussian {
    fn ln_density(&self, km: f64) -> f64 {
        self.ln_top - self.square(km)
    }

    fn beyond(&self, km: f64) -> f64 {
        num::exp(-self.square(km))
    }

    fn relative(&self, km: f64) -> Option<f64> {
        Some(num::exp(-self.square(km)))
    }

    fn mean_km(&self) -> f64 {
        self.a_km * PI.sqrt() / 2.0
    }
}

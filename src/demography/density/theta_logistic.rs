//! Theta-logistic, for models of counts: exp(-r (N/K)^theta) (Gilpin & Ayala 1973).

use std::sync::Arc;

use super::{Curve, Scale};
use crate::num;
use crate::study::{POSITIVE, Table};

#[derive(Debug)]
struct ThetaLogistic {
    /// ln of mean growth
    log_growth: f64,
    theta: f64,
}

impl Curve for ThetaLogistic {
    fn multiplier(&self, crowding: f64) -> f64 {
        num::exp(-self.log_growth * num::pow(crowding, self.theta))
    }

    fn formula(&self) -> String {
        format!("exp(-{:.6} (N/K)^{})", self.log_growth, self.theta)
    }
}

/// Reads `theta`, above 0.
pub(super) fn make(table: &Table<'_>, scale: Scale) -> Option<Arc<dyn Curve>> {
    let theta = table.number("theta", POSITIVE);
    if !scale.counts {
        table.mistake(table.address("form"), "theta-logistic in a life history of kind = \"counts\" only");
        return None;
    }
    if !table.has("theta") {
        table.missing("theta", "a number above 0: below 1 crowding bites early, above 1 late");
    }
    Some(Arc::new(ThetaLogistic { log_growth: scale.log_growth, theta: theta?.value }))
}

//! Beverton-Holt: every individual takes an equal share of what is there (Beverton & Holt 1957).

use std::sync::Arc;

use super::{Curve, Scale};
use crate::study::Table;

#[derive(Debug)]
struct BevertonHolt {
    /// 1 / phi* - 1
    steepness: f64,
}

impl Curve for BevertonHolt {
    fn multiplier(&self, crowding: f64) -> f64 {
        1.0 / (1.0 + self.steepness * crowding)
    }

    fn formula(&self) -> String {
        format!("1 / (1 + {:.6} N/K)", self.steepness)
    }
}

/// No keys of its own.
#[expect(clippy::unnecessary_wraps, reason = "the shape that all forms share")]
pub(super) fn make(_: &Table<'_>, scale: Scale) -> Option<Arc<dyn Curve>> {
    Some(Arc::new(BevertonHolt { steepness: 1.0 / scale.at_capacity - 1.0 }))
}

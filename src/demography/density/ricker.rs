//! Ricker: crowding presses ever harder, and numbers can overshoot (Ricker 1954).

use std::sync::Arc;

use super::{Curve, Scale};
use crate::num;
use crate::study::Table;

#[derive(Debug)]
struct Ricker {
    /// ln phi*
    log_at_capacity: f64,
}

impl Curve for Ricker {
    fn multiplier(&self, crowding: f64) -> f64 {
        num::exp(self.log_at_capacity * crowding)
    }

    fn formula(&self) -> String {
        format!("{:.6} ^ (N/K)", num::exp(self.log_at_capacity))
    }
}

/// No keys of its own.
#[expect(clippy::unnecessary_wraps, reason = "the shape that all forms share")]
pub(super) fn make(_: &Table<'_>, scale: Scale) -> Option<Arc<dyn Curve>> {
    Some(Arc::new(Ricker { log_at_capacity: num::ln(scale.at_capacity) }))
}

//! One event that strikes the patches about one of them.

use std::sync::Arc;

use super::{Begins, Strikes};
use crate::study::{POSITIVE, Table};

#[derive(Debug)]
struct Radius {
    radius_km: f64,
}

/// Distances are known to the millimetre: half of one above the radius is still within it.
const ROUNDING_KM: f64 = 5e-7;

/// Reads `{ radius_km }`.
pub(super) fn read(table: Table<'_>) -> Option<Arc<dyn Strikes>> {
    const KEY: &str = "radius_km";
    if !table.has(KEY) {
        table.missing(KEY, "how far about a patch drawn at random others are struck too, in kilometres");
    }
    let radius = table.number(KEY, POSITIVE);
    table.finish();
    Some(Arc::new(Radius { radius_km: radius?.value }))
}

impl Strikes for Radius {
    fn begins(&self) -> Begins {
        Begins::AtOnePatch
    }

    fn reaches(&self, origin: usize, patch: usize, centroids_km: &[[f64; 2]]) -> bool {
        let ([x, y], [to_x, to_y]) = (centroids_km[origin], centroids_km[patch]);
        let square = (to_x - x) * (to_x - x) + (to_y - y) * (to_y - y);
        square.sqrt() <= self.radius_km + ROUNDING_KM
    }

    fn in_words(&self) -> String {
        format!("the patches within {} km of one drawn at random", self.radius_km)
    }
}

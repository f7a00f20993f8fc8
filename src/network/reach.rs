//! Which patches a source can reach: the search for candidate targets, which never looks at all pairs.

use super::kernel::Kernel;
use super::table::KernelDispersal;
use crate::landscape::{Landscape, Neighbours};
use crate::num;

/// What a network asks of the distances of a landscape: symmetric, in kilometres.
pub trait Distances: Sync {
    /// All other patches farther from a patch than `beyond_km` and no farther than `km`, by position, with their distances,
    /// in any order.
    fn beyond_within(&self, patch: usize, beyond_km: f64, km: f64) -> Vec<(usize, f64)>;

    /// The distance between two patches.
    fn distance_km(&self, a: usize, b: usize) -> f64;
}

impl Distances for Neighbours {
    fn beyond_within(&self, patch: usize, beyond_km: f64, km: f64) -> Vec<(usize, f64)> {
        Self::beyond_within(self, patch, beyond_km, km)
    }

    fn distance_km(&self, a: usize, b: usize) -> f64 {
        Self::distance_km(self, a, b)
    }
}

/// The part of `tail` that the search may leave unseen.
const UNSEEN: f64 = 1e-3;
/// Below this ln of a ratio, the smaller number vanishes beside the larger one, or an amount is none at all.
const LN_VANISHING: f64 = -745.0;

/// A patch in which emigrants of the source may settle.
#[derive(Debug, Clone, Copy)]
pub(super) struct Candidate {
    pub(super) to: usize,
    pub(super) distance_km: f64,
    /// ln of its weight among the targets; finite
    pub(super) ln_weight: f64,
}

/// Finds candidates by widening rings until what is left outside cannot matter: beyond a radius no weight per unit of
/// target exceeds the kernel's density there.
pub(super) struct Reach<'a> {
    distances: &'a dyn Distances,
    kernel: &'a Kernel,
    n_patches: usize,
    limit_km: f64,
    /// ln of the summed units of all targets
    ln_units: f64,
    /// ln of the remainder that is negligible, relative to what was found
    ln_negligible: f64,
    /// ln of a remainder that is nothing whatever was found
    ln_nothing: f64,
}

impl<'a> Reach<'a> {
    /// `units` are what the kernel's density is multiplied by, at most, to give the targets' weights. Where weights are
    /// `absolute` probabilities, those that vanish are none; where they are normalised, the nearest target takes all.
    pub(super) fn new(
        landscape: &Landscape,
        distances: &'a dyn Distances,
        dispersal: &'a KernelDispersal,
        mut units: Vec<f64>,
        absolute: bool,
    ) -> Self {
        // Summed by size, the total does not depend on the order of the patches.
        units.sort_by(f64::total_cmp);
        Self {
            distances,
            kernel: &dispersal.kernel,
            n_patches: units.len(),
            limit_km: dispersal.max_km.unwrap_or(f64::MAX).min(extent_km(landscape)),
            ln_units: num::ln(units.iter().sum()),
            ln_negligible: num::ln(dispersal.tail * UNSEEN).max(LN_VANISHING),
            ln_nothing: if absolute { LN_VANISHING } else { f64::NEG_INFINITY },
        }
    }

    /// The candidates of one source in the order of their positions, each weighed once by its position and distance (ln).
    /// `slack_km` is the most by which ground of source and target may be nearer than their distance.
    pub(super) fn candidates(&self, from: usize, slack_km: f64, weigh: impl Fn(usize, f64) -> f64) -> Vec<Candidate> {
        let mut found: Vec<Candidate> = Vec::new();
        let mut seen_km = f64::NEG_INFINITY;
        let mut radius_km = (2.0 * self.kernel.mean_km() + slack_km).min(self.limit_km);
        loop {
            let ring = self.distances.beyond_within(from, seen_km, radius_km).into_iter();
            found.extend(ring.map(|(to, distance_km)| Candidate {
                to,
                distance_km,
                ln_weight: weigh(to, distance_km),
            }));
            seen_km = radius_km;
            let allowed = (ln_total(&found) + self.ln_negligible).max(self.ln_nothing);
            let done = |km: f64| self.kernel.ln_density_beyond((km - slack_km).max(0.0)) + self.ln_units <= allowed;
            if found.len() + 1 >= self.n_patches || seen_km >= self.limit_km || done(seen_km) {
                break;
            }
            radius_km = self.next_km(seen_km, done);
        }
        found.retain(|candidate| candidate.ln_weight.is_finite());
        found.sort_by_key(|candidate| candidate.to);
        found
    }

    /// The radius at which the search would be done, or twice the radius if that is nearer: a target found on the way may
    /// end it sooner.
    fn next_km(&self, seen_km: f64, done: impl Fn(f64) -> bool) -> f64 {
        let (mut low, mut high) = (seen_km, (2.0 * seen_km).min(self.limit_km));
        if !done(high) {
            return high;
        }
        for _ in 0..12 {
            let middle = (low + high) / 2.0;
            if done(middle) {
                high = middle;
            } else {
                low = middle;
            }
        }
        high
    }
}

/// ln of the summed weights; a bound for the search, not a result.
fn ln_total(found: &[Candidate]) -> f64 {
    let heaviest = found.iter().map(|candidate| candidate.ln_weight).fold(f64::NEG_INFINITY, f64::max);
    if heaviest == f64::NEG_INFINITY {
        return heaviest;
    }
    let sum: f64 = found.iter().map(|candidate| num::exp(candidate.ln_weight - heaviest)).sum();
    heaviest + num::ln(sum)
}

/// More km than any two patches lie apart.
fn extent_km(landscape: &Landscape) -> f64 {
    let mut low = [f64::INFINITY; 2];
    let mut high = [f64::NEG_INFINITY; 2];
    for patch in &landscape.patches {
        for axis in 0..2 {
            low[axis] = low[axis].min(patch.centroid_km[axis] - patch.radius_km);
            high[axis] = high[axis].max(patch.centroid_km[axis] + patch.radius_km);
        }
    }
    let [x, y] = [high[0] - low[0], high[1] - low[1]];
    // Half as much again, and a metre: distances on the ground are not exactly those of the plane.
    1.5 * (x * x + y * y).sqrt() + 1e-3
}

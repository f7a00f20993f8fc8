//! Estimates against standards.

use super::interval::Estimate;

/// The persistence that is customarily asked of a viable population, over [`CUSTOMARY_YEARS`]. It is a habit of the
/// trade, without a source that could be cited for it.
pub const CUSTOMARY_PERSISTENCE: f64 = 0.95;

/// The years over which [`CUSTOMARY_PERSISTENCE`] is asked.
pub const CUSTOMARY_YEARS: u32 = 100;

/// Where an estimate lies, seen from a threshold.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Standing {
    /// the whole interval is at least the threshold
    Above,
    /// the whole interval is below the threshold
    Below,
    /// the threshold lies in the interval: so many replicates do not tell
    NotToldApart,
}

impl Standing {
    /// Where `estimate` lies, its whole interval considered.
    pub fn of(estimate: &Estimate, threshold: f64) -> Self {
        if estimate.low >= threshold {
            Self::Above
        } else if estimate.high < threshold {
            Self::Below
        } else {
            Self::NotToldApart
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The bounds are Wilson's (1927) at 95 %: 963/1000 has the lower bound 0.9494, 966/1000 0.9529; 936/1000 has the
    /// upper bound 0.9496, 940/1000 0.9531 (recomputed by hand from the formula).
    #[test]
    fn a_threshold_within_the_interval_is_not_told_apart() {
        let standing = |seen| Standing::of(&Estimate::proportion(seen, 1000), CUSTOMARY_PERSISTENCE);
        assert_eq!(standing(966), Standing::Above);
        assert_eq!(standing(963), Standing::NotToldApart);
        assert_eq!(standing(940), Standing::NotToldApart);
        assert_eq!(standing(936), Standing::Below);
    }
}

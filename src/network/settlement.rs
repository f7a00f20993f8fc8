//! From weights of targets to the probabilities of one source's links.

use super::links::Link;
use super::reach::Candidate;
use crate::num;

/// How a source's landings are divided over its candidates, before mortality.
#[derive(Debug)]
pub(super) struct Division {
    /// each candidate's share of those who land, the cut ones included
    shares: Vec<f64>,
    /// whether the tail's cut leaves a candidate in
    kept: Vec<bool>,
    /// ln of the summed weights
    pub(super) ln_total: f64,
    /// share of those who land that was cut
    pub(super) cut_share: f64,
}

impl Division {
    /// Divides by weight, and cuts the weakest while their summed share stays within `tail` (ties: the later patch stays).
    /// At least one candidate is needed.
    pub(super) fn new(candidates: &[Candidate], tail: f64) -> Self {
        // In logarithms from the heaviest down, so that far targets under a thin tail do not all vanish.
        let heaviest = candidates.iter().map(|candidate| candidate.ln_weight).fold(f64::NEG_INFINITY, f64::max);
        let mut shares: Vec<f64> =
            candidates.iter().map(|candidate| num::exp(candidate.ln_weight - heaviest)).collect();
        let mut weakest_first: Vec<usize> = (0..shares.len()).collect();
        weakest_first.sort_by(|a, b| shares[*a].total_cmp(&shares[*b]).then(a.cmp(b)));
        // Summed by size, so that the total does not depend on the order of the patches.
        let total: f64 = weakest_first.iter().map(|candidate| shares[*candidate]).sum();
        for share in &mut shares {
            *share /= total;
        }
        let mut kept = vec![true; shares.len()];
        let mut cut_share = 0.0;
        for candidate in weakest_first {
            if cut_share + shares[candidate] > tail {
                break;
            }
            cut_share += shares[candidate];
            kept[candidate] = false;
        }
        Self { shares, kept, ln_total: heaviest + num::ln(total), cut_share }
    }

    /// Those of the candidates it was made from that the cut leaves in.
    pub(super) fn kept<'c>(&'c self, candidates: &'c [Candidate]) -> impl Iterator<Item = &'c Candidate> {
        candidates.iter().zip(&self.kept).filter(|(_, kept)| **kept).map(|(candidate, _)| candidate)
    }
}

/// The links out of one patch.
#[derive(Debug, Default)]
pub(super) struct Row {
    pub(super) links: Vec<Link>,
    pub(super) lost: f64,
    pub(super) cut_share: f64,
}

impl Row {
    /// A patch that sends its emigrants nowhere.
    pub(super) fn isolated() -> Self {
        Self { lost: 1.0, ..Self::default() }
    }

    /// Under `shared`: everybody settles, the cut share goes back to the kept links in proportion, and the way there takes
    /// its toll.
    pub(super) fn shared(from: usize, candidates: &[Candidate], division: &Division, mortality_per_km: f64) -> Self {
        Self::new(from, candidates, division, 1.0 / (1.0 - division.cut_share), 0.0, mortality_per_km)
    }

    /// Under `open`: the share `landing` of all emigrants lands in a candidate; the rest and the cut share are lost.
    pub(super) fn open(
        from: usize,
        candidates: &[Candidate],
        division: &Division,
        landing: f64,
        mortality_per_km: f64,
    ) -> Self {
        let nowhere = 1.0 - landing * (1.0 - division.cut_share);
        Self::new(from, candidates, division, landing, nowhere, mortality_per_km)
    }

    fn new(
        from: usize,
        candidates: &[Candidate],
        division: &Division,
        factor: f64,
        nowhere: f64,
        mortality_per_km: f64,
    ) -> Self {
        let mut links = Vec::new();
        let mut died = Vec::new();
        for (position, candidate) in candidates.iter().enumerate().filter(|(position, _)| division.kept[*position]) {
            let landing = division.shares[position] * factor;
            let way = -mortality_per_km * candidate.distance_km;
            let probability = landing * num::exp(way);
            died.push(-landing * num::exp_m1(way));
            if probability > 0.0 {
                links.push(Link {
                    from: index(from),
                    to: index(candidate.to),
                    distance_km: candidate.distance_km,
                    probability,
                });
            }
        }
        died.sort_by(f64::total_cmp);
        Self { links, lost: nowhere.max(0.0) + died.iter().sum::<f64>(), cut_share: division.cut_share }
    }
}

/// The position of a patch as a link holds it.
pub(super) fn index(patch: usize) -> u32 {
    u32::try_from(patch).expect("a landscape that fits into memory has fewer than four thousand million patches")
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn candidates(ln_weights: &[f64]) -> Vec<Candidate> {
        let candidate = |(to, ln_weight): (usize, &f64)| Candidate { to, distance_km: 1.0, ln_weight: *ln_weight };
        ln_weights.iter().enumerate().map(candidate).collect()
    }

    proptest! {
        /// Whatever the weights: the links and the lost sum to 1, no more than the tail is cut, one link more would be too
        /// many, and the cut ones are the weakest.
        #[test]
        fn rows_sum_to_one(
            ln_weights in prop::collection::vec(-900.0..900.0_f64, 1..60),
            tail in 0.0..0.5_f64,
            landing in 0.0..1.0_f64,
            mortality in 0.0..3.0_f64,
        ) {
            let candidates = candidates(&ln_weights);
            let division = Division::new(&candidates, tail);
            prop_assert!(division.cut_share <= tail);
            let least_kept = division.shares.iter().zip(&division.kept).filter(|(_, kept)| **kept);
            let least_kept = least_kept.map(|(share, _)| *share).fold(f64::INFINITY, f64::min);
            prop_assert!(division.cut_share + least_kept > tail);
            for (share, kept) in division.shares.iter().zip(&division.kept) {
                prop_assert!(*kept || *share <= least_kept);
            }
            for row in [
                Row::shared(0, &candidates, &division, mortality),
                Row::open(0, &candidates, &division, landing, mortality),
            ] {
                let sum: f64 = row.links.iter().map(|link| link.probability).sum();
                prop_assert!((sum + row.lost - 1.0).abs() < 1e-12);
                prop_assert!(row.links.iter().all(|link| link.probability > 0.0) && row.lost >= 0.0);
            }
        }
    }

    #[test]
    fn a_cut_share_goes_back_to_the_kept_under_shared_and_is_lost_under_open() {
        let candidates = candidates(&[num::ln(0.9), num::ln(0.06), num::ln(0.04)]);
        let division = Division::new(&candidates, 0.05);
        assert!((division.cut_share - 0.04).abs() < 1e-12);
        let shared = Row::shared(0, &candidates, &division, 0.0);
        assert!((shared.links[0].probability - 0.9 / 0.96).abs() < 1e-12 && shared.lost == 0.0);
        let open = Row::open(0, &candidates, &division, 0.5, 0.0);
        assert!((open.links[0].probability - 0.45).abs() < 1e-12 && (open.lost - 0.52).abs() < 1e-12);
    }
}

//! Probability of connectivity.

use std::cmp::Ordering;
use std::collections::BinaryHeap;

use rayon::prelude::*;

use super::losses::losses;
use super::sparse::Sparse;

/// Paths whose product falls below this are not followed.
pub(super) const LEAST_PRODUCT: f64 = 1e-4;
/// The most patches for which the loss by patch is worked out.
const MOST_FOR_LOSSES: usize = 2_000;

/// How well connected the habitat of a landscape is.
#[derive(Debug, Clone, PartialEq)]
pub struct Connectivity {
    /// probability that two points drawn in the landscape lie in patches connected to each other
    pub probability: f64,
    /// the area in hectares that a single patch would need for the same probability
    pub equivalent_area_ha: f64,
    /// by patch, the loss of the probability in per cent when the patch goes, the landscape's area staying; none above
    /// 2,000 patches
    pub loss_percent: Option<Vec<f64>>,
}

impl Connectivity {
    /// The probability of connectivity: the sum of a_i a_j p*_ij over all ordered pairs, a patch with itself included
    /// (p* = 1), divided by the square of the landscape's area. p*_ij is the greatest product of probabilities along a path
    /// of links; paths end at a product of 1e-4.
    ///
    /// `direct` holds the probabilities of going straight from a row's patch to a column's. In the reports these are the
    /// links that the dispersal matrix keeps, each in its direction: P(distance > d) of the kernel, or a measured table's
    /// own probability.
    ///
    /// # Source
    /// Saura & Pascual-Hortal 2007; equivalent connected area: Saura et al. 2011.
    pub fn new(areas_ha: &[f64], landscape_area_ha: f64, direct: &Sparse) -> Self {
        let direct = needed(&direct.clone().strongest_first());
        let (double_sum, loss_percent) = if direct.n() > MOST_FOR_LOSSES {
            (double_sum(areas_ha, &direct), None)
        } else {
            let (double_sum, losses) = losses(areas_ha, &direct);
            let percent = |loss: f64| if double_sum > 0.0 { 100.0 * loss / double_sum } else { 0.0 };
            (double_sum, Some(losses.into_iter().map(percent).collect()))
        };
        let probability =
            if landscape_area_ha > 0.0 { double_sum / landscape_area_ha / landscape_area_ha } else { 0.0 };
        Self { probability, equivalent_area_ha: double_sum.sqrt(), loss_percent }
    }
}

/// The sum of a_i a_j p*_ij.
fn double_sum(areas_ha: &[f64], direct: &Sparse) -> f64 {
    let by_source = |search: &mut Search, from: usize| {
        search.run(direct, from);
        areas_ha[from] * search.reached.iter().map(|to| areas_ha[*to] * search.best[*to]).sum::<f64>()
    };
    let sums: Vec<f64> = (0..direct.n()).into_par_iter().map_init(|| Search::new(direct.n()), by_source).collect();
    sums.into_iter().sum()
}

/// The links without those that ways over each of two other patches beat: no best path uses such a link, nor does one
/// where any single patch is gone.
fn needed(direct: &Sparse) -> Sparse {
    let narrow = |patch: usize| u32::try_from(patch).expect("patches are numbered in 32 bits");
    let needed_from = |(straight, detours): &mut (Vec<f64>, Vec<u8>), from: usize| -> Vec<(u32, u32, f64)> {
        for (to, probability) in direct.row(from) {
            (straight[to], detours[to]) = (probability, 0);
        }
        for (over, first) in direct.row(from) {
            for (to, second) in direct.row(over).take_while(|(_, second)| first * second >= LEAST_PRODUCT) {
                if first * second > straight[to] {
                    detours[to] = detours[to].saturating_add(1);
                }
            }
        }
        let needed = direct.row(from).filter(|(to, probability)| detours[*to] < 2 && *probability >= LEAST_PRODUCT);
        let links = needed.map(|(to, probability)| (narrow(from), narrow(to), probability)).collect();
        // A link that is not there is one that nothing beats.
        direct.row(from).for_each(|(to, _)| straight[to] = f64::INFINITY);
        links
    };
    let links: Vec<Vec<(u32, u32, f64)>> = (0..direct.n())
        .into_par_iter()
        .map_init(|| (vec![f64::INFINITY; direct.n()], vec![0; direct.n()]), needed_from)
        .collect();
    Sparse::new(direct.n(), links.iter().flatten().copied())
}

/// A patch at the edge of a search, with the product of the best path to it so far.
#[derive(Debug, PartialEq)]
pub(super) struct Frontier {
    pub(super) product: f64,
    pub(super) patch: usize,
}

impl Eq for Frontier {}

impl PartialOrd for Frontier {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Frontier {
    fn cmp(&self, other: &Self) -> Ordering {
        self.product.total_cmp(&other.product).then(other.patch.cmp(&self.patch))
    }
}

/// The best paths from one patch (Dijkstra 1959, on products), with a cut-off. Kept from source to source, so that no
/// search clears more than it reached.
pub(super) struct Search {
    /// greatest product of a path to each patch; 0 where it is not reached
    pub(super) best: Vec<f64>,
    /// the patch before it on that path; for the source, itself
    pub(super) before: Vec<usize>,
    /// the patches reached, by falling product: the source first
    pub(super) reached: Vec<usize>,
    heap: BinaryHeap<Frontier>,
}

impl Search {
    pub(super) fn new(n: usize) -> Self {
        Self { best: vec![0.0; n], before: vec![0; n], reached: Vec::new(), heap: BinaryHeap::new() }
    }

    /// Searches from one patch, along rows whose strongest links come first.
    pub(super) fn run(&mut self, direct: &Sparse, from: usize) {
        for patch in self.reached.drain(..) {
            self.best[patch] = 0.0;
        }
        self.best[from] = 1.0;
        self.before[from] = from;
        self.heap.push(Frontier { product: 1.0, patch: from });
        while let Some(Frontier { product, patch }) = self.heap.pop() {
            if product < self.best[patch] {
                continue;
            }
            self.reached.push(patch);
            for (to, probability) in direct.row(patch) {
                let product = product * probability;
                if product < LEAST_PRODUCT {
                    break;
                }
                if product > self.best[to] {
                    self.best[to] = product;
                    self.before[to] = patch;
                    self.heap.push(Frontier { product, patch: to });
                }
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::num;

    /// A graph of `n` patches with random links in one direction each, from a plain congruential generator.
    fn random(n: u32, seed: u64) -> (Vec<f64>, Vec<(u32, u32, f64)>) {
        let mut state = seed;
        let mut uniform = || {
            state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            (state >> 11) as f64 / (1_u64 << 53) as f64
        };
        let areas = (0..n).map(|_| 1.0 + 9.0 * uniform()).collect();
        let mut links = Vec::new();
        for from in 0..n {
            for to in (0..n).filter(|to| *to != from) {
                if uniform() < 0.25 {
                    links.push((from, to, uniform() * uniform() * uniform()));
                }
            }
        }
        (areas, links)
    }

    /// The definition, by closing the matrix of best products over every patch in turn (Floyd 1962), with one patch left
    /// out or none.
    fn plain(areas: &[f64], links: &[(u32, u32, f64)], without: Option<usize>) -> f64 {
        let n = areas.len();
        let mut best = vec![vec![0.0_f64; n]; n];
        for (from, to, probability) in links {
            best[*from as usize][*to as usize] = *probability;
        }
        let there: Vec<usize> = (0..n).filter(|patch| Some(*patch) != without).collect();
        for patch in &there {
            best[*patch][*patch] = 1.0;
        }
        for over in &there {
            for from in &there {
                for to in &there {
                    best[*from][*to] = best[*from][*to].max(best[*from][*over] * best[*over][*to]);
                }
            }
        }
        let pairs = there.iter().flat_map(|from| there.iter().map(move |to| (*from, *to)));
        pairs.filter(|(i, j)| best[*i][*j] >= LEAST_PRODUCT).map(|(i, j)| areas[i] * areas[j] * best[i][j]).sum()
    }

    #[test]
    fn it_is_the_plain_definition_with_and_without_each_patch() {
        let (areas, links) = random(40, 5);
        let connectivity = Connectivity::new(&areas, 1_000.0, &Sparse::new(40, links.iter().copied()));
        let whole = plain(&areas, &links, None);
        assert!((connectivity.probability * 1e6 - whole).abs() < 1e-9 * whole);
        for (patch, loss) in connectivity.loss_percent.unwrap().into_iter().enumerate() {
            let truth = 100.0 * (whole - plain(&areas, &links, Some(patch))) / whole;
            assert!((loss - truth).abs() < 1e-9 * truth, "{patch}: {loss} against {truth}");
        }
    }

    #[test]
    fn above_two_thousand_patches_no_losses_are_worked_out() {
        let chain = (0..2_000).map(|patch| (patch, patch + 1, 0.5));
        let connectivity = Connectivity::new(&[1.0; 2_001], 2_001.0, &Sparse::new(2_001, chain));
        // From each patch 0.5, 0.25, ... down to 0.5^13, the last that is not below 1e-4, but for the end of the chain.
        let ends: f64 = (0..13).map(|left| 1.0 - num::pow(0.5, f64::from(left))).sum();
        let sum = 2_001.0 + (2_001.0 - 13.0) * (1.0 - num::pow(0.5, 13.0)) + ends;
        assert!((connectivity.probability * 2_001.0 * 2_001.0 - sum).abs() < 1e-6);
        assert!(connectivity.loss_percent.is_none());
    }
}

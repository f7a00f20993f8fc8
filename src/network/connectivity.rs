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
        let direct = direct.clone().strongest_first();
        let (double_sum, loss_percent) = if direct.n() > MOST_FOR_LOSSES {
            (double_sum(areas_ha, &without_detoured(&direct)), None)
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

/// The links without those that a way over one other patch beats; no best path uses such a link.
fn without_detoured(direct: &Sparse) -> Sparse {
    let kept: Vec<Vec<(u32, u32, f64)>> = (0..direct.n())
        .into_par_iter()
        .map_init(
            || vec![0.0_f64; direct.n()],
            |detour, from| {
                for (over, first) in direct.row(from) {
                    for (to, second) in direct.row(over).take_while(|(_, second)| first * second >= LEAST_PRODUCT) {
                        detour[to] = detour[to].max(first * second);
                    }
                }
                let links: Vec<(usize, f64)> = direct.row(from).filter(|(to, value)| *value >= detour[*to]).collect();
                for (over, _) in direct.row(from) {
                    direct.row(over).for_each(|(to, _)| detour[to] = 0.0);
                }
                let narrow = |patch: usize| u32::try_from(patch).expect("patches are numbered in 32 bits");
                links.into_iter().map(|(to, value)| (narrow(from), narrow(to), value)).collect()
            },
        )
        .collect();
    Sparse::new(direct.n(), kept.iter().flatten().copied())
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

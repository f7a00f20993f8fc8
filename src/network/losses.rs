//! What the probability of connectivity loses with each patch.

use std::collections::BinaryHeap;

use rayon::prelude::*;

use super::connectivity::{Frontier, LEAST_PRODUCT, Search};
use super::sparse::Sparse;

/// The sum of a_i a_j p*_ij, and by patch what it loses when the patch goes. Rows of `direct` have the strongest first.
///
/// For each source, only the paths that lead over the lost patch are searched again: those to the patches behind it in
/// the tree of best paths.
pub(super) fn losses(areas_ha: &[f64], direct: &Sparse) -> (f64, Vec<f64>) {
    let n = direct.n();
    let incoming = direct.transposed();
    let by_source: Vec<(f64, Vec<(usize, f64)>)> = (0..n)
        .into_par_iter()
        .map_init(|| Repair::new(direct, &incoming, areas_ha), |repair, from| repair.losses_from(from))
        .collect();
    let mut losses = vec![0.0; n];
    let mut double_sum = 0.0;
    for (from, (sum, by_patch)) in by_source.into_iter().enumerate() {
        let own = areas_ha[from] * sum;
        double_sum += own;
        losses[from] += own;
        for (patch, loss) in by_patch {
            losses[patch] += areas_ha[from] * loss;
        }
    }
    (double_sum, losses)
}

/// The work space of one thread.
struct Repair<'a> {
    direct: &'a Sparse,
    incoming: &'a Sparse,
    areas_ha: &'a [f64],
    search: Search,
    /// the patches that follow each patch in the tree of best paths
    next: Vec<Vec<usize>>,
    /// the patches behind the lost one, and whether each patch is among them
    behind: Vec<usize>,
    is_behind: Vec<bool>,
    /// greatest products to the patches behind, without the lost one
    repaired: Vec<f64>,
    heap: BinaryHeap<Frontier>,
}

impl<'a> Repair<'a> {
    fn new(direct: &'a Sparse, incoming: &'a Sparse, areas_ha: &'a [f64]) -> Self {
        let n = direct.n();
        Self {
            direct,
            incoming,
            areas_ha,
            search: Search::new(n),
            next: vec![Vec::new(); n],
            behind: Vec::new(),
            is_behind: vec![false; n],
            repaired: vec![0.0; n],
            heap: BinaryHeap::new(),
        }
    }

    /// The sum of a_j p*_j over the patches reached from a source, and what it loses with each other patch.
    fn losses_from(&mut self, from: usize) -> (f64, Vec<(usize, f64)>) {
        self.search.run(self.direct, from);
        let reached = self.search.reached.clone();
        for patch in &reached {
            self.next[*patch].clear();
        }
        for patch in &reached[1..] {
            self.next[self.search.before[*patch]].push(*patch);
        }
        let weight = |patch: usize| self.areas_ha[patch] * self.search.best[patch];
        let sum = reached.iter().map(|patch| weight(*patch)).sum();
        let losses = reached[1..].iter().map(|patch| (*patch, self.loss_of(*patch))).collect();
        (sum, losses)
    }

    fn loss_of(&mut self, lost: usize) -> f64 {
        self.gather_behind(lost);
        self.repair(lost);
        let mut loss = self.areas_ha[lost] * self.search.best[lost];
        for patch in self.behind.drain(..) {
            loss += self.areas_ha[patch] * (self.search.best[patch] - self.repaired[patch]);
            self.is_behind[patch] = false;
        }
        loss
    }

    fn gather_behind(&mut self, lost: usize) {
        self.behind.extend(&self.next[lost]);
        let mut position = 0;
        while let Some(&patch) = self.behind.get(position) {
            self.is_behind[patch] = true;
            self.behind.extend(&self.next[patch]);
            position += 1;
        }
    }

    /// The best paths to the patches behind: entering among them from a patch that keeps its path, then onward.
    fn repair(&mut self, lost: usize) {
        for &patch in &self.behind {
            let entries = self.incoming.row(patch).filter(|(before, _)| *before != lost && !self.is_behind[*before]);
            let product =
                entries.map(|(before, probability)| self.search.best[before] * probability).fold(0.0, f64::max);
            self.repaired[patch] = if product < LEAST_PRODUCT { 0.0 } else { product };
            if product >= LEAST_PRODUCT {
                self.heap.push(Frontier { product, patch });
            }
        }
        while let Some(Frontier { product, patch }) = self.heap.pop() {
            if product < self.repaired[patch] {
                continue;
            }
            for (to, probability) in self.direct.row(patch) {
                let product = product * probability;
                if product < LEAST_PRODUCT {
                    break;
                }
                if self.is_behind[to] && product > self.repaired[to] {
                    self.repaired[to] = product;
                    self.heap.push(Frontier { product, patch: to });
                }
            }
        }
    }
}

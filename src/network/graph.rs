//! What holds a network together: components, and the patches and links whose loss splits it.

use petgraph::algo::articulation_points::articulation_points;
use petgraph::algo::bridges;
use petgraph::graph::{NodeIndex, UnGraph};
use petgraph::unionfind::UnionFind;
use petgraph::visit::EdgeRef;

/// The structure of a graph of patches, in which a link in either direction joins two patches.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Graph {
    /// the component that each patch belongs to, numbered from 0 in the order of their first patches
    pub component: Vec<u32>,
    /// number of components
    pub n_components: usize,
    /// patches whose loss splits the component that they belong to, rising
    pub cut_patches: Vec<usize>,
    /// pairs of patches, the lower position first, whose joining links are all that holds their component together; rising
    pub cut_links: Vec<(usize, usize)>,
}

impl Graph {
    /// The structure of `n_patches` patches joined by `pairs`, which may repeat.
    ///
    /// # Source
    /// Tarjan 1972, depth-first search and linear graph algorithms.
    pub fn new(n_patches: usize, pairs: impl Iterator<Item = (u32, u32)>) -> Self {
        let mut pairs: Vec<(u32, u32)> = pairs.map(|(a, b)| (a.min(b), a.max(b))).collect();
        pairs.sort_unstable();
        pairs.dedup();
        let (component, n_components) = components(n_patches, &pairs);
        let mut graph: UnGraph<(), (), u32> = UnGraph::with_capacity(n_patches, pairs.len());
        for _ in 0..n_patches {
            graph.add_node(());
        }
        graph.extend_with_edges(pairs.iter().map(|(a, b)| (NodeIndex::from(*a), NodeIndex::from(*b))));
        let mut cut_patches: Vec<usize> = articulation_points(&graph).into_iter().map(NodeIndex::index).collect();
        cut_patches.sort_unstable();
        let ends = |edge: petgraph::graph::EdgeReference<'_, (), u32>| (edge.source().index(), edge.target().index());
        let mut cut_links: Vec<(usize, usize)> = bridges(&graph).map(ends).collect();
        cut_links.sort_unstable();
        Self { component, n_components, cut_patches, cut_links }
    }
}

fn components(n_patches: usize, pairs: &[(u32, u32)]) -> (Vec<u32>, usize) {
    let mut sets: UnionFind<usize> = UnionFind::new(n_patches);
    for (a, b) in pairs {
        sets.union(*a as usize, *b as usize);
    }
    let mut number_of = vec![None; n_patches];
    let mut n_components = 0;
    let component = (0..n_patches)
        .map(|patch| {
            *number_of[sets.find(patch)].get_or_insert_with(|| {
                n_components += 1;
                n_components - 1
            })
        })
        .collect();
    (component, n_components as usize)
}

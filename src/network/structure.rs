//! The structure of a network, gathered for the reports.

use super::capacity::Capacity;
use super::connectivity::Connectivity;
use super::graph::Graph;
use super::links::{Link, Network};
use super::sparse::Sparse;
use super::table::{DispersalTable, Movement};
use crate::landscape::Landscape;
use crate::num;

/// What the network is before anybody lives in it.
#[derive(Debug, Clone, PartialEq)]
pub struct Structure {
    /// components, and the patches and links whose loss splits the network
    pub graph: Graph,
    /// metapopulation capacity over the links kept, with areas in hectares
    pub capacity: Capacity,
    /// probability of connectivity over the links kept
    pub connectivity: Connectivity,
}

impl Structure {
    /// The structure of a network that was built from this landscape and table. `extinction_exponent` is the exponent x
    /// with which extinction falls with area: 1 unless an occupancy model gives another.
    pub fn new(landscape: &Landscape, dispersal: &DispersalTable, network: &Network, extinction_exponent: f64) -> Self {
        let n = network.n_patches();
        let areas_ha: Vec<f64> = landscape.patches.iter().map(|patch| patch.area_ha).collect();
        // The symmetric form of A_i^x A_j^b, which has the same eigenvalue and shares.
        let exponent = (extinction_exponent + dispersal.area_exponent) / 2.0;
        let sizes: Vec<f64> = areas_ha.iter().map(|area| num::pow(*area, exponent)).collect();
        let contributions = network.links.iter().map(|link| {
            let size = sizes[link.to as usize] * sizes[link.from as usize];
            (link.to, link.from, nearness(dispersal, link) * size)
        });
        let direct = network.links.iter().map(|link| (link.from, link.to, passage(dispersal, link)));
        Self {
            graph: Graph::new(n, network.links.iter().map(|link| (link.from, link.to))),
            capacity: Capacity::new(&Sparse::new(n, contributions)),
            connectivity: Connectivity::new(&areas_ha, landscape.landscape_area_ha, &Sparse::new(n, direct)),
        }
    }
}

/// What distance leaves of a contribution to the metapopulation capacity: the kernel over its value at 0; P(distance > d)
/// for one without such a value; a measured table's own probability.
fn nearness(dispersal: &DispersalTable, link: &Link) -> f64 {
    match &dispersal.movement {
        Movement::Kernel(by) => {
            by.kernel.relative(link.distance_km).unwrap_or_else(|| by.kernel.beyond(link.distance_km))
        }
        Movement::Measured(_) => link.probability,
    }
}

/// The probability of going straight along a link, for the probability of connectivity.
fn passage(dispersal: &DispersalTable, link: &Link) -> f64 {
    match &dispersal.movement {
        Movement::Kernel(by) => by.kernel.beyond(link.distance_km),
        Movement::Measured(_) => link.probability,
    }
}

//! What travels on each link.

use crate::engine::Tallies;
use crate::network::{Network, Structure};

/// One link, over all replicates.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LinkRow {
    /// position of the source patch among the patches
    pub from: u32,
    /// position of the target patch among the patches
    pub to: u32,
    /// effective length in kilometres
    pub distance_km: f64,
    /// probability that an emigrant of the source arrives alive in the target: a number of the model, not an estimate
    pub probability: f64,
    /// mean arrivals alive a year
    pub movers_per_year: f64,
    /// whether the network falls apart without it and its counterpart the other way
    pub splits: bool,
}

/// A row for every link of the network, in its order. At least one replicate is done.
pub(super) fn by_link(tallies: &Tallies, network: &Network, structure: Option<&Structure>) -> Vec<LinkRow> {
    debug_assert_eq!(network.links.len(), tallies.movers.len());
    let replicates = tallies.records.len() as f64;
    let years = f64::from(tallies.horizon);
    let links = network.links.iter().zip(&tallies.movers);
    let cut_links = structure.map_or(&[][..], |structure| &structure.graph.cut_links);
    let splits = |a: u32, b: u32| cut_links.binary_search(&(a.min(b) as usize, a.max(b) as usize)).is_ok();
    links
        .map(|(link, movers)| LinkRow {
            from: link.from,
            to: link.to,
            distance_km: link.distance_km,
            probability: link.probability,
            movers_per_year: *movers as f64 / replicates / years,
            splits: splits(link.from, link.to),
        })
        .collect()
}

//! What travels on each link.

use crate::engine::Tallies;
use crate::network::Network;

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
}

/// A row for every link of the network, in its order. At least one replicate is done.
pub(super) fn by_link(tallies: &Tallies, network: &Network) -> Vec<LinkRow> {
    debug_assert_eq!(network.links.len(), tallies.movers.len());
    let replicates = tallies.records.len() as f64;
    let years = f64::from(tallies.horizon);
    let links = network.links.iter().zip(&tallies.movers);
    links
        .map(|(link, movers)| LinkRow {
            from: link.from,
            to: link.to,
            distance_km: link.distance_km,
            probability: link.probability,
            movers_per_year: *movers as f64 / replicates / years,
        })
        .collect()
}

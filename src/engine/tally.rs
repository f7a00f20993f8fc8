//! What replicates leave behind: integers, which add up to the same whatever the order.

/// One replicate's own numbers.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Record {
    /// the replicate, from 1
    pub replicate: u32,
    /// individuals in the whole network at census 0 to the horizon; length horizon + 1
    pub totals: Vec<u64>,
    /// first census at which the counted stages were below the threshold of quasi-extinction
    pub quasi_extinct_in: Option<u32>,
    /// patches occupied at the last census
    pub occupied_at_end: u32,
    /// whether a count reached the largest that can be held and was stopped there
    pub saturated: bool,
}

/// One patch's sums over replicates. Yearly sums run over censuses 1 to the horizon.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct PatchTally {
    /// replicates in which it is occupied at the last census
    pub occupied_at_end: u64,
    /// censuses at which it is occupied
    pub years_occupied: u64,
    /// individuals, summed over censuses
    pub abundance: u128,
    /// squares of each replicate's sum of individuals over censuses
    pub abundance_squares: u128,
    /// individuals at the last census
    pub abundance_at_end: u64,
    /// squares of the individuals at the last census
    pub abundance_at_end_squares: u128,
    /// occupied at one census and empty at the next
    pub local_extinctions: u64,
    /// empty at one census and occupied at the next
    pub recolonisations: u64,
    /// arrivals alive from other patches, before the ceiling
    pub immigrants: u64,
    /// all who left
    pub emigrants: u64,
    /// those of its emigrants who arrived elsewhere alive
    pub arrived_elsewhere: u64,
    /// each replicate's (arrived elsewhere - immigrants), summed
    pub net_export: i128,
    /// the squares of the same, summed
    pub net_export_squares: u128,
}

/// The sum over a set of replicates.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Tallies {
    /// years from census 0 to the last
    pub horizon: u32,
    /// one record a replicate, in the order of replicates
    pub records: Vec<Record>,
    /// occupied patches summed over replicates, by census 0 to the horizon
    pub occupied_patches: Vec<u64>,
    /// one tally a patch, in canonical order
    pub patches: Vec<PatchTally>,
    /// movers summed over years and replicates, one a link of the network
    pub movers: Vec<u64>,
}

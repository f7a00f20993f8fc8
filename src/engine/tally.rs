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
    /// those taken out by removals
    pub removed: u64,
    /// replicates in which it is below its own threshold of quasi-extinction at least once, census 0 included
    pub quasi_extinct: u64,
    /// each replicate's (arrived elsewhere - immigrants), summed
    pub net_export: i128,
    /// the squares of the same, summed
    pub net_export_squares: u128,
}

/// Individuals taken out of the whole network in a replicate, summed over replicates.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub struct RemovedTally {
    /// the sum
    pub sum: u128,
    /// the sum of squares
    pub squares: u128,
}

impl RemovedTally {
    /// Adds a replicate.
    pub(super) fn add(&mut self, removed: u64) {
        self.sum += u128::from(removed);
        self.squares += u128::from(removed) * u128::from(removed);
    }
}

/// The sum over a set of replicates.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Tallies {
    /// years from census 0 to the last
    pub horizon: u32,
    /// one record a replicate, in the order of replicates
    pub records: Vec<Record>,
    /// replicates with at least one individual at the last census
    pub persisting: u64,
    /// occupied patches summed over replicates, by census 0 to the horizon
    pub occupied_patches: Vec<u64>,
    /// one tally a patch, in canonical order
    pub patches: Vec<PatchTally>,
    /// movers summed over years and replicates, one a link of the network
    pub movers: Vec<u64>,
    /// those taken out by removals; `None` where the study has none
    pub removed: Option<RemovedTally>,
}

impl Tallies {
    /// The sum over no replicates.
    pub fn empty(horizon: u32, n_patches: usize, n_links: usize) -> Self {
        Self {
            horizon,
            records: Vec::new(),
            persisting: 0,
            occupied_patches: vec![0; horizon as usize + 1],
            patches: vec![PatchTally::default(); n_patches],
            movers: vec![0; n_links],
            removed: None,
        }
    }

    /// Replicates in the sum.
    pub fn n_replicates(&self) -> usize {
        self.records.len()
    }

    /// Takes down a replicate.
    pub(super) fn add_record(&mut self, record: Record) {
        self.persisting += u64::from(record.totals.last().is_some_and(|total| *total > 0));
        self.records.push(record);
    }

    /// Adds the sum over other replicates of the same model; the result is the same in any order of adding.
    ///
    /// # Panics
    /// If the two are of models with other horizons, patches or links.
    pub fn merge(&mut self, other: Self) {
        assert_eq!(self.horizon, other.horizon, "sums of one model");
        assert_eq!(self.patches.len(), other.patches.len(), "sums of one model");
        assert_eq!(self.movers.len(), other.movers.len(), "sums of one model");
        let in_order = match (self.records.last(), other.records.first()) {
            (Some(last), Some(first)) => last.replicate < first.replicate,
            _ => true,
        };
        self.persisting += other.persisting;
        self.records.extend(other.records);
        if !in_order {
            self.records.sort_by_key(|record| record.replicate);
        }
        add_all(&mut self.occupied_patches, &other.occupied_patches);
        add_all(&mut self.movers, &other.movers);
        if let Some(more) = other.removed {
            let removed = self.removed.get_or_insert_default();
            removed.sum += more.sum;
            removed.squares += more.squares;
        }
        for (tally, more) in self.patches.iter_mut().zip(&other.patches) {
            tally.add(more);
        }
    }
}

fn add_all(sums: &mut [u64], more: &[u64]) {
    for (sum, more) in sums.iter_mut().zip(more) {
        *sum += more;
    }
}

impl PatchTally {
    fn add(&mut self, more: &Self) {
        self.occupied_at_end += more.occupied_at_end;
        self.years_occupied += more.years_occupied;
        self.abundance += more.abundance;
        self.abundance_squares += more.abundance_squares;
        self.abundance_at_end += more.abundance_at_end;
        self.abundance_at_end_squares += more.abundance_at_end_squares;
        self.local_extinctions += more.local_extinctions;
        self.recolonisations += more.recolonisations;
        self.immigrants += more.immigrants;
        self.emigrants += more.emigrants;
        self.arrived_elsewhere += more.arrived_elsewhere;
        self.removed += more.removed;
        self.quasi_extinct += more.quasi_extinct;
        self.net_export += more.net_export;
        self.net_export_squares += more.net_export_squares;
    }
}

//! What happened in each replicate.

use crate::engine::Record;

/// One replicate.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct ReplicateRow {
    /// its number, from 1
    pub replicate: u32,
    /// the first census of the last unbroken run of empty ones, if the last census is empty
    pub extinct_in_year: Option<u32>,
    /// the first census below the threshold of quasi-extinction
    pub quasi_extinct_in_year: Option<u32>,
    /// the fewest individuals at any census, census 0 included
    pub lowest_abundance: u64,
    /// individuals at the last census
    pub abundance_at_end: u64,
    /// patches occupied at the last census
    pub occupied_at_end: u32,
}

impl From<&Record> for ReplicateRow {
    fn from(record: &Record) -> Self {
        Self {
            replicate: record.replicate,
            extinct_in_year: extinct_in(&record.totals),
            quasi_extinct_in_year: record.quasi_extinct_in,
            lowest_abundance: record.totals.iter().copied().min().unwrap_or(0),
            abundance_at_end: record.totals.last().copied().unwrap_or(0),
            occupied_at_end: record.occupied_at_end,
        }
    }
}

fn extinct_in(totals: &[u64]) -> Option<u32> {
    let empty = totals.iter().rev().take_while(|total| **total == 0).count();
    if empty == 0 { None } else { u32::try_from(totals.len() - empty).ok() }
}

#[cfg(test)]
mod tests {
    use super::extinct_in;

    #[test]
    fn extinction_dates_from_the_last_unbroken_empty_run() {
        assert_eq!(extinct_in(&[5, 3, 0, 0]), Some(2));
        assert_eq!(extinct_in(&[5, 0, 2, 0]), Some(3), "a release refilled it");
        assert_eq!(extinct_in(&[5, 0, 2]), None);
        assert_eq!(extinct_in(&[0, 0]), Some(0));
    }
}

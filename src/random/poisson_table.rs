//! The Poisson distributions of the small whole means, as a table that the compiler fills.

/// The largest mean that has a row.
pub(super) const LARGEST_MEAN: usize = 64;

/// Above so many the chance at [`LARGEST_MEAN`] is below 2^-64.
const MOST: usize = 160;

/// Where the search begins for a word, by its highest bits.
const GUIDES: usize = 256;

pub(super) static TABLE: PoissonTable = PoissonTable::fill();

/// Inversion by guide table (Chen & Asau 1974, AIIE Trans. 6): the number rises with the word, so that draws from one
/// stream with means that differ by little differ by little.
pub(super) struct PoissonTable {
    /// by mean and k, the chance of at most k in units of 2^-64
    at_most: [[u64; MOST]; LARGEST_MEAN + 1],
    /// by mean and the highest bits of a word, the least k that a word with these can mean
    guide: [[u8; GUIDES]; LARGEST_MEAN + 1],
}

impl PoissonTable {
    /// The Poisson number of this mean that a random word means; `mean` at most [`LARGEST_MEAN`].
    #[inline]
    pub(super) fn number(&self, mean: usize, word: u64) -> u32 {
        let at_most = &self.at_most[mean];
        let mut k = usize::from(self.guide[mean][(word >> 56) as usize]);
        // Ends in time, because the last entry is the largest word.
        while word > at_most[k] {
            k += 1;
        }
        k as u32
    }

    const fn fill() -> Self {
        let mut table = Self { at_most: [[u64::MAX; MOST]; LARGEST_MEAN + 1], guide: [[0; GUIDES]; LARGEST_MEAN + 1] };
        let mut none = 1.0;
        let mut mean = 0;
        while mean <= LARGEST_MEAN {
            fill_row(&mut table.at_most[mean], mean, none);
            fill_guide(&mut table.guide[mean], &table.at_most[mean]);
            none /= std::f64::consts::E;
            mean += 1;
        }
        table
    }
}

const fn fill_row(at_most: &mut [u64; MOST], mean: usize, none: f64) {
    let mut mass = none;
    let mut sum = none;
    let mut k = 0;
    while k + 1 < MOST {
        // The cast stops at the largest word.
        at_most[k] = (sum * 18_446_744_073_709_551_616.0) as u64;
        k += 1;
        mass *= mean as f64 / k as f64;
        sum += mass;
    }
}

const fn fill_guide(guide: &mut [u8; GUIDES], at_most: &[u64; MOST]) {
    let mut k = 0;
    let mut high = 0;
    while high < GUIDES {
        while at_most[k] < (high as u64) << 56 {
            k += 1;
        }
        guide[high] = k as u8;
        high += 1;
    }
}

//! Removal: individuals taken out of patches in stated years, such as by trapping or hunting.

mod table;

pub use table::RemovalTable;

use super::replicate::State;
use crate::random::{Purpose, Stream, YearKey, binomial, remove_at_random};

/// How many are taken from each patch.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Amount {
    /// this many, or as many as there are above the floor
    Number(u32),
    /// each individual with this chance, down to the floor
    Share(f64),
}

/// The years in which a removal acts: year t lies between census t and census t + 1.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Years {
    /// from the first to the last, both included
    Between(u32, u32),
    /// these, in ascending order
    Listed(Vec<u32>),
}

impl Years {
    fn contain(&self, year: u32) -> bool {
        match self {
            Self::Between(first, last) => (*first..=*last).contains(&year),
            Self::Listed(years) => years.binary_search(&year).is_ok(),
        }
    }
}

/// A removal, compiled.
#[derive(Debug, Clone)]
pub(super) struct Removal {
    /// the key of its draws, from its name alone
    key: u32,
    patches: Vec<usize>,
    /// the stage that is counted and taken; without one, all are
    stage: Option<usize>,
    amount: Amount,
    /// how many it leaves in a patch, of those that it counts
    floor: u64,
    years: Years,
}

impl Removal {
    /// Takes individuals out of the patches, if it is a year for it. `patch_keys` has a key for every patch of the landscape.
    pub(super) fn act(&self, state: &mut State, patch_keys: &[u64], year: u32, key: YearKey) {
        if !self.years.contain(year) {
            return;
        }
        let stages = state.counts.len() / patch_keys.len();
        for &patch in &self.patches {
            let counts = &mut state.counts[patch * stages..(patch + 1) * stages];
            let pool = match self.stage {
                Some(stage) => &mut counts[stage..=stage],
                None => counts,
            };
            let most = total(pool).saturating_sub(self.floor);
            if most > 0 {
                let mut stream = key.patch(patch_keys[patch]).draw(Purpose::Removal(self.key));
                state.own[patch].removed += self.amount.take(&mut stream, pool, most, &mut state.scratch);
            }
        }
    }
}

impl Amount {
    /// Takes from `pool` at random, at most `most` of all that it holds; says how many. `taken` is at least as long.
    fn take(self, stream: &mut Stream, pool: &mut [u32], most: u64, taken: &mut [u32]) -> u64 {
        match self {
            Self::Number(number) => {
                let number = u64::from(number).min(most);
                remove_at_random(stream, pool, number);
                number
            }
            Self::Share(share) => {
                let taken = &mut taken[..pool.len()];
                for (taken, count) in taken.iter_mut().zip(pool.iter()) {
                    *taken = binomial(stream, *count, share);
                }
                // Who is spared for the floor's sake is drawn among those who were taken.
                let spared = total(taken).saturating_sub(most);
                remove_at_random(stream, taken, spared);
                for (count, taken) in pool.iter_mut().zip(taken.iter()) {
                    *count -= taken;
                }
                total(taken)
            }
        }
    }
}

fn total(counts: &[u32]) -> u64 {
    counts.iter().map(|count| u64::from(*count)).sum()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::ReplicateKey;

    fn stream(year: u32) -> Stream {
        ReplicateKey::new(31, 7).year(year).network().draw(Purpose::Removal(0))
    }

    #[test]
    fn years_are_a_list_or_a_span() {
        let acting = |years: &Years| (0..10).filter(|year| years.contain(*year)).collect::<Vec<_>>();
        assert_eq!(acting(&Years::Between(3, 5)), [3, 4, 5]);
        assert_eq!(acting(&Years::Listed(vec![0, 4, 12])), [0, 4]);
    }

    #[test]
    fn no_more_are_taken_than_may_be() {
        for year in 0..200 {
            for amount in [Amount::Number(9), Amount::Share(0.9), Amount::Share(1.0)] {
                let mut pool = [4, 0, 6];
                let taken = amount.take(&mut stream(year), &mut pool, 7, &mut [0; 3]);
                assert!(taken <= 7 && taken + total(&pool) == 10, "{amount:?}: {taken} of {pool:?}");
                assert!(taken == 7 || amount == Amount::Share(0.9));
            }
        }
    }

    /// Null: of 4 and 6 individuals 5 are taken at random, hypergeometric: 2 of the four in the mean, variance
    /// 5 (4/10) (6/10) (5/9) = 2/3. By number, and by a share so high that the floor alone decides. 20,000 draws, 4 standard
    /// errors.
    #[test]
    fn who_is_taken_is_drawn_among_all() {
        for amount in [Amount::Number(5), Amount::Share(1.0)] {
            let mut of_the_first = 0.0;
            for year in 0..20_000 {
                let mut pool = [4, 6];
                amount.take(&mut stream(year), &mut pool, 5, &mut [0; 2]);
                of_the_first += f64::from(4 - pool[0]);
            }
            let mean = of_the_first / 20_000.0;
            assert!((mean - 2.0).abs() < 4.0 * (2.0 / 3.0 / 20_000.0_f64).sqrt(), "{amount:?}: {mean}");
        }
    }
}

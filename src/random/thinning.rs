//! Removal at random, by individual.

use super::{Stream, hypergeometric};

/// Removes `surplus` individuals at random from all that `counts` hold together; all of them if it is more.
///
/// A hypergeometric number for each count in turn, which is as fast as picking one by one from all of them even where few
/// are picked, and no worse where all but few go.
#[inline]
pub fn remove_at_random(stream: &mut Stream, counts: &mut [u32], surplus: u64) {
    let mut all: u64 = counts.iter().map(|count| u64::from(*count)).sum();
    let mut surplus = surplus.min(all);
    for count in counts {
        if surplus == 0 {
            break;
        }
        let marked = u64::from(*count);
        let removed = hypergeometric(stream, marked, all - marked, surplus);
        all -= marked;
        surplus -= removed;
        *count -= removed as u32;
    }
}

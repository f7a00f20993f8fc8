//! Destinations by Walker's alias method.

use super::Stream;

/// Rows of probabilities, each of which answers with one random word in which of its places a draw lands.
///
/// Walker (1977), ACM Trans. Math. Softw. 3, filled in linear time as by Vose (1991), IEEE Trans. Softw. Eng. 17. The
/// probabilities count to 2^-64 of a slot.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct AliasRows {
    slots: Vec<Slot>,
    /// where each row ends among the slots
    ends: Vec<u32>,
    n_places: u32,
}

/// A part of a row: of all words that meet it, those below the threshold mean one place, the others another.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
struct Slot {
    threshold: u64,
    below: u32,
    above: u32,
}

/// The place of those who land nowhere.
const LOST: u32 = u32::MAX;

/// What a row may lack of 1 and still lose nobody: more than rounding takes, less than any draw can see.
const SLACK: f64 = 1e-12;

impl AliasRows {
    /// No rows.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a row. What its probabilities, each 0 or above, lack of 1 is the chance to land nowhere; if they sum to more
    /// than 1 they are scaled to it.
    pub fn push(&mut self, probabilities: &[f64]) {
        let sum: f64 = probabilities.iter().sum();
        let lost = 1.0 - sum;
        let n_places = probabilities.len() as u32;
        let mut places: Vec<(u32, f64)> = (self.n_places..).zip(probabilities.iter().copied()).collect();
        if lost > SLACK || places.is_empty() {
            places.push((LOST, lost));
        }
        let total = if lost > SLACK { 1.0 } else { sum };
        self.slots.extend(slots(&places, total));
        self.ends.push(self.slots.len() as u32);
        self.n_places += n_places;
    }

    /// Where a draw from a row lands, as a position among the probabilities of all rows, the first of row 0 being 0;
    /// `None` if nowhere.
    #[inline]
    pub fn draw(&self, stream: &mut Stream, row: usize) -> Option<u32> {
        let begin = if row == 0 { 0 } else { self.ends[row - 1] };
        let n_slots = self.ends[row] - begin;
        let wide = u128::from(stream.word()) * u128::from(n_slots);
        let slot = &self.slots[begin as usize + (wide >> 64) as usize];
        let place = if (wide as u64) < slot.threshold { slot.below } else { slot.above };
        (place != LOST).then_some(place)
    }
}

/// The slots of one row, each as wide as the others: places with less than a slot's share leave the rest of theirs to one
/// that has more.
fn slots(places: &[(u32, f64)], total: f64) -> Vec<Slot> {
    let n = places.len();
    let mut shares: Vec<f64> = places.iter().map(|(_, p)| p / total * n as f64).collect();
    let mut slots: Vec<Slot> =
        places.iter().map(|(place, _)| Slot { threshold: 0, below: *place, above: *place }).collect();
    let (mut small, mut large): (Vec<usize>, Vec<usize>) = (0..n).partition(|i| shares[*i] < 1.0);
    while let (Some(low), Some(&high)) = (small.pop(), large.last()) {
        slots[low].threshold = (shares[low] * 18_446_744_073_709_551_616.0) as u64;
        slots[low].above = places[high].0;
        shares[high] -= 1.0 - shares[low];
        if shares[high] < 1.0 {
            large.pop();
            small.push(high);
        }
    }
    slots
}

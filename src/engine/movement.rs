//! Dispersal as the yearly loop sees it: who leaves, and where each emigrant ends up.

use super::replicate::State;
use crate::demography::Stage;
use crate::network::Network;
use crate::random::{AliasRows, PlaceKey, Purpose, binomial};

/// The compiled dispersal matrix.
#[derive(Debug)]
pub(super) struct Movement {
    /// stages that move, with their probability of leaving
    movers: Vec<(usize, f64)>,
    n_stages: usize,
    row_start: Vec<usize>,
    /// target patch of each link
    targets: Vec<u32>,
    /// one row a patch, whose places are its links
    destinations: AliasRows,
    /// probability of each link
    probabilities: Vec<f64>,
}

/// Above this many emigrants a target, drawing how many go to each costs less than drawing where each one goes.
const EMIGRANTS_PER_TARGET: u32 = 3;

impl Movement {
    /// `None` where nobody moves.
    pub(super) fn compile(network: &Network, stages: &[Stage]) -> Option<Self> {
        let movers: Vec<(usize, f64)> = stages
            .iter()
            .enumerate()
            .filter(|(_, stage)| stage.emigration > 0.0)
            .map(|(position, stage)| (position, stage.emigration))
            .collect();
        if movers.is_empty() {
            return None;
        }
        let probabilities: Vec<f64> = network.links.iter().map(|link| link.probability).collect();
        let mut destinations = AliasRows::new();
        for ends in network.row_start.windows(2) {
            destinations.push(&probabilities[ends[0]..ends[1]]);
        }
        Some(Self {
            movers,
            n_stages: stages.len(),
            row_start: network.row_start.clone(),
            targets: network.links.iter().map(|link| link.to).collect(),
            destinations,
            probabilities,
        })
    }

    /// Draws the emigrants of a patch and where they arrive.
    pub(super) fn leave(&self, state: &mut State, patch: usize, place: PlaceKey) {
        for &(stage, chance) in &self.movers {
            let count = &mut state.counts[patch * self.n_stages + stage];
            if *count == 0 {
                continue;
            }
            let leaving = binomial(&mut place.draw(Purpose::Leaving(stage as u32)), *count, chance);
            if leaving == 0 {
                continue;
            }
            *count -= leaving;
            state.own[patch].emigrants += u64::from(leaving);
            let arrived = self.spread(state, patch, stage, leaving, place);
            state.own[patch].arrived_elsewhere += u64::from(arrived);
        }
    }

    fn spread(&self, state: &mut State, patch: usize, stage: usize, leaving: u32, place: PlaceKey) -> u32 {
        let (first, end) = (self.row_start[patch], self.row_start[patch + 1]);
        let targets = u32::try_from(end - first).unwrap_or(u32::MAX);
        let mut stream = place.draw(Purpose::Destinations(stage as u32));
        let mut arrived = 0;
        if leaving <= targets.saturating_mul(EMIGRANTS_PER_TARGET) {
            for _ in 0..leaving {
                if let Some(link) = self.destinations.draw(&mut stream, patch) {
                    self.settle(state, link as usize, stage, 1);
                    arrived += 1;
                }
            }
            return arrived;
        }
        let (mut left, mut probability_left) = (leaving, 1.0_f64);
        for link in first..end {
            if left == 0 {
                break;
            }
            let chance = (self.probabilities[link] / probability_left).min(1.0);
            let settling = binomial(&mut stream, left, chance);
            self.settle(state, link, stage, settling);
            arrived += settling;
            left -= settling;
            probability_left -= self.probabilities[link];
        }
        arrived
    }

    fn settle(&self, state: &mut State, link: usize, stage: usize, settling: u32) {
        let cell = &mut state.arrivals[self.targets[link] as usize * self.n_stages + stage];
        let (sum, over) = cell.overflowing_add(settling);
        *cell = if over { u32::MAX } else { sum };
        state.saturated |= over;
        state.tallies.movers[link] += u64::from(settling);
    }

    /// Adds the year's arrivals to the counts.
    pub(super) fn arrive(&self, state: &mut State) {
        let rows = state.counts.chunks_mut(self.n_stages).zip(state.arrivals.chunks_mut(self.n_stages));
        for ((counts, arrivals), own) in rows.zip(&mut state.own) {
            for (count, arriving) in counts.iter_mut().zip(arrivals) {
                if *arriving > 0 {
                    own.immigrants += u64::from(*arriving);
                    let (sum, over) = count.overflowing_add(*arriving);
                    *count = if over { u32::MAX } else { sum };
                    state.saturated |= over;
                    *arriving = 0;
                }
            }
        }
    }
}

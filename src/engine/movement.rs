//! Dispersal as the yearly loop sees it: who leaves, and where each emigrant ends up.

use std::ops::Range;

use super::crowded::{Crowd, Room};
use super::replicate::State;
use crate::demography::Stage;
use crate::network::{CrowdingResponse, Network};
use crate::random::{AliasRows, PlaceKey, Purpose, Stream, binomial};

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
    /// what crowding does to it; nothing as compiled
    pub(super) crowding: CrowdingResponse,
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
            crowding: CrowdingResponse::default(),
        })
    }

    /// Takes down how crowded a patch is, where that matters; of all patches, before anyone leaves.
    pub(super) fn look(&self, crowd: &mut Crowd, patch: usize, counts: &[u32], weights: &[f64], capacity: f64) {
        let numbers = counts.iter().zip(weights).map(|(count, weight)| f64::from(*count) * weight).sum();
        crowd.see(self.crowding, patch, numbers, capacity);
    }

    /// Draws the emigrants of a patch and where they arrive.
    pub(super) fn leave(&self, state: &mut State, patch: usize, place: PlaceKey) {
        let eagerness = state.crowd.eagerness(patch);
        for &(stage, chance) in &self.movers {
            let count = &mut state.counts[patch * self.n_stages + stage];
            if *count == 0 {
                continue;
            }
            let leaving = binomial(&mut place.draw(Purpose::Leaving(stage as u32)), *count, chance * eagerness);
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
        if let Some(room) = state.crowd.room(&self.targets[first..end], &self.probabilities[first..end]) {
            return self.spread_past_full(state, patch, stage, leaving, room, &mut stream);
        }
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

    /// The same where full targets are passed by: their chances go to the row's other targets in proportion, so that as
    /// many are lost as ever.
    fn spread_past_full(
        &self,
        state: &mut State,
        patch: usize,
        stage: usize,
        leaving: u32,
        room: Room,
        stream: &mut Stream,
    ) -> u32 {
        let (first, end) = (self.row_start[patch], self.row_start[patch + 1]);
        let targets = u32::try_from(end - first).unwrap_or(u32::MAX);
        let mut arrived = 0;
        if leaving <= targets.saturating_mul(EMIGRANTS_PER_TARGET) {
            for _ in 0..leaving {
                let Some(link) = self.destinations.draw(stream, patch) else { continue };
                let link = link as usize;
                let is_full = state.crowd.is_full(self.targets[link]);
                let link = if is_full { self.another(state, first..end, room, stream) } else { link };
                self.settle(state, link, stage, 1);
                arrived += 1;
            }
            return arrived;
        }
        let scale = room.anywhere / room.with_room;
        let (mut left, mut probability_left) = (leaving, 1.0_f64);
        for link in first..end {
            if left == 0 {
                break;
            }
            if state.crowd.is_full(self.targets[link]) {
                continue;
            }
            let probability = self.probabilities[link] * scale;
            let settling = binomial(stream, left, (probability / probability_left).min(1.0));
            self.settle(state, link, stage, settling);
            arrived += settling;
            left -= settling;
            probability_left -= probability;
        }
        arrived
    }

    /// One of the row's targets with room, by their chances.
    fn another(&self, state: &State, row: Range<usize>, room: Room, stream: &mut Stream) -> usize {
        let mut beyond = stream.uniform() * room.with_room;
        let mut last = row.start;
        for link in row.filter(|link| !state.crowd.is_full(self.targets[*link])) {
            // Rounding may leave a hair beyond the last of them.
            last = link;
            beyond -= self.probabilities[link];
            if beyond < 0.0 {
                break;
            }
        }
        last
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

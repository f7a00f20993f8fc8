//! Catastrophes over the patches of a landscape, year by year.

use std::sync::Arc;

use super::{Begins, Catastrophe, Lasts, Shares, Strikes};
use crate::random::{PlaceKey, Purpose, YearKey, name_index};

/// The catastrophes that can happen and take something, compiled.
#[derive(Debug, Clone)]
pub struct Catastrophes {
    /// in the order of their names, so that their order in the study changes no byte
    events: Vec<Event>,
    centroids_km: Vec<[f64; 2]>,
    patch_keys: Vec<u64>,
    takes_capacity: bool,
}

/// One catastrophe.
#[derive(Debug, Clone)]
struct Event {
    /// its part of the keys of draws, from its name alone: another catastrophe more or less does not change it
    index: u32,
    probability: f64,
    years: Vec<u32>,
    strikes: Arc<dyn Strikes>,
    lasts: Lasts,
    left: Shares,
}

/// What the catastrophes leave of one year of one replicate. Made once a thread, it serves one replicate after another and
/// allocates nothing.
#[derive(Debug, Clone)]
pub struct CatastropheState {
    left: Vec<Shares>,
    memories: Vec<Memory>,
}

/// What a catastrophe has left behind for the next year.
#[derive(Debug, Clone)]
struct Memory {
    /// years of this event that each patch has still to go; where events have a chance of another year, 1 where a patch was
    /// struck
    years_left: Vec<u32>,
    /// the patch at which the event that is running began, if one is running that belongs to no patch alone
    running_from: Option<u32>,
}

impl Catastrophes {
    /// Over patches in canonical order, with their centroids in kilometres and their keys. `None` where nothing can happen.
    pub fn compile(catastrophes: &[Catastrophe], centroids_km: &[[f64; 2]], patch_keys: &[u64]) -> Option<Self> {
        let mut acting: Vec<&Catastrophe> = catastrophes.iter().filter(|catastrophe| catastrophe.acts()).collect();
        acting.sort_by(|a, b| a.name.cmp(&b.name));
        let event = |catastrophe: &&Catastrophe| Event {
            index: name_index(&catastrophe.name),
            probability: catastrophe.yearly_probability,
            years: catastrophe.years.clone(),
            strikes: Arc::clone(&catastrophe.strikes),
            lasts: catastrophe.lasts,
            left: catastrophe.left,
        };
        (!acting.is_empty()).then(|| Self {
            takes_capacity: acting.iter().any(|catastrophe| catastrophe.left.capacity < 1.0),
            events: acting.iter().map(event).collect(),
            centroids_km: centroids_km.to_vec(),
            patch_keys: patch_keys.to_vec(),
        })
    }

    /// Whether any of them takes capacity.
    pub fn take_capacity(&self) -> bool {
        self.takes_capacity
    }

    /// Room for one replicate at a time.
    pub fn state(&self) -> CatastropheState {
        let n_patches = self.patch_keys.len();
        let memory = Memory { years_left: vec![0; n_patches], running_from: None };
        CatastropheState { left: vec![Shares::ALL; n_patches], memories: vec![memory; self.events.len()] }
    }

    /// Draws one year of a replicate, whose key is `key`. Years follow each other from 0, which forgets those of the
    /// replicate before.
    pub fn draw(&self, state: &mut CatastropheState, key: YearKey, year: u32) {
        state.left.fill(Shares::ALL);
        for (event, memory) in self.events.iter().zip(&mut state.memories) {
            if year == 0 {
                memory.years_left.fill(0);
                memory.running_from = None;
            }
            match (event.strikes.begins(), event.lasts) {
                (Begins::InEachPatch, _) => self.draw_by_patch(event, memory, key, year),
                (_, Lasts::Years(years)) => self.draw_event(event, memory, key, year, years),
                (_, Lasts::AnotherYear(_)) => self.draw_running(event, memory, key, year),
            }
            memory.leave(event, &mut state.left);
        }
    }

    fn draw_by_patch(&self, event: &Event, memory: &mut Memory, key: YearKey, year: u32) {
        for (years_left, patch_key) in memory.years_left.iter_mut().zip(&self.patch_keys) {
            let is_struck = event.is_struck(key.patch(*patch_key), year, *years_left > 0);
            match event.lasts {
                Lasts::Years(years) if is_struck => *years_left = years,
                Lasts::Years(_) => {}
                Lasts::AnotherYear(_) => *years_left = u32::from(is_struck),
            }
        }
    }

    /// An event that lasts a number of years: it starts the clock of each patch that it reaches.
    fn draw_event(&self, event: &Event, memory: &mut Memory, key: YearKey, year: u32, years: u32) {
        if event.is_struck(key.network(), year, false) {
            let origin = self.origin(event, key);
            for (patch, years_left) in memory.years_left.iter_mut().enumerate() {
                if event.strikes.reaches(origin, patch, &self.centroids_km) {
                    *years_left = years;
                }
            }
        }
    }

    /// An event with a chance of another year: while it runs it keeps its place and no other begins.
    fn draw_running(&self, event: &Event, memory: &mut Memory, key: YearKey, year: u32) {
        let goes_on = event.is_struck(key.network(), year, memory.running_from.is_some());
        memory.running_from = match memory.running_from {
            _ if !goes_on => None,
            Some(origin) => Some(origin),
            None => Some(self.origin(event, key) as u32),
        };
        let Some(origin) = memory.running_from else {
            memory.years_left.fill(0);
            return;
        };
        for (patch, years_left) in memory.years_left.iter_mut().enumerate() {
            *years_left = u32::from(event.strikes.reaches(origin as usize, patch, &self.centroids_km));
        }
    }

    fn origin(&self, event: &Event, key: YearKey) -> usize {
        if event.strikes.begins() == Begins::AtOnePatch {
            key.network().draw(Purpose::Origin(event.index)).below(self.patch_keys.len() as u64) as usize
        } else {
            0
        }
    }
}

impl Event {
    fn is_struck(&self, place: PlaceKey, year: u32, was_struck: bool) -> bool {
        let is_certain = !self.years.is_empty() && self.years.binary_search(&year).is_ok();
        let chance = self.lasts.chance(self.probability, was_struck, year == 0);
        is_certain || place.draw(Purpose::Struck(self.index)).uniform() < chance
    }
}

impl Memory {
    /// Leaves the event's shares in every patch that it strikes this year, and counts the year off.
    fn leave(&mut self, event: &Event, left: &mut [Shares]) {
        let counts_down = matches!(event.lasts, Lasts::Years(_));
        for (years_left, left) in self.years_left.iter_mut().zip(left).filter(|(years_left, _)| **years_left > 0) {
            left.times(&event.left);
            *years_left -= u32::from(counts_down);
        }
    }
}

impl CatastropheState {
    /// What is left of a patch's year.
    pub fn left(&self, patch: usize) -> Shares {
        self.left[patch]
    }
}

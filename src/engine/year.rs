//! One year of one replicate, from a census to the next.

use super::capacity;
use super::model::Model;
use super::replicate::State;
use crate::demography::local::Pressure;
use crate::random::{Purpose, YearKey, remove_at_random};

/// Takes the state from census `year` to census `year + 1`.
///
/// Habitat changes (step 1) have no part yet: the landscape is as is.
pub(super) fn step(model: &Model, state: &mut State, year: u32) {
    let key = state.replicate.year(year);
    weather(model, state, key, year);
    if let Some(turnovers) = &model.turnovers {
        turnovers.step(model, state, key);
    } else {
        local_dynamics(model, state, key);
        dispersal(model, state, key);
        management(model, state, year, key);
        ceiling(model, state, key);
    }
    census(model, state, year + 1);
}

/// Step 2: the year's deviates and catastrophes, and the capacity that they leave.
fn weather(model: &Model, state: &mut State, key: YearKey, year: u32) {
    model.rates.advance(&mut state.weather);
    if let (Some(catastrophes), Some(drawn)) = (&model.catastrophes, &mut state.catastrophes) {
        catastrophes.draw(drawn, key, year);
    }
    capacity::of_the_year(model, state, key, year);
}

/// Step 3: births, and survival with advance, from the numbers of the last census.
fn local_dynamics(model: &Model, state: &mut State, key: YearKey) {
    let stages = model.n_stages;
    for patch in 0..model.n_patches() {
        let counts = &mut state.counts[patch * stages..(patch + 1) * stages];
        if counts.iter().all(|count| *count == 0) {
            continue;
        }
        let mut pressure = pressure(model, state.capacity[patch], counts);
        if let Some(catastrophes) = &state.catastrophes {
            let left = catastrophes.left(patch);
            pressure.survival *= left.survival;
            pressure.fecundity *= left.fecundity;
        }
        model.rates.realise(state.weather.as_ref(), patch, &mut state.rates);
        let place = key.patch(model.patch_keys[patch]);
        state.saturated |= model.local.step(counts, &state.rates, pressure, place, &mut state.scratch);
    }
}

/// Where there is no capacity the multiplier of the rates acted on is 0, under every form.
fn pressure(model: &Model, capacity: f64, counts: &[u32]) -> Pressure {
    let crowding = &model.crowding;
    let multiplier = match &crowding.curve {
        _ if capacity <= 0.0 => 0.0,
        None => return Pressure::NONE,
        Some(curve) => {
            let weighted = counts.iter().zip(&model.toward_capacity).map(|(count, weight)| f64::from(*count) * weight);
            curve.multiplier(weighted.sum::<f64>() / capacity)
        }
    };
    Pressure {
        survival: if crowding.on_survival { multiplier } else { 1.0 },
        fecundity: if crowding.on_fecundity { multiplier } else { 1.0 },
    }
}

/// Step 4: emigrants leave, by the stage they are in now, and those who survive the way arrive.
fn dispersal(model: &Model, state: &mut State, key: YearKey) {
    let Some(movement) = &model.movement else { return };
    let stages = model.n_stages;
    if !movement.crowding.is_idle() {
        let patches = state.counts.chunks(stages).zip(&state.capacity).enumerate();
        for (patch, (counts, capacity)) in patches {
            movement.look(&mut state.crowd, patch, counts, &model.toward_capacity, *capacity);
        }
    }
    for patch in 0..model.n_patches() {
        let counts = &state.counts[patch * stages..(patch + 1) * stages];
        if counts.iter().all(|count| *count == 0) {
            continue;
        }
        movement.leave(state, patch, key.patch(model.patch_keys[patch]));
    }
    movement.arrive(state);
}

/// Step 5: removals, in the order of the study.
fn management(model: &Model, state: &mut State, year: u32, key: YearKey) {
    for removal in &model.removals {
        removal.act(state, &model.patch_keys, year, key);
    }
}

/// Step 6: where the form is a ceiling, surplus over the whole part of capacity is removed at random. A patch without
/// capacity is emptied under every form.
fn ceiling(model: &Model, state: &mut State, key: YearKey) {
    let stages = model.n_stages;
    for patch in 0..model.n_patches() {
        let counts = &mut state.counts[patch * stages..(patch + 1) * stages];
        let capacity = state.capacity[patch];
        if capacity <= 0.0 {
            counts.fill(0);
        } else if model.ceiling {
            remove_surplus(model, counts, capacity, key, patch, &mut state.scratch);
        }
    }
}

fn remove_surplus(model: &Model, counts: &mut [u32], capacity: f64, key: YearKey, patch: usize, counted: &mut [u32]) {
    let mut total = 0_u64;
    for ((counted, count), weight) in counted.iter_mut().zip(counts.iter()).zip(&model.toward_capacity) {
        *counted = if *weight > 0.0 { *count } else { 0 };
        total += u64::from(*counted);
    }
    let most = capacity.floor().min(9e18) as u64;
    if total <= most {
        return;
    }
    let mut stream = key.patch(model.patch_keys[patch]).draw(Purpose::Surplus);
    remove_at_random(&mut stream, counted, total - most);
    for ((count, counted), weight) in counts.iter_mut().zip(counted).zip(&model.toward_capacity) {
        if *weight > 0.0 {
            *count = *counted;
        }
    }
}

/// Step 7: what is reported is what the census sees.
fn census(model: &Model, state: &mut State, census: u32) {
    let stages = model.n_stages;
    let mut total = 0;
    let mut occupied = 0;
    for (counts, own) in state.counts.chunks(stages).zip(&mut state.own) {
        let here: u64 = counts.iter().map(|count| u64::from(*count)).sum();
        total += here;
        occupied += u32::from(here > 0);
        own.see(here);
    }
    state.note(model, census, total, occupied);
}

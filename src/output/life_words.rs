//! The life history in words: what an Allee effect does to the patches, and what a year does to an individual.

use super::words::{amount, grouped};
use crate::demography::LifeHistory;
use crate::demography::allee::{Balance, balance};
use crate::engine::Prepared;
use crate::landscape::Patch;

/// The Allee effect, and where it leaves the patches: a line each. Empty where there is none.
pub(super) fn allee_effect(prepared: &Prepared) -> Vec<String> {
    let life_history = &prepared.life_history;
    let Some(effect) = &life_history.allee_effect else { return Vec::new() };
    let acts_on = if life_history.kind == "counts" { "growth" } else { "fecundity" };
    let names: Vec<&str> = effect.breeders.iter().map(|stage| life_history.stages[*stage].name.as_str()).collect();
    let half_at = effect.half_at;
    let formula = format!(
        "{acts_on} times N / (N + {half_at}), N being a patch's individuals of {} (Dennis 1989)",
        names.join(", ")
    );
    vec![formula, balance_in_words(life_history, &prepared.landscape.patches)]
}

fn balance_in_words(life_history: &LifeHistory, patches: &[Patch]) -> String {
    let found: Vec<Option<Balance>> = patches.iter().map(|patch| balance(life_history, patch.capacity)).collect();
    let Some(largest) = (0..patches.len()).max_by(|a, b| patches[*a].capacity.total_cmp(&patches[*b].capacity)) else {
        return String::new();
    };
    let patch = &patches[largest];
    let what = match found[largest] {
        None => return "threshold and balance are not computed for these rates".to_owned(),
        Some(Balance::Never) => return "numbers fall in every patch, however many there are".to_owned(),
        Some(Balance::Between { threshold, settles: None }) => {
            format!("numbers fall below {} and rise above", amount(threshold))
        }
        Some(Balance::Between { threshold, settles: Some(settles) }) => format!(
            "in the largest ({}, K = {}) numbers fall below {} and rise above, toward {}",
            patch.name,
            amount(patch.capacity),
            amount(threshold),
            amount(settles)
        ),
    };
    let too_small = found.iter().filter(|balance| **balance == Some(Balance::Never)).count() as u64;
    let others = match too_small {
        0 => String::new(),
        1 => "; in 1 patch, too small for it, they fall from any number".to_owned(),
        _ => format!("; in {} patches, too small for it, they fall from any number", grouped(too_small)),
    };
    format!("one closed patch, average years, no chance: {what}{others}")
}

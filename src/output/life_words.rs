//! The life history in words: what an Allee effect does to the patches, and what a year does to an individual.

use super::words::{amount, grouped};
use crate::demography::allee::{Balance, balance};
use crate::demography::{LifeHistory, Matrix};
use crate::engine::Prepared;
use crate::landscape::Patch;

/// The Allee effect, and where it leaves the patches: a line each. Empty where there is none.
pub(super) fn allee_effect(prepared: &Prepared) -> Vec<String> {
    let life_history = &prepared.life_history;
    let Some(effect) = &life_history.allee_effect else { return Vec::new() };
    let acts_on = if life_history.kind == "counts" { "growth" } else { "fecundity" };
    let names: Vec<&str> = effect.breeders.iter().map(|stage| life_history.stages[*stage].name.as_str()).collect();
    let half_at = effect.half_at;
    let whom = if names.len() == life_history.stages.len() {
        "individuals".to_owned()
    } else {
        format!("individuals of {}", names.join(", "))
    };
    let formula = format!("{acts_on} times N / (N + {half_at}), N being a patch's {whom} (Dennis 1989)");
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

/// What an average year does to a hundred individuals of each stage, without crowding: a sentence a stage.
pub(super) fn of_a_hundred(life_history: &LifeHistory) -> Vec<String> {
    (0..life_history.stages.len()).map(|stage| of_a_hundred_in(life_history, stage)).collect()
}

fn of_a_hundred_in(life_history: &LifeHistory, from: usize) -> String {
    let matrix = &life_history.matrix;
    let entries = |part: &Matrix| -> Vec<(usize, f64)> {
        (0..part.size()).map(|to| (to, part[(to, from)])).filter(|(_, entry)| *entry > 0.0).collect()
    };
    let listed = |entries: &[(usize, f64)], before: &str| {
        let parts: Vec<String> = entries
            .iter()
            .map(|(to, entry)| format!("{} {before}{}", of_100(*entry), life_history.stages[*to].name))
            .collect();
        parts.join(" and ")
    };
    let name = &life_history.stages[from].name;
    let alive = match entries(&matrix.fates).as_slice() {
        [] => "none is alive".to_owned(),
        [(to, entry)] if *to == from => format!("{} are alive", of_100(*entry)),
        several => format!("alive are {}", listed(several, "as ")),
    };
    let young = entries(&matrix.young);
    let mated = if matrix.leading.is_some() { ", all mated," } else { "" };
    let born = if young.is_empty() {
        String::new()
    } else {
        format!("; by their young{mated} there are {} more", listed(&young, ""))
    };
    format!("of 100 {name}, a year later {alive}{born}")
}

/// A hundred times a number, as finely as it is small.
fn of_100(number: f64) -> String {
    match 100.0 * number {
        many if many >= 9.95 => format!("{many:.0}"),
        some if some >= 0.995 => format!("{some:.1}"),
        few => format!("{few:.2}"),
    }
}

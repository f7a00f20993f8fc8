//! Stages: individuals survive, advance and breed by the stage they are in.
//!
//! The mean of a step is the projection matrix times the counts, exactly: survival is a multinomial over fates, and young
//! enter the first stage.

mod matrix_form;
mod sexes;
mod table_form;

use std::sync::Arc;

use super::young::Young;
use super::{LocalModel, Pressure, add};
use crate::demography::allee::{self, AlleeEffect};
use crate::demography::density::Density;
use crate::demography::{Census, LifeHistory, ProjectionMatrix, Rate, Stage};
use crate::mistake::Mistake;
use crate::random::{PlaceKey, Purpose, binomial};
use crate::study::{Said, Table};

/// Where the survivors of a stage go.
#[derive(Debug, Clone, PartialEq)]
struct Fates {
    /// target stages with the probability of each among survivors not yet placed; the last takes the rest
    shares: Vec<(usize, f64)>,
}

/// What the two ways of writing a life cycle, rows or a matrix, both come down to.
struct Cycle {
    stages: Vec<Stage>,
    survival: Vec<Rate>,
    /// `fate_shares[from][to]`, each row summing to 1, or all 0 where nothing survives
    fate_shares: Vec<Vec<f64>>,
    fecundity: Vec<Rate>,
    emigration_said: Option<Said<f64>>,
}

#[derive(Debug)]
struct Stages {
    fates: Vec<Fates>,
    young: Young,
}

impl LocalModel for Stages {
    fn step(&self, counts: &mut [u32], rates: &[f64], pressure: Pressure, place: PlaceKey, next: &mut [u32]) -> bool {
        let (survival, fecundity) = rates.split_at(counts.len());
        next.fill(0);
        let mut over = survive(&self.fates, counts, survival, pressure.survival, place, next);
        let born = self.young.number(counts, fecundity, pressure.fecundity, place);
        over |= add(&mut next[0], born) || born == u32::MAX;
        counts.copy_from_slice(next);
        over
    }

    fn young_in_words(&self) -> String {
        self.young.in_words()
    }
}

/// Survival with advance: adds to `next` what becomes of `counts`. Says whether a count had to stop at the largest.
fn survive(
    fates: &[Fates],
    counts: &[u32],
    survival: &[f64],
    pressure: f64,
    place: PlaceKey,
    next: &mut [u32],
) -> bool {
    let mut over = false;
    for (stage, fates) in fates.iter().enumerate() {
        let count = counts[stage];
        if count == 0 || fates.shares.is_empty() {
            continue;
        }
        let chance = survival[stage] * pressure;
        let mut left = binomial(&mut place.draw(Purpose::Fates(stage as u32)), count, chance);
        let (last, others) = fates.shares.split_last().expect("a stage with survivors has a fate");
        if !others.is_empty() {
            let mut stream = place.draw(Purpose::Advance(stage as u32));
            for (to, share) in others {
                let moved = binomial(&mut stream, left, *share);
                over |= add(&mut next[*to], moved);
                left -= moved;
            }
        }
        over |= add(&mut next[last.0], left);
    }
    over
}

/// Reads the life cycle, as rows or as a whole matrix, and what stands beside it.
pub(super) fn read(table: &Table<'_>) -> Option<LifeHistory> {
    let choices = [("females", "females"), ("individuals", "individuals"), (sexes::INDIVIDUALS, sexes::INDIVIDUALS)];
    let individuals = table.choice("individuals", &choices);
    if individuals.as_ref().is_some_and(|said| said.value == sexes::INDIVIDUALS) {
        return sexes::read(table);
    }
    for key in ["female_share", "harem_size"].into_iter().filter(|key| table.has(key)) {
        table.mistake(table.address(key), "no such key unless individuals = \"both sexes\"");
    }
    let census = Census::read(table);
    let young = Young::read(table);
    let as_read = young.clone().unwrap_or(Young::Poisson);
    let cycle = match (table.has("stage"), table.has("matrix")) {
        (_, true) => matrix_form::read(table, &as_read),
        (true, false) => table_form::read(table, &as_read),
        (false, false) => {
            table.missing("stage", "stages, each under [[life_history.stage]], or a whole matrix = [[..], ..]");
            None
        }
    };
    let matrix = cycle.as_ref().map(|cycle| projection_matrix(cycle, &as_read));
    let density = Density::read(table, matrix.as_ref(), false);
    let allee_effect = AlleeEffect::read(table, cycle.as_ref().map(breeders));
    let (cycle, matrix, density) = (cycle?, matrix?, density?);
    if density.ceiling {
        refuse_partial_weights(table, &cycle.stages)?;
    }
    let fates = cycle.fate_shares.iter().map(|shares| fates(shares)).collect();
    let rates = cycle.survival.into_iter().chain(cycle.fecundity).collect();
    Some(LifeHistory {
        kind: "stages",
        individuals: individuals.map_or("individuals", |said| said.value).to_owned(),
        stages: cycle.stages,
        rates,
        matrix,
        density,
        model: allee::under(allee_effect.as_ref(), Arc::new(Stages { fates, young: young? })),
        allee_effect,
        census,
        emigration_said: cycle.emigration_said,
        occupancy: None,
    })
}

fn projection_matrix(cycle: &Cycle, young: &Young) -> ProjectionMatrix {
    let mut matrix = ProjectionMatrix::zero(cycle.stages.len());
    for (from, shares) in cycle.fate_shares.iter().enumerate() {
        for (to, share) in shares.iter().enumerate() {
            matrix.fates[(to, from)] = cycle.survival[from].mean * share;
        }
        matrix.young[(0, from)] = young.mean(&cycle.fecundity[from]);
    }
    matrix
}

/// The stages with mean fecundity above 0.
fn breeders(cycle: &Cycle) -> Vec<usize> {
    (0..cycle.fecundity.len()).filter(|stage| cycle.fecundity[*stage].mean > 0.0).collect()
}

fn fates(shares: &[f64]) -> Fates {
    let mut left = 1.0;
    let mut targets = Vec::new();
    for (to, share) in shares.iter().enumerate().filter(|(_, share)| **share > 0.0) {
        targets.push((to, (share / left).min(1.0)));
        left -= share;
    }
    Fates { shares: targets }
}

/// A ceiling removes whole individuals, so that each either counts or does not.
#[expect(clippy::float_cmp, reason = "the weights 0 and 1 are written, not computed")]
fn refuse_partial_weights(table: &Table<'_>, stages: &[Stage]) -> Option<()> {
    let partial: Vec<&Stage> =
        stages.iter().filter(|stage| stage.toward_capacity != 0.0 && stage.toward_capacity != 1.0).collect();
    for stage in &partial {
        let found = format!("life_history.{}.toward_capacity = {}", stage.name, stage.toward_capacity);
        let mistake = Mistake::new(table.place().clone(), found, "0 or 1 under density_dependence form \"ceiling\"");
        table.document().mistake(mistake);
    }
    partial.is_empty().then_some(())
}

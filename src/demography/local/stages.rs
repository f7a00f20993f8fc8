//! Stages: individuals survive, advance and breed by the stage they are in.
//!
//! The mean of a step is the projection matrix times the counts, exactly: survival is a multinomial over fates, and young
//! enter the first stage.

mod matrix_form;
mod table_form;

use std::sync::Arc;

use super::{LocalModel, Pressure, add};
use crate::demography::density::Density;
use crate::demography::{LifeHistory, ProjectionMatrix, Rate, Stage};
use crate::mistake::Mistake;
use crate::random::{PlaceKey, Purpose, binomial, poisson};
use crate::study::{Said, Table};

/// How many young a breeding individual has.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Young {
    /// a Poisson number with fecundity as its mean
    Poisson,
    /// one with fecundity as its probability, else none
    AtMostOne,
}

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
        let mut over = false;
        for (stage, fates) in self.fates.iter().enumerate() {
            let count = counts[stage];
            if count == 0 || fates.shares.is_empty() {
                continue;
            }
            let chance = survival[stage] * pressure.survival;
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
        let born = self.born(counts, fecundity, pressure.fecundity, place);
        over |= born == u32::MAX;
        over |= add(&mut next[0], born);
        counts.copy_from_slice(next);
        over
    }

    fn young_in_words(&self) -> String {
        match self.young {
            Young::Poisson => "the number of young is Poisson".to_owned(),
            Young::AtMostOne => "each individual has one young or none".to_owned(),
        }
    }
}

impl Stages {
    /// The young of all stages; the largest count stands for all that would pass it.
    fn born(&self, counts: &[u32], fecundity: &[f64], pressure: f64, place: PlaceKey) -> u32 {
        match self.young {
            // A sum of independent Poisson numbers is Poisson: one draw for all stages.
            Young::Poisson => {
                let mean: f64 = counts.iter().zip(fecundity).map(|(count, rate)| f64::from(*count) * rate).sum();
                poisson(&mut place.draw(Purpose::Young(0)), mean * pressure)
            }
            Young::AtMostOne => counts
                .iter()
                .zip(fecundity)
                .enumerate()
                .filter(|(_, (count, rate))| **count > 0 && **rate > 0.0)
                .map(|(stage, (count, rate))| {
                    binomial(&mut place.draw(Purpose::Young(stage as u32)), *count, rate * pressure)
                })
                .fold(0, u32::saturating_add),
        }
    }
}

/// Reads the life cycle, as rows or as a whole matrix, and what stands beside it.
pub(super) fn read(table: &Table<'_>) -> Option<LifeHistory> {
    let individuals = table.choice("individuals", &[("females", "females"), ("individuals", "individuals")]);
    let young = if table.has("young") {
        table.choice("young", &[("poisson", Young::Poisson), ("at most one", Young::AtMostOne)]).map(|said| said.value)
    } else {
        Some(Young::Poisson)
    };
    let cycle = match (table.has("stage"), table.has("matrix")) {
        (_, true) => matrix_form::read(table, young.unwrap_or(Young::Poisson)),
        (true, false) => table_form::read(table, young.unwrap_or(Young::Poisson)),
        (false, false) => {
            table.missing("stage", "stages, each under [[life_history.stage]], or a whole matrix = [[..], ..]");
            None
        }
    };
    let matrix = cycle.as_ref().map(projection_matrix);
    let density = Density::read(table, matrix.as_ref(), false);
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
        model: Arc::new(Stages { fates, young: young? }),
        emigration_said: cycle.emigration_said,
        occupancy: None,
    })
}

fn projection_matrix(cycle: &Cycle) -> ProjectionMatrix {
    let mut matrix = ProjectionMatrix::zero(cycle.stages.len());
    for (from, shares) in cycle.fate_shares.iter().enumerate() {
        for (to, share) in shares.iter().enumerate() {
            matrix.fates[(to, from)] = cycle.survival[from].mean * share;
        }
        matrix.young[(0, from)] = cycle.fecundity[from].mean;
    }
    matrix
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

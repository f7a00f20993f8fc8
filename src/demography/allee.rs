//! The Allee effect: where few are there to breed, each has fewer young.
//!
//! Fecundity (growth, in a model of counts) is multiplied by N/(N + A), N being the individuals of the stages that breed in
//! the patch at the census from which the year begins, A the number at which half of the fecundity is left (Dennis 1989,
//! Natural Resource Modeling 3).

use std::sync::Arc;

use super::LifeHistory;
use super::density::multiplier_at_balance;
use super::local::{LocalModel, Pressure};
use crate::random::PlaceKey;
use crate::study::{POSITIVE, Table};

/// The Allee effect as the study states it.
#[derive(Debug, Clone, PartialEq)]
pub struct AlleeEffect {
    /// breeders of a patch at which half of the fecundity is left
    pub half_at: f64,
    /// the stages whose individuals are counted, by position: those (females, of both sexes) with mean fecundity above 0
    pub breeders: Vec<usize>,
}

impl AlleeEffect {
    /// Reads `allee_effect = { half_at = .. }` of the life history, where it stands there; its mistakes are noted.
    /// `breeders` are the stages with fecundity, as far as the life cycle could be read.
    pub(super) fn read(life_history: &Table<'_>, breeders: Option<Vec<usize>>) -> Option<Self> {
        let table = life_history.table("allee_effect")?;
        let half_at = table.number("half_at", POSITIVE);
        if !table.has("half_at") {
            table
                .missing("half_at", "a number above 0: the breeders of a patch at which half of the fecundity is left");
        }
        if half_at.is_some() && breeders.as_ref().is_some_and(Vec::is_empty) {
            table.mistake(table.path(), "a stage with fecundity above 0, on which it could act");
        }
        table.finish();
        Some(Self { half_at: half_at?.value, breeders: breeders? })
    }

    /// The share of fecundity left where so many breeders are.
    pub fn share_left(&self, breeders: f64) -> f64 {
        if breeders > 0.0 { breeders / (breeders + self.half_at) } else { 0.0 }
    }

    fn count(&self, counts: &[u32]) -> f64 {
        self.breeders.iter().map(|stage| f64::from(counts[*stage])).sum()
    }
}

/// The local model with the effect, where there is one; else the model itself.
pub(super) fn under(effect: Option<&AlleeEffect>, model: Arc<dyn LocalModel>) -> Arc<dyn LocalModel> {
    match effect {
        None => model,
        Some(effect) => Arc::new(UnderAllee { effect: effect.clone(), model }),
    }
}

/// A local model whose breeders are held back where they are few.
#[derive(Debug)]
struct UnderAllee {
    effect: AlleeEffect,
    model: Arc<dyn LocalModel>,
}

impl LocalModel for UnderAllee {
    fn step(
        &self,
        counts: &mut [u32],
        rates: &[f64],
        pressure: Pressure,
        place: PlaceKey,
        scratch: &mut [u32],
    ) -> bool {
        let share = self.effect.share_left(self.effect.count(counts));
        let pressure = Pressure { fecundity: pressure.fecundity * share, ..pressure };
        self.model.step(counts, rates, pressure, place, scratch)
    }

    fn young_in_words(&self) -> String {
        self.model.young_in_words()
    }
}

/// Where the numbers of one closed patch stay as they are, in average years and without the chances of individuals; in
/// individuals that count toward capacity, at the proportions of an unchanging population.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Balance {
    /// numbers fall, however many there are
    Never,
    /// below `threshold` numbers fall, above it they rise toward `settles`
    Between {
        /// the unstable balance
        threshold: f64,
        /// the upper balance; `None` where nothing holds numbers back
        settles: Option<f64>,
    },
}

/// Steps of the search from nothing to capacity.
const STEPS: u32 = 4_000;

/// The balance of a patch of this capacity under the study's Allee effect. `None` where there is no such effect or where it
/// cannot be said: density dependence acts on survival, or the population would hold without any young.
pub fn balance(life_history: &LifeHistory, capacity: f64) -> Option<Balance> {
    let effect = life_history.allee_effect.as_ref()?;
    let density = &life_history.density;
    if density.curve.is_some() && density.on_survival {
        return None;
    }
    let part = life_history.matrix.leading_part();
    if part.growth() <= 1.0 {
        return Some(Balance::Never);
    }
    if part.scaled(1.0, 0.0).dominant().0 >= 1.0 {
        return None;
    }
    let needed = multiplier_at_balance(&part, false, true);
    let shares = life_history.matrix.acted_on(1.0, needed).stable_distribution();
    let weight = |stage: usize| life_history.stages[stage].toward_capacity;
    let counted: f64 = shares.iter().enumerate().map(|(stage, share)| share * weight(stage)).sum();
    let breeding: f64 = effect.breeders.iter().map(|stage| shares[*stage]).sum();
    if counted <= 0.0 {
        return None;
    }
    let per_counted = breeding / counted;
    let alone = effect.half_at * needed / (1.0 - needed) / per_counted;
    let Some(curve) = &density.curve else {
        let settles = density.ceiling.then(|| capacity.floor());
        let below = settles.is_none_or(|settles| alone < settles);
        return Some(if below { Balance::Between { threshold: alone, settles } } else { Balance::Never });
    };
    let surplus =
        |numbers: f64| curve.multiplier(numbers / capacity) * effect.share_left(per_counted * numbers) - needed;
    // Growth is below 1 at nothing and at capacity: it crosses 1 twice in between, or nowhere.
    let at = |step: u32| capacity * f64::from(step) / f64::from(STEPS);
    let rises: Vec<u32> = (1..STEPS).filter(|step| surplus(at(*step)) > 0.0).collect();
    let (Some(first), Some(last)) = (rises.first(), rises.last()) else { return Some(Balance::Never) };
    let threshold = crossing(&surplus, at(first - 1), at(*first));
    let settles = crossing(&|numbers| -surplus(numbers), at(*last), at(last + 1));
    Some(Balance::Between { threshold, settles: Some(settles) })
}

/// Where a function that is below 0 at `low` and above at `high` crosses, by bisection.
fn crossing(function: &dyn Fn(f64) -> f64, mut low: f64, mut high: f64) -> f64 {
    for _ in 0..100 {
        let middle = f64::midpoint(low, high);
        if function(middle) > 0.0 {
            high = middle;
        } else {
            low = middle;
        }
    }
    f64::midpoint(low, high)
}

//! The life history of the species, whatever its kind.

use std::sync::Arc;

use super::allee::AlleeEffect;
use super::census::Census;
use super::density::Density;
use super::local::{self, LocalModel, Occupancy};
use super::matrix::ProjectionMatrix;
use super::oddities;
use super::rate::Rate;
use crate::study::{Said, Table};

/// A stage of the life history.
#[derive(Debug, Clone)]
pub struct Stage {
    /// its name
    pub name: String,
    /// probability that an individual of this stage leaves its patch in a year
    pub emigration: f64,
    /// what an individual counts toward capacity, 0 to 1
    pub toward_capacity: f64,
}

/// A life history: what individuals there are, their rates, and the local model that steps them through a year.
#[derive(Debug, Clone)]
pub struct LifeHistory {
    /// the kind, as the study names it
    pub kind: &'static str,
    /// what is counted, such as `females`
    pub individuals: String,
    /// the stages, at least one
    pub stages: Vec<Stage>,
    /// every rate that may vary, in the order in which the local model takes them
    pub rates: Vec<Rate>,
    /// the projection matrix of mean rates
    pub matrix: ProjectionMatrix,
    /// how numbers are held near capacity
    pub density: Density,
    /// what holds breeders back where they are few, if anything does
    pub allee_effect: Option<AlleeEffect>,
    /// when in the year individuals are counted, if the study says
    pub census: Option<Census>,
    /// the step of a year
    pub model: Arc<dyn LocalModel>,
    /// the first emigration above 0 that the study states, to point at where it has no `[dispersal]`
    pub emigration_said: Option<Said<f64>>,
    /// in a model of patches full or empty, what a patch's turnover follows; its rates are e and y
    pub occupancy: Option<Occupancy>,
}

impl LifeHistory {
    /// Reads `[life_history]`. Mistakes are noted in the document; `None` if there was one.
    pub fn read(table: Table<'_>) -> Option<Self> {
        let choices: Vec<(&str, local::ReadKind)> = local::KINDS.to_vec();
        let Some(kind) = table.choice("kind", &choices) else {
            if !table.has("kind") {
                let names: Vec<String> = local::KINDS.iter().map(|(name, _)| format!("\"{name}\"")).collect();
                table.missing("kind", names.join(" or "));
            }
            return None;
        };
        let life_history = (kind.value)(&table);
        if let Some(life_history) = &life_history {
            oddities::warn(&table, life_history);
        }
        table.finish();
        life_history
    }

    /// The exponent x with which extinction falls with area, as the metapopulation capacity takes it: 1 where patches are not
    /// full or empty.
    pub fn extinction_exponent(&self) -> f64 {
        self.occupancy.map_or(1.0, |occupancy| occupancy.extinction_exponent)
    }

    /// Whether any rate varies from year to year.
    pub fn varies(&self) -> bool {
        self.rates.iter().any(|rate| rate.sd > 0.0)
    }

    /// Generation time in years, where stages give it: see [`ProjectionMatrix::generation_time`].
    pub fn generation_time(&self) -> Option<f64> {
        if self.stages.len() > 1 { self.matrix.generation_time() } else { None }
    }

    /// The names of the stages.
    pub fn stage_names(&self) -> Vec<String> {
        self.stages.iter().map(|stage| stage.name.clone()).collect()
    }
}

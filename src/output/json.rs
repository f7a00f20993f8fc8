//! `outcome.json`: what was asked, of which inputs, and the answer. The forms here are what is promised to readers of the
//! file; the types that the program works with may change without them.

use std::io;

use serde::Serialize;

use super::occupancy::json as occupancy;
use super::words::{CAUTIONS, answer};
use super::{Account, files::RUN_FILES};
use crate::mistake::Mistake;
use crate::network;
use crate::outcome::{
    CUSTOMARY_PERSISTENCE, CUSTOMARY_YEARS, Counted, Customary, Estimate, Outcome, ROLE_MARGIN, Standing, Summary,
};
use crate::study::Effort;

/// The word by which an outcome is known.
pub const SCHEMA: &str = "eyot-outcome";

/// The version of the form of `outcome.json`; it rises when a reader of the old form would be misled.
pub const SCHEMA_VERSION: u32 = 1;

/// Writes `outcome.json`, which is also what `--json` prints.
///
/// # Errors
/// If `to` cannot be written.
pub fn write(outcome: &Outcome, account: &Account, mut to: impl io::Write) -> io::Result<()> {
    serde_json::to_writer_pretty(&mut to, &document(outcome, account))?;
    writeln!(to)
}

#[derive(Serialize)]
struct Document<'a> {
    schema: &'static str,
    schema_version: u32,
    eyot_version: &'static str,
    command: &'a str,
    title: &'a str,
    seed: u64,
    horizon: u32,
    quasi_extinction: Option<Threshold<'a>>,
    replicates: Replicates,
    inputs: Vec<Input<'a>>,
    answer: AnswerOf,
    network: Network,
    files: &'static [&'static str],
    warnings: Vec<Warning<'a>>,
    cautions: [&'static str; CAUTIONS.len()],
}

#[derive(Serialize)]
struct Threshold<'a> {
    below: u32,
    stages: Vec<&'a str>,
    #[serde(skip_serializing_if = "Option::is_none")]
    in_each_patch: Option<u32>,
}

#[derive(Serialize)]
struct Replicates {
    #[serde(skip_serializing_if = "Option::is_none")]
    asked: Option<u32>,
    #[serde(skip_serializing_if = "Option::is_none")]
    precision: Option<f64>,
    done: u64,
    complete: bool,
}

#[derive(Serialize)]
struct Input<'a> {
    path: &'a str,
    sha256: &'a str,
}

/// The answer in the terms of what is counted.
#[derive(Serialize)]
#[serde(untagged)]
enum AnswerOf {
    Individuals(Answer),
    OccupiedPatches(occupancy::Answer),
}

#[derive(Serialize)]
struct Answer {
    sentence: String,
    persistence: Interval,
    quasi_extinction: Option<Interval>,
    expected_minimum_abundance: Interval,
    realised_growth: Option<f64>,
    median_time_to_extinction: Option<f64>,
    lost_emigrants_share: Option<f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    removed_per_year: Option<Interval>,
    saturated_replicates: u64,
    customary_target: Option<Target>,
    source_sink_margin: f64,
}

/// An estimate with its 95 % interval; an end that is not known is null.
#[derive(Serialize)]
pub(super) struct Interval {
    value: f64,
    low: f64,
    high: f64,
    replicates: u64,
}

#[derive(Serialize)]
pub(super) struct Target {
    persistence_asked: f64,
    years: u32,
    source: &'static str,
    persistence: Interval,
    standing: &'static str,
}

/// The network as is.
#[derive(Serialize)]
struct Network {
    patches: usize,
    links: usize,
    area_ha: f64,
    #[serde(skip_serializing_if = "Option::is_none")]
    capacity: Option<f64>,
    start: u64,
    structure: Option<Structure>,
}

/// What holds the network together. Capacity: Hanski & Ovaskainen 2000; connectivity: Saura & Pascual-Hortal 2007.
#[derive(Serialize)]
struct Structure {
    components: usize,
    patches_whose_loss_splits: Vec<String>,
    links_whose_loss_splits: Vec<[String; 2]>,
    metapopulation_capacity: f64,
    probability_of_connectivity: f64,
    equivalent_connected_area_ha: f64,
}

#[derive(Serialize)]
struct Warning<'a> {
    place: String,
    found: &'a str,
    note: &'a str,
    advice: Option<&'a str>,
}

fn document<'a>(outcome: &'a Outcome, account: &'a Account) -> Document<'a> {
    let (asked, precision) = match account.effort {
        Effort::Replicates(asked) => (Some(asked), None),
        Effort::Precision(precision) => (None, Some(precision)),
    };
    Document {
        schema: SCHEMA,
        schema_version: SCHEMA_VERSION,
        eyot_version: env!("CARGO_PKG_VERSION"),
        command: &account.command,
        title: &account.title,
        seed: account.seed,
        horizon: outcome.horizon,
        quasi_extinction: outcome.quasi_extinction.as_ref().map(|threshold| Threshold {
            below: threshold.below,
            stages: threshold.stages.iter().map(|stage| stage.value.as_str()).collect(),
            in_each_patch: threshold.in_each_patch,
        }),
        replicates: Replicates { asked, precision, done: outcome.replicates_done(), complete: account.complete },
        inputs: account.inputs.iter().map(|input| Input { path: &input.path, sha256: &input.sha256 }).collect(),
        answer: AnswerOf::new(outcome, answer(outcome, account)),
        network: Network::new(outcome),
        files: &RUN_FILES,
        warnings: account.warnings.iter().map(Warning::from).collect(),
        cautions: CAUTIONS,
    }
}

impl AnswerOf {
    fn new(outcome: &Outcome, sentence: String) -> Self {
        match outcome.counted {
            Counted::Individuals => Self::Individuals(Answer::new(&outcome.summary, sentence)),
            Counted::OccupiedPatches => Self::OccupiedPatches(occupancy::Answer::new(&outcome.summary, sentence)),
        }
    }
}

impl Answer {
    fn new(summary: &Summary, sentence: String) -> Self {
        Self {
            sentence,
            persistence: summary.persistence.into(),
            quasi_extinction: summary.quasi_extinction.map(Interval::from),
            expected_minimum_abundance: summary.expected_minimum_abundance.into(),
            realised_growth: summary.realised_growth,
            median_time_to_extinction: summary.median_time_to_extinction,
            lost_emigrants_share: summary.lost_emigrants_share,
            removed_per_year: summary.removed_per_year.map(Interval::from),
            saturated_replicates: summary.saturated_replicates,
            customary_target: summary.customary.map(Target::from),
            source_sink_margin: ROLE_MARGIN,
        }
    }
}

impl Network {
    fn new(outcome: &Outcome) -> Self {
        Self {
            patches: outcome.by_patch.len(),
            links: outcome.by_link.len(),
            area_ha: outcome.by_patch.iter().map(|row| row.area_ha).sum(),
            capacity: match outcome.counted {
                Counted::Individuals => Some(outcome.by_patch.iter().map(|row| row.capacity).sum()),
                Counted::OccupiedPatches => None,
            },
            start: outcome.by_patch.iter().map(|row| row.start).sum(),
            structure: outcome.structure.as_ref().map(|structure| {
                let name = |position: usize| outcome.by_patch[position].patch.clone();
                Structure::new(structure, name)
            }),
        }
    }
}

impl Structure {
    fn new(structure: &network::Structure, name: impl Fn(usize) -> String) -> Self {
        let connectivity = &structure.connectivity;
        Self {
            components: structure.graph.n_components,
            patches_whose_loss_splits: structure.graph.cut_patches.iter().map(|patch| name(*patch)).collect(),
            links_whose_loss_splits: structure.graph.cut_links.iter().map(|(a, b)| [name(*a), name(*b)]).collect(),
            metapopulation_capacity: structure.capacity.value,
            probability_of_connectivity: connectivity.probability,
            equivalent_connected_area_ha: connectivity.equivalent_area_ha,
        }
    }
}

impl From<Estimate> for Interval {
    fn from(estimate: Estimate) -> Self {
        Self { value: estimate.value, low: estimate.low, high: estimate.high, replicates: estimate.n }
    }
}

impl From<Customary> for Target {
    fn from(customary: Customary) -> Self {
        Self {
            persistence_asked: CUSTOMARY_PERSISTENCE,
            years: CUSTOMARY_YEARS,
            source: "customary, without a source",
            persistence: customary.persistence.into(),
            standing: match customary.standing {
                Standing::Above => "above",
                Standing::Below => "below",
                Standing::NotToldApart => "not told apart",
            },
        }
    }
}

impl<'a> From<&'a Mistake> for Warning<'a> {
    fn from(warning: &'a Mistake) -> Self {
        Self {
            place: warning.place.to_string(),
            found: &warning.found,
            note: &warning.expected,
            advice: warning.advice.as_deref(),
        }
    }
}

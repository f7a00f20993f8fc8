//! The top of the study file: what belongs to no room.

use super::table::{Numbers, POSITIVE, Said, Table};
use crate::mistake::{Mistake, nearest_word};

/// The largest horizon, in years, and the largest number of replicates.
const MOST: u64 = 10_000_000;

/// How many replicates are run.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Effort {
    /// this many
    Replicates(u32),
    /// as many as bring the half-width of the 95 % interval on persistence at the horizon to at most this
    Precision(f64),
}

/// The threshold of quasi-extinction.
#[derive(Debug, Clone, PartialEq)]
pub struct QuasiExtinction {
    /// the network is quasi-extinct where a census counts fewer than this
    pub below: u32,
    /// the stages that are counted, by name; empty means all
    pub stages: Vec<Said<String>>,
    /// a patch is quasi-extinct where a census counts fewer than this in it, all stages together
    pub in_each_patch: Option<u32>,
}

/// The settings at the top of a study.
#[derive(Debug, Clone)]
pub struct Settings {
    /// the study's title
    pub title: String,
    /// the seed of all randomness
    pub seed: u64,
    /// years to simulate, at least 1
    pub horizon: u32,
    /// how many replicates
    pub effort: Effort,
    /// the threshold of quasi-extinction, if one is asked for
    pub quasi_extinction: Option<QuasiExtinction>,
    /// generation time in years where no stages give it
    pub generation_years: Option<f64>,
}

impl Settings {
    /// Reads the keys that stand at the top of the file. Mistakes are noted in the document; `None` if a value without
    /// which nothing can go on is missing or wrong.
    pub fn read(root: &Table<'_>) -> Option<Self> {
        let title = root.text("title");
        if !root.has("title") {
            root.missing("title", "a text that names the study");
        }
        let seed = root.whole("seed", 0, i64::MAX as u64);
        if !root.has("seed") {
            root.missing("seed", "a whole number, 0 or above, so that the study can be run again to the same result");
        }
        let horizon = root.whole("horizon", 1, 100_000);
        if !root.has("horizon") {
            root.missing("horizon", "the years to look ahead, such as 100");
        }
        let effort = read_effort(root);
        let quasi_extinction = read_quasi_extinction(root);
        let generation_years = root.number("generation_years", POSITIVE).map(|said| said.value);
        Some(Self {
            title: title?.value,
            seed: seed?.value,
            horizon: u32::try_from(horizon?.value).ok()?,
            effort: effort?,
            quasi_extinction,
            generation_years,
        })
    }
}

fn read_effort(root: &Table<'_>) -> Option<Effort> {
    let replicates = root.whole("replicates", 1, MOST);
    let half_width = Numbers { low: 0.0005, high: 0.5, above_low: false, below_high: true };
    let precision = root.number("precision", half_width);
    match (root.has("replicates"), root.has("precision")) {
        (true, true) => {
            const EITHER: &str = "either replicates or precision, not both";
            let clash = replicates.map(|said| said.mistake(EITHER)).or(precision.map(|said| said.mistake(EITHER)));
            if let Some(mistake) = clash {
                root.document().mistake(mistake.advise("take one of the two out"));
            }
            None
        }
        (false, false) => {
            root.missing("replicates", "replicates = 1000, or precision = 0.01 to let the tool choose their number");
            None
        }
        (true, false) => u32::try_from(replicates?.value).ok().map(Effort::Replicates),
        (false, true) => Some(Effort::Precision(precision?.value)),
    }
}

fn read_quasi_extinction(root: &Table<'_>) -> Option<QuasiExtinction> {
    const KEY: &str = "quasi_extinction";
    let most = u64::from(u32::MAX);
    match root.item(KEY)? {
        super::table::Item::Table(table) => {
            let below = table.whole("below", 1, most);
            if !table.has("below") {
                table.missing("below", "the threshold, in individuals of the whole network");
            }
            let stages = table.texts("stages");
            if stages.as_ref().is_some_and(Vec::is_empty) {
                table.mistake(
                    format!("{} = []", table.address("stages")),
                    "at least one stage; leave the key out to count all",
                );
            }
            let in_each_patch = table.whole("in_each_patch", 1, most);
            let is_right = table.has("in_each_patch") == in_each_patch.is_some();
            table.finish();
            let threshold = QuasiExtinction {
                below: u32::try_from(below?.value).ok()?,
                stages: stages.unwrap_or_default(),
                in_each_patch: in_each_patch.and_then(|said| u32::try_from(said.value).ok()),
            };
            is_right.then_some(threshold)
        }
        super::table::Item::Number(_) => {
            let below = root.whole(KEY, 1, most)?;
            let below = u32::try_from(below.value).ok()?;
            Some(QuasiExtinction { below, stages: Vec::new(), in_each_patch: None })
        }
        other => {
            other.refuse(
                root.document(),
                "a whole number of individuals in the whole network, or { below = 20, stages = [...] }",
            );
            None
        }
    }
}

impl Settings {
    /// Checks that the stages named under `quasi_extinction` are among `stages`, and says which positions they have;
    /// empty means that all are counted.
    ///
    /// # Errors
    /// A mistake for each name that is not among `stages` or stands there twice.
    pub fn counted_stages(&self, stages: &[&str]) -> Result<Vec<usize>, Vec<Mistake>> {
        let Some(threshold) = &self.quasi_extinction else { return Ok(Vec::new()) };
        let mut positions = Vec::new();
        let mut mistakes = Vec::new();
        for said in &threshold.stages {
            match stages.iter().position(|stage| *stage == said.value) {
                Some(position) if positions.contains(&position) => mistakes.push(said.mistake("each stage once")),
                Some(position) => positions.push(position),
                None => {
                    let mistake = said.mistake(format!("stages of the life history: {}", stages.join(", ")));
                    mistakes.push(match nearest_word(&said.value, stages.iter().copied()) {
                        Some(near) => mistake.advise(format!("write \"{near}\"")),
                        None => mistake,
                    });
                }
            }
        }
        if mistakes.is_empty() { Ok(positions) } else { Err(mistakes) }
    }
}

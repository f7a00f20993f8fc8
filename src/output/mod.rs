//! An outcome as files and text: CSV, GeoJSON and JSON in a folder that appears whole or not at all, and the summary for
//! the terminal.

mod columns;
pub mod csv;
mod files;
mod first_study;
mod folder;
pub mod geojson;
pub mod json;
mod life_words;
mod occupancy;
mod rules;
mod terminal;
#[cfg(test)]
mod tests;
mod threats;
mod understood;
mod words;

pub use files::{ALL_FILES, RUN_FILES};
pub use first_study::{first_study, write_new};
pub use folder::{Draft, Existing, Folder};
pub use occupancy::OccupancyUnderstood;
pub use terminal::summary;
pub use understood::Understood;
pub use words::{CAUTIONS, answer};

use crate::landscape::Landscape;
use crate::mistake::{Failure, Mistake};
use crate::outcome::Outcome;
use crate::study::{Effort, Input};

/// What was asked, and of what: all that an outcome is told beside its numbers.
#[derive(Debug, Clone)]
pub struct Account {
    /// the command in its canonical form: without threads, portion or folder
    pub command: String,
    /// the study's title
    pub title: String,
    /// the seed of all randomness
    pub seed: u64,
    /// how many replicates were asked for
    pub effort: Effort,
    /// whether that many were done
    pub complete: bool,
    /// the files that went in
    pub inputs: Vec<Input>,
    /// what was odd about them
    pub warnings: Vec<Mistake>,
}

/// Writes the folder of a run: the files of [`RUN_FILES`], all of them or none.
///
/// # Errors
/// [`Failure::System`] if a file cannot be written, [`Failure::Input`] if something has come to stand in the way since the
/// folder was claimed.
pub fn write_run(folder: &Folder, outcome: &Outcome, landscape: &Landscape, account: &Account) -> Result<(), Failure> {
    folder.fill(|draft| {
        draft.file(files::OUTCOME, |to| json::write(outcome, account, to))?;
        draft.file(files::BY_YEAR, |to| csv::by_year(outcome, to))?;
        draft.file(files::BY_PATCH, |to| csv::by_patch(outcome, to))?;
        draft.file(files::BY_PATCH_MAP, |to| geojson::by_patch(outcome, landscape, to))?;
        draft.file(files::BY_LINK, |to| csv::by_link(outcome, to))?;
        draft.file(files::BY_LINK_MAP, |to| geojson::by_link(outcome, landscape, to))?;
        draft.file(files::BY_REPLICATE, |to| csv::by_replicate(outcome, to))
    })
}

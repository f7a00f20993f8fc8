//! What a catastrophe strikes. A new kind is one file and one line in [`WORDS`], or in [`read`] where it has numbers.

mod each_patch;
mod landscape;
mod one_patch;
mod radius;

use std::fmt::Debug;
use std::sync::Arc;

use crate::study::{Item, Table};

/// Where an event begins, if one does.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Begins {
    /// in each patch, drawn for itself
    InEachPatch,
    /// once, everywhere
    Everywhere,
    /// once, at a patch drawn at random, each with the same chance
    AtOnePatch,
}

/// What a catastrophe strikes.
pub trait Strikes: Debug + Send + Sync {
    /// Where its events begin.
    fn begins(&self) -> Begins;

    /// Whether an event that begins at the patch `origin` strikes `patch`; both by position, with the centroids of all
    /// patches in kilometres.
    fn reaches(&self, origin: usize, patch: usize, centroids_km: &[[f64; 2]]) -> bool;

    /// In words that follow "strikes".
    fn in_words(&self) -> String;
}

type Make = fn() -> Arc<dyn Strikes>;

/// The kinds that are a word alone.
const WORDS: &[(&str, Make)] =
    &[("each patch", each_patch::make), ("one patch", one_patch::make), ("landscape", landscape::make)];

/// Reads the key `strikes` of a `[[catastrophe]]`. `None` if it is missing or wrong, which has then been noted.
pub(super) fn read(table: &Table<'_>) -> Option<Arc<dyn Strikes>> {
    const KEY: &str = "strikes";
    const EXPECTED: &str = "\"each patch\", \"one patch\", \"landscape\" or { radius_km = .. }";
    let Some(item) = table.item(KEY) else {
        if !table.has(KEY) {
            table.missing(KEY, EXPECTED);
        }
        return None;
    };
    match item {
        Item::Table(inner) => radius::read(inner),
        Item::Text(_) => table.choice_of(&item, WORDS).map(|make| (make.value)()),
        other => {
            other.refuse(table.document(), EXPECTED);
            None
        }
    }
}

//! What an occupancy study must say, and the links by which its patches are colonised.

use super::occupancy::Turnovers;
use crate::demography::local::Occupancy;
use crate::landscape::{Landscape, Neighbours};
use crate::mistake::Mistake;
use crate::network::{DispersalTable, Movement, Network, Sources};
use crate::num;
use crate::study::{Document, Item, Settings, Table};

/// Whether the study says that its patches are full or empty, known before anything else is read: other tables are then
/// asked for other keys.
pub(super) fn is_asked_for(root: &Table<'_>) -> bool {
    let Some(Item::Table(life_history)) = root.item("life_history") else { return false };
    matches!(life_history.item("kind"), Some(Item::Text(said)) if said.value == "occupancy")
}

/// Notes what is missing, and what has no meaning where nobody is counted.
pub(super) fn check(document: &Document, settings: Option<&Settings>, has_dispersal: bool) {
    let root = document.root();
    if !has_dispersal && !root.has("dispersal") {
        root.missing("dispersal", "a table [dispersal], whose kernel says how far colonists come");
    }
    let threshold = settings.and_then(|settings| settings.quasi_extinction.as_ref());
    if threshold.is_some_and(|threshold| threshold.in_each_patch.is_some()) {
        let expected = "no such key in an occupancy study, where a patch is full or empty";
        let place = document.root().place().clone();
        document.mistake(Mistake::new(place, "quasi_extinction.in_each_patch", expected));
    }
    for stage in settings.iter().flat_map(|settings| &settings.quasi_extinction).flat_map(|threshold| &threshold.stages)
    {
        let mistake = stage.mistake("no stages in an occupancy study, whose threshold counts occupied patches");
        document.mistake(mistake.advise("write the threshold alone: quasi_extinction = 5"));
    }
}

/// The links of a study, and what is compiled from them where patches are full or empty.
pub(super) struct Linked {
    pub(super) network: Network,
    pub(super) turnovers: Option<Turnovers>,
    pub(super) n_left_out: u64,
}

impl Linked {
    /// Links along which individuals move.
    pub(super) fn for_movement(network: Network) -> Self {
        Self { network, turnovers: None, n_left_out: 0 }
    }
}

/// Links each patch with those by which it may be colonised. `None` leaves a mistake.
pub(super) fn link(
    document: &Document,
    landscape: &Landscape,
    dispersal: &DispersalTable,
    occupancy: Occupancy,
) -> Option<Linked> {
    check_areas(document, landscape, dispersal, occupancy)?;
    match Sources::build(landscape, dispersal, &Neighbours::new(landscape)) {
        Ok(sources) => {
            warn_of_the_isolated(document, landscape, dispersal, &sources.network);
            let turnovers = Some(Turnovers::compile(occupancy, landscape, &sources));
            Some(Linked { network: sources.network, turnovers, n_left_out: sources.n_left_out })
        }
        Err(mistakes) => {
            mistakes.into_vec().into_iter().for_each(|mistake| document.mistake(mistake));
            None
        }
    }
}

/// Areas that leave all numbers behind when raised to the exponents of the study are a mistake.
fn check_areas(
    document: &Document,
    landscape: &Landscape,
    dispersal: &DispersalTable,
    occupancy: Occupancy,
) -> Option<()> {
    let exponent = occupancy.extinction_exponent + dispersal.area_exponent;
    let beyond = |area_ha: f64| !num::pow(area_ha, exponent).is_finite();
    let patch = landscape.patches.iter().find(|patch| beyond(patch.area_ha));
    if let Some(patch) = patch {
        let found = format!("{} ha to the power {exponent}, x and area_exponent together", patch.area_ha);
        document.mistake(Mistake::new(patch.place.clone(), found, "a size that can be held"));
        return None;
    }
    Some(())
}

fn warn_of_the_isolated(document: &Document, landscape: &Landscape, dispersal: &DispersalTable, network: &Network) {
    let mut reached = vec![false; landscape.patches.len()];
    network.links.iter().for_each(|link| reached[link.to as usize] = true);
    let alone: Vec<&str> = landscape
        .patches
        .iter()
        .zip(&reached)
        .filter(|(_, reached)| !**reached)
        .map(|(patch, _)| patch.name.as_str())
        .collect();
    let Some(first) = alone.first() else { return };
    let others = if alone.len() > 1 { format!(" and {} more", alone.len() - 1) } else { String::new() };
    let by = match &dispersal.movement {
        Movement::Measured(_) => ", by the measured table",
        Movement::Kernel(kernel) if kernel.max_km.is_some() => ", within max_km",
        Movement::Kernel(_) => "",
    };
    let found = format!("no patch from which {first}{others} could be colonised{by}");
    let note = "where such a patch dies out it stays empty";
    document.warning(Mistake::new(dispersal.place.clone(), found, note));
}

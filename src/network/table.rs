//! The table `[dispersal]` of a study.

use super::crowding::CrowdingResponse;
use super::kernel::Kernel;
use super::measured::Measured;
use crate::mistake::{Mistake, Place};
use crate::study::{Item, NOT_NEGATIVE, Numbers, POSITIVE, Table};

/// Share of those who land that the weakest links may lose, unless the study says otherwise.
const TAIL: f64 = 1e-4;

/// Where emigrants settle.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Settlement {
    /// every emigrant heads for one of the patches: they share it between them
    Shared,
    /// emigrants land where the kernel takes them, and are lost outside the patches
    Open,
}

/// How a kernel becomes a dispersal matrix.
#[derive(Debug, Clone)]
pub struct KernelDispersal {
    /// the kernel
    pub kernel: Kernel,
    /// where emigrants settle; of no meaning in an occupancy study
    pub settlement: Settlement,
    /// rate of dying per km of the way
    pub path_mortality_per_km: f64,
    /// distance in km beyond which nobody goes
    pub max_km: Option<f64>,
    /// share of those who land that the weakest links of a patch may be cut by, from 0 to below 1
    pub tail: f64,
}

/// What moves emigrants between patches.
#[derive(Debug, Clone)]
pub enum Movement {
    /// a kernel over the distances of the landscape
    Kernel(KernelDispersal),
    /// a measured table of probabilities
    Measured(Measured),
}

/// The table `[dispersal]` of a study, read and checked.
#[derive(Debug, Clone)]
pub struct DispersalTable {
    /// a kernel or a measured table
    pub movement: Movement,
    /// exponent b of the area in a target's weight A^b
    pub area_exponent: f64,
    /// what crowding does to leaving and settling
    pub crowding: CrowdingResponse,
    /// where the table stands in the study
    pub place: Place,
}

impl DispersalTable {
    /// Reads the table. Mistakes are noted in the document; `None` if a value without which nothing can go on is missing
    /// or wrong.
    pub fn read(table: Table<'_>) -> Option<Self> {
        Self::read_as(table, Use::Movement)
    }

    /// Reads the table of an occupancy study, in which the kernel says how near patches are and nobody is moved: settlement
    /// is not asked for, and the keys that play no part are warned of. `None` as in [`DispersalTable::read`].
    pub fn read_for_occupancy(table: Table<'_>) -> Option<Self> {
        Self::read_as(table, Use::Occupancy)
    }

    fn read_as(table: Table<'_>, used: Use) -> Option<Self> {
        let place = table.place().clone();
        let area_exponent = or(&table, "area_exponent", NOT_NEGATIVE, 1.0);
        let crowding = CrowdingResponse::read(&table);
        if !table.has("kernel") {
            table.missing(
                "kernel",
                "{ shape = \"exponential\", mean_km = 1.4 } or the like, or { table = \"file.csv\" }",
            );
        }
        let movement = match table.table("kernel") {
            Some(keys) if keys.has("table") => read_measured(&table, keys),
            Some(keys) => read_kernel(&table, Some(keys), used),
            None => read_kernel(&table, None, used),
        };
        match used {
            Use::Movement => warn_of_an_idle_exponent(&table, movement.as_ref()),
            Use::Occupancy => {
                warn_of_idle_keys(&table, movement.as_ref());
                refuse_crowding(&table);
            }
        }
        table.finish();
        Some(Self { movement: movement?, area_exponent: area_exponent?, crowding: crowding?, place })
    }
}

/// What the table is read for.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Use {
    /// individuals that move
    Movement,
    /// patches that are colonised
    Occupancy,
}

/// Where nobody is counted nothing is crowded.
fn refuse_crowding(table: &Table<'_>) {
    for key in ["rises_with_crowding", "avoids_full"] {
        if let Some(item) = table.item(key) {
            item.refuse(table.document(), "no such key in an occupancy study, which counts nobody");
        }
    }
}

/// Without the kernel's own keys the others are still read, so that all that is missing is named at once.
fn read_kernel(table: &Table<'_>, keys: Option<Table<'_>>, used: Use) -> Option<Movement> {
    let kernel = keys.as_ref().and_then(Kernel::read);
    // A shape that is not known has keys that are not known either.
    if let (Some(keys), true) = (keys, kernel.is_some()) {
        keys.finish();
    }
    let settles = used == Use::Movement || table.has("settlement");
    if settles && !table.has("settlement") {
        table.missing(
            "settlement",
            "\"shared\" (every emigrant heads for a patch) or \"open\" (those who land outside the patches are lost)",
        );
    }
    let choices = [("shared", Settlement::Shared), ("open", Settlement::Open)];
    let settlement = table.choice("settlement", &choices).map(|said| said.value);
    let settlement = if settles { settlement } else { Some(Settlement::Shared) };
    let path_mortality_per_km = or(table, "path_mortality_per_km", NOT_NEGATIVE, 0.0);
    let below_1 = Numbers { low: 0.0, high: 1.0, above_low: false, below_high: true };
    let tail = or(table, "tail", below_1, TAIL);
    let max_km = table.number("max_km", POSITIVE);
    if table.has("max_km") && max_km.is_none() {
        return None;
    }
    Some(Movement::Kernel(KernelDispersal {
        kernel: kernel?,
        settlement: settlement?,
        path_mortality_per_km: path_mortality_per_km?,
        max_km: max_km.map(|said| said.value),
        tail: tail?,
    }))
}

fn read_measured(table: &Table<'_>, keys: Table<'_>) -> Option<Movement> {
    let file = keys.text("table");
    keys.finish();
    let idle = ["settlement", "path_mortality_per_km", "max_km", "tail"];
    let refused: Vec<Item<'_>> = idle.into_iter().filter_map(|key| table.item(key)).collect();
    for item in &refused {
        let why = "no such key beside a measured table, whose probabilities already are those of arriving alive";
        item.refuse(table.document(), why);
    }
    let measured = Measured::read(table.document(), &file?);
    refused.is_empty().then_some(Movement::Measured(measured?))
}

/// The number of a key, or what stands for it where the key is missing; `None` only if it is wrong.
fn or(table: &Table<'_>, key: &str, numbers: Numbers, default: f64) -> Option<f64> {
    if table.has(key) { table.number(key, numbers).map(|said| said.value) } else { Some(default) }
}

/// In an occupancy study nobody dies on the way, settles or is cut off.
fn warn_of_idle_keys(table: &Table<'_>, movement: Option<&Movement>) {
    if !matches!(movement, Some(Movement::Kernel(_))) {
        return;
    }
    for key in ["settlement", "path_mortality_per_km", "tail"].into_iter().filter(|key| table.has(key)) {
        let warning = Mistake::new(
            table.place().clone(),
            table.address(key),
            "not used in an occupancy study, whose kernel says how near patches are: nobody is moved",
        );
        table.document().warning(warning.advise("take the key out"));
    }
}

fn warn_of_an_idle_exponent(table: &Table<'_>, movement: Option<&Movement>) {
    let reason = match movement {
        Some(Movement::Measured(_)) => "the measured table says by itself where emigrants arrive",
        Some(Movement::Kernel(KernelDispersal { settlement: Settlement::Open, .. })) => {
            "under \"open\" settlement a target catches by its area alone"
        }
        _ => return,
    };
    if let Some(said) = table.number("area_exponent", NOT_NEGATIVE) {
        let meaning = format!("{reason}; the exponent is read by the metapopulation capacity only");
        table.document().warning(said.mistake(meaning));
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::study::Document;
    use std::path::Path;

    fn read(keys: &str) -> (Option<DispersalTable>, Vec<String>, usize) {
        let document = Document::parse(Path::new("study.toml"), format!("[dispersal]\n{keys}"));
        let table = DispersalTable::read(document.root().table("dispersal").unwrap());
        match document.verdict() {
            Ok(warnings) => (table, Vec::new(), warnings.len()),
            Err(mistakes) => (table, mistakes.into_vec().into_iter().map(|mistake| mistake.found).collect(), 0),
        }
    }

    const KERNEL: &str = "kernel = { shape = 'exponential', mean_km = 1.4, origin = 'ringing' }\n";

    #[test]
    fn keys_left_out_take_their_defaults() {
        let (table, mistakes, warnings) = read(&format!("{KERNEL}settlement = 'shared'"));
        assert!(mistakes.is_empty() && warnings == 0);
        let table = table.unwrap();
        assert!((table.area_exponent - 1.0).abs() < f64::EPSILON);
        let Movement::Kernel(by) = table.movement else { panic!("a kernel") };
        assert_eq!((by.settlement, by.max_km), (Settlement::Shared, None));
        assert!((by.tail - 1e-4).abs() < f64::EPSILON && by.path_mortality_per_km.abs() < f64::EPSILON);
    }

    #[test]
    fn all_mistakes_are_found_at_once() {
        let (table, mistakes, _) = read(&format!("{KERNEL}settlement = 'opn'\ntail = 1.0\nmax_km = 0\nmean = 3"));
        assert!(table.is_none());
        let expected = [
            "dispersal.settlement = 'opn'",
            "dispersal.tail = 1.0",
            "dispersal.max_km = 0",
            "dispersal.mean is not a key",
        ];
        assert_eq!(mistakes, expected);
        let (_, mistakes, _) = read(KERNEL);
        assert_eq!(mistakes, ["dispersal.settlement is missing"]);
        let (_, mistakes, _) = read("settlement = 'open'");
        assert_eq!(mistakes, ["dispersal.kernel is missing"]);
        let (_, mistakes, _) = read("settlement = 'open'\nkernel = { shape = 'gaussian', mean_km = 1, c = 2 }");
        assert_eq!(mistakes, ["dispersal.kernel.c is not a key"]);
        let (table, mistakes, _) = read(&format!("{KERNEL}settlement = 'open'\narea_exponent = -1"));
        assert!(table.is_none());
        assert_eq!(mistakes, ["dispersal.area_exponent = -1"]);
    }

    #[test]
    fn crowding_is_read_and_its_mistakes_found() {
        let shared = format!("{KERNEL}settlement = 'shared'\n");
        let crowding = |keys: &str| read(&format!("{shared}{keys}")).0.unwrap().crowding;
        assert!(crowding("").is_idle() && crowding("avoids_full = false").is_idle());
        let said = crowding("rises_with_crowding = { exponent = 1.5, origin = 'marking' }\navoids_full = true");
        assert_eq!(said, CrowdingResponse { emigration_exponent: Some(1.5), avoids_full: true });
        for (keys, found) in [
            ("rises_with_crowding = true", "dispersal.rises_with_crowding = true"),
            ("rises_with_crowding = {}", "dispersal.rises_with_crowding.exponent is missing"),
            ("rises_with_crowding = { exponent = 0 }", "dispersal.rises_with_crowding.exponent = 0"),
            ("rises_with_crowding = { exponent = 1, power = 2 }", "dispersal.rises_with_crowding.power is not a key"),
            ("avoids_full = 'yes'", "dispersal.avoids_full = 'yes'"),
        ] {
            assert_eq!(read(&format!("{shared}{keys}")).1, [found]);
        }
    }

    #[test]
    fn an_exponent_that_plays_no_part_is_told() {
        assert_eq!(read(&format!("{KERNEL}settlement = 'open'\narea_exponent = 0.5")).2, 1);
        assert_eq!(read(&format!("{KERNEL}settlement = 'shared'\narea_exponent = 0.5")).2, 0);
    }
}

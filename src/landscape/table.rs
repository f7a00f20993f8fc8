//! The study's `[landscape]` table.

use super::patch::Crs;
use crate::mistake::Place;
use crate::study::{Item, NOT_NEGATIVE, Numbers, POSITIVE, Said, Table};

/// What the study says about its landscape. Nothing of the patch file has been read yet.
#[derive(Debug, Clone)]
pub struct LandscapeTable {
    /// path of the GeoJSON file of the patches
    pub patches: Said<String>,
    /// property that names a patch; without it the `id` member of the features does
    pub id: Option<Said<String>>,
    /// the coordinates of the file
    pub crs: Crs,
    /// whether distances run between centroids instead of nearest edges
    pub between_centroids: bool,
    /// property that holds the area in hectares
    pub area: Option<Said<String>>,
    /// where carrying capacities come from
    pub capacity: CapacityFrom,
    /// how carrying capacities change over the years
    pub capacity_changes: CapacityChanges,
    /// where the individuals at census 0 come from
    pub start: StartFrom,
    /// area of the whole landscape in hectares, if the study states one
    pub landscape_area_ha: Option<Said<f64>>,
}

/// Where carrying capacities (individuals) come from.
#[derive(Debug, Clone)]
pub enum CapacityFrom {
    /// area in hectares times this many, times the quality
    PerHectare {
        /// individuals per hectare of quality 1
        per_hectare: Said<f64>,
        /// property that holds the quality; 1 without it
        quality: Option<Said<String>>,
    },
    /// a property of the patches
    Property(Said<String>),
    /// a CSV table with the header `patch,capacity`, or `patch,year,capacity`
    Table(Said<String>),
    /// patches are full or empty: each holds one
    FullOrEmpty(Place),
}

/// What the study says about changes of all capacities alike.
#[derive(Debug, Clone, Default)]
pub struct CapacityChanges {
    /// the share by which they change a year
    pub trend_per_year: Option<Said<f64>>,
    /// their standard deviation over years as a share of the mean
    pub variation: Option<Said<f64>>,
}

/// Where the individuals at census 0 come from.
#[derive(Debug, Clone)]
pub enum StartFrom {
    /// this share of the capacity
    ShareOfCapacity(Said<f64>),
    /// a property of the patches: totals
    Property(Said<String>),
    /// a CSV table with the header `patch,count` or `patch,<stage>,...`
    Table(Said<String>),
    /// a property of the patches that says whether they are occupied
    OccupiedProperty(Said<String>),
    /// a CSV table with the header `patch,occupied`
    OccupiedTable(Said<String>),
}

impl LandscapeTable {
    /// Reads the table. `None`, with the mistakes noted, if a value without which nothing can go on is missing or wrong.
    pub fn read(table: Table<'_>) -> Option<Self> {
        let capacity = required(&table, "capacity", "{ per_hectare = 14.0 }", read_capacity);
        let start = required(&table, "start", "{ share_of_capacity = 0.6 }", read_start);
        Self::read_with(table, capacity, start)
    }

    /// Reads the table of a study whose patches are full or empty: without capacities, and a start that says which are
    /// occupied. `None` as in [`LandscapeTable::read`].
    pub fn read_full_or_empty(table: Table<'_>) -> Option<Self> {
        let capacity = no_capacity(&table).map(|none| (none, CapacityChanges::default()));
        let start = required(&table, "start", "{ property = \"occupied_2024\" }", read_occupied);
        Self::read_with(table, capacity, start)
    }

    fn read_with(
        table: Table<'_>,
        capacity: Option<(CapacityFrom, CapacityChanges)>,
        start: Option<StartFrom>,
    ) -> Option<Self> {
        let patches = table.text("patches");
        if !table.has("patches") {
            table.missing("patches", "the path of a GeoJSON file of patches");
        }
        let id = table.text("id");
        let crs = table.choice("crs", &[("metres", Crs::Metres)]);
        let distance = table.choice("distance", &[("edges", false), ("centroids", true)]);
        let area = read_area(&table);
        let landscape_area_ha = table.number("landscape_area_ha", POSITIVE);
        let optional_are_right = [
            table.has("id") == id.is_some(),
            table.has("crs") == crs.is_some(),
            table.has("distance") == distance.is_some(),
            table.has("area") == area.is_some(),
            table.has("landscape_area_ha") == landscape_area_ha.is_some(),
        ];
        table.finish();
        let (capacity, capacity_changes) = capacity.unzip();
        let read = Self {
            patches: patches?,
            id,
            crs: crs.map_or(Crs::Degrees, |said| said.value),
            between_centroids: distance.is_some_and(|said| said.value),
            area,
            capacity: capacity?,
            capacity_changes: capacity_changes?,
            start: start?,
            landscape_area_ha,
        };
        optional_are_right.iter().all(|right| *right).then_some(read)
    }
}

impl CapacityFrom {
    /// Where the study says so, and in which words.
    pub(super) fn said(&self) -> (&Place, &str) {
        match self {
            Self::PerHectare { per_hectare, .. } => (&per_hectare.place, &per_hectare.words),
            Self::Property(said) | Self::Table(said) => (&said.place, &said.words),
            Self::FullOrEmpty(place) => (place, "occupied patches"),
        }
    }
}

fn read_area(table: &Table<'_>) -> Option<Said<String>> {
    let area = inner_table(table, "area", "a table such as { property = \"hectares\" }")?;
    let property = area.text("property");
    if !area.has("property") {
        area.missing("property", "the property that holds the area in hectares");
    }
    area.finish();
    property
}

fn required<T>(table: &Table<'_>, key: &str, such_as: &str, read: impl Fn(Table<'_>) -> Option<T>) -> Option<T> {
    if !table.has(key) {
        table.missing(key, format!("a table such as {such_as}"));
    }
    read(inner_table(table, key, &format!("a table such as {such_as}"))?)
}

fn inner_table<'d>(table: &Table<'d>, key: &str, expected: &str) -> Option<Table<'d>> {
    match table.item(key)? {
        Item::Table(inner) => Some(inner),
        other => {
            other.refuse(table.document(), expected);
            None
        }
    }
}

fn read_capacity(table: Table<'_>) -> Option<(CapacityFrom, CapacityChanges)> {
    let per_hectare = table.number("per_hectare", POSITIVE);
    let quality = table.text("quality");
    let property = table.text("property");
    let path = table.text("table");
    let sound = exactly_one(&table, &["per_hectare", "property", "table"]);
    if table.has("quality") && !table.has("per_hectare") {
        table.mistake(format!("{} without per_hectare", table.address("quality")), "quality scales per_hectare alone");
    }
    let quality_is_right = table.has("quality") == quality.is_some();
    let changes = read_changes(&table);
    table.finish();
    if !sound || !quality_is_right {
        return None;
    }
    let per_hectare = per_hectare.map(|per_hectare| CapacityFrom::PerHectare { per_hectare, quality });
    let from = per_hectare.or(property.map(CapacityFrom::Property)).or(path.map(CapacityFrom::Table));
    from.zip(changes)
}

/// A yearly trend that at most doubles capacity, and does not take it all in one year.
const TRENDS: Numbers = Numbers { low: -1.0, high: 1.0, above_low: true, below_high: false };

fn read_changes(table: &Table<'_>) -> Option<CapacityChanges> {
    let trend_per_year = table.number("trend_per_year", TRENDS);
    let variation = table.number("variation", NOT_NEGATIVE);
    let are_right =
        table.has("trend_per_year") == trend_per_year.is_some() && table.has("variation") == variation.is_some();
    are_right.then_some(CapacityChanges { trend_per_year, variation })
}

fn read_start(table: Table<'_>) -> Option<StartFrom> {
    let share = table.number("share_of_capacity", NOT_NEGATIVE);
    let property = table.text("property");
    let path = table.text("table");
    let sound = exactly_one(&table, &["share_of_capacity", "property", "table"]);
    table.finish();
    if !sound {
        return None;
    }
    share.map(StartFrom::ShareOfCapacity).or(property.map(StartFrom::Property)).or(path.map(StartFrom::Table))
}

/// Patches that are full or empty have no capacity: a study that gives one means another kind of life history.
fn no_capacity(table: &Table<'_>) -> Option<CapacityFrom> {
    let Some(item) = table.item("capacity") else {
        return (!table.has("capacity")).then(|| CapacityFrom::FullOrEmpty(table.place().clone()));
    };
    item.refuse(
        table.document(),
        "no capacity, since in an occupancy study patches are full or empty; take it out, or choose another kind",
    );
    None
}

/// Reads a start of patches that are full or empty.
fn read_occupied(table: Table<'_>) -> Option<StartFrom> {
    let share = table.item("share_of_capacity");
    if let Some(share) = &share {
        let expected = "property or table, which say patch by patch what is occupied: there is no capacity to share";
        share.refuse(table.document(), expected);
    }
    let property = table.text("property");
    let path = table.text("table");
    let sound = share.is_none() && exactly_one(&table, &["property", "table"]);
    table.finish();
    if !sound {
        return None;
    }
    property.map(StartFrom::OccupiedProperty).or(path.map(StartFrom::OccupiedTable))
}

fn exactly_one(table: &Table<'_>, keys: &[&str]) -> bool {
    let there: Vec<&str> = keys.iter().copied().filter(|key| table.has(key)).collect();
    if there.len() == 1 {
        return true;
    }
    let found =
        if there.is_empty() { format!("{} is empty", table.path()) } else { table.address(&there.join(" and ")) };
    table.mistake(found, format!("exactly one of {}", keys.join(", ")));
    false
}

#[cfg(test)]
mod tests {
    use std::path::Path;

    use super::*;
    use crate::study::Document;

    fn read(text: &str) -> (Option<LandscapeTable>, String) {
        let document = Document::parse(Path::new("study.toml"), format!("[landscape]\n{text}"));
        let table = document.root().table("landscape").and_then(LandscapeTable::read);
        (table, document.verdict().err().map(|mistakes| mistakes.to_string()).unwrap_or_default())
    }

    #[test]
    fn the_whole_table_is_read() {
        let (table, mistakes) = read(
            "patches = \"p.geojson\"\nid = \"patch\"\ncrs = \"metres\"\ndistance = \"centroids\"\n\
             area = { property = \"ha\" }\ncapacity = { per_hectare = 14.0, quality = \"q\" }\n\
             start = { share_of_capacity = 0.6 }\nlandscape_area_ha = 1000",
        );
        assert_eq!(mistakes, "");
        let table = table.unwrap();
        assert_eq!((table.crs, table.between_centroids), (Crs::Metres, true));
        assert!(matches!(table.capacity, CapacityFrom::PerHectare { quality: Some(_), .. }));
    }

    #[test]
    fn all_mistakes_are_named_at_once() {
        let (table, mistakes) = read(
            "patchs = \"p.geojson\"\ncrs = \"feet\"\ncapacity = { per_hectare = 1, property = \"k\" }\nstart = 0.6\n\
             landscape_area_ha = -1",
        );
        assert!(table.is_none());
        for words in [
            "landscape.patches is missing",
            "write patches",
            "landscape.crs = \"feet\"",
            "exactly one of per_hectare, property, table",
            "a table such as { share_of_capacity = 0.6 }",
            "landscape.landscape_area_ha = -1",
        ] {
            assert!(mistakes.contains(words), "{words} in:\n{mistakes}");
        }
    }

    #[test]
    fn capacity_and_start_are_required() {
        let (table, mistakes) = read("patches = \"p.geojson\"");
        assert!(table.is_none());
        assert!(mistakes.contains("landscape.capacity is missing") && mistakes.contains("landscape.start is missing"));
    }

    #[test]
    fn a_wrong_optional_key_is_not_taken_for_a_missing_one() {
        let (table, _) =
            read("patches = \"p.geojson\"\nid = 3\ncapacity = { property = \"k\" }\nstart = { property = \"n\" }");
        assert!(table.is_none());
    }
}

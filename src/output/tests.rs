//! Every written form: its columns, its types, and a small example of it whole.

#![expect(clippy::float_cmp, reason = "numbers must read back to the bit")]

use std::fs;
use std::path::{Path, PathBuf};

use ::geojson::{FeatureCollection, GeoJson, GeometryValue};
use serde_json::Value;

use super::*;
use crate::engine::{PatchTally, RemovedTally};
use crate::mistake::Place;
use crate::outcome::example::{landscape, network, outcome, tallies, threshold};
use crate::outcome::{Estimate, Outcome, PatchRow};

/// The first columns of each table, which readers rely on; others may follow them.
const FIRST_COLUMNS: [(&str, &str); 4] = [
    (
        "by_year.csv",
        "year,persistence,persistence_low,persistence_high,quasi_extinction,quasi_extinction_low,\
         quasi_extinction_high,mean_abundance,sd_abundance,abundance_5,abundance_25,abundance_50,abundance_75,\
         abundance_95,mean_occupied_patches",
    ),
    (
        "by_patch.csv",
        "patch,area_ha,capacity,start,occupied_at_end,occupied_at_end_low,occupied_at_end_high,\
         share_of_years_occupied,mean_abundance,mean_abundance_at_end,local_extinctions_per_century,\
         recolonisations_per_century,immigrants_per_year,emigrants_per_year,net_export_per_year,role",
    ),
    ("by_link.csv", "from,to,distance_km,probability,movers_per_year"),
    (
        "by_replicate.csv",
        "replicate,extinct_in_year,quasi_extinct_in_year,lowest_abundance,abundance_at_end,occupied_at_end",
    ),
];

fn account() -> Account {
    let at = Place::Text { file: "marsh.toml".into(), line: 14, column: 5 };
    Account {
        command: "eyot run marsh.toml".to_owned(),
        title: "Marsh vole in the Quenmere fens".to_owned(),
        seed: 20261,
        effort: Effort::Replicates(4),
        complete: true,
        inputs: vec![Input { path: "marsh.toml".to_owned(), sha256: "0f".repeat(32) }],
        warnings: vec![Mistake::new(at, "mean = 1.4", "few patches lie in reach").advise("check its unit")],
    }
}

fn written(write: impl FnOnce(&mut Vec<u8>) -> std::io::Result<()>) -> String {
    let mut bytes = Vec::new();
    write(&mut bytes).unwrap();
    String::from_utf8(bytes).unwrap()
}

/// Writes a run into a folder of its own and gives back where it is; the folder goes when the first value is dropped.
fn written_run() -> (tempfile::TempDir, PathBuf) {
    let parent = tempfile::tempdir().unwrap();
    let path = parent.path().join("outcome");
    let folder = Folder::claim(&path, Existing::Keep).unwrap();
    write_run(&folder, &outcome(Some(&threshold())), &landscape(), &account()).unwrap();
    (parent, path)
}

fn names(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> =
        fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
    names.sort();
    names
}

#[test]
fn a_run_writes_its_files_and_nothing_else() {
    let (parent, path) = written_run();
    let mut expected = RUN_FILES.map(str::to_owned);
    expected.sort();
    assert_eq!(names(&path), expected);
    assert_eq!(names(parent.path()), ["outcome"], "nothing stays beside it");
}

#[test]
fn the_files_are_these_to_the_byte() {
    let (_parent, path) = written_run();
    let golden = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/golden/outcome");
    for name in RUN_FILES {
        let expected = fs::read_to_string(golden.join(name)).unwrap();
        assert_eq!(fs::read_to_string(path.join(name)).unwrap(), expected, "{name}");
    }
}

#[test]
fn columns_stand_in_the_promised_order() {
    let (_parent, path) = written_run();
    for (name, columns) in FIRST_COLUMNS {
        let text = fs::read_to_string(path.join(name)).unwrap();
        let header: Vec<&str> = text.lines().next().unwrap().split(',').collect();
        let promised: Vec<&str> = columns.split(',').collect();
        assert_eq!(header[..promised.len()], promised, "{name}");
    }
}

#[test]
fn numbers_read_back_as_they_were_and_what_did_not_happen_is_empty() {
    let outcome = outcome(None);
    let text = written(|to| csv::by_year(&outcome, to));
    let mut table = ::csv::Reader::from_reader(text.as_bytes());
    let rows: Vec<::csv::StringRecord> = table.records().map(Result::unwrap).collect();
    for (cells, row) in rows.iter().zip(&outcome.by_year) {
        assert_eq!(cells[2].parse::<f64>().unwrap(), row.persistence.low);
        assert_eq!(cells[8].parse::<f64>().unwrap(), row.sd_abundance.unwrap());
        assert_eq!([&cells[4], &cells[5], &cells[6]], ["", "", ""]);
    }
}

#[test]
fn a_single_replicate_leaves_the_bounds_of_means_empty() {
    let mut one = tallies();
    one.records.truncate(1);
    one.patches.fill(PatchTally::default());
    let starts = crate::outcome::example::STARTS;
    let outcome = Outcome::from_tallies(&one, &landscape(), &network(), &starts, None, None).unwrap();
    let text = written(|to| csv::by_year(&outcome, to));
    assert!(!text.contains("inf") && !text.contains("NaN"), "{text}");
    let json: Value = serde_json::from_str(&written(|to| json::write(&outcome, &account(), to))).unwrap();
    assert_eq!(json["answer"]["expected_minimum_abundance"]["low"], Value::Null);
}

fn features(text: &str) -> FeatureCollection {
    match text.parse::<GeoJson>().unwrap() {
        GeoJson::FeatureCollection(collection) => collection,
        other => panic!("a collection, not {other}"),
    }
}

#[test]
fn the_map_of_patches_opens_with_types_and_crs() {
    let (_parent, path) = written_run();
    let map = features(&fs::read_to_string(path.join("by_patch.geojson")).unwrap());
    assert_eq!(map.foreign_members.unwrap()["crs"], landscape().crs_member.unwrap());
    assert_eq!(map.features.len(), 3);
    let properties = map.features[1].properties.as_ref().unwrap();
    assert_eq!(properties["patch"], "Long \"Reed\", east");
    assert_eq!(properties["role"], "sink");
    let header = fs::read_to_string(path.join("by_patch.csv")).unwrap();
    let columns: Vec<&str> = header.lines().next().unwrap().split(',').collect();
    assert_eq!(properties.keys().collect::<Vec<_>>(), columns, "the same columns as the table");
    for (name, value) in properties.iter().filter(|(name, _)| !["patch", "role"].contains(&name.as_str())) {
        let is_flag = name == "splits_network";
        assert!(if is_flag { value.is_boolean() } else { value.is_number() }, "{name} is {value}");
    }
    let GeometryValue::Polygon { coordinates } = &map.features[0].geometry.as_ref().unwrap().value else {
        panic!("a polygon")
    };
    assert_eq!(coordinates[0][1].as_slice(), [5.25, 52.0], "the outer ring runs anticlockwise");
}

#[test]
fn the_map_of_links_joins_centroids() {
    let (_parent, path) = written_run();
    let map = features(&fs::read_to_string(path.join("by_link.geojson")).unwrap());
    let expected = GeometryValue::new_line_string([[5.125, 52.125], [5.625, 52.125]]);
    assert_eq!(map.features[0].geometry.as_ref().unwrap().value, expected);
    assert_eq!(map.features[2].properties.as_ref().unwrap()["movers_per_year"], 0.0625);
}

#[test]
fn a_map_without_links_is_a_map() {
    let mut none = outcome(None);
    none.by_link.clear();
    let text = written(|to| geojson::by_link(&none, &landscape(), to));
    assert_eq!(features(&text).features.len(), 0);
}

#[test]
fn the_summary_is_this_and_fits_the_terminal() {
    let text = summary(&outcome(Some(&threshold())), &account());
    assert_eq!(text, include_str!("../../tests/golden/outcome/summary.txt"));
}

#[test]
fn many_patches_with_long_names_and_large_numbers_fit_the_terminal() {
    let mut outcome = outcome(Some(&threshold()));
    let row = outcome.by_patch[0].clone();
    outcome.by_patch =
        (0..40).map(|number| PatchRow { patch: format!("{number:02} {}", "fen ".repeat(20)), ..row.clone() }).collect();
    for row in &mut outcome.by_year {
        row.mean_abundance.value = 987_654.0;
        row.abundance = [987_654.0; 5];
        row.persistence = Estimate::proportion(99_999, 100_000);
        row.quasi_extinction = Some(row.persistence);
    }
    outcome.by_patch[17].occupied_at_end = Estimate::proportion(4, 4);
    outcome.by_patch[3].occupied_at_end = Estimate::proportion(0, 4);
    let text = summary(&outcome, &account());
    assert!(text.lines().all(|line| line.chars().count() <= 100), "{text}");
    let ranked: Vec<&str> = text.lines().filter(|line| line.contains(" fen ")).map(|line| &line[2..4]).collect();
    assert_eq!(ranked, ["17", "00", "01", "02", "04", "36", "37", "38", "39", "03"]);
}

#[test]
fn an_unfinished_run_says_so_first() {
    let outcome = outcome(None);
    let asked = |effort| answer(&outcome, &Account { effort, complete: false, ..account() });
    let until = "0.50 (0.15 to 0.85): the chance that the network persists for 4 years, from";
    assert_eq!(asked(Effort::Replicates(1000)), format!("{until} the 4 of 1,000 replicates that were done"));
    assert_eq!(
        asked(Effort::Precision(0.01)),
        format!("{until} 4 replicates, stopped before the precision of 0.01 was reached")
    );
    let json: Value = serde_json::from_str(&written(|to| {
        json::write(&outcome, &Account { effort: Effort::Replicates(1000), complete: false, ..account() }, to)
    }))
    .unwrap();
    assert_eq!(json["replicates"], serde_json::json!({"asked": 1000, "done": 4, "complete": false}));
}

/// By hand: 9, 4, 3 and 0 in four replicates of four years are 1 a year, 12 of the first patch 0.75 a year.
#[test]
fn what_is_removed_is_told_where_a_study_removes() {
    let mut tallies = tallies();
    tallies.removed = Some(RemovedTally { sum: 16, squares: 81 + 16 + 9 });
    tallies.patches[0].removed = 12;
    tallies.patches[2].removed = 4;
    let outcome = Outcome::from_tallies(&tallies, &landscape(), &network(), &[12, 6, 2], None, None).unwrap();
    let table = written(|to| csv::by_patch(&outcome, to));
    let ends: Vec<&str> = table.lines().map(|line| line.rsplit(',').next().unwrap()).collect();
    assert_eq!(ends, ["removed_per_year", "0.75", "0", "0.25"]);
    let map = written(|to| geojson::by_patch(&outcome, &landscape(), to));
    assert!(map.contains("\"removed_per_year\":0.75"), "{map}");
    let document: Value = serde_json::from_str(&written(|to| json::write(&outcome, &account(), to))).unwrap();
    assert_eq!(document["answer"]["removed_per_year"]["value"], 1.0);
    assert!(summary(&outcome, &account()).contains("removed "), "{}", summary(&outcome, &account()));
}

//! A study that is no more than its `[landscape]` table, and what is made of it.

#![allow(dead_code, reason = "each of the test crates uses its own part")]

use std::path::Path;

use eyot::landscape::{Landscape, LandscapeTable};
use eyot::study::Document;

/// What came of reading.
pub(crate) struct Reading {
    pub(crate) landscape: Option<Landscape>,
    /// all mistakes, as the user sees them
    pub(crate) mistakes: String,
    pub(crate) n_mistakes: usize,
    /// all warnings, each as the user sees it
    pub(crate) warnings: Vec<String>,
}

impl Reading {
    /// The landscape of a study that must be right.
    pub(crate) fn sound(self) -> Landscape {
        self.landscape.unwrap_or_else(|| panic!("{}", self.mistakes))
    }
}

/// Reads a `[landscape]` table and its files, which are written beside it.
pub(crate) fn read(table: &str, files: &[(&str, &[u8])], stages: &[&str]) -> Reading {
    let folder = tempfile::tempdir().expect("a folder for the study");
    for (name, bytes) in files {
        std::fs::write(folder.path().join(name), bytes).expect("the study can be written");
    }
    read_in(folder.path(), table, stages)
}

fn read_in(folder: &Path, table: &str, stages: &[&str]) -> Reading {
    let document = Document::parse(&folder.join("study.toml"), format!("[landscape]\n{table}"));
    let stages: Vec<String> = stages.iter().map(|stage| (*stage).to_owned()).collect();
    let landscape = document
        .root()
        .table("landscape")
        .and_then(LandscapeTable::read)
        .and_then(|table| Landscape::read(&table, &document, &stages));
    let (mistakes, n_mistakes, warnings) = match document.verdict() {
        Ok(warnings) => (String::new(), 0, warnings.iter().map(|w| eyot::mistake::Warning(w).to_string()).collect()),
        Err(mistakes) => (mistakes.to_string(), mistakes.as_slice().len(), Vec::new()),
    };
    assert_eq!(
        landscape.is_some(),
        n_mistakes == 0,
        "no landscape without a mistake, no mistake with one:\n{mistakes}"
    );
    Reading { landscape, mistakes, n_mistakes, warnings }
}

/// A collection of features that are named p1, p2, ... and have the property `ha` = 1.
pub(crate) fn collection(geometries: &[&str]) -> String {
    let features: Vec<String> = geometries
        .iter()
        .enumerate()
        .map(|(position, geometry)| {
            let name = position + 1;
            format!(r#"{{"type":"Feature","properties":{{"patch":"p{name}","ha":1}},"geometry":{geometry}}}"#)
        })
        .collect();
    format!(r#"{{"type":"FeatureCollection","features":[{}]}}"#, features.join(",\n"))
}

/// A polygon from its rings, each written `x y, x y, ...`.
pub(crate) fn polygon(rings: &[&str]) -> String {
    format!(r#"{{"type":"Polygon","coordinates":[{}]}}"#, ring_list(rings))
}

/// The rings of a polygon as JSON.
pub(crate) fn ring_list(rings: &[&str]) -> String {
    let rings: Vec<String> = rings
        .iter()
        .map(|ring| {
            let positions: Vec<String> = ring
                .split(',')
                .map(|position| format!("[{}]", position.split_whitespace().collect::<Vec<_>>().join(",")))
                .collect();
            format!("[{}]", positions.join(","))
        })
        .collect();
    rings.join(",")
}

/// A box as a ring, counter-clockwise and closed.
pub(crate) fn box_ring(west: f64, south: f64, east: f64, north: f64) -> String {
    format!("{west} {south}, {east} {south}, {east} {north}, {west} {north}, {west} {south}")
}

/// A box as a polygon.
pub(crate) fn box_polygon(west: f64, south: f64, east: f64, north: f64) -> String {
    polygon(&[&box_ring(west, south, east, north)])
}

/// A point.
pub(crate) fn point(x: f64, y: f64) -> String {
    format!(r#"{{"type":"Point","coordinates":[{x},{y}]}}"#)
}

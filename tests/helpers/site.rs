//! A folder of its own with a study in it, and the program called there.

#![allow(dead_code, reason = "each of the test crates uses its own part")]

use std::fmt::Write;
use std::fs;
use std::path::{Path, PathBuf};

use assert_cmd::Command;
use serde_json::Value;
use tempfile::TempDir;

/// The study that tests change by replacing words. It gives no warning.
pub(crate) const STUDY: &str = r#"title = "Reed mouse in a chain of fens"
seed = 7
horizon = 20
replicates = 40
quasi_extinction = 4

[landscape]
patches = "fens.geojson"
id = "patch"
capacity = { property = "capacity" }
start = { property = "count" }

[life_history]
kind = "stages"
individuals = "females"
density_dependence = { form = "beverton-holt", acts_on = ["fecundity"] }

[[life_history.stage]]
name = "young"
survival = { mean = 0.35, sd = 0.1 }
fecundity = 0.6
emigration = 0.2

[[life_history.stage]]
name = "adult"
survival = { mean = 0.5, sd = 0.1 }
fecundity = { mean = 1.4, sd = 0.5 }

[environment]
correlation = { reach_km = 12.0 }

[dispersal]
kernel = { shape = "exponential", mean_km = 1.4 }
settlement = "shared"
path_mortality_per_km = 0.2
"#;

/// One square patch: its name, and the corner where it begins, in degrees.
pub(crate) fn square(name: &str, longitude: f64, latitude: f64, capacity: f64, count: u32) -> String {
    let (east, north) = (longitude + 0.003, latitude + 0.002);
    format!(
        "{{\"type\":\"Feature\",\"properties\":{{\"patch\":\"{name}\",\"capacity\":{capacity},\"count\":{count}}},\
         \"geometry\":{{\"type\":\"Polygon\",\"coordinates\":[[[{longitude:.6},{latitude:.6}],[{east:.6},{latitude:.6}],\
         [{east:.6},{north:.6}],[{longitude:.6},{north:.6}],[{longitude:.6},{latitude:.6}]]]}}}}"
    )
}

/// A GeoJSON file of these features, one a line.
pub(crate) fn collection(features: &[String]) -> String {
    format!("{{\"type\":\"FeatureCollection\",\"features\":[\n{}\n]}}\n", features.join(",\n"))
}

/// Six fens, about 600 m from one to the next.
pub(crate) fn fens() -> Vec<String> {
    let names = ["Alder Fen", "Birch Fen", "Cress Fen", "Dock Fen", "Elder Fen", "Flag Fen"];
    let fen = |(position, name): (usize, &&str)| {
        square(name, -31.1 + 0.011 * position as f64, 47.17, 12.0 + 2.0 * position as f64, 6 + position as u32)
    };
    names.iter().enumerate().map(fen).collect()
}

/// `count` squares in rows of a hundred, about 1.8 km from one to the next.
pub(crate) fn grid(count: usize) -> String {
    let place = |index: usize| (-31.0 + 0.024 * (index % 100) as f64, 47.0 + 0.0165 * (index / 100) as f64);
    let patch = |index: usize| {
        let (longitude, latitude) = place(index);
        square(&format!("p{index}"), longitude, latitude, 10.0, 5)
    };
    collection(&(0..count).map(patch).collect::<Vec<_>>())
}

/// A study in a temporary folder.
pub(crate) struct Site {
    folder: TempDir,
}

impl Site {
    /// The six fens, and [`STUDY`] with each first text replaced by the second.
    pub(crate) fn new(changes: &[(&str, &str)]) -> Self {
        Self::with_patches(&collection(&fens()), changes)
    }

    /// The same around other patches.
    pub(crate) fn with_patches(patches: &str, changes: &[(&str, &str)]) -> Self {
        let site = Self { folder: tempfile::tempdir().unwrap() };
        let study = changes.iter().fold(STUDY.to_owned(), |study, (old, new)| {
            assert!(study.contains(old), "the study has no {old}");
            study.replace(old, new)
        });
        site.write("study.toml", &study);
        site.write("fens.geojson", patches);
        site
    }

    pub(crate) fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    pub(crate) fn write(&self, name: &str, text: &str) {
        fs::write(self.path(name), text).unwrap();
    }

    pub(crate) fn read(&self, name: &str) -> String {
        fs::read_to_string(self.path(name)).unwrap()
    }

    pub(crate) fn json(&self, name: &str) -> Value {
        serde_json::from_str(&self.read(name)).unwrap()
    }

    /// The names in the folder, hidden ones too, sorted.
    pub(crate) fn names(&self) -> Vec<String> {
        names(self.folder.path())
    }

    /// The program, called from the folder with these words.
    pub(crate) fn eyot(&self, words: &[&str]) -> Command {
        let mut command = Command::cargo_bin("eyot").unwrap();
        command.current_dir(self.folder.path()).args(words);
        command
    }

    /// Calls the program, which must end with `code`; what it printed to standard output and to standard error.
    pub(crate) fn call(&self, words: &[&str], code: i32) -> (String, String) {
        let assert = self.eyot(words).assert();
        let output = assert.get_output();
        let text = |bytes: &[u8]| String::from_utf8(bytes.to_vec()).unwrap();
        let (out, told) = (text(&output.stdout), text(&output.stderr));
        assert_eq!(output.status.code(), Some(code), "{words:?}\n{out}\n{told}");
        assert!(!told.contains("panicked"), "{told}");
        (out, told)
    }

    /// Every file of a folder, in the order of names: its name, a line break, its text.
    pub(crate) fn bytes(&self, folder: &str) -> String {
        let mut bytes = String::new();
        for name in names(&self.path(folder)) {
            write!(bytes, "{name}\n{}", self.read(&format!("{folder}/{name}"))).unwrap();
        }
        bytes
    }

    /// A column of a CSV file, as text.
    pub(crate) fn column(&self, file: &str, name: &str) -> Vec<String> {
        let mut reader = csv::Reader::from_path(self.path(file)).unwrap();
        let position = reader.headers().unwrap().iter().position(|header| header == name);
        let position = position.unwrap_or_else(|| panic!("{file} has no column {name}"));
        reader.records().map(|record| record.unwrap()[position].to_owned()).collect()
    }

    /// A column of numbers.
    pub(crate) fn numbers(&self, file: &str, name: &str) -> Vec<f64> {
        self.column(file, name).iter().map(|cell| cell.parse().unwrap()).collect()
    }
}

fn names(folder: &Path) -> Vec<String> {
    let name = |entry: std::io::Result<fs::DirEntry>| entry.unwrap().file_name().into_string().unwrap();
    let mut names: Vec<String> = fs::read_dir(folder).unwrap().map(name).collect();
    names.sort();
    names
}

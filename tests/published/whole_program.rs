//! Published matrices through the whole program: a study around each, read by `eyot check --json`.

use std::fs;
use std::process::Command;

use serde_json::Value;

/// What `check --json` says of the species with this life history.
fn species(life_history: &str) -> Value {
    let folder = tempfile::tempdir().expect("a temporary folder can be made");
    let write = |name: &str, text: &str| {
        fs::write(folder.path().join(name), text).expect("a temporary file can be written");
    };
    write(
        "patches.geojson",
        r#"{"type":"FeatureCollection","features":[{"type":"Feature","properties":{"patch":"p","area":1,"k":1000},"geometry":{"type":"Point","coordinates":[-31.2,47.1]}}]}"#,
    );
    write(
        "study.toml",
        &format!(
            "title = \"published\"\nseed = 1\nhorizon = 10\nreplicates = 10\n[landscape]\npatches = \"patches.geojson\"\n\
             id = \"patch\"\narea = {{ property = \"area\" }}\ncapacity = {{ property = \"k\" }}\n\
             start = {{ share_of_capacity = 0.1 }}\n[life_history]\nkind = \"stages\"\n\
             density_dependence = {{ form = \"none\" }}\n{life_history}\n"
        ),
    );
    let checked = Command::new(env!("CARGO_BIN_EXE_eyot"))
        .args(["check", "--json"])
        .arg(folder.path().join("study.toml"))
        .output()
        .expect("the program can be run");
    assert!(checked.status.success(), "{}", String::from_utf8_lossy(&checked.stderr));
    let understood: Value = serde_json::from_slice(&checked.stdout).expect("one JSON document");
    understood["species"].clone()
}

fn near(value: &Value, expected: f64, relative: f64) {
    let value = value.as_f64().expect("a number");
    assert!((value - expected).abs() <= relative * expected.abs(), "{value} is not {expected}");
}

fn stages_are_near(species: &Value, key: &str, expected: &[f64], relative: f64) {
    let stages = species["stages"].as_array().expect("a list of stages");
    assert_eq!(stages.len(), expected.len());
    for (stage, expected) in stages.iter().zip(expected) {
        near(&stage[key], *expected, relative);
    }
}

/// Brault & Caswell 1993, Ecology 74: the matrix was seen; growth 1.0254 printed, from memory; the rest recomputed.
/// Generation time: mean age of mothers at the stable distribution, Bienvenu & Legendre 2015.
#[test]
fn killer_whale() {
    let species = species(
        "matrix = [[0, 0.0043, 0.1132, 0], [0.9775, 0.9111, 0, 0], [0, 0.0736, 0.9534, 0], [0, 0, 0.0452, 0.9804]]",
    );
    near(&species["growth_in_an_average_year"], 1.025_441_33, 1e-8);
    near(&species["generation_years"], 23.692_05, 1e-6);
    near(&species["elasticity_fecundity"], 0.042_208, 2e-5);
    stages_are_near(&species, "stable_share", &[0.036_972, 0.316_071, 0.322_910, 0.324_047], 2e-5);
    stages_are_near(&species, "reproductive_value", &[1.0, 1.049_045, 1.571_320, 0.0], 1e-6);
}

/// Crouse, Crowder & Caswell 1987, Ecology 68: growth 0.9450 seen; the rest recomputed.
#[test]
fn loggerhead_turtle() {
    let species = species(
        "matrix = [[0, 0, 0, 0, 127, 4, 80], [0.6747, 0.7370, 0, 0, 0, 0, 0], [0, 0.0486, 0.6610, 0, 0, 0, 0], \
         [0, 0, 0.0147, 0.6907, 0, 0, 0], [0, 0, 0, 0.0518, 0, 0, 0], [0, 0, 0, 0, 0.8091, 0, 0], \
         [0, 0, 0, 0, 0, 0.8091, 0.8089]]",
    );
    near(&species["growth_in_an_average_year"], 0.945_030_98, 1e-8);
    near(&species["generation_years"], 19.607_06, 1e-6);
    near(&species["elasticity_fecundity"], 0.051_002, 2e-5);
    stages_are_near(&species, "reproductive_value", &[1.0, 1.4007, 5.9955, 115.845, 568.78, 507.37, 587.67], 5e-5);
}

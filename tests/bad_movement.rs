//! What studies get wrong about crowding, removal and the detail of weather: each is refused in words that say where.

use std::fs;

use eyot::engine::{Overrides, prepare};
use eyot::mistake::Failure;

const STUDY: &str = r#"
title = "bad movement"
seed = 1
horizon = 20
replicates = 1
[landscape]
patches = "patches.geojson"
id = "patch"
crs = "metres"
area = { property = "area" }
capacity = { per_hectare = 10 }
start = { share_of_capacity = 0.5 }
[life_history]
kind = "stages"
density_dependence = { form = "ceiling" }
[[life_history.stage]]
name = "young"
survival = { mean = 0.4, sd = 0.1 }
emigration = 0.2
[[life_history.stage]]
name = "adult"
survival = 0.6
fecundity = 0.8
"#;
const DISPERSAL: &str = "[dispersal]\nkernel = { shape = \"exponential\", mean_km = 1 }\nsettlement = \"shared\"\n";
const WEATHER: &str = "[environment]\ncorrelation = \"full\"\n";

/// The mistakes of a study with these tables, and its warnings, each as the user sees them.
fn read(tables: &[&str], years: &str) -> (Vec<String>, Vec<String>) {
    let folder = tempfile::tempdir().expect("a temporary folder can be made");
    let write = |name: &str, text: &str| {
        fs::write(folder.path().join(name), text).expect("a temporary file can be written");
    };
    let point = |name: &str, x: u32| {
        format!(
            r#"{{"type":"Feature","properties":{{"patch":"{name}","area":2}},"geometry":{{"type":"Point","coordinates":[{x},0]}}}}"#
        )
    };
    let features = [point("Long Mere", 0), point("Ash Carr", 900)].join(",");
    write("patches.geojson", &format!(r#"{{"type":"FeatureCollection","features":[{features}]}}"#));
    write("years.csv", years);
    write("study.toml", &(STUDY.to_owned() + &tables.concat()));
    match prepare(&folder.path().join("study.toml"), Overrides::default()) {
        Ok(checked) => (Vec::new(), checked.warnings.iter().map(ToString::to_string).collect()),
        Err(Failure::Input(mistakes)) => (mistakes.as_slice().iter().map(ToString::to_string).collect(), Vec::new()),
        Err(other) => panic!("mistakes, not: {other}"),
    }
}

/// One mistake that holds all these words.
fn assert_refused(tables: &[&str], years: &str, words: &[&str]) {
    let (mistakes, _) = read(tables, years);
    assert_eq!(mistakes.len(), 1, "{tables:?}: {mistakes:?}");
    for word in words {
        assert!(mistakes[0].contains(word), "no `{word}` in: {}", mistakes[0]);
    }
}

/// No mistake, and a warning that holds all these words.
fn assert_warned(tables: &[&str], years: &str, words: &[&str]) {
    let (mistakes, warnings) = read(tables, years);
    assert!(mistakes.is_empty(), "{tables:?}: {mistakes:?}");
    let holds = |warning: &String| words.iter().all(|word| warning.contains(word));
    assert!(warnings.iter().any(holds), "no {words:?} in: {warnings:?}");
}

#[test]
fn crowding() {
    for (keys, words) in [
        ("rises_with_crowding = 1", ["rises_with_crowding = 1", "exponent"]),
        ("rises_with_crowding = { exponent = -1 }", ["exponent = -1", "above 0"]),
        ("rises_with_crowding = { exponent = \"linear\" }", ["exponent = \"linear\"", "a number above 0"]),
        ("rises_with_crowding = {}", ["exponent is missing", "N/K"]),
        ("rises_with_crowding = { exponnt = 1, exponent = 1 }", ["exponnt is not a key", "exponent"]),
        ("avoids_full = 1", ["avoids_full = 1", "true or false"]),
    ] {
        assert_refused(&[WEATHER, DISPERSAL, keys], "", &words);
    }
    assert_eq!(
        read(&[WEATHER, DISPERSAL, "rises_with_crowding = { exponent = 1 }\navoids_full = true"], ""),
        Default::default()
    );
}

#[test]
fn removals() {
    const TRAPPING: &str = "[[removal]]\nname = \"trapping\"\n";
    for (keys, words) in [
        ("", ["removal.trapping.number is missing", "share = 0.1"]),
        ("number = 3\nshare = 0.1", ["removal.trapping.share = 0.1", "not both"]),
        ("number = 2.5", ["number = 2.5", "a whole number"]),
        ("number = -1", ["number = -1", "a whole number"]),
        ("share = 1.5", ["share = 1.5", "from 0 to 1"]),
        ("share = \"half\"", ["share = \"half\"", "from 0 to 1"]),
        ("share = 0.1\nfloor = -2", ["floor = -2", "a whole number"]),
        ("number = 3\nyears = [4, 2]", ["years = [4, 2]", "greater than the one before"]),
        ("number = 3\nyears = [4, 4]", ["years = [4, 4]", "greater than the one before"]),
        ("number = 3\nyears = []", ["years = []", "whole numbers"]),
        ("number = 3\nyears = [1.5]", ["years = [1.5]", "whole numbers"]),
        ("number = 3\nyears = 4", ["years = 4", "a list"]),
        ("number = 3\nyears = [4]\nfrom_year = 2", ["from_year = 2", "not both"]),
        ("number = 3\nfrom_year = 9\nto_year = 4", ["to_year = 4", "from_year (9) or later"]),
        ("number = 3\npatches = []", ["patches = []", "leave the key out"]),
        ("number = 3\npatches = \"Ash Carr\"", ["patches = \"Ash Carr\"", "a list of texts"]),
        ("number = 3\npatches = [\"Ash Car\"]", ["\"Ash Car\"", "write \"Ash Carr\""]),
        ("number = 3\npatches = [\"Ash Carr\", \"Ash Carr\"]", ["\"Ash Carr\"", "each patch once"]),
        ("number = 3\nstage = \"adlt\"", ["stage = \"adlt\"", "write \"adult\""]),
        ("number = 3\nstage = 2", ["stage = 2", "a text"]),
        ("number = 3\nflor = 4", ["removal.trapping.flor is not a key", "floor"]),
    ] {
        assert_refused(&[WEATHER, DISPERSAL, TRAPPING, keys], "", &words);
    }
    assert_refused(&[WEATHER, DISPERSAL, "[[removal]]\nnumber = 3"], "", &["name is missing"]);
    assert_refused(&[WEATHER, DISPERSAL, "[[removal]]\nname = \" \"\nnumber = 3"], "", &["name = \" \"", "not empty"]);
    let twice = [WEATHER, DISPERSAL, TRAPPING, "number = 3\n", TRAPPING, "share = 0.1\n"];
    assert_refused(&twice, "", &["name = \"trapping\"", "no other removal"]);
    assert_refused(&[WEATHER, DISPERSAL, "[removal]\nname = \"trapping\""], "", &["[[removal]]"]);
    let late = [WEATHER, DISPERSAL, TRAPPING, "number = 3\nyears = [19, 20]\n"];
    assert_warned(&late, "", &["trapping", "nothing is taken in year 20"]);
}

#[test]
fn weather_in_detail() {
    const SOUND: &str = "year,deviate\n2001,1\n2002,-1\n2003,1\n2004,-1\n";
    for (table, years, words) in [
        ("between_stages = -0.1", "", vec!["between_stages = -0.1", "from 0 to 1"]),
        ("between_stages = \"apart\"", "", vec!["between_stages = \"apart\"", "from 0 to 1"]),
    ] {
        assert_refused(&[WEATHER, table, "\n", DISPERSAL], years, &words);
    }
    let with = |keys: &str| format!("[environment]\nrecorded = {keys}\n");
    let resample = "{ table = \"years.csv\", use = \"resample\" }";
    for (keys, years, words) in [
        ("3", SOUND, vec!["recorded = 3", "a table"]),
        ("{ use = \"resample\" }", SOUND, vec!["recorded.table is missing", "year and deviate"]),
        ("{ table = \"years.csv\" }", SOUND, vec!["recorded.use is missing", "replay"]),
        ("{ table = \"years.csv\", use = \"resampl\" }", SOUND, vec!["use = \"resampl\"", "write \"resample\""]),
        ("{ table = \"year.csv\", use = \"resample\" }", SOUND, vec!["year.csv", "there is none"]),
        ("{ table = \"years.csv\", use = \"replay\" }", SOUND, vec!["at least 20 years", "it holds 4", "resample"]),
        ("{ table = \"years.csv\", use = \"replay\", block_years = 2 }", SOUND, vec!["block_years = 2", "replayed"]),
        ("{ table = \"years.csv\", use = \"resample\", block_years = 5 }", SOUND, vec!["block_years = 5", "at most 4"]),
        ("{ table = \"years.csv\", use = \"resample\", block_years = 0 }", SOUND, vec!["block_years = 0", "whole"]),
        ("{ table = \"years.csv\", use = \"resample\", block = 2 }", SOUND, vec!["block is not a key", "block_years"]),
        (resample, "year,z\n2001,1\n2002,-1\n", vec!["years.csv:1", "a column deviate"]),
        (resample, "year,deviate\n2001,1\n", vec!["years.csv:1", "at least two years"]),
        (resample, "year,deviate\n2001,1\n2003,-1\n", vec!["years.csv:3", "year = 2003", "2002", "in order"]),
        (resample, "year,deviate\n2002,1\n2001,-1\n", vec!["years.csv:3", "year = 2001", "2003", "in order"]),
        (resample, "year,deviate\n2001,wet\n2002,-1\n", vec!["years.csv:2", "deviate = wet", "from -8 to 8"]),
        (resample, "year,deviate\n2001,nan\n2002,-1\n", vec!["years.csv:2", "deviate = nan"]),
        (resample, "year,deviate\n2001,1\n2002,-12\n", vec!["years.csv:3", "deviate = -12", "from -8 to 8"]),
    ] {
        assert_refused(&[&with(keys), DISPERSAL], years, &words);
    }
    for (key, words) in [
        ("correlation = \"none\"\n", ["correlation = \"none\"", "in common"]),
        ("correlation = { reach_km = 3 }\n", ["environment.correlation", "in common"]),
        ("autocorrelation = 0.2\n", ["autocorrelation = 0.2", "their own memory"]),
    ] {
        assert_refused(&[&with(resample), key, DISPERSAL], SOUND, &words);
    }
    assert_eq!(read(&[&with(resample), DISPERSAL], "year,deviate\n2001,1\n2002,0\n2003,-1\n"), Default::default());
    let wet = "year,deviate\n2001,1\n2002,2\n2003,0\n";
    assert_warned(&[&with(resample), DISPERSAL], wet, &["mean 0 and sd 1", "not 1.00 and 1.00"]);
}

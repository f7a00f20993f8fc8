//! What occupancy studies get wrong: each mistake is refused, all at once, in words that say where and what to do.

use std::fs;

use eyot::engine::{Overrides, Prepared, prepare};
use eyot::mistake::{Checked, Failure};

const LANDSCAPE: &str = "[landscape]\npatches = \"p.geojson\"\nid = \"patch\"\ncrs = \"metres\"\n\
                         area = { property = \"ha\" }\nstart = { property = \"there\" }\n";
const LIFE: &str =
    "[life_history]\nkind = \"occupancy\"\nextinction = { e = 0.1, x = 0.8 }\ncolonisation = { y = 2 }\n";
const DISPERSAL: &str = "[dispersal]\nkernel = { shape = \"exponential\", mean_km = 1.0 }\n";

/// Three points a kilometre apart, with this property as JSON.
fn patches(there: [&str; 3]) -> String {
    let feature = |(place, there): (usize, &str)| {
        format!(
            r#"{{"type":"Feature","properties":{{"patch":"p{}","ha":2,"there":{there}}},"geometry":{{"type":"Point","coordinates":[{},500000]}}}}"#,
            place + 1,
            500_000 + 1000 * place
        )
    };
    let features: Vec<String> = there.into_iter().enumerate().map(feature).collect();
    format!(r#"{{"type":"FeatureCollection","features":[{}]}}"#, features.join(",\n"))
}

fn try_with(tables: &str, geojson: &str, table: &str) -> Result<Checked<Prepared>, Failure> {
    let folder = tempfile::tempdir().expect("a temporary folder can be made");
    let write = |name: &str, text: &str| fs::write(folder.path().join(name), text).expect("the folder can be written");
    write("p.geojson", geojson);
    write("table.csv", table);
    write("study.toml", &format!("title = \"t\"\nseed = 1\nhorizon = 5\nreplicates = 10\n{tables}"));
    prepare(&folder.path().join("study.toml"), Overrides::default())
}

fn study(tables: &str) -> Result<Checked<Prepared>, Failure> {
    try_with(tables, &patches(["1", "0", "true"]), "")
}

/// So many mistakes, which hold all these words between them.
fn refused(result: Result<Checked<Prepared>, Failure>, number: usize, words: &[&str]) {
    let Err(Failure::Input(mistakes)) = result else { panic!("nothing was refused; {words:?} should be") };
    let text = mistakes.to_string();
    assert_eq!(mistakes.as_slice().len(), number, "{text}");
    for word in words {
        assert!(text.contains(word), "no `{word}` in:\n{text}");
    }
}

fn warned(result: Result<Checked<Prepared>, Failure>, words: &[&str]) {
    let checked = result.unwrap_or_else(|failure| panic!("{failure}"));
    let warnings: Vec<String> = checked.warnings.iter().map(ToString::to_string).collect();
    assert_eq!(warnings.len(), words.len(), "{warnings:?}");
    for (warning, word) in warnings.iter().zip(words) {
        assert!(warning.contains(word), "no `{word}` in: {warning}");
    }
}

#[test]
fn a_study_that_is_right() {
    warned(study(&format!("{LANDSCAPE}{LIFE}{DISPERSAL}")), &[]);
}

#[test]
fn every_number_has_its_range() {
    for (life, words) in [
        ("extinction = { e = 0, x = 1 }\ncolonisation = { y = 1 }", "life_history.extinction.e = 0"),
        ("extinction = { e = 0.1, x = -1 }\ncolonisation = { y = 1 }", "life_history.extinction.x = -1"),
        ("extinction = { e = 0.1, x = 1 }\ncolonisation = { y = 0.0 }", "life_history.colonisation.y = 0.0"),
        ("extinction = { e = nan, x = 1 }\ncolonisation = { y = 1 }", "life_history.extinction.e = nan"),
        ("extinction = { e = 0.1, x = 1 }\ncolonisation = { y = \"two\" }", "life_history.colonisation.y = \"two\""),
        ("extinction = { e = 0.1, x = 1 }\ncolonisation = { y = 1 }\nrescue = \"yes\"", "true or false"),
        ("extinction = { e = 0.1, x = 1 }\ncolonisation = { y = 1 }\nweather = 3", "life_history.weather = 3"),
        ("extinction = 0.1\ncolonisation = { y = 1 }", "life_history.extinction = 0.1"),
        ("extinction = { e = 0.1 }\ncolonisation = { y = 1 }", "life_history.extinction.x is missing"),
        ("extinction = { e = 0.1, x = 1 }", "life_history.colonisation is missing"),
        ("extinction = { e = 0.1, x = 1, z = 2 }\ncolonisation = { y = 1 }", "life_history.extinction.z is not a key"),
        (
            "extinction = { e = 0.1, x = 1 }\ncolonisation = { y = 1 }\nweather = { e_sd = -0.1 }",
            "life_history.weather.e_sd = -0.1",
        ),
    ] {
        let life = format!("[life_history]\nkind = \"occupancy\"\n{life}\n");
        refused(study(&format!("{LANDSCAPE}{life}{DISPERSAL}")), 1, &[words]);
    }
}

#[test]
fn all_mistakes_at_once() {
    let life = "[life_history]\nkind = \"occupancy\"\nextinction = { e = -1, x = -1 }\n\
                colonisation = { y = -1 }\nweather = { e_sd = -1, y_sd = -1 }\nrescue = 3\n";
    refused(study(&format!("{LANDSCAPE}{life}{DISPERSAL}")), 6, &["e = -1", "x = -1", "y = -1", "y_sd", "rescue"]);
}

#[test]
fn keys_of_individuals_are_no_keys_here() {
    let life = format!(
        "{LIFE}density_dependence = {{ form = \"ceiling\" }}\nemigration = 0.1\nmatrix = [[0.5]]\ngrowth = 1.1\n\
         [[life_history.stage]]\nname = \"adult\"\n"
    );
    refused(
        study(&format!("{LANDSCAPE}{life}{DISPERSAL}")),
        5,
        &["density_dependence is not", "emigration is not", "matrix is not", "stage is not", "growth is not"],
    );
}

#[test]
fn there_is_no_capacity() {
    let landscape = format!("{LANDSCAPE}capacity = {{ per_hectare = 14 }}\n");
    refused(study(&format!("{landscape}{LIFE}{DISPERSAL}")), 1, &["landscape.capacity", "full or empty"]);
    let share = LANDSCAPE.replace("property = \"there\"", "share_of_capacity = 0.5");
    refused(study(&format!("{share}{LIFE}{DISPERSAL}")), 1, &["share_of_capacity = 0.5", "property or table"]);
    let none = LANDSCAPE.replace("start = { property = \"there\" }\n", "");
    refused(study(&format!("{none}{LIFE}{DISPERSAL}")), 1, &["landscape.start is missing", "occupied"]);
    let both = LANDSCAPE.replace("property = \"there\"", "property = \"there\", table = \"table.csv\"");
    refused(study(&format!("{both}{LIFE}{DISPERSAL}")), 1, &["exactly one of property, table"]);
}

#[test]
fn a_patch_is_occupied_or_empty() {
    let tables = format!("{LANDSCAPE}{LIFE}{DISPERSAL}");
    for (there, words) in [
        ("2", ["there = 2", "correct the value"]),
        ("0.5", ["there = 0.5", "correct the value"]),
        ("-1", ["there = -1", "correct the value"]),
        ("\"yes\"", ["\"yes\", which is text", "type to a whole number or a boolean"]),
        ("\"1\"", ["\"1\", which is text", "type to a whole number or a boolean"]),
        ("null", ["there is null", "fill the field"]),
        ("[1]", ["there is", "type to a whole number or a boolean"]),
    ] {
        refused(try_with(&tables, &patches(["1", there, "false"]), ""), 1, &["feature 1 (p2)", words[0], words[1]]);
    }
    refused(try_with(&tables, &patches(["0", "false", "0.0"]), ""), 1, &["every patch empty", "one occupied patch"]);
    let named = tables.replace("\"there\"", "\"ther\"");
    refused(study(&named), 1, &["landscape.start.property = \"ther\"", "write \"there\""]);
}

#[test]
fn a_table_of_the_start() {
    let tables = format!("{LANDSCAPE}{LIFE}{DISPERSAL}").replace("property = \"there\"", "table = \"table.csv\"");
    let read = |table: &str| try_with(&tables, &patches(["0", "0", "0"]), table);
    let checked = read("patch,occupied\np1,TRUE\np2,false\np3,1\n").unwrap_or_else(|failure| panic!("{failure}"));
    assert_eq!(checked.value.model.start_totals(), [1, 0, 1]);
    refused(read("patch,occupied\np1,yes\np2,0\np3,1\n"), 1, &["table.csv:2", "occupied = yes", "1 or true"]);
    refused(read("patch,occupied\np1,12\np2,\np3,1\n"), 2, &["occupied = 12", "table.csv:3"]);
    refused(read("patch,occupied\np1,1\np2,0\n"), 1, &["p3 has none"]);
    refused(read("patch,count\np1,1\np2,0\np3,1\n"), 1, &["a column occupied"]);
    refused(read("patch,occupied\np1,1\np2,0\np3,1\np9,1\n"), 1, &["p9", "the name of a patch"]);
}

#[test]
fn dispersal_is_needed_and_nobody_settles() {
    refused(study(&format!("{LANDSCAPE}{LIFE}")), 1, &["dispersal is missing", "how far colonists come"]);
    let lognormal = "[dispersal]\nkernel = { shape = \"lognormal\", mean_km = 1.0, s = 0.5 }\n";
    refused(study(&format!("{LANDSCAPE}{LIFE}{lognormal}")), 1, &["lognormal kernel", "at distance 0", "exponential"]);
    let idle = format!("{DISPERSAL}settlement = \"shared\"\npath_mortality_per_km = 0.1\ntail = 0.01\n");
    warned(
        study(&format!("{LANDSCAPE}{LIFE}{idle}")),
        &["dispersal.settlement", "path_mortality_per_km", "dispersal.tail"],
    );
    let wrong = format!("{DISPERSAL}settlement = \"opn\"\nmax_km = 0\n");
    refused(study(&format!("{LANDSCAPE}{LIFE}{wrong}")), 2, &["write \"open\"", "max_km = 0"]);
    let near = format!("{DISPERSAL}max_km = 0.9\n");
    warned(study(&format!("{LANDSCAPE}{LIFE}{near}")), &["p1 and 2 more could be colonised, within max_km"]);
}

#[test]
fn weather_needs_its_correlation() {
    let life = format!("{LIFE}weather = {{ y_sd = 0.2 }}\n");
    refused(
        study(&format!("{LANDSCAPE}{life}{DISPERSAL}")),
        1,
        &["environment.correlation is missing", "life_history.colonisation.y varies"],
    );
    warned(study(&format!("{LANDSCAPE}{life}{DISPERSAL}[environment]\ncorrelation = \"full\"\n")), &[]);
}

#[test]
fn a_threshold_has_no_stages() {
    let tables = format!("quasi_extinction = {{ below = 2, stages = [\"adult\"] }}\n{LANDSCAPE}{LIFE}{DISPERSAL}");
    refused(study(&tables), 1, &["adult", "no stages in an occupancy study", "quasi_extinction = 5"]);
}

#[test]
fn sizes_beyond_all_numbers() {
    let dispersal = format!("{DISPERSAL}area_exponent = 2000\n");
    refused(study(&format!("{LANDSCAPE}{LIFE}{dispersal}")), 1, &["2 ha to the power 2000.8", "can be held"]);
}

/// 1,500 patches within reach of each other make 2,248,500 links.
#[test]
fn too_many_links_ask_for_max_km() {
    let feature = |place: usize| {
        format!(
            r#"{{"type":"Feature","properties":{{"patch":"p{place}","ha":2,"there":1}},"geometry":{{"type":"Point","coordinates":[{},{}]}}}}"#,
            500_000 + 10 * (place % 40),
            500_000 + 10 * (place / 40)
        )
    };
    let features: Vec<String> = (0..1500).map(feature).collect();
    let geojson = format!(r#"{{"type":"FeatureCollection","features":[{}]}}"#, features.join(",\n"));
    let tables = format!("{LANDSCAPE}{LIFE}{DISPERSAL}");
    refused(try_with(&tables, &geojson, ""), 1, &["more than 2000000 pairs", "max_km", "mean is 1 km"]);
    let checked =
        try_with(&format!("{tables}max_km = 0.1\n"), &geojson, "").unwrap_or_else(|failure| panic!("{failure}"));
    assert!(checked.value.network.links.len() < 500_000);
}

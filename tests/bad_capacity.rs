//! What people's capacities over the years get wrong: each is refused in words that say where and what to do.

#[path = "helpers/landscape.rs"]
mod study;

use study::{Reading, box_polygon, collection, read};

fn read_capacity(capacity: &str, table: &str) -> Reading {
    let patches = collection(&[&box_polygon(5.0, 52.0, 5.01, 52.01), &box_polygon(5.1, 52.0, 5.11, 52.01)]);
    let text = format!(
        "patches = \"p.geojson\"\nid = \"patch\"\ncapacity = {capacity}\nstart = {{ share_of_capacity = 0.5 }}\n"
    );
    read(&text, &[("p.geojson", patches.as_bytes()), ("k.csv", table.as_bytes())], &[])
}

fn assert_refused(capacity: &str, table: &str, words: &[&str]) {
    let reading = read_capacity(capacity, table);
    assert_eq!(reading.n_mistakes, 1, "{}", reading.mistakes);
    for word in words {
        assert!(reading.mistakes.contains(word), "no `{word}` in:\n{}", reading.mistakes);
    }
}

const TABLE: &str = "{ table = \"k.csv\" }";

#[test]
fn tables_by_years() {
    let right = "patch,year,capacity\np1,0,3\np2,5,4\np1,10,8\n";
    let landscape = read_capacity(TABLE, right).sound();
    assert!(landscape.capacity_over_time.has_table() && !landscape.capacity_over_time.is_constant());
    let capacities: Vec<String> = landscape.patches.iter().map(|patch| patch.capacity.to_string()).collect();
    assert_eq!(capacities, ["3", "4"]);

    let below = |rows: &str| format!("patch,year,capacity\n{rows}");
    assert_refused(TABLE, &below("p1,9,3\np1,5,4\np2,0,1\n"), &["k.csv:3", "year = 5 after year = 9", "in order"]);
    assert_refused(TABLE, &below("p1,9,3\np1,9,4\np2,0,1\n"), &["k.csv:3", "year = 9 after year = 9", "each once"]);
    assert_refused(TABLE, &below("p1,1.5,3\np2,0,1\n"), &["k.csv:2", "year = 1.5", "a whole year"]);
    assert_refused(TABLE, &below("p1,-1,3\np2,0,1\n"), &["k.csv:2", "year = -1"]);
    assert_refused(TABLE, &below("p1,0,-3\np2,0,1\n"), &["k.csv:2", "capacity = -3"]);
    assert_refused(TABLE, &below("p1,0,3\np1,4,3\n"), &["a row for every patch: p2 has none"]);
    assert_refused(TABLE, &below("p1,0,3\np2,0,3\np3,0,3\n"), &["k.csv:4", "patch = p3"]);
    assert_refused(TABLE, "patch,capacity\np1,3\np2,3\np2,4\n", &["k.csv:4", "one row for every patch"]);
    assert_refused(TABLE, "patch,yeer,capacity\np1,0,3\np2,0,3\n", &["column yeer"]);
}

#[test]
fn trends_and_variation() {
    let of = |rest: &str| format!("{{ per_hectare = 1, {rest} }}");
    let right = read_capacity(&of("trend_per_year = -0.01, variation = 0.2"), "").sound();
    assert_eq!((right.capacity_over_time.trend_per_year, right.capacity_over_time.variation), (-0.01, 0.2));
    for (wrong, words) in [
        ("trend_per_year = -1", ["study.toml:4:", "above -1"]),
        ("trend_per_year = -5", ["landscape.capacity.trend_per_year = -5", "above -1"]),
        ("variation = -0.1", ["landscape.capacity.variation = -0.1", "0 or above"]),
        ("variation = \"some\"", ["variation = \"some\"", "a number"]),
    ] {
        assert_refused(&of(wrong), "", &words);
    }
    let both = "{ table = \"k.csv\", trend_per_year = 0.01 }";
    assert_refused(both, "patch,year,capacity\np1,0,3\np1,9,3\np2,0,1\n", &["no trend beside a table with years"]);
    assert!(read_capacity(both, "patch,capacity\np1,3\np2,1\n").n_mistakes == 0);
}

//! What people's files get wrong: each is refused or warned of in words that say where and what to do.

#[path = "helpers/landscape.rs"]
mod study;

use study::{Reading, box_polygon, box_ring, collection, point, polygon, read, ring_list};

const TABLE: &str = "patches = \"p.geojson\"\nid = \"patch\"\ncapacity = { per_hectare = 1 }\n\
                     start = { share_of_capacity = 0.5 }\n";

fn read_bytes(bytes: &[u8]) -> Reading {
    read(TABLE, &[("p.geojson", bytes)], &[])
}

fn read_all(geometries: &[&str]) -> Reading {
    read_bytes(collection(geometries).as_bytes())
}

/// One mistake that holds all these words.
fn assert_refused(reading: &Reading, words: &[&str]) {
    assert_eq!(reading.n_mistakes, 1, "{}", reading.mistakes);
    for word in words {
        assert!(reading.mistakes.contains(word), "no `{word}` in:\n{}", reading.mistakes);
    }
}

/// One warning that holds all these words.
fn assert_warned(reading: &Reading, words: &[&str]) {
    assert_eq!(reading.mistakes, "");
    assert_eq!(reading.warnings.len(), 1, "{:?}", reading.warnings);
    for word in words {
        assert!(reading.warnings[0].contains(word), "no `{word}` in:\n{}", reading.warnings[0]);
    }
}

fn good() -> String {
    box_polygon(5.0, 52.0, 5.01, 52.01)
}

#[test]
fn files_that_are_no_geojson() {
    let whole = collection(&[&good()]);
    assert_refused(&read_bytes(b""), &["p.geojson:1:1", "an empty file"]);
    assert_refused(
        &read_bytes(&whole.as_bytes()[..whole.len() - 40]),
        &["p.geojson:1:", "ends in the middle", "again"],
    );
    assert_refused(&read_bytes(b"patch,count\nfen,3\n"), &["p.geojson:1:1", "not JSON", "FeatureCollection"]);
    assert_refused(&read_bytes(b"[1, 2]"), &["a list", "FeatureCollection"]);
    assert_refused(&read_bytes(&[0xff, 0xfe, b'{', 0, b'}', 0]), &["not UTF-8", "in UTF-8"]);
    assert_refused(&read_bytes(good().as_bytes()), &["type Polygon", "FeatureCollection"]);
    assert_refused(&read_bytes(br#"{"type":"FeatureCollection"}"#), &["no list of features"]);
    assert_refused(&read_bytes(br#"{"type":"FeatureCollection","features":[]}"#), &["no patches", "filter"]);
    let nan = collection(&["{\"type\":\"Point\",\n\"coordinates\":[5.0,NaN]}"]);
    assert_refused(&read_bytes(nan.as_bytes()), &["p.geojson:2:", "NaN", "not JSON"]);
    let huge = collection(&["{\"type\":\"Point\",\"coordinates\":[5.0,1e999]}"]);
    assert_refused(&read_bytes(huge.as_bytes()), &["a number too large to hold"]);
    let missing = read(TABLE, &[], &[]);
    assert_refused(&missing, &["study.toml:2:1", "there is none at", "relative to the study file"]);
}

#[test]
fn a_byte_order_mark_is_no_mistake() {
    let marked = format!("\u{feff}{}", collection(&[&good()]));
    assert_eq!(read_bytes(marked.as_bytes()).sound().patches.len(), 1);
}

#[test]
fn geometries_that_are_no_patches() {
    for (geometry, words) in [
        ("null", ["feature 1 (p2)", "geometry is null", "delete its row"]),
        (r#"{"type":"Polygon","coordinates":[]}"#, ["feature 1 (p2)", "empty geometry", "delete"]),
        (r#"{"type":"LineString","coordinates":[[5,52],[6,53]]}"#, ["feature 1 (p2)", "LineString", "buffer"]),
        (r#"{"type":"MultiPoint","coordinates":[[5,52]]}"#, ["feature 1 (p2)", "MultiPoint", "single parts"]),
        (r#"{"type":"GeometryCollection","geometries":[]}"#, ["feature 1 (p2)", "GeometryCollection", "split"]),
        (
            r#"{"type":"Polygon","coordinates":[[[6,52],[6.1,52],[6,52]]]}"#,
            ["feature 1 (p2)", "ring 1 has 2 different points", "sliver"],
        ),
        (
            r#"{"type":"Polygon","coordinates":[[[6,52],[6.1,52],[6.2,52],[6,52]]]}"#,
            ["feature 1 (p2)", "zero area", "sliver"],
        ),
        (
            r#"{"type":"Polygon","coordinates":[[[6,52],[6.0000000001,52],[6,52.0000000001],[6,52]]]}"#,
            ["feature 1 (p2)", "zero area", "0.01 m2"],
        ),
        (
            r#"{"type":"Polygon","coordinates":[[[6,52],[6.1,"52"],[6.2,53],[6,52]]]}"#,
            ["feature 1 (p2)", "ring 1, vertex 2 is [6.1,\"52\"]", "export again"],
        ),
        (&point(6.0, 52.0), ["feature 1 (p2)", "a point without an area", "area = { property"]),
        (
            &polygon(&[&box_ring(6.0, 52.0, 6.1, 52.1), &box_ring(7.0, 52.0, 7.1, 52.1)]),
            ["feature 1 (p2)", "a hole outside", "repair the geometry"],
        ),
        (&polygon(&["0 80, 90 80, 180 80, -90 80, 0 80"]), ["feature 1 (p2)", "round a pole", "polar projection"]),
    ] {
        assert_refused(&read_all(&[&good(), geometry]), &words);
    }
}

#[test]
fn every_bad_feature_is_named_and_a_flood_is_counted() {
    let line = r#"{"type":"LineString","coordinates":[[5,52],[6,53]]}"#;
    let mut geometries = vec!["null"; 40];
    geometries.push(line);
    let reading = read_all(&geometries);
    assert_eq!(reading.n_mistakes, 21, "{}", reading.mistakes);
    assert!(
        reading.mistakes.contains("feature 19 (p20)  geometry is null, and 20 more like this"),
        "{}",
        reading.mistakes
    );
    assert!(reading.mistakes.contains("feature 40 (p41)  LineString"), "{}", reading.mistakes);
}

#[test]
fn rings_that_can_be_mended_are_and_it_is_said() {
    let open = r#"{"type":"Polygon","coordinates":[[[5,52],[5.01,52],[5.01,52.01],[5,52.01]]]}"#;
    let reading = read_all(&[open]);
    assert_warned(&reading, &["feature 0 (p1)", "an unclosed ring", "closed"]);
    let closed = read_all(&[&good()]).sound();
    assert!((reading.sound().patches[0].area_ha - closed.patches[0].area_ha).abs() < 1e-9);

    let bow_tie = polygon(&["5 52, 5 52.01, 5.01 52, 5.01 52.01, 5 52"]);
    let reading = read_all(&[&bow_tie]);
    assert_warned(&reading, &["feature 0 (p1)", "crosses itself near 5.005000, 52.005000", "repaired"]);
    // Two triangles that are a quarter of the box each.
    let share = reading.sound().patches[0].area_ha / closed.patches[0].area_ha;
    assert!((share - 0.5).abs() < 1e-5, "{share}");

    let parts = format!(
        r#"{{"type":"MultiPolygon","coordinates":[[{}],[{}]]}}"#,
        ring_list(&[&box_ring(5.0, 52.0, 5.01, 52.01)]),
        ring_list(&[&box_ring(5.005, 52.0, 5.015, 52.01)])
    );
    let reading = read_all(&[&parts]);
    assert_warned(&reading, &["feature 0 (p1)", "parts that overlap", "joined"]);
    let share = reading.sound().patches[0].area_ha / closed.patches[0].area_ha;
    assert!((share - 1.5).abs() < 1e-4, "{share}");
}

#[test]
fn the_same_ground_twice() {
    let other = box_polygon(5.1, 52.0, 5.11, 52.01);
    let reading = read_all(&[&good(), &other, &good()]);
    assert_refused(&reading, &["feature 2 (p3)", "the same geometry as feature 0", "delete one"]);

    let reading = read_all(&[&good(), &box_polygon(5.005, 52.0, 5.015, 52.01)]);
    assert_warned(&reading, &["p2 overlaps p1", "common ground"]);
    let reading = read_all(&[&good(), &box_polygon(5.004, 52.004, 5.006, 52.006)]);
    assert_warned(&reading, &["p2 overlaps p1", "common ground"]);

    let ring = polygon(&[&box_ring(5.0, 52.0, 5.01, 52.01), &box_ring(5.004, 52.004, 5.006, 52.006)]);
    let beside = box_polygon(5.01, 52.0, 5.02, 52.01);
    let inside = box_polygon(5.004, 52.004, 5.006, 52.006);
    assert_eq!(read_all(&[&ring, &beside, &inside]).warnings, [""; 0]);
}

#[test]
fn names() {
    let named = |first: &str, second: &str| {
        let text = collection(&[&good(), &box_polygon(5.1, 52.0, 5.11, 52.01)]);
        read_bytes(text.replace("\"p1\"", first).replace("\"p2\"", second).as_bytes())
    };
    assert_refused(&named("12", "12.0"), &["feature 1 (12)", "which feature 0 has already", "multipolygon"]);
    assert_refused(&named("\" \"", "\"b\""), &["feature 0", "patch is empty", "a name of its own"]);
    assert_refused(&named("null", "\"b\""), &["feature 0", "patch is null"]);
    assert_refused(&named("\"b\"", "true"), &["feature 1", "patch is true or false"]);
    let names: Vec<String> = named("12.0", "\"  11 \"").sound().patches.into_iter().map(|patch| patch.name).collect();
    assert_eq!(names, ["11", "12"]);

    let text = collection(&[&good()]);
    let wrong = TABLE.replace("id = \"patch\"", "id = \"Patch\"");
    let reading = read(&wrong, &[("p.geojson", text.as_bytes())], &[]);
    assert_refused(&reading, &["study.toml:3:1", "landscape.id = \"Patch\"", "ha, patch", "write \"patch\""]);
    let none = TABLE.replace("id = \"patch\"\n", "");
    let reading = read(&none, &[("p.geojson", text.as_bytes())], &[]);
    assert_refused(&reading, &["features without an id", "id = \"...\"", "ha, patch"]);
    let member = text.replace("\"type\":\"Feature\",", "\"type\":\"Feature\",\"id\":7,");
    assert_eq!(read(&none, &[("p.geojson", member.as_bytes())], &[]).sound().patches[0].name, "7");
}

#[test]
fn coordinates_that_are_not_what_the_study_says() {
    let metres = box_polygon(155_000.0, 463_000.0, 155_200.0, 463_200.0);
    let farther = box_polygon(156_000.0, 463_000.0, 156_200.0, 463_200.0);
    let reading = read_all(&[&metres, &farther]);
    assert_refused(&reading, &["feature 0 (p1)", "155200, 463200", "1 more", "EPSG:4326", "crs = \"metres\""]);
    let swapped = read_all(&[&box_polygon(-37.0, 144.0, -36.99, 144.01)]);
    assert_refused(&swapped, &["feature 0 (p1)", "look swapped", "longitude first"]);

    let planar = format!("{TABLE}crs = \"metres\"\n");
    let reading = read(&planar, &[("p.geojson", collection(&[&metres]).as_bytes())], &[]);
    assert!((reading.sound().patches[0].area_ha - 4.0).abs() < 1e-9);
    let reading = read(&planar, &[("p.geojson", collection(&[&good()]).as_bytes())], &[]);
    assert_refused(&reading, &["a landscape 0.010 m across", "planar metres", "if they are degrees"]);
    let tiny = box_polygon(0.0, 0.0, 80.0, 80.0);
    let reading = read(&planar, &[("p.geojson", collection(&[&tiny]).as_bytes())], &[]);
    assert_warned(&reading, &["within 180 and 90", "if they are degrees"]);

    let stray = read_all(&[&good(), &box_polygon(-170.0, -40.0, -169.9, -39.9)]);
    assert_refused(&stray, &["more than 6,000 km", "stray"]);
    let wide = read_all(&[&good(), &box_polygon(25.0, 52.0, 25.01, 52.01)]);
    assert_warned(&wide, &["km across", "distances may be wrong"]);
}

#[test]
fn a_crs_member_is_carried() {
    let member = r#"{"type":"name","properties":{"name":"urn:ogc:def:crs:OGC:1.3:CRS84"}}"#;
    let text = collection(&[&good()]).replacen('{', &format!("{{\"crs\":{member},"), 1);
    let landscape = read_bytes(text.as_bytes()).sound();
    assert_eq!(landscape.crs_member, Some(serde_json::from_str(member).unwrap()));
}

/// Reads two patches whose property `k` has these values, as capacity.
fn with_values(first: &str, second: &str) -> Reading {
    let text = collection(&[&good(), &box_polygon(5.1, 52.0, 5.11, 52.01)])
        .replacen("\"ha\":1", &format!("\"k\":{first}"), 1)
        .replacen("\"ha\":1", &format!("\"k\":{second}"), 1);
    let table = TABLE.replace("per_hectare = 1", "property = \"k\"");
    read(&table, &[("p.geojson", text.as_bytes())], &[])
}

#[test]
fn properties_that_are_no_numbers() {
    for (value, words) in [
        ("\"12.5\"", ["feature 0 (p1)", "k = \"12.5\", which is text", "change the field's type"]),
        ("null", ["feature 0 (p1)", "k is null", "fill the field"]),
        ("-3", ["feature 0 (p1)", "k = -3", "0 or above"]),
        ("true", ["feature 0 (p1)", "k is true or false", "type"]),
    ] {
        assert_refused(&with_values(value, "5"), &words);
    }
    assert_refused(&with_values("0", "0"), &["study.toml:4:", "capacity above 0", "property"]);
    assert!((with_values("0", "7").sound().patches[1].capacity - 7.0).abs() < 1e-12);

    let reading = read(
        &TABLE.replace("per_hectare = 1", "property = \"hx\""),
        &[("p.geojson", collection(&[&good()]).as_bytes())],
        &[],
    );
    assert_refused(&reading, &["study.toml:4:", "capacity.property = \"hx\"", "ha, patch", "write \"ha\""]);
}

#[test]
fn quality_and_area() {
    let text = collection(&[&good()]).replace("\"ha\":1", "\"ha\":80,\"q\":0.5");
    let table = TABLE.replace("per_hectare = 1", "per_hectare = 2, quality = \"q\"") + "area = { property = \"ha\" }\n";
    let patch = read(&table, &[("p.geojson", text.as_bytes())], &[]).sound().patches.remove(0);
    assert!((patch.area_ha - 80.0).abs() < 1e-12 && (patch.capacity - 80.0).abs() < 1e-12);

    let percent = text.replace("0.5", "50");
    assert_warned(&read(&table, &[("p.geojson", percent.as_bytes())], &[]), &["q = 50", "percentage"]);
    let none = text.replace("\"ha\":80", "\"ha\":0");
    assert_refused(
        &read(&table, &[("p.geojson", none.as_bytes())], &[]),
        &["feature 0 (p1)", "ha = 0", "from 0.000001"],
    );

    let huge = text.replace("0.5", "1e308");
    assert_refused(&read(&table, &[("p.geojson", huge.as_bytes())], &[]), &["feature 0 (p1)", "beyond all numbers"]);

    let narrow = format!("{TABLE}landscape_area_ha = 10\n");
    let reading = read(&narrow, &[("p.geojson", collection(&[&good()]).as_bytes())], &[]);
    assert_refused(&reading, &["study.toml:", "landscape_area_ha = 10", "at least the"]);
}

/// Reads two patches, p1 and p2, with this start table and the stages young and adult.
fn with_table(csv: &str) -> Reading {
    let text = collection(&[&good(), &box_polygon(5.1, 52.0, 5.11, 52.01)]);
    let table = TABLE.replace("share_of_capacity = 0.5", "table = \"start.csv\"");
    read(&table, &[("p.geojson", text.as_bytes()), ("start.csv", csv.as_bytes())], &["young", "adult"])
}

#[test]
fn start_tables() {
    use eyot::landscape::Start;
    let starts =
        |csv: &str| -> Vec<Start> { with_table(csv).sound().patches.into_iter().map(|patch| patch.start).collect() };
    assert_eq!(starts("patch,count\np2,7\np1,4.5\n"), [Start::Total(4.5), Start::Total(7.0)]);
    assert_eq!(starts("patch,adult,young\np1,1,2\np2,3,4\n"), [Start::ByStage(vec![2, 1]), Start::ByStage(vec![4, 3])]);
    for (csv, words) in [
        ("patch,count\np1,4\npx2,7\np2,1\n", ["start.csv:3", "patch = px2", "write p2"]),
        ("patch,count\np1,4\n", ["study.toml:5:", "p2 has none", "start.table"]),
        ("patch,count\np1,4\np2,7\np1,5\n", ["start.csv:4", "which line 2 has already", "one row"]),
        ("patch,young,adult,adlt\np1,1,2,3\np2,1,2,3\n", ["start.csv:1", "column adlt", "write adult"]),
        ("patch,young\np1,1\np2,1\n", ["start.csv:1", "a column adult", "header patch,young"]),
        ("patch,young,adult\np1,1,2.5\np2,1,2\n", ["start.csv:2", "adult = 2.5", "a whole number"]),
        ("patch,count\np1,-4\np2,7\n", ["start.csv:2", "count = -4", "from 0"]),
        ("patch,count\np1,NaN\np2,7\n", ["start.csv:2", "count = NaN", "from 0"]),
        ("patch,count\np1,many\np2,7\n", ["start.csv:2", "count = many", "a number"]),
        ("name,count\np1,4\np2,7\n", ["start.csv:1", "header name,count", "a column patch"]),
        ("patch;count\np1;4\np2;7\n", ["start.csv:1", "commas", "semicolons"]),
    ] {
        assert_refused(&with_table(csv), &words);
    }
}

#[test]
fn capacity_tables() {
    let text = collection(&[&good()]);
    let table = TABLE.replace("per_hectare = 1", "table = \"k.csv\"");
    let with = |csv: &str| read(&table, &[("p.geojson", text.as_bytes()), ("k.csv", csv.as_bytes())], &[]);
    assert!((with("patch,capacity\np1,12.5\n").sound().patches[0].capacity - 12.5).abs() < 1e-12);
    assert_refused(&with("patch,capacity\np1,-1\n"), &["k.csv:2", "capacity = -1", "0 or above"]);
    assert_refused(&with("patch,K\np1,1\n"), &["k.csv:1", "a column capacity"]);
}

#[test]
fn mistakes_of_all_kinds_are_told_at_once() {
    let text = collection(&["null", &good(), &box_polygon(5.1, 52.0, 5.11, 52.01)])
        .replacen("\"ha\":1", "\"ha\":\"1\"", 2)
        .replace("\"p3\"", "\"p2\"");
    let table = TABLE.replace("per_hectare = 1", "property = \"ha\"");
    let reading = read(&table, &[("p.geojson", text.as_bytes())], &[]);
    assert_eq!(reading.n_mistakes, 4, "{}", reading.mistakes);
}

#[test]
fn nobody_at_the_start_is_worth_a_word() {
    let table = TABLE.replace("0.5", "0");
    let reading = read(&table, &[("p.geojson", collection(&[&good()]).as_bytes())], &[]);
    assert_warned(&reading, &["no patch has any individual", "releases"]);
}

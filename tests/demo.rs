//! The example landscape: that it is what its program draws, that its shapes are sound, and that it is laid out as its
//! own page says.

#![expect(clippy::unwrap_used, reason = "a test stops where a file is not as it should be")]

#[path = "../examples/draw_thrindle/main.rs"]
#[expect(dead_code, reason = "the test draws in memory and leaves the files alone")]
mod draw_thrindle;

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use eyot::study::{Document, Settings};
use geo::{
    Area, BooleanOps, BoundingRect, Coord, Distance, Euclidean, Geometry, Intersects, MapCoords, MultiPolygon, Relate,
    Validation,
};
use geojson::{Feature, FeatureCollection};

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

fn read(name: &str) -> Vec<Feature> {
    let text = std::fs::read_to_string(root().join("landscapes/thrindle").join(name)).unwrap();
    text.parse::<FeatureCollection>().unwrap().features
}

fn geometry(feature: &Feature) -> Geometry {
    feature.geometry.clone().unwrap().try_into().unwrap()
}

fn patches() -> BTreeMap<String, (Feature, MultiPolygon)> {
    let named = |feature: Feature| {
        let shape = match geometry(&feature) {
            Geometry::Polygon(polygon) => polygon.into(),
            Geometry::MultiPolygon(parts) => parts,
            other => panic!("{other:?}"),
        };
        (feature.property("patch").unwrap().as_str().unwrap().to_owned(), (feature, shape))
    };
    let features = read("patches.geojson");
    let count = features.len();
    let patches: BTreeMap<_, _> = features.into_iter().map(named).collect();
    assert_eq!(patches.len(), count, "names are unique");
    patches
}

/// In a plane of kilometres: good to a few per cent, which is all that these tests ask.
fn in_km(shape: &MultiPolygon) -> MultiPolygon {
    let shrink = eyot::num::cos(47.15_f64.to_radians());
    shape.map_coords(|at| Coord { x: at.x * 111.2 * shrink, y: at.y * 111.2 })
}

fn area_ha(shape: &MultiPolygon) -> f64 {
    in_km(shape).unsigned_area() * 100.0
}

#[test]
fn the_program_draws_the_files_that_are_kept() {
    for (name, text) in draw_thrindle::files() {
        let kept = std::fs::read_to_string(root().join("landscapes/thrindle").join(name)).unwrap();
        assert!(text == kept, "{name} is not what its program draws: run `cargo run --example draw_thrindle`");
    }
}

#[test]
fn every_shape_is_valid_and_no_two_patches_meet() {
    let patches: Vec<_> = patches().into_iter().collect();
    for (position, (name, (_, shape))) in patches.iter().enumerate() {
        assert_eq!(shape.validation_errors(), [], "{name}");
        for (other, (_, other_shape)) in &patches[..position] {
            assert!(!shape.intersects(other_shape), "{name} meets {other}");
        }
    }
    for name in ["quarry.geojson", "corridor.geojson", "road.geojson"] {
        for feature in read(name) {
            assert!(geometry(&feature).is_valid(), "{name}");
        }
    }
}

#[test]
fn the_valley_is_as_its_page_says() {
    let patches = patches();
    let areas: Vec<f64> = patches.values().map(|(_, shape)| area_ha(shape)).collect();
    assert_eq!(areas.len(), 48);
    assert!(areas.iter().all(|area| (0.4..45.0).contains(area)));
    assert_eq!(areas.iter().filter(|area| **area > 23.0).count(), 3);
    let holes = |shape: &MultiPolygon| shape.iter().map(|part| part.interiors().len()).sum::<usize>();
    assert_eq!(patches.values().filter(|(_, shape)| holes(shape) == 1).count(), 2);
    assert_eq!(patches.values().filter(|(_, shape)| shape.0.len() == 2).count(), 2);
    for (name, (feature, shape)) in &patches {
        let number = |key: &str| feature.property(key).unwrap().as_f64().unwrap();
        assert!((0.35..=1.0).contains(&number("quality")), "{name}");
        assert!(number("count_2024") <= 3.0 * 4.0 * area_ha(shape) * number("quality"), "{name}");
        assert!(number("cost") > 0.0, "{name}");
        assert!(["trust", "farm", "parish"].contains(&feature.property("owner").unwrap().as_str().unwrap()), "{name}");
    }
}

#[test]
fn only_stepping_stones_and_outliers_lie_more_than_2_km_from_the_next() {
    let shapes: BTreeMap<String, MultiPolygon> =
        patches().into_iter().map(|(name, (_, shape))| (name, in_km(&shape))).collect();
    let is_remote = |name: &str| {
        let others = shapes.iter().filter(|(other, _)| *other != name);
        others.map(|(_, shape)| Euclidean.distance(&shapes[name], shape)).all(|distance_km| distance_km > 2.0)
    };
    let remote: Vec<&str> = shapes.keys().map(String::as_str).filter(|name| is_remote(name)).collect();
    let expected = ["Brockmoss", "Farthing Fen", "Ferryman's Carr", "Halfway Fen", "Lonely Pool", "Wether Hags"];
    assert_eq!(remote, expected);
}

#[test]
fn the_quarry_takes_most_of_one_fen_and_a_corner_of_two() {
    let Geometry::Polygon(quarry) = geometry(&read("quarry.geojson")[0]) else { panic!("not a polygon") };
    let taken = |shape: &MultiPolygon| shape.intersection(&quarry).unsigned_area() / shape.unsigned_area();
    let hit: Vec<(String, f64)> = patches()
        .into_iter()
        .map(|(name, (_, shape))| (name, taken(&shape)))
        .filter(|(_, share)| *share > 0.0)
        .collect();
    let names: Vec<&str> = hit.iter().map(|(name, _)| name.as_str()).collect();
    assert_eq!(names, ["Bittergreen", "Hallow Fen", "Parson's Piece"]);
    assert!(hit[1].1 > 0.6 && hit[1].1 < 0.9 && hit[0].1 < 0.2 && hit[2].1 < 0.2, "{hit:?}");
}

#[test]
fn the_road_parts_the_stepping_stones_and_spares_every_patch() {
    let Geometry::LineString(road) = geometry(&read("road.geojson")[0]) else { panic!("not a line") };
    let patches = patches();
    assert!(patches.values().all(|(_, shape)| !shape.intersects(&road)));
    let longitude = |name: &str| patches[name].1.bounding_rect().unwrap().center().x;
    let crossing = road.bounding_rect().unwrap().center().x;
    assert!(longitude("Halfway Fen") < crossing && crossing < longitude("Ferryman's Carr"));
}

#[test]
fn the_corridors_join_the_upper_cluster_and_both_stepping_stones() {
    let strips = read("corridor.geojson");
    let patches = patches();
    for (strip, ends) in strips.iter().zip([["Sallow Fen", "Ferryman's Carr"], ["Ferryman's Carr", "Halfway Fen"]]) {
        let line = geometry(strip);
        let touched: Vec<&str> = patches
            .iter()
            .filter(|(_, (_, shape))| shape.relate(&line).is_intersects())
            .map(|(name, _)| name.as_str())
            .collect();
        assert!(ends.iter().all(|end| touched.contains(end)) && touched.len() == 2, "{touched:?}");
    }
}

#[test]
fn the_study_reads_without_a_mistake_at_its_top() {
    let file: PathBuf = root().join("examples/thrindle/study.toml");
    let document = Document::open(&file).unwrap();
    let settings = Settings::read(&document.root()).unwrap();
    assert_eq!(document.verdict().unwrap(), []);
    assert_eq!((settings.horizon, settings.title.as_str()), (100, "Withy vole in the fens of the Thrindle"));
    let patches = document.root().table("landscape").unwrap().text("patches").unwrap();
    assert!(document.read_file(&patches).is_some());
}

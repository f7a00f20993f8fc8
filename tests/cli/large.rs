//! Landscapes of the sizes that agencies have.

use std::fmt::Write;

use super::site::{Site, collection, fens, grid};

/// A circle of about 1 km of a million vertices, to seven decimals as GIS write them, beside the fens.
fn a_million_vertices() -> String {
    const VERTICES: u32 = 1_000_000;
    let mut ring = String::new();
    for vertex in 0..=VERTICES {
        let turn = 2.0 * std::f64::consts::PI * f64::from(vertex % VERTICES) / f64::from(VERTICES);
        let (x, y) = (-31.2 + 0.013 * eyot::num::cos(turn), 47.2 + 0.009 * eyot::num::sin(turn));
        write!(ring, "{}[{x:.9},{y:.9}]", if vertex > 0 { "," } else { "" }).unwrap();
    }
    let lake = format!(
        "{{\"type\":\"Feature\",\"properties\":{{\"patch\":\"Great Lake\",\"capacity\":90,\"count\":40}},\
         \"geometry\":{{\"type\":\"Polygon\",\"coordinates\":[[{ring}]]}}}}"
    );
    collection(&[fens(), vec![lake]].concat())
}

#[test]
fn a_polygon_of_a_million_vertices() {
    let site = Site::with_patches(&a_million_vertices(), &[]);
    site.call(&["run", "study.toml", "--replicates", "5"], 0);
    let patches = site.column("outcome/by_patch.csv", "patch");
    let lake = patches.iter().position(|patch| patch == "Great Lake").unwrap();
    // Half axes of 0.013 and 0.009 degrees at 47.2 N, where a degree measures 75.7717 km by 111.1747 km: the radii of
    // curvature of the WGS 84 ellipsoid, a = 6378.137 km, 1/f = 298.257223563. Pi times 0.985032 km times 1.000573 km.
    let area_ha = site.numbers("outcome/by_patch.csv", "area_ha")[lake];
    assert!((area_ha / 309.6343 - 1.0).abs() < 1e-3, "{area_ha}");
}

#[test]
fn ten_thousand_patches_with_weather_of_their_own() {
    // A reach of its own keeps the links to neighbours, about 600,000 without it.
    let changes =
        [("{ reach_km = 12.0 }", "\"none\""), ("settlement = \"shared\"", "settlement = \"shared\"\nmax_km = 4.0")];
    let site = Site::with_patches(&grid(10_000), &changes);
    site.call(&["run", "study.toml", "--replicates", "3"], 0);
    assert_eq!(site.column("outcome/by_patch.csv", "patch").len(), 10_000);
    assert!(site.column("outcome/by_link.csv", "from").len() > 10_000);
}

#[test]
fn correlated_weather_has_its_limit_which_is_told() {
    let site = Site::with_patches(&grid(2_001), &[]);
    let (_, told) = site.call(&["run", "study.toml", "--replicates", "3"], 2);
    assert!(told.contains("environment.correlation") && told.contains("2000 patches"), "{told}");
    assert_eq!(site.names(), ["fens.geojson", "study.toml"]);
}

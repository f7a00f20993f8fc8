//! Draws the invented valley of the Thrindle, the landscape of the example study.
//!
//! `cargo run --example draw_thrindle -- landscapes/thrindle` writes the GeoJSON files that stand there, byte for byte.
//! All is drawn in a plane of kilometres (x to the east, y to the north) and laid on the open ocean at the very end.

mod outline;
mod plane;
mod sites;
mod streams;
mod survey;
mod works;

use std::path::Path;

use eyot::num;
use geo::{Area, Coord, Distance, Euclidean, Geometry, MapCoords, MultiPolygon, Validation};
use rand::SeedableRng;
use rand_xoshiro::Xoshiro256PlusPlus as Rng;
use serde_json::{Value, json};

use outline::{Outline, oxbow, tidy};
use plane::{left_of, normal};
use sites::{Form, SITES, Site, Water};
use streams::Valley;

/// The seed of the watercourses; those of the sites follow it, so that a change of one site leaves the others alone.
const SEED: u64 = 481_516;
/// Fens keep at least this far from each other.
const GAP_KM: f64 = 0.06;
/// The south-west corner of the plane: deep water, more than a thousand kilometres from the mainland.
const CORNER: Coord = Coord { x: -31.42, y: 47.08 };

fn main() -> std::io::Result<()> {
    let folder = std::env::args().nth(1).unwrap_or_else(|| "landscapes/thrindle".to_owned());
    std::fs::create_dir_all(&folder)?;
    for (name, text) in files() {
        std::fs::write(Path::new(&folder).join(name), text)?;
    }
    Ok(())
}

/// The files of the landscape: their names and texts.
pub(crate) fn files() -> [(&'static str, String); 4] {
    let valley = Valley::carve(&mut Rng::seed_from_u64(SEED));
    let mut shapes = Vec::new();
    let mut patches = Vec::new();
    for (site, seed) in SITES.iter().zip(SEED + 1..) {
        let mut rng = Rng::seed_from_u64(seed);
        let shape = settle(site, &valley, &shapes, &mut rng);
        patches.push(survey::patch(site, &shape, &mut rng));
        shapes.push(shape);
    }
    [
        ("patches.geojson", collection(&patches)),
        ("quarry.geojson", collection(&[works::quarry(&shapes)])),
        ("corridor.geojson", collection(&works::corridors(&valley, &shapes))),
        ("road.geojson", collection(&[works::road(&valley)])),
    ]
}

/// A shape for a site, clear of all that stand already: place and outline are drawn anew, ever farther from the place
/// asked for, until one fits.
fn settle(site: &Site, valley: &Valley, others: &[MultiPolygon], rng: &mut Rng) -> MultiPolygon {
    let area_km2 = site.form.draw_area_ha(rng) / 100.0;
    let stream = valley.stream(site.water);
    for attempt in 0..500 {
        let stray_km = 0.001 * f64::from(attempt);
        let along_km = site.along_km + stray_km * normal(rng);
        let (middle, ahead) = (stream.at(along_km), stream.direction(along_km));
        let place = middle + left_of(ahead) * (site.aside_km + stray_km * normal(rng));
        let shape = tidy(&match site.form {
            Form::Oxbow => oxbow(place, middle, rng),
            _ => Outline::draw(place, ahead, site.form, rng).of_area(area_km2, &valley.channels),
        });
        if is_sound(&shape, site.form) && others.iter().all(|other| Euclidean.distance(&shape, other) >= GAP_KM) {
            return shape;
        }
    }
    panic!("{} finds no room", site.name);
}

/// Whether a shape is valid as it will stand in the file, and has the parts and holes of its form.
fn is_sound(shape: &MultiPolygon, form: Form) -> bool {
    let parts = if matches!(form, Form::TwoBanks) { 2 } else { 1 };
    let holes = usize::from(matches!(form, Form::Ringed));
    let total_km2 = shape.unsigned_area();
    on_the_ocean(shape).is_valid()
        && shape.0.len() == parts
        && shape.iter().all(|part| part.unsigned_area() > 0.2 * total_km2)
        && shape.iter().map(|part| part.interiors().len()).sum::<usize>() == holes
}

/// The same in longitude and latitude, to six decimals: within the tenth of a metre.
fn on_the_ocean<T: MapCoords<f64, f64>>(shape: &T) -> T::Output {
    const KM_PER_DEGREE: f64 = 111.2;
    let round = |degrees: f64| (degrees * 1e6).round() / 1e6;
    shape.map_coords(|at| {
        let latitude = CORNER.y + at.y / KM_PER_DEGREE;
        let longitude = CORNER.x + at.x / (KM_PER_DEGREE * num::cos(CORNER.y.to_radians()));
        Coord { x: round(longitude), y: round(latitude) }
    })
}

/// A feature; its properties stand first, so that a line of the file begins with what it is about.
fn feature(properties: Value, shape: &Geometry) -> Value {
    let geometry = geojson::Geometry::from(&on_the_ocean(shape));
    json!({ "type": "Feature", "properties": properties, "geometry": geometry })
}

/// A feature collection with one feature a line.
fn collection(features: &[Value]) -> String {
    let lines: Vec<String> = features.iter().map(Value::to_string).collect();
    format!("{{\"type\":\"FeatureCollection\",\"features\":[\n{}\n]}}\n", lines.join(",\n"))
}

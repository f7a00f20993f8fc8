//! What is proposed in the valley: a quarry, strips of cover, a road.

use geo::{Coord, Geometry, InteriorPoint, LineString, MultiPolygon, Polygon, Simplify};
use serde_json::{Value, json};

use super::feature;
use super::sites::{SITES, Water};
use super::streams::Valley;

/// The ground of a gravel quarry: most of Hallow Fen, and a corner of two of its neighbours.
pub(crate) fn quarry(shapes: &[MultiPolygon]) -> Value {
    let middle = middle(&shapes[position("Hallow Fen")]);
    let corners = [
        (-0.22, -0.23),
        (-0.12, -0.31),
        (-0.17, -0.69),
        (0.03, -0.71),
        (0.3, -0.27),
        (0.51, 0.27),
        (0.61, 0.76),
        (0.34, 0.77),
        (0.19, 0.45),
        (-0.05, 0.18),
    ];
    let ring = corners.map(|(x, y)| middle + Coord { x, y });
    named("gravel quarry", Polygon::new(ring.into_iter().collect(), Vec::new()).into())
}

/// Strips of sedge and willow on the river bank, from the upper cluster to the two stepping stones.
pub(crate) fn corridors(valley: &Valley, shapes: &[MultiPolygon]) -> [Value; 2] {
    let strip = |name, from, to| {
        let (from, to) = (position(from), position(to));
        let bank = valley.stream(Water::Thrindle).left_bank(SITES[from].along_km, SITES[to].along_km);
        let line: LineString =
            std::iter::once(middle(&shapes[from])).chain(bank).chain([middle(&shapes[to])]).collect();
        named(name, line.simplify(0.01).into())
    };
    [strip("upper strip", "Sallow Fen", "Ferryman's Carr"), strip("lower strip", "Ferryman's Carr", "Halfway Fen")]
}

/// A road across the valley between the two stepping stones.
pub(crate) fn road(valley: &Valley) -> Value {
    let bridge = valley.stream(Water::Thrindle).at(15.4);
    let bends = [(-1.1, -7.0), (-0.6, -3.4), (0.1, -1.2), (0.0, 0.0), (-0.2, 1.3), (0.5, 3.3), (0.7, 6.0)];
    named("valley road", bends.map(|(x, y)| bridge + Coord { x, y }).into_iter().collect::<LineString>().into())
}

fn position(name: &str) -> usize {
    SITES.iter().position(|site| site.name == name).expect("a name of the list")
}

fn middle(shape: &MultiPolygon) -> Coord {
    shape.interior_point().expect("a shape with an area").into()
}

fn named(name: &str, shape: Geometry) -> Value {
    feature(json!({ "name": name }), &shape)
}

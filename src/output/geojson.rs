//! The tables of patches and links as GeoJSON (RFC 7946), in the coordinates of the input, with its `crs` member.
//!
//! Properties have the names and the order of the CSV columns, and keep their types: a number is a number, and what is
//! empty there is null here. Features stand one a line.

use std::io;

use geo::{BoundingRect, Centroid, Coord, CoordsIter, Geometry, LineString, MapCoords, MultiPolygon, Polygon};
use geojson::{Feature, GeometryValue, JsonObject, JsonValue};

use super::columns::{self, Cell, Column};
use crate::landscape::{Crs, Landscape};
use crate::outcome::Outcome;

/// Writes `by_patch.geojson`: the patches' own geometry, outer rings anticlockwise and holes clockwise.
///
/// # Errors
/// If `to` cannot be written.
pub fn by_patch(outcome: &Outcome, landscape: &Landscape, to: impl io::Write) -> io::Result<()> {
    let rows = outcome.by_patch.iter().zip(&landscape.patches);
    let features = rows.map(|(row, patch)| {
        let shape = wound(&patch.shape, landscape.crs);
        feature(Some((&shape).into()), properties(outcome, columns::by_patch(outcome.counted), row))
    });
    collection(landscape.crs_member.as_ref(), features, to)
}

/// Writes `by_link.geojson`: straight lines between the centroids of the patches, cut where they cross the antimeridian.
///
/// # Errors
/// If `to` cannot be written.
pub fn by_link(outcome: &Outcome, landscape: &Landscape, to: impl io::Write) -> io::Result<()> {
    let centroids: Vec<_> = landscape.patches.iter().map(|patch| centroid(&patch.shape, landscape.crs)).collect();
    let features = outcome.by_link.iter().map(|row| {
        let ends = centroids[row.from as usize].zip(centroids[row.to as usize]);
        let line = ends.map(|(from, to)| link_line(from, to, landscape.crs));
        feature(line, properties(outcome, columns::by_link(outcome.counted), row))
    });
    collection(landscape.crs_member.as_ref(), features, to)
}

fn collection(
    crs_member: Option<&JsonValue>,
    features: impl Iterator<Item = Feature>,
    mut to: impl io::Write,
) -> io::Result<()> {
    writeln!(to, "{{\n\"type\": \"FeatureCollection\",")?;
    if let Some(member) = crs_member {
        writeln!(to, "\"crs\": {member},")?;
    }
    write!(to, "\"features\": [")?;
    for (position, feature) in features.enumerate() {
        to.write_all(if position == 0 { b"\n" } else { b",\n" })?;
        serde_json::to_writer(&mut to, &feature)?;
    }
    writeln!(to, "\n]\n}}")
}

fn feature(geometry: Option<GeometryValue>, properties: JsonObject) -> Feature {
    Feature { geometry: geometry.map(geojson::Geometry::new), properties: Some(properties), ..Feature::default() }
}

fn properties<Row>(outcome: &Outcome, columns: &[Column<Row>], row: &Row) -> JsonObject {
    let value = |cell| match cell {
        Cell::Text(text) => text.into(),
        Cell::Whole(number) => number.into(),
        Cell::Number(number) => number.into(),
        Cell::Flag(flag) => flag.into(),
        Cell::Empty => JsonValue::Null,
    };
    let columns = columns.iter().filter(|column| (column.stands_in)(outcome));
    columns.map(|column| (column.name.to_owned(), value((column.cell)(outcome, row)))).collect()
}

/// The same geometry with its rings wound by the right-hand rule (RFC 7946, section 3.1.6).
fn wound(shape: &Geometry<f64>, crs: Crs) -> Geometry<f64> {
    match shape {
        Geometry::Polygon(polygon) => wound_polygon(polygon, crs).into(),
        Geometry::MultiPolygon(parts) => {
            MultiPolygon(parts.iter().map(|part| wound_polygon(part, crs)).collect()).into()
        }
        other => other.clone(),
    }
}

fn wound_polygon(polygon: &Polygon<f64>, crs: Crs) -> Polygon<f64> {
    let wind = |ring: &LineString<f64>, left: bool| {
        let mut ring = ring.clone();
        if winds_left(&ring, crs) != left {
            ring.0.reverse();
        }
        ring
    };
    let holes = polygon.interiors().iter().map(|hole| wind(hole, false)).collect();
    Polygon::new(wind(polygon.exterior(), true), holes)
}

/// Whether a ring runs anticlockwise. It is walked step by step from its first corner, the short way round the world, so
/// that a ring that jumps from 180 to -180 is not taken for its mirror image.
fn winds_left(ring: &LineString<f64>, crs: Crs) -> bool {
    let mut twice_area = 0.0;
    let mut here = Coord { x: 0.0, y: 0.0 };
    for side in ring.lines() {
        let step = Coord { x: short_way(side.dx(), crs), y: side.dy() };
        twice_area += here.x * step.y - here.y * step.x;
        here = here + step;
    }
    twice_area > 0.0
}

/// A difference of longitudes, taken the short way round the world; metres are left alone.
fn short_way(difference: f64, crs: Crs) -> f64 {
    match crs {
        Crs::Degrees if difference > 180.0 => difference - 360.0,
        Crs::Degrees if difference < -180.0 => difference + 360.0,
        _ => difference,
    }
}

/// Where the lines of a patch begin and end; `None` for an empty geometry. A patch on both sides of the antimeridian has
/// its centroid among its parts and not on the other side of the world.
fn centroid(shape: &Geometry<f64>, crs: Crs) -> Option<Coord<f64>> {
    let first = shape.coords_iter().next()?;
    let together = shape.map_coords(|at| Coord { x: first.x + short_way(at.x - first.x, crs), y: at.y });
    let mut centroid = together.centroid()?.0;
    let bounds = shape.bounding_rect()?;
    // An input whose longitudes themselves run on past 180 is left as it is, so that lines meet its patches.
    if crs == Crs::Degrees && bounds.min().x >= -180.0 && bounds.max().x <= 180.0 {
        centroid.x = within_180(centroid.x);
    }
    Some(centroid)
}

fn within_180(longitude: f64) -> f64 {
    if longitude > 180.0 {
        longitude - 360.0
    } else if longitude < -180.0 {
        longitude + 360.0
    } else {
        longitude
    }
}

/// A straight line the short way round the world, in two parts where it crosses the antimeridian (RFC 7946, section
/// 3.1.9).
fn link_line(from: Coord<f64>, to: Coord<f64>, crs: Crs) -> GeometryValue {
    let line = |from_x, to_x| GeometryValue::new_line_string([[from_x, from.y], [to_x, to.y]]);
    let across = to.x - from.x;
    let step = short_way(across, crs);
    if (across - step).abs() < 180.0 {
        return line(from.x, to.x);
    }
    // An end on the antimeridian itself, or past it, is written as the other side has it: nothing is left to cut.
    if from.x.abs() >= 180.0 {
        return line(from.x + 360.0 * across.signum(), to.x);
    }
    if to.x.abs() >= 180.0 {
        return line(from.x, to.x - 360.0 * across.signum());
    }
    let edge = 180.0 * step.signum();
    let latitude = from.y + (to.y - from.y) * (edge - from.x) / step;
    GeometryValue::new_multi_line_string([[[from.x, from.y], [edge, latitude]], [[-edge, latitude], [to.x, to.y]]])
}

#[cfg(test)]
mod tests {
    use super::*;
    use geo::{point, polygon};

    fn at(x: f64, y: f64) -> Coord<f64> {
        Coord { x, y }
    }

    #[test]
    fn rings_are_wound_by_the_right_hand_rule() {
        let clockwise: Polygon<f64> = polygon!(
            exterior: [(x: 0., y: 0.), (x: 0., y: 4.), (x: 4., y: 4.), (x: 4., y: 0.)],
            interiors: [[(x: 1., y: 1.), (x: 2., y: 1.), (x: 2., y: 2.), (x: 1., y: 2.)]],
        );
        let Geometry::Polygon(turned) = wound(&clockwise.clone().into(), Crs::Metres) else { panic!("a polygon") };
        assert_eq!(turned.exterior().0[1], at(4.0, 0.0));
        assert_eq!(turned.interiors()[0].0[1], at(1.0, 2.0));
        let again = wound(&turned.clone().into(), Crs::Metres);
        assert_eq!(again, turned.into(), "what is right is left alone");
    }

    #[test]
    fn a_ring_that_jumps_across_the_antimeridian_is_not_mirrored() {
        // West edge at 179.9, east edge at -179.9: anticlockwise on the globe, clockwise in the raw numbers.
        let ring: Polygon<f64> = polygon![(x: 179.9, y: 0.), (x: -179.9, y: 0.), (x: -179.9, y: 1.), (x: 179.9, y: 1.)];
        assert_eq!(wound(&ring.clone().into(), Crs::Degrees), ring.clone().into());
        assert_ne!(wound(&ring.clone().into(), Crs::Metres), ring.into());
    }

    #[test]
    fn the_centroid_of_a_patch_across_the_antimeridian_lies_in_it() {
        let west: Polygon<f64> = polygon![(x: 179.9, y: 0.), (x: 180., y: 0.), (x: 180., y: 1.), (x: 179.9, y: 1.)];
        let east: Polygon<f64> = polygon![(x: -180., y: 0.), (x: -179.7, y: 0.), (x: -179.7, y: 1.), (x: -180., y: 1.)];
        let found = centroid(&MultiPolygon(vec![west, east]).into(), Crs::Degrees).unwrap();
        assert!((found.x + 179.9).abs() < 1e-9 && (found.y - 0.5).abs() < 1e-9, "{found:?}");
        let past: Polygon<f64> = polygon![(x: 179.9, y: 0.), (x: 180.3, y: 0.), (x: 180.3, y: 1.), (x: 179.9, y: 1.)];
        let found = centroid(&past.into(), Crs::Degrees).unwrap();
        assert!((found.x - 180.1).abs() < 1e-9, "an input that runs on past 180 is followed: {found:?}");
        assert_eq!(centroid(&point!(x: 3.0, y: 4.0).into(), Crs::Metres), Some(at(3.0, 4.0)));
        assert_eq!(centroid(&MultiPolygon(Vec::new()).into(), Crs::Degrees), None);
    }

    #[test]
    fn lines_are_cut_at_the_antimeridian() {
        let degrees = |from, to| link_line(from, to, Crs::Degrees);
        let cut = GeometryValue::new_multi_line_string([[[179.0, 0.0], [180.0, 1.0]], [[-180.0, 1.0], [-178.0, 3.0]]]);
        assert_eq!(degrees(at(179.0, 0.0), at(-178.0, 3.0)), cut);
        let back = GeometryValue::new_multi_line_string([[[-178.0, 3.0], [-180.0, 1.0]], [[180.0, 1.0], [179.0, 0.0]]]);
        assert_eq!(degrees(at(-178.0, 3.0), at(179.0, 0.0)), back);
        let line = |a: [f64; 2], b: [f64; 2]| GeometryValue::new_line_string([a, b]);
        assert_eq!(degrees(at(5.0, 52.0), at(6.0, 53.0)), line([5.0, 52.0], [6.0, 53.0]));
        assert_eq!(degrees(at(180.0, 0.0), at(-179.5, 3.0)), line([-180.0, 0.0], [-179.5, 3.0]));
        assert_eq!(degrees(at(-179.5, 3.0), at(180.0, 0.0)), line([-179.5, 3.0], [-180.0, 0.0]));
        assert_eq!(link_line(at(0.0, 0.0), at(900.0, 3.0), Crs::Metres), line([0.0, 0.0], [900.0, 3.0]));
    }
}

//! What a patch measures: area, centroid, radius, and its outline in the plane of the landscape.

use geo::{Area, Centroid, Coord, LineString, MultiPolygon, Polygon};

use super::ground::Ground;
use super::plane::Plane;

/// A patch in the plane.
#[derive(Debug, Clone)]
pub(super) struct Measured {
    /// area in hectares, rounded to 0.01 m2; 0 for a point
    pub(super) area_ha: f64,
    /// centroid, kilometres
    pub(super) centroid_km: [f64; 2],
    /// farthest that the outline lies from the centroid, kilometres
    pub(super) radius_km: f64,
    /// outline, kilometres; empty for a point
    pub(super) outline_km: MultiPolygon<f64>,
}

/// Measures a patch in a plane.
pub(super) fn measure(ground: &Ground, plane: &Plane) -> Measured {
    let outline = match ground {
        Ground::Point(at) => {
            let at = plane.position_km(*at);
            let outline_km = MultiPolygon::new(Vec::new());
            return Measured { area_ha: 0.0, centroid_km: [at.x, at.y], radius_km: 0.0, outline_km };
        }
        Ground::Outline(outline) => outline,
    };
    let outline_km: MultiPolygon<f64> = outline.iter().map(|part| in_plane(part, plane)).collect();
    let centroid = outline_km.centroid().map_or(Coord { x: 0.0, y: 0.0 }, |point| point.0);
    let shells = outline_km.iter().flat_map(|part| part.exterior().coords());
    let farthest_squared = shells.map(|at| distance_squared(centroid, *at)).fold(0.0, f64::max);
    Measured {
        area_ha: round_area_ha(outline_km.unsigned_area() * HECTARES_PER_KM2),
        centroid_km: [centroid.x, centroid.y],
        radius_km: farthest_squared.sqrt(),
        outline_km,
    }
}

fn distance_squared(a: Coord<f64>, b: Coord<f64>) -> f64 {
    let apart = b - a;
    apart.x * apart.x + apart.y * apart.y
}

const HECTARES_PER_KM2: f64 = 100.0;

/// Rounds an area in hectares to 0.01 m2.
pub(super) fn round_area_ha(area_ha: f64) -> f64 {
    (area_ha * 1e6).round() / 1e6
}

/// Rounds a distance in kilometres to 1 mm.
pub(super) fn round_distance_km(distance_km: f64) -> f64 {
    (distance_km * 1e6).round() / 1e6
}

fn in_plane(part: &Polygon<f64>, plane: &Plane) -> Polygon<f64> {
    let ring = |ring: &LineString<f64>| LineString::new(plane.ring_km(&ring.0));
    Polygon::new(ring(part.exterior()), part.interiors().iter().map(ring).collect())
}

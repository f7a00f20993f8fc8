//! The plane in which a landscape is measured: planar metres as they are, or a Lambert azimuthal equal-area projection
//! centred on the landscape.

use geo::{Coord, Rect};

use super::patch::Crs;
use crate::num;

/// An ellipsoid of revolution.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Ellipsoid {
    /// equatorial radius in metres
    pub equatorial_m: f64,
    /// square of the eccentricity, above 0
    pub eccentricity_squared: f64,
}

const WGS84_FLATTENING: f64 = 1.0 / 298.257_223_563;

/// The ellipsoid of the World Geodetic System 1984, on which longitudes and latitudes of GeoJSON stand (RFC 7946).
pub const WGS84: Ellipsoid =
    Ellipsoid { equatorial_m: 6_378_137.0, eccentricity_squared: WGS84_FLATTENING * (2.0 - WGS84_FLATTENING) };

/// The centre stays this far off the poles, where the formulas divide 0 by 0. Distances suffer nothing from a centre one
/// degree aside.
const MOST_NORTHERN_CENTRE: f64 = 89.0;

/// The farthest from the centre that a landscape may lie, as the cosine of the angle: 60 degrees, some 6,700 km.
const FARTHEST_COSINE: f64 = 0.5;

/// The Lambert azimuthal equal-area projection of an ellipsoid, oblique aspect.
///
/// # Units
/// degrees in, metres out
///
/// # Source
/// Snyder 1987, Map projections: a working manual, USGS Professional Paper 1395, equations 3-11 to 3-13 and 24-17 to 24-20.
/// The sine and the logarithm are the library's own, so that every platform measures the same.
#[derive(Debug, Clone, Copy)]
pub struct EqualAreaPlane {
    ellipsoid: Ellipsoid,
    centre_longitude: f64,
    /// q at the pole: the authalic sphere's surface over that of its cylinder
    polar_q: f64,
    authalic_radius_m: f64,
    /// sine and cosine of the centre's authalic latitude
    centre: (f64, f64),
    /// keeps the scale true at the centre
    stretch: f64,
}

impl EqualAreaPlane {
    /// The projection centred on a longitude and a latitude, both in degrees. The latitude is kept within 89 degrees of the
    /// equator.
    pub fn new(ellipsoid: Ellipsoid, centre_longitude: f64, centre_latitude: f64) -> Self {
        let latitude = centre_latitude.clamp(-MOST_NORTHERN_CENTRE, MOST_NORTHERN_CENTRE).to_radians();
        let (sine, cosine) = (num::sin(latitude), num::cos(latitude));
        let polar_q = authalic_q(ellipsoid, 1.0);
        let authalic_radius_m = ellipsoid.equatorial_m * (polar_q / 2.0).sqrt();
        let centre = authalic(ellipsoid, polar_q, sine);
        let parallel = cosine / (1.0 - ellipsoid.eccentricity_squared * sine * sine).sqrt();
        let stretch = ellipsoid.equatorial_m * parallel / (authalic_radius_m * centre.1);
        Self { ellipsoid, centre_longitude, polar_q, authalic_radius_m, centre, stretch }
    }

    /// Easting and northing in metres of a point given by longitude and latitude in degrees.
    pub fn forward(&self, longitude: f64, latitude: f64) -> [f64; 2] {
        let (sine, cosine) = authalic(self.ellipsoid, self.polar_q, num::sin(latitude.to_radians()));
        let east = (longitude - self.centre_longitude).to_radians();
        let (sine_east, cosine_east) = (num::sin(east), num::cos(east));
        let (centre_sine, centre_cosine) = self.centre;
        let nearness = 1.0 + centre_sine * sine + centre_cosine * cosine * cosine_east;
        let b = self.authalic_radius_m * (2.0 / nearness).sqrt();
        let x = b * self.stretch * cosine * sine_east;
        let y = b / self.stretch * (centre_cosine * sine - centre_sine * cosine * cosine_east);
        [x, y]
    }
}

/// q of equation 3-12, from the sine of a latitude.
fn authalic_q(ellipsoid: Ellipsoid, sine: f64) -> f64 {
    let e2 = ellipsoid.eccentricity_squared;
    let e = e2.sqrt();
    let logarithm = num::ln_1p(-e * sine) - num::ln_1p(e * sine);
    (1.0 - e2) * (sine / (1.0 - e2 * sine * sine) - logarithm / (2.0 * e))
}

/// Sine and cosine of the authalic latitude (equation 3-11), from the sine of a latitude.
fn authalic(ellipsoid: Ellipsoid, polar_q: f64, sine: f64) -> (f64, f64) {
    let sine = (authalic_q(ellipsoid, sine) / polar_q).clamp(-1.0, 1.0);
    (sine, (1.0 - sine * sine).sqrt())
}

/// From the coordinates of a file to kilometres in the plane of its landscape.
#[derive(Debug, Clone, Copy)]
pub(super) struct Plane {
    projection: Option<EqualAreaPlane>,
    /// longest step in degrees along an edge; longer edges are measured through points between
    longest_step: f64,
}

/// Why there is no plane.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum NoPlane {
    /// there is nothing to be centred on
    Nothing,
    /// the patches lie too far apart
    TooWide,
}

impl Plane {
    /// The plane for patches that lie within these boxes (in the coordinates of the file).
    ///
    /// The centre is the middle of the corners as they lie in space, which knows no antimeridian, and does not depend on
    /// the order of the patches.
    pub(super) fn around(crs: Crs, boxes: &[Rect<f64>]) -> Result<Self, NoPlane> {
        if crs == Crs::Metres {
            return Ok(Self { projection: None, longest_step: f64::INFINITY });
        }
        let directions: Vec<[f64; 3]> = boxes
            .iter()
            .flat_map(|bounds| {
                let (low, high) = (bounds.min(), bounds.max());
                [(low.x, low.y), (low.x, high.y), (high.x, low.y), (high.x, high.y)]
            })
            .map(|(longitude, latitude)| direction(longitude, latitude))
            .collect();
        let first = directions.first().ok_or(NoPlane::Nothing)?;
        let (low, high) = directions.iter().fold((*first, *first), |(low, high), at| {
            ([0, 1, 2].map(|axis| low[axis].min(at[axis])), [0, 1, 2].map(|axis| high[axis].max(at[axis])))
        });
        let middle = [0, 1, 2].map(|axis| f64::midpoint(low[axis], high[axis]));
        let length = dot(middle, middle).sqrt();
        let nearest_cosine = directions.iter().map(|at| dot(*at, middle) / length).fold(f64::INFINITY, f64::min);
        if length <= 0.0 || nearest_cosine <= FARTHEST_COSINE {
            return Err(NoPlane::TooWide);
        }
        let latitude = num::atan2(middle[2], (middle[0] * middle[0] + middle[1] * middle[1]).sqrt()).to_degrees();
        let longitude = num::atan2(middle[1], middle[0]).to_degrees();
        let width = boxes.iter().map(|bounds| bounds.width().max(bounds.height())).fold(0.0, f64::max);
        let projection = EqualAreaPlane::new(WGS84, longitude, latitude);
        // A straight line in degrees leaves the straight line of the plane by the square of its length: 3 cm at 0.01
        // degrees and 50 degrees north. Giants are cut no finer than their thousandth, to bound the work.
        Ok(Self { projection: Some(projection), longest_step: (width / 1000.0).max(0.01) })
    }

    /// A position in the plane, in kilometres.
    pub(super) fn position_km(&self, at: Coord<f64>) -> Coord<f64> {
        let [x, y] = match &self.projection {
            Some(projection) => projection.forward(at.x, at.y),
            None => [at.x, at.y],
        };
        Coord { x: x / 1000.0, y: y / 1000.0 }
    }

    /// A closed ring in the plane, in kilometres. Edges run straight in the coordinates of the file, so long ones in
    /// degrees are followed through points between their ends.
    pub(super) fn ring_km(&self, ring: &[Coord<f64>]) -> Vec<Coord<f64>> {
        let mut placed = Vec::with_capacity(ring.len());
        placed.extend(ring.first().map(|first| self.position_km(*first)));
        for edge in ring.windows(2) {
            let (start, end) = (edge[0], edge[1]);
            let delta = end - start;
            let steps = (delta.x.abs().max(delta.y.abs()) / self.longest_step).ceil().max(1.0);
            let mut step = 1.0;
            while step < steps {
                placed.push(self.position_km(start + delta * (step / steps)));
                step += 1.0;
            }
            placed.push(self.position_km(end));
        }
        placed
    }
}

fn direction(longitude: f64, latitude: f64) -> [f64; 3] {
    let (longitude, latitude) = (longitude.to_radians(), latitude.to_radians());
    [num::cos(latitude) * num::cos(longitude), num::cos(latitude) * num::sin(longitude), num::sin(latitude)]
}

fn dot(a: [f64; 3], b: [f64; 3]) -> f64 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

#[cfg(test)]
mod tests {
    use super::*;

    fn at(x: f64, y: f64) -> Rect<f64> {
        Rect::new(Coord { x, y }, Coord { x: x + 0.1, y: y + 0.1 })
    }

    #[test]
    fn the_centre_lies_amid_the_patches_across_the_antimeridian() {
        let plane = Plane::around(Crs::Degrees, &[at(179.5, -16.6), at(-179.6, -16.6)]).unwrap();
        for (x, y) in [(179.5, -16.6), (-179.6, -16.6)] {
            let placed = plane.position_km(Coord { x, y });
            assert!(placed.x.abs() < 60.0 && placed.y.abs() < 20.0, "{placed:?}");
        }
    }

    #[test]
    fn patches_on_two_sides_of_the_earth_share_no_plane() {
        assert_eq!(Plane::around(Crs::Degrees, &[at(0.0, 50.0), at(180.0, -50.0)]).unwrap_err(), NoPlane::TooWide);
        assert_eq!(Plane::around(Crs::Degrees, &[]).unwrap_err(), NoPlane::Nothing);
    }

    #[test]
    fn the_pole_has_a_plane() {
        let plane = Plane::around(Crs::Degrees, &[at(-180.0, 89.5), at(0.0, 89.5), at(90.0, 89.8)]).unwrap();
        let pole = plane.position_km(Coord { x: 12.0, y: 90.0 });
        assert!(pole.x.is_finite() && pole.y.is_finite() && pole.y.abs() < 200.0);
    }

    #[test]
    fn long_edges_in_degrees_are_followed() {
        let plane = Plane::around(Crs::Degrees, &[Rect::new((5.0, 52.0), (6.0, 53.0))]).unwrap();
        let ring = plane.ring_km(&[Coord { x: 5.0, y: 53.0 }, Coord { x: 6.0, y: 53.0 }]);
        assert_eq!(ring.len(), 101);
        // The parallel bulges from its chord by about L^2 tan(latitude) / 8R = 67 km^2 * 1.327 / 51000 km.
        let sagitta = (ring[0].y + ring[100].y) / 2.0 - ring[50].y;
        assert!((sagitta.abs() - 0.117).abs() < 0.003, "{sagitta}");
    }
}

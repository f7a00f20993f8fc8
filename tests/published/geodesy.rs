//! Areas and distances on the ellipsoid and in the plane.
//!
//! Sources: the tool's own promise is areas and distances within 0.1 % of the geodesic truth up to 500 km across. The
//! values named "computed" were recomputed outside of this crate with independent implementations of the method of Karney
//! 2013, Algorithms for geodesics, J. Geodesy 87, and of an independent planar geometry library.

#[path = "../helpers/landscape.rs"]
mod study;

use eyot::landscape::{Ellipsoid, EqualAreaPlane, Landscape, Neighbours};
use geo::{Bearing, Distance, Geodesic, GeodesicMeasure, Point};
use study::{box_polygon, box_ring, collection, point, polygon, ring_list};

const TABLE: &str = "patches = \"p.geojson\"\nid = \"patch\"\ncapacity = { per_hectare = 1 }\n\
                     start = { share_of_capacity = 0.5 }\n";

fn landscape(geometries: &[&str], more: &str) -> Landscape {
    let table = format!("{TABLE}{more}");
    study::read(&table, &[("p.geojson", collection(geometries).as_bytes())], &[]).sound()
}

/// Distance in metres between two geometries, through the files and the plane of the tool.
fn distance_m(a: &str, b: &str, more: &str) -> f64 {
    let landscape = landscape(&[a, b], more);
    Neighbours::new(&landscape).distance_km(0, 1) * 1000.0
}

fn area_m2(geometry: &str) -> f64 {
    landscape(&[geometry], "").patches[0].area_ha * 1e4
}

fn assert_share(value: f64, truth: f64, share: f64, what: &str) {
    assert!((value / truth - 1.0).abs() <= share, "{what}: {value} against {truth}");
}

fn degrees(degrees: f64, minutes: f64, seconds: f64) -> f64 {
    degrees + minutes / 60.0 + seconds / 3600.0
}

const POINTS: &str = "area = { property = \"ha\" }";

/// The line Flinders Peak - Buninyong: 54972.271 m, azimuths 306°52'05.37" and 127°10'25.07" on GRS80. Source: ICSM, Geocentric Datum of
/// Australia Technical Manual, worked example of Vincenty's formulae (verified in the published manual).
#[test]
fn the_published_line_flinders_peak_to_buninyong() {
    let flinders = (degrees(144.0, 25.0, 29.52440), -degrees(37.0, 57.0, 3.72030));
    let buninyong = (degrees(143.0, 55.0, 35.38390), -degrees(37.0, 39.0, 10.15610));
    let (from, to) = (Point::new(flinders.0, flinders.1), Point::new(buninyong.0, buninyong.1));
    let grs80 = GeodesicMeasure::new(6_378_137.0, 1.0 / 298.257_222_101);
    assert!((grs80.distance(from, to) - 54_972.271).abs() < 1e-3);
    let second = 1.0 / 3600.0;
    assert!((grs80.bearing(from, to) - degrees(306.0, 52.0, 5.37)).abs() < 0.01 * second);
    assert!((grs80.bearing(to, from) - degrees(127.0, 10.0, 25.07)).abs() < 0.01 * second);

    let ours = distance_m(&point(flinders.0, flinders.1), &point(buninyong.0, buninyong.1), POINTS);
    assert_share(ours, 54_972.271, 1e-3, "in the plane");
}

/// Geodesics on WGS84, computed by the method of Karney 2013. A sphere of the mean radius is up to 0.56 % off.
#[test]
fn geodesic_lengths() {
    for (from, to, metres) in [
        ((0.0, 0.0), (0.0, 1.0), 110_574.389),
        ((0.0, 0.0), (1.0, 0.0), 111_319.491),
        ((5.0, 52.0), (5.9, 52.45), 79_305.070),
        ((179.95, -16.5), (-179.95, -16.5), 10_676.415),
        ((18.9, 69.6), (19.4, 69.7), 22_390.070),
        ((7.0, 47.0), (11.5, 50.5), 510_683.346),
    ] {
        let routine = Geodesic.distance(Point::from(from), Point::from(to));
        assert!((routine - metres).abs() < 1e-3, "{routine} against {metres}");
        for more in [POINTS, &format!("{POINTS}\ndistance = \"centroids\"")] {
            let ours = distance_m(&point(from.0, from.1), &point(to.0, to.1), more);
            assert_share(ours, metres, 1e-3, &format!("{from:?} to {to:?}"));
        }
    }
}

const D: &str = "-3.7200 56.1500, -3.7050 56.1480, -3.6980 56.1550, -3.7080 56.1620, -3.7190 56.1590, -3.7200 56.1500";

/// Polygon areas on WGS84 with geodesic edges, computed by the method of Karney 2013; the cell between parallels is Snyder
/// 1987, USGS Professional Paper 1395, equation 3-12. The promise is 0.1 %; 0.01 % is held.
#[test]
fn polygon_areas() {
    let b = box_ring(5.0, 52.0, 5.02, 52.01);
    let hole = box_ring(5.005, 52.003, 5.01, 52.006);
    for (geometry, area) in [
        (polygon(&[&b]), 1_528_155.23),
        (polygon(&[&b, &hole]), 1_413_542.32),
        (box_polygon(179.99, -16.51, 180.01, -16.5), 2_362_928.01),
        (polygon(&[D]), 1_449_602.03),
        (box_polygon(5.0, 52.0, 6.0, 53.0), 7_556_565_706.0),
    ] {
        assert_share(area_m2(&geometry), area, 1e-4, &geometry);
    }
    // Straight in longitude and latitude (RFC 7946) the last one is the cell between parallels.
    assert_share(area_m2(&box_polygon(5.0, 52.0, 6.0, 53.0)), 7_556_735_896.0, 1e-6, "cell between parallels");
}

#[test]
fn the_way_a_ring_winds_changes_no_area() {
    let backward = "5.00 52.00, 5.00 52.01, 5.02 52.01, 5.02 52.00, 5.00 52.00";
    let hole_forward = box_ring(5.005, 52.003, 5.01, 52.006);
    assert_share(area_m2(&polygon(&[backward])), 1_528_155.23, 1e-4, "clockwise");
    assert_share(area_m2(&polygon(&[backward, &hole_forward])), 1_413_542.32, 1e-4, "clockwise with a hole");
}

/// The same ground, cut at the antimeridian as RFC 7946 section 3.1.9 asks, running on beyond 180, or with the sign changed
/// within the ring.
#[test]
fn the_antimeridian_changes_no_area() {
    let cut = format!(
        r#"{{"type":"MultiPolygon","coordinates":[[{}],[{}]]}}"#,
        ring_list(&[&box_ring(179.99, -16.51, 180.0, -16.5)]),
        ring_list(&[&box_ring(-180.0, -16.51, -179.99, -16.5)])
    );
    let jumping = polygon(&["179.99 -16.51, -179.99 -16.51, -179.99 -16.5, 179.99 -16.5, 179.99 -16.51"]);
    for geometry in [&cut, &jumping] {
        assert_share(area_m2(geometry), 2_362_928.01, 1e-4, geometry);
    }
    assert!((area_m2(&cut) - area_m2(&jumping)).abs() < 0.02);
}

/// Source: Snyder 1987, Map projections: a working manual, USGS Professional Paper 1395, numerical examples of the Lambert
/// azimuthal equal-area projection (verified in the published paper): the Clarke 1866 ellipsoid, and a sphere of radius 3.
#[test]
fn the_equal_area_plane_is_that_of_the_manual() {
    let clarke = Ellipsoid { equatorial_m: 6_378_206.4, eccentricity_squared: 0.006_768_66 };
    let [x, y] = EqualAreaPlane::new(clarke, -100.0, 40.0).forward(-110.0, 30.0);
    assert!((x + 965_932.1).abs() < 0.1 && (y + 1_056_814.9).abs() < 0.1, "{x}, {y}");
    // An ellipsoid that is a sphere to twelve digits.
    let sphere = Ellipsoid { equatorial_m: 3.0, eccentricity_squared: 1e-12 };
    let [x, y] = EqualAreaPlane::new(sphere, -100.0, 40.0).forward(100.0, -20.0);
    assert!((x + 4.233_930_3).abs() < 1e-6 && (y - 4.025_777_5).abs() < 1e-6, "{x}, {y}");
}

/// Nearest edges on WGS84, computed by minimising the geodesic over both rings.
#[test]
fn nearest_edges() {
    let p = box_polygon(5.0, 52.0, 5.01, 52.006);
    let ring_p = box_ring(5.0, 52.0, 5.01, 52.006);
    let hollow = polygon(&[&box_ring(4.99, 51.99, 5.02, 52.02), &ring_p]);
    for (name, a, b, metres) in [
        ("edges face each other", &p, &box_polygon(5.03, 52.002, 5.04, 52.008), 1373.38),
        ("corner to corner", &p, &box_polygon(5.02, 52.012, 5.03, 52.018), 957.69),
        ("corner to edge", &p, &polygon(&["5.02 51.990, 5.05 52.020, 5.05 51.990, 5.02 51.990"]), 1168.89),
        ("far", &p, &box_polygon(11.8, 52.9, 11.81, 52.906), 472_006.1),
        (
            "across the antimeridian",
            &box_polygon(179.98, -16.505, 179.995, -16.5),
            &box_polygon(-179.99, -16.503, -179.98, -16.498),
            1601.44,
        ),
        ("in a hole", &hollow, &box_polygon(5.004, 52.002, 5.006, 52.004), 222.53),
    ] {
        for (a, b) in [(a, b), (b, a)] {
            assert_share(distance_m(a, b, ""), metres, 1e-3, name);
        }
    }
    for touching in [box_polygon(5.01, 52.002, 5.02, 52.004), box_polygon(5.005, 52.002, 5.02, 52.004)] {
        assert!(distance_m(&p, &touching, "").abs() < 1e-9);
    }
}

/// Areas, centroids and distances of planar polygons, computed with an independent geometry library.
#[test]
fn planar_measures() {
    let p = polygon(&["0 0, 400 0, 400 100, 150 100, 150 300, 0 300, 0 0"]);
    let q = polygon(&["520 90, 700 220, 610 400, 430 330, 520 90"]);
    let h = polygon(&[&box_ring(0.0, 0.0, 600.0, 400.0), &box_ring(100.0, 100.0, 300.0, 300.0)]);
    let metres = "crs = \"metres\"";
    let both = landscape(&[&p, &q], metres);
    let hollow = landscape(&[&h], metres);
    for (patch, m2, [x, y]) in [
        (&both.patches[0], 70_000.0, [146.428_571, 114.285_714]),
        (&both.patches[1], 46_800.0, [562.403_846, 256.057_692]),
        (&hollow.patches[0], 200_000.0, [320.0, 200.0]),
    ] {
        assert!((patch.area_ha * 1e4 - m2).abs() < 1e-6, "{}", patch.area_ha);
        let [x_km, y_km] = patch.centroid_km;
        assert!((x_km * 1000.0 - x).abs() < 1e-6 && (y_km * 1000.0 - y).abs() < 1e-6, "{x_km}, {y_km}");
    }
    // Distances are rounded to a millimetre.
    assert!((distance_m(&p, &q, metres) - 108.848_267).abs() < 0.000_51);
    let centroids = "crs = \"metres\"\ndistance = \"centroids\"";
    assert!((distance_m(&p, &q, centroids) - 439.470_958).abs() < 0.000_51);
}

/// P less the footprint of a clearing: two parts of 55500 and 10500 m2, 37.754334 m apart, and 4000 m2 cut, computed with an independent
/// geometry library. Here the parts and the cut ground are given as patches: their areas must add up to that of P.
#[test]
fn what_is_left_of_a_clearing_and_what_is_cut_add_up() {
    // The corners of the cut, by hand: the footprint's sides rise 200 m over 70 m.
    let (a, b) = (220.0 + 70.0 * 0.25, 220.0 + 70.0 * 0.75);
    let west = polygon(&[&format!("0 0, {a} 0, {b} 100, 150 100, 150 300, 0 300, 0 0")]);
    let east = polygon(&[&format!("{} 0, 400 0, 400 100, {} 100, {} 0", a + 40.0, b + 40.0, a + 40.0)]);
    let cut = polygon(&[&format!("{a} 0, {} 0, {} 100, {b} 100, {a} 0", a + 40.0, b + 40.0)]);
    let metres = "crs = \"metres\"";
    let parts = landscape(&[&west, &east, &cut], metres);
    let areas: Vec<f64> = parts.patches.iter().map(|patch| patch.area_ha * 1e4).collect();
    for (area, m2) in areas.iter().zip([55_500.0, 10_500.0, 4_000.0]) {
        assert!((area - m2).abs() < 1e-6, "{areas:?}");
    }
    assert!((parts.landscape_area_ha * 1e4 - 70_000.0).abs() < 1e-6);
    assert!((distance_m(&west, &east, metres) - 37.754_334).abs() < 0.000_51);
}

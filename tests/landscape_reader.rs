//! Whatever a file holds, reading it neither panics nor makes a landscape of nothing; and what a landscape is does not hang
//! on the order of its features.

#[path = "helpers/landscape.rs"]
mod study;

use eyot::landscape::{Landscape, Neighbours};
use proptest::prelude::*;
use study::{box_polygon, box_ring, collection, point, polygon, read, ring_list};

const TABLE: &str = "patches = \"p.geojson\"\nid = \"patch\"\narea = { property = \"ha\" }\n\
                     capacity = { per_hectare = 3 }\nstart = { share_of_capacity = 0.5 }\n";

fn sample() -> String {
    let multi = format!(
        r#"{{"type":"MultiPolygon","coordinates":[[{}],[{}]]}}"#,
        ring_list(&[&box_ring(5.2, 52.0, 5.21, 52.01), &box_ring(5.202, 52.002, 5.206, 52.006)]),
        ring_list(&[&box_ring(5.22, 52.0, 5.23, 52.01)])
    );
    collection(&[&box_polygon(5.0, 52.0, 5.01, 52.01), &multi, &point(5.1, 52.1)])
}

fn read_bytes(bytes: &[u8]) -> Option<Landscape> {
    read(TABLE, &[("p.geojson", bytes)], &[]).landscape
}

/// Numbers that a landscape may hold: none is NaN, infinite or negative.
fn assert_sane(landscape: &Landscape) {
    for patch in &landscape.patches {
        assert!(patch.area_ha > 0.0 && patch.area_ha.is_finite(), "{patch:?}");
        assert!(patch.capacity >= 0.0 && patch.capacity.is_finite(), "{patch:?}");
        assert!(patch.centroid_km.iter().all(|at| at.is_finite()) && patch.radius_km.is_finite(), "{patch:?}");
    }
    assert!(landscape.patches.is_sorted_by(|a, b| a.name < b.name));
    let neighbours = Neighbours::new(landscape);
    for patch in 0..landscape.patches.len() {
        let all = neighbours.within(patch, neighbours.reach_km(patch));
        assert_eq!(all.len() + 1, landscape.patches.len());
        assert!(all.iter().all(|(_, km)| *km >= 0.0 && km.is_finite()));
    }
}

/// What a landscape says, but for the place in the file.
fn said(landscape: &Landscape) -> String {
    let patches: Vec<String> = landscape
        .patches
        .iter()
        .map(|patch| {
            format!(
                "{:?}",
                (&patch.name, patch.area_ha, patch.capacity, &patch.start, patch.centroid_km, patch.radius_km)
            ) + &format!("{:?} {:?}", patch.outline_km, patch.shape)
        })
        .collect();
    format!("{} {}", landscape.landscape_area_ha, patches.join("\n"))
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(400))]

    #[test]
    fn random_bytes_never_panic(bytes in prop::collection::vec(any::<u8>(), 0..200)) {
        prop_assert!(read_bytes(&bytes).is_none());
    }

    #[test]
    fn a_file_with_bytes_changed_never_panics(
        changes in prop::collection::vec((any::<prop::sample::Index>(), prop::sample::select(b"[]{},:\"0123456789.-e nul".to_vec())), 1..6)
    ) {
        let mut bytes = sample().into_bytes();
        for (index, byte) in &changes {
            let at = index.index(bytes.len());
            bytes[at] = *byte;
        }
        read_bytes(&bytes).iter().for_each(assert_sane);
    }

    #[test]
    fn a_file_cut_anywhere_is_refused(index in any::<prop::sample::Index>()) {
        let text = sample();
        prop_assert!(read_bytes(&text.as_bytes()[..index.index(text.len())]).is_none());
    }

    /// Rings of any shape on a coarse grid, so that they cross, touch and double back on themselves.
    #[test]
    fn any_ring_is_read_or_refused(
        rings in prop::collection::vec(prop::collection::vec((0..6_i32, 0..6_i32), 0..9), 1..4)
    ) {
        let rings: Vec<String> = rings
            .iter()
            .map(|ring| {
                let positions: Vec<String> = ring
                    .iter()
                    .map(|(x, y)| format!("{} {}", 5.0 + f64::from(*x) / 100.0, 52.0 + f64::from(*y) / 100.0))
                    .collect();
                positions.join(", ")
            })
            .filter(|ring| !ring.is_empty())
            .collect();
        let rings: Vec<&str> = rings.iter().map(String::as_str).collect();
        read_bytes(collection(&[&polygon(&rings), &point(5.0, 52.0)]).as_bytes()).iter().for_each(assert_sane);
    }

    /// These broke an assertion within the overlay that mends outlines.
    #[test]
    fn rings_that_the_overlay_stumbles_over(shift in 0..3_i32) {
        let x = |x: i32| format!("{:.2}", 5.0 + f64::from(x + shift) / 100.0);
        let ring = |points: &[(i32, i32)]| {
            let positions: Vec<String> =
                points.iter().map(|(a, b)| format!("{} {:.2}", x(*a), 52.0 + f64::from(*b) / 100.0)).collect();
            positions.join(", ")
        };
        let rings = [ring(&[(1, 3), (1, 2), (2, 5), (3, 5)]), ring(&[(1, 0), (0, 5), (3, 2)])];
        let rings: Vec<&str> = rings.iter().map(String::as_str).collect();
        read_bytes(collection(&[&polygon(&rings), &point(5.2, 52.0)]).as_bytes()).iter().for_each(assert_sane);
    }

    #[test]
    fn the_order_of_the_features_changes_nothing(order in Just(vec![0, 1, 2, 3, 4, 5]).prop_shuffle()) {
        let root: serde_json::Value = serde_json::from_str(&collection(&[
            &box_polygon(179.9, -16.5, 179.91, -16.4),
            &box_polygon(-179.9, -16.5, -179.8, -16.3),
            &point(179.7, -16.0),
            &polygon(&["179.95 -16.8, 179.97 -16.8, 179.97 -16.7, 179.95 -16.8"]),
            &point(-179.99, -16.9),
            &box_polygon(179.5, -17.5, 179.7, -17.4),
        ])).unwrap();
        let features: Vec<serde_json::Value> = order.iter().map(|index| root["features"][*index].clone()).collect();
        let shuffled = serde_json::json!({ "type": "FeatureCollection", "features": features });
        let (first, second) = (read_bytes(root.to_string().as_bytes()), read_bytes(shuffled.to_string().as_bytes()));
        prop_assert_eq!(said(&first.unwrap()), said(&second.unwrap()));
    }
}

/// A coast of a million vertices, with small patches along it. The area is that of a regular polygon with every second
/// vertex drawn out, n/2 sin(2 pi / n) r R, here on a plane in metres.
#[test]
fn a_patch_of_a_million_vertices_is_read_and_has_neighbours() {
    const N: u32 = 1_000_000;
    let (near, far) = (30_000.0, 30_000.02);
    let vertex = |step: u32| {
        let angle = std::f64::consts::TAU * f64::from(step % N) / f64::from(N);
        let radius = if step.is_multiple_of(2) { near } else { far };
        format!(
            "[{:.6},{:.6}]",
            600_000.0 + radius * eyot::num::cos(angle),
            5_700_000.0 + radius * eyot::num::sin(angle)
        )
    };
    let ring: Vec<String> = (0..=N).map(vertex).collect();
    let mut geometries = vec![format!(r#"{{"type":"Polygon","coordinates":[[{}]]}}"#, ring.join(","))];
    geometries.extend((0..300).map(|step| {
        let y = 5_700_000.0 + 10.0 * f64::from(step);
        box_polygon(631_000.0, y, 631_005.0, y + 5.0)
    }));
    let geometries: Vec<&str> = geometries.iter().map(String::as_str).collect();
    let table = TABLE.replace("area = { property = \"ha\" }\n", "crs = \"metres\"\n");
    let landscape = read(&table, &[("p.geojson", collection(&geometries).as_bytes())], &[]).sound();
    let area_ha = f64::from(N) / 2.0 * eyot::num::sin(std::f64::consts::TAU / f64::from(N)) * near * far / 1e4;
    assert!((landscape.patches[0].area_ha / area_ha - 1.0).abs() < 1e-9);
    let neighbours = Neighbours::new(&landscape);
    assert_eq!(neighbours.within(0, 1.2).len(), 300);
    let first = landscape.patches.iter().position(|patch| patch.name == "p2").unwrap();
    let [(_, beside)] = neighbours.within(first, 0.005)[..] else { panic!("one neighbour beside it") };
    assert!((beside - 0.005).abs() < 1e-9);
    // Due east of the centre, so the gap is 1000 m less the two centimetres of every second vertex at most.
    assert!((neighbours.distance_km(0, first) - 1.0).abs() < 2.1e-5);
}

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

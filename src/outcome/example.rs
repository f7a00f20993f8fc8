//! A tiny outcome whose numbers can be worked out by hand: three patches, four years, four replicates.

use geo::{Geometry, MultiPolygon, point, polygon};
use serde_json::json;

use super::Outcome;
use crate::engine::{PatchTally, Record, Tallies};
use crate::landscape::{CapacityOverTime, Crs, Landscape, Patch, Start};
use crate::mistake::Place;
use crate::network::{Capacity, Connectivity, Graph, Link, Network, Structure};
use crate::study::{QuasiExtinction, Said};

/// Individuals of each patch at census 0.
pub(crate) const STARTS: [u64; 3] = [12, 6, 2];

pub(crate) fn landscape() -> Landscape {
    let square = |x: f64, y: f64| -> Geometry<f64> {
        // Wound clockwise, as many exports are.
        polygon![(x: x, y: y), (x: x, y: y + 0.25), (x: x + 0.25, y: y + 0.25), (x: x + 0.25, y: y)].into()
    };
    Landscape {
        patches: vec![
            patch("Ash Carr", 12.5, 30.0, square(5.0, 52.0)),
            patch("Long \"Reed\", east", 6.0, 14.5, square(5.5, 52.0)),
            patch("pool", 1.0, 3.0, point!(x: 6.0, y: 52.5).into()),
        ],
        crs: Crs::Degrees,
        crs_member: Some(json!({"type": "name", "properties": {"name": "urn:ogc:def:crs:OGC:1.3:CRS84"}})),
        landscape_area_ha: 19.5,
        between_centroids: false,
        capacity_over_time: CapacityOverTime::default(),
    }
}

fn patch(name: &str, area_ha: f64, capacity: f64, shape: Geometry<f64>) -> Patch {
    Patch {
        name: name.to_owned(),
        area_ha,
        capacity,
        start: Start::ShareOfCapacity(0.5),
        centroid_km: [0.0, 0.0],
        radius_km: 0.0,
        outline_km: MultiPolygon(Vec::new()),
        shape,
        place: Place::Call,
    }
}

pub(crate) fn network() -> Network {
    let link = |from, to, distance_km, probability| Link { from, to, distance_km, probability };
    Network {
        links: vec![link(0, 1, 17.134, 0.5), link(1, 0, 17.134, 0.625), link(2, 1, 33.062, 0.1)],
        row_start: vec![0, 1, 2, 3],
        lost: vec![0.5, 0.375, 0.9],
        cut_share: vec![0.0; 3],
    }
}

pub(crate) fn tallies() -> Tallies {
    let record = |replicate, totals: [u64; 5], quasi_extinct_in, occupied_at_end| Record {
        replicate,
        totals: totals.to_vec(),
        quasi_extinct_in,
        occupied_at_end,
        saturated: replicate == 2,
    };
    Tallies {
        horizon: 4,
        persisting: 2,
        records: vec![
            record(1, [20, 12, 6, 3, 0], Some(3), 0),
            record(2, [20, 24, 22, 25, 30], None, 3),
            record(3, [20, 10, 0, 0, 0], Some(2), 0),
            record(4, [20, 18, 4, 9, 16], Some(2), 2),
        ],
        occupied_patches: vec![12, 11, 7, 6, 5],
        patches: vec![
            // Each replicate's sum over the four censuses: 20, 60, 10, 30; its net export: 10, 12, 8, 10.
            PatchTally {
                occupied_at_end: 2,
                years_occupied: 12,
                abundance: 120,
                abundance_squares: 5000,
                abundance_at_end: 24,
                abundance_at_end_squares: 320,
                local_extinctions: 3,
                recolonisations: 1,
                immigrants: 8,
                emigrants: 100,
                arrived_elsewhere: 48,
                net_export: 40,
                net_export_squares: 408,
                removed: 0,
                quasi_extinct: 0,
            },
            // Sums 1, 35, 0, 12; net export -8, -10, -6, -8.
            PatchTally {
                occupied_at_end: 2,
                years_occupied: 8,
                abundance: 48,
                abundance_squares: 1370,
                abundance_at_end: 16,
                abundance_at_end_squares: 160,
                local_extinctions: 4,
                recolonisations: 2,
                immigrants: 40,
                emigrants: 16,
                arrived_elsewhere: 8,
                net_export: -32,
                net_export_squares: 264,
                removed: 0,
                quasi_extinct: 0,
            },
            // Sums 0, 6, 0, 5; net export 0, -1, 0, 1.
            PatchTally {
                occupied_at_end: 1,
                years_occupied: 4,
                abundance: 11,
                abundance_squares: 61,
                abundance_at_end: 6,
                abundance_at_end_squares: 36,
                local_extinctions: 4,
                recolonisations: 1,
                immigrants: 1,
                emigrants: 4,
                arrived_elsewhere: 1,
                net_export: 0,
                net_export_squares: 2,
                removed: 0,
                quasi_extinct: 0,
            },
        ],
        movers: vec![48, 8, 1],
        removed: None,
    }
}

pub(crate) fn threshold() -> QuasiExtinction {
    let adult = Said { value: "adult".to_owned(), place: Place::Call, words: String::new() };
    QuasiExtinction { below: 5, stages: vec![adult], in_each_patch: None }
}

/// A structure of round numbers: the network's own graph, two shares and a loss each.
pub(crate) fn structure() -> Structure {
    let network = network();
    Structure {
        graph: Graph::new(3, network.links.iter().map(|link| (link.from, link.to))),
        capacity: Capacity { value: 2.0, shares: vec![1.25, 0.5, 0.25] },
        connectivity: Connectivity {
            probability: 0.25,
            equivalent_area_ha: 10.0,
            loss_percent: Some(vec![75.0, 37.5, 12.5]),
        },
    }
}

pub(crate) fn outcome(threshold: Option<&QuasiExtinction>) -> Outcome {
    Outcome::from_tallies(&tallies(), &landscape(), &network(), &STARTS, threshold, Some(structure())).unwrap()
}

//! Linking a landscape of points under an exponential kernel, beside the bare neighbour search that it stands on.

use divan::{Bencher, black_box};
use eyot::landscape::{CapacityOverTime, Crs, Landscape, Patch, Start};
use eyot::mistake::Place;
use eyot::network::kernel::{Exponential, Scale};
use eyot::network::{
    CrowdingResponse, DispersalTable, Distances, Kernel, KernelDispersal, Movement, Network, Settlement, Structure,
};
use geo::{Geometry, MultiPolygon};
use kiddo::{ImmutableKdTree, SquaredEuclidean};
use rayon::prelude::*;

/// Distance to which the kernel of mean 1.4 km has links worth keeping, about.
const REACH_KM: f64 = 10.0;

fn main() {
    divan::main();
}

/// One patch a km2 on the average, of 1 to 10 ha.
fn landscape(n: usize) -> Landscape {
    let mut state = 20_261_u64;
    let mut uniform = || {
        state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (state >> 11) as f64 / (1_u64 << 53) as f64
    };
    let side_km = (n as f64).sqrt();
    let patches: Vec<Patch> = (0..n)
        .map(|position| {
            let centroid_km = [side_km * uniform(), side_km * uniform()];
            Patch {
                name: format!("p{position:05}"),
                area_ha: 1.0 + 9.0 * uniform(),
                capacity: 0.0,
                start: Start::Total(0.0),
                centroid_km,
                radius_km: 0.0,
                outline_km: MultiPolygon::new(Vec::new()),
                shape: Geometry::Point(centroid_km.into()),
                place: Place::file("patches.geojson"),
            }
        })
        .collect();
    let landscape_area_ha = patches.iter().map(|patch| patch.area_ha).sum();
    Landscape {
        patches,
        crs: Crs::Metres,
        crs_member: None,
        landscape_area_ha,
        between_centroids: true,
        capacity_over_time: CapacityOverTime::default(),
    }
}

struct Centroids<'a> {
    landscape: &'a Landscape,
    tree: ImmutableKdTree<f64, 2>,
}

impl<'a> Centroids<'a> {
    fn new(landscape: &'a Landscape) -> Self {
        let points: Vec<[f64; 2]> = landscape.patches.iter().map(|patch| patch.centroid_km).collect();
        Self { landscape, tree: ImmutableKdTree::new_from_slice(&points).expect("finite points") }
    }
}

impl Distances for Centroids<'_> {
    fn beyond_within(&self, patch: usize, beyond_km: f64, km: f64) -> Vec<(usize, f64)> {
        let centre = self.landscape.patches[patch].centroid_km;
        let found = self.tree.query(&centre).within::<SquaredEuclidean<f64>>(km * km).unsorted().execute();
        let apart = found.into_iter().map(|other| (other.item as usize, other.distance.sqrt()));
        apart.filter(|(other, apart)| *other != patch && *apart > beyond_km).collect()
    }

    fn distance_km(&self, a: usize, b: usize) -> f64 {
        let [a, b] = [a, b].map(|patch| self.landscape.patches[patch].centroid_km);
        ((a[0] - b[0]) * (a[0] - b[0]) + (a[1] - b[1]) * (a[1] - b[1])).sqrt()
    }
}

fn dispersal(settlement: Settlement) -> DispersalTable {
    let kernel = Kernel::new(Exponential::new(Scale::MeanKm(1.4)));
    let movement = KernelDispersal { kernel, settlement, path_mortality_per_km: 0.15, max_km: None, tail: 1e-4 };
    DispersalTable {
        movement: Movement::Kernel(movement),
        area_exponent: 1.0,
        crowding: CrowdingResponse::default(),
        place: Place::Call,
    }
}

#[divan::bench(args = [1_000, 10_000], sample_count = 5)]
fn neighbours_alone(bencher: Bencher, n: usize) {
    let landscape = landscape(n);
    let distances = Centroids::new(&landscape);
    bencher.bench(|| {
        (0..n).into_par_iter().map(|from| black_box(distances.beyond_within(from, -1.0, REACH_KM)).len()).sum::<usize>()
    });
}

#[divan::bench(args = [1_000, 10_000], sample_count = 5)]
fn shared(bencher: Bencher, n: usize) {
    build(bencher, n, Settlement::Shared);
}

#[divan::bench(args = [1_000, 10_000], sample_count = 5)]
fn open(bencher: Bencher, n: usize) {
    build(bencher, n, Settlement::Open);
}

fn build(bencher: Bencher, n: usize, settlement: Settlement) {
    let landscape = landscape(n);
    let distances = Centroids::new(&landscape);
    let dispersal = dispersal(settlement);
    bencher.bench(|| Network::build(&landscape, &dispersal, &distances).expect("a kernel"));
}

#[divan::bench(args = [1_000, 10_000], sample_count = 1)]
fn structure(bencher: Bencher, n: usize) {
    let landscape = landscape(n);
    let distances = Centroids::new(&landscape);
    let dispersal = dispersal(Settlement::Shared);
    let network = Network::build(&landscape, &dispersal, &distances).expect("a kernel").value;
    bencher.bench(|| Structure::new(&landscape, &dispersal, &network, 1.0));
}

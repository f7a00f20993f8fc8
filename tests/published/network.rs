//! Checks of network.

#![expect(clippy::unwrap_used, reason = "a test fails where it panics")]

use std::f64::consts::{PI, TAU};
use std::path::Path;

use eyot::landscape::{CapacityOverTime, Crs, Landscape, Patch, Start};
use eyot::mistake::Place;
use eyot::network::kernel::{Exponential, ExponentialPower, Gaussian, Lognormal, Scale, TwoDt};
use eyot::network::{
    Capacity, Connectivity, CrowdingResponse, DispersalTable, Distances, Graph, Kernel, KernelDispersal, Movement,
    Network, Settlement, Sparse, Structure,
};
use eyot::num;
use eyot::study::Document;
use geo::{BoundingRect, Geometry, MultiPolygon, Rect, coord};

/// Passes if a value agrees with a printed one to half a unit of its last digit.
fn agrees(value: f64, printed: &str) {
    let (digits, exponent) = printed.split_once('e').unwrap_or((printed, "0"));
    let decimals = digits.split_once('.').map_or(0, |(_, decimals)| decimals.len());
    let unit: f64 =
        format!("1e{}", exponent.parse::<i32>().unwrap() - i32::try_from(decimals).unwrap()).parse().unwrap();
    let truth: f64 = printed.parse().unwrap();
    assert!((value - truth).abs() <= 0.5001 * unit, "{value} against {printed}");
}

fn close(value: f64, truth: f64, relative: f64) {
    assert!((value - truth).abs() <= relative * truth.abs(), "{value} against {truth}");
}

/// The five kernels, all of mean 1.4 km.
fn kernels() -> [(&'static str, Kernel); 5] {
    let scale = Scale::MeanKm(1.4);
    [
        ("exponential", Kernel::new(Exponential::new(scale))),
        ("gaussian", Kernel::new(Gaussian::new(scale))),
        ("exponential-power", Kernel::new(ExponentialPower::new(0.5, scale))),
        ("2Dt", Kernel::new(TwoDt::new(2.5, scale))),
        ("lognormal", Kernel::new(Lognormal::new(0.8, scale))),
    ]
}

fn patch(name: String, centroid_km: [f64; 2], area_ha: f64, outline_km: MultiPolygon<f64>, radius_km: f64) -> Patch {
    Patch {
        name,
        area_ha,
        capacity: 0.0,
        start: Start::Total(0.0),
        centroid_km,
        radius_km,
        outline_km,
        shape: Geometry::Point(centroid_km.into()),
        place: Place::file("patches.geojson"),
    }
}

fn point(name: String, centroid_km: [f64; 2], area_ha: f64) -> Patch {
    patch(name, centroid_km, area_ha, MultiPolygon::new(Vec::new()), 0.0)
}

/// A rectangle by its lower left corner and its sides.
fn rectangle(name: &str, corner: [f64; 2], sides: [f64; 2]) -> Patch {
    let [x, y] = corner;
    let [wide, high] = sides;
    let outline = Rect::new(coord! { x: x, y: y }, coord! { x: x + wide, y: y + high }).to_polygon().into();
    let radius = (wide * wide + high * high).sqrt() / 2.0;
    patch(name.to_owned(), [x + wide / 2.0, y + high / 2.0], 100.0 * wide * high, outline, radius)
}

fn landscape(patches: Vec<Patch>) -> Landscape {
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

/// Points in a square with areas of 1 to 10 ha, from a plain congruential generator, so that nothing else moves them.
fn scattered(n: usize, side_km: f64, seed: u64) -> Landscape {
    let mut state = seed;
    let mut uniform = || {
        state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (state >> 11) as f64 / (1_u64 << 53) as f64
    };
    let patches = (0..n).map(|position| {
        let centroid = [side_km * uniform(), side_km * uniform()];
        point(format!("p{position:05}"), centroid, 1.0 + 9.0 * uniform())
    });
    landscape(patches.collect())
}

fn distance(landscape: &Landscape, a: usize, b: usize) -> f64 {
    let [a, b] = [a, b].map(|patch| landscape.patches[patch].centroid_km);
    ((a[0] - b[0]) * (a[0] - b[0]) + (a[1] - b[1]) * (a[1] - b[1])).sqrt()
}

/// All patches by all patches, unrounded: the plain stand-in for the landscape's own neighbour search.
struct AllPairs<'a>(&'a Landscape);

impl Distances for AllPairs<'_> {
    fn beyond_within(&self, patch: usize, beyond_km: f64, km: f64) -> Vec<(usize, f64)> {
        let others = (0..self.0.patches.len()).filter(|other| *other != patch);
        let measured = others.map(|other| (other, self.distance_km(patch, other)));
        measured.filter(|(_, apart)| *apart > beyond_km && *apart <= km).collect()
    }

    fn distance_km(&self, a: usize, b: usize) -> f64 {
        distance(self.0, a, b)
    }
}

fn table(kernel: &Kernel, settlement: Settlement, tail: f64) -> DispersalTable {
    let movement =
        KernelDispersal { kernel: kernel.clone(), settlement, path_mortality_per_km: 0.0, max_km: None, tail };
    DispersalTable {
        movement: Movement::Kernel(movement),
        area_exponent: 1.0,
        crowding: CrowdingResponse::default(),
        place: Place::Call,
    }
}

fn with_mortality(mut table: DispersalTable, per_km: f64) -> DispersalTable {
    if let Movement::Kernel(by) = &mut table.movement {
        by.path_mortality_per_km = per_km;
    }
    table
}

fn build(landscape: &Landscape, dispersal: &DispersalTable) -> Network {
    Network::build(landscape, dispersal, &AllPairs(landscape)).unwrap().value
}

fn probability(network: &Network, from: usize, to: usize) -> f64 {
    network.row(from).iter().find(|link| link.to as usize == to).map_or(0.0, |link| link.probability)
}

/// Location densities with mean 1.4 km: Nathan, Klein, Robledo-Arnuncio & Revilla 2012 (from memory); 2Dt: Clark et al.
/// 1999, Ecology 80 (from memory); exponential-power: Austerlitz et al. 2004, Mol. Ecol. 13 (from memory). Values computed
/// independently. Columns: median, k(0.5), k(1.4), k(3), k(10), P(> 5), P(> 10).
#[test]
fn kernels_have_the_published_densities_and_tails() {
    let printed = [
        ["1.174843", "0.1590061", "0.0439577", "4.4706e-03", "2.0296e-07", "6.4368e-03", "9.5517e-06"],
        ["1.315212", "0.1153924", "0.0581554", "3.4629e-03", "5.0457e-19", "4.4597e-05", "3.956e-18"],
        ["0.943882", "0.1869571", "0.0309185", "3.8843e-03", "1.7443e-05", "3.1134e-02", "2.3778e-03"],
        ["1.072989", "0.1804450", "0.0430636", "3.2946e-03", "1.2481e-05", "1.9602e-02", "2.6653e-03"],
        ["1.016609", "0.2142132", "0.0373801", "3.5325e-03", "1.3378e-05", "2.3229e-02", "2.1340e-03"],
    ];
    for ((_, kernel), row) in kernels().iter().zip(printed) {
        agrees(kernel.median_km(), row[0]);
        for (km, printed) in [0.5, 1.4, 3.0, 10.0].into_iter().zip(&row[1..5]) {
            agrees(kernel.density(km), printed);
        }
        agrees(kernel.beyond(5.0), row[5]);
        agrees(kernel.beyond(10.0), row[6]);
    }
}

/// The densities integrate to 1 over the plane and to their mean, by the trapezoid rule in ln r; the same sources.
#[test]
fn kernels_integrate_to_one_and_to_their_mean() {
    for (name, kernel) in kernels() {
        let (step, mut all, mut mean, mut beyond_3) = (0.005, 0.0, 0.0, 0.0);
        for position in -5_000..5_000 {
            let km = num::exp(step * (f64::from(position) + 0.5));
            let ring = TAU * km * km * kernel.density(km) * step;
            all += ring;
            mean += km * ring;
            beyond_3 += if km > 3.0 { ring } else { 0.0 };
        }
        assert!((all - 1.0).abs() < 1e-6, "{name}: {all}");
        assert!((mean - 1.4).abs() < 1.4e-6, "{name}: {mean}");
        // The ring in which 3 km lies falls to one side or the other.
        close(beyond_3, kernel.beyond(3.0), 0.02);
    }
}

/// The exponential's mean is 2 a and not a, its median 1.678347 a (computed).
#[test]
fn the_exponential_kernel_has_mean_two_a() {
    let kernel = Kernel::new(Exponential::new(Scale::MeanKm(2.0)));
    close(kernel.density(0.0), 1.0 / TAU, 1e-12);
    agrees(kernel.median_km(), "1.678347");
    let by_median = Kernel::new(Exponential::new(Scale::MedianKm(kernel.median_km())));
    close(by_median.mean_km(), 2.0, 1e-12);
}

/// Landing in a square of side 0.5 km centred 2 km away, seen from a point: exact by quadrature, computed independently.
/// The network takes evenly spread points for it, good to half a per cent; density times area is 3 % off at most.
#[test]
fn landing_in_a_square_is_the_integral_of_the_kernel() {
    let exact = [0.00472757, 0.00648293, 0.00327712, 0.00386577, 0.00353897];
    for ((_, kernel), exact) in kernels().iter().zip(exact) {
        let patches = vec![point("a".into(), [0.0, 0.0], 1e-6), rectangle("b", [1.75, -0.25], [0.5, 0.5])];
        let network = build(&landscape(patches), &table(kernel, Settlement::Open, 0.0));
        close(probability(&network, 0, 1), exact, 0.005);
        close(kernel.density(2.0) * 0.25, exact, 0.03);
    }
}

/// The same for a disc of radius 0.3 km centred 1 km away: a point patch of that area.
#[test]
fn landing_in_a_disc_is_the_integral_of_the_kernel() {
    let exact = [0.02215547, 0.02389772, 0.01800131, 0.02472452, 0.02301319];
    for ((_, kernel), exact) in kernels().iter().zip(exact) {
        let patches = vec![point("a".into(), [0.0, 0.0], 1e-6), point("b".into(), [0.0, 1.0], 9.0 * PI)];
        let network = build(&landscape(patches), &table(kernel, Settlement::Open, 0.0));
        close(probability(&network, 0, 1), exact, 0.005);
    }
}

/// Where landing under `open` misses 1 %: the far flank of a gaussian of short mean, which steepens beyond what the spread of
/// start points follows. A case that comes right must leave the list; a new one must not come.
const KNOWN_TO_BE_COARSE: &[&str] = &[
    "gaussian mean 0.5 km, at [4.0, -3.0]: exact 7.1e-23, off by -6.3 %",
    "gaussian mean 1.4 km, at [4.0, -3.0]: exact 2.4e-5, off by -2.9 %",
];

/// Two rectangles side by side: the kernel averaged over all pairs of points, from the distribution of the difference
/// of two uniform points (a product of trapezoids), by the midpoint rule; computed here, another way than the network's.
/// Near and far patches both, to 1 %, but for the cases known to be coarser.
#[test]
fn landing_between_rectangles_is_the_double_integral() {
    // Probability density of the difference between uniform points of [0, a] and [shift, shift + b], at u.
    let difference =
        |u: f64, a: f64, b: f64, shift: f64| ((u - shift + a).min(a).min(b).min(b + shift - u)).max(0.0) / (a * b);
    let integral = |kernel: &Kernel, shift: [f64; 2], source: [f64; 2], target: [f64; 2]| {
        let n = 1_200;
        let spans = [0, 1].map(|axis| (shift[axis] - source[axis], shift[axis] + target[axis]));
        let steps = spans.map(|(low, high)| (high - low) / f64::from(n));
        let middle = |axis: usize, cell: i32| spans[axis].0 + (f64::from(cell) + 0.5) * steps[axis];
        let weights = |axis: usize| -> Vec<(f64, f64)> {
            let at = |u: f64| (u, difference(u, source[axis], target[axis], shift[axis]) * steps[axis]);
            (0..n).map(|cell| at(middle(axis, cell))).collect()
        };
        let [across, up] = [weights(0), weights(1)];
        let columns = across.iter().map(|(x, weight)| {
            weight * up.iter().map(|(y, weight)| weight * kernel.density((x * x + y * y).sqrt())).sum::<f64>()
        });
        columns.sum::<f64>() * target[0] * target[1]
    };
    let source = [1.0, 0.6];
    let mut beyond: Vec<String> = Vec::new();
    for mean in [0.5, 1.4, 6.0] {
        let kernels = [
            ("exponential", Kernel::new(Exponential::new(Scale::MeanKm(mean)))),
            ("gaussian", Kernel::new(Gaussian::new(Scale::MeanKm(mean)))),
            ("2Dt", Kernel::new(TwoDt::new(2.5, Scale::MeanKm(mean)))),
        ];
        for (shift, target) in
            [([1.0, 0.0], [0.8, 0.6]), ([1.3, 0.2], [0.3, 2.0]), ([2.5, 1.0], [0.4, 0.4]), ([4.0, -3.0], [1.0, 1.0])]
        {
            for (name, kernel) in &kernels {
                let patches = vec![rectangle("a", [0.0, 0.0], source), rectangle("b", shift, target)];
                let network = build(&landscape(patches), &table(kernel, Settlement::Open, 0.0));
                let own = integral(kernel, [0.0, 0.0], source, source);
                let exact = integral(kernel, shift, source, target) / (1.0 - own);
                let off = probability(&network, 0, 1) / exact - 1.0;
                if off.abs() > 0.01 {
                    beyond.push(format!(
                        "{} mean {mean} km, at {shift:?}: exact {exact:.1e}, off by {:.1} %",
                        name,
                        100.0 * off
                    ));
                }
            }
        }
    }
    assert_eq!(beyond, KNOWN_TO_BE_COARSE);
}

/// Arrivals w_ij / sum w_ik exp(-0.15 d_ij) with w_ij = k(d_ij) A_j^b; computed independently.
#[test]
fn shared_settlement_divides_by_kernel_and_area() {
    let printed = [
        (
            1.0,
            [
                ["0", "0.144160", "0.038335", "0.476124", "0.341381"],
                ["0.392558", "0", "0.202432", "0.007079", "0.397930"],
                ["0.161365", "0.312921", "0", "0.038138", "0.487576"],
                ["0.661834", "0.003614", "0.012594", "0", "0.321958"],
            ],
        ),
        (
            0.5,
            [
                ["0", "0.174913", "0.018605", "0.471683", "0.334799"],
                ["0.451769", "0", "0.147340", "0.010518", "0.390373"],
                ["0.118911", "0.364600", "0", "0.036283", "0.480206"],
                ["0.665903", "0.005749", "0.008014", "0", "0.320333"],
            ],
        ),
    ];
    let places = [([0.0, 0.0], 10.0), ([3.0, 0.0], 4.0), ([3.0, 4.0], 25.0), ([-2.0, 1.5], 6.0)];
    let patches = places.iter().enumerate().map(|(name, (at, area))| point(name.to_string(), *at, *area));
    let landscape = landscape(patches.collect());
    let [(_, exponential), ..] = kernels();
    for (exponent, rows) in printed {
        let mut table = with_mortality(table(&exponential, Settlement::Shared, 0.0), 0.15);
        table.area_exponent = exponent;
        let network = build(&landscape, &table);
        for (from, row) in rows.iter().enumerate() {
            for (to, printed) in row[..4].iter().enumerate() {
                agrees(probability(&network, from, to), printed);
            }
            agrees(network.lost[from], row[4]);
        }
    }
}

/// The search and the cut against looking at all pairs: the definition of the tail, worked out here without a search.
#[test]
fn the_weakest_links_are_cut_as_if_all_pairs_were_seen() {
    let landscape = scattered(300, 40.0, 7);
    for (name, kernel) in kernels() {
        for tail in [0.0, 1e-4, 0.05] {
            let network = build(&landscape, &table(&kernel, Settlement::Shared, tail));
            for from in (0..300).step_by(13) {
                let weight = |to: usize| kernel.density(distance(&landscape, from, to)) * landscape.patches[to].area_ha;
                let mut all: Vec<(f64, usize)> = (0..300).filter(|to| *to != from).map(|to| (weight(to), to)).collect();
                all.sort_by(|a, b| a.partial_cmp(b).unwrap());
                let total: f64 = all.iter().map(|(weight, _)| weight).sum();
                let mut cut = 0.0;
                let kept: Vec<(f64, usize)> = all
                    .into_iter()
                    .skip_while(|(weight, _)| {
                        cut += weight / total;
                        cut <= tail
                    })
                    .collect();
                let kept_total: f64 = kept.iter().map(|(weight, _)| weight).sum();
                assert_eq!(network.row(from).len(), kept.len(), "{name}, tail {tail}, from {from}");
                // Below, numbers lose their digits one by one.
                for (weight, to) in kept.into_iter().filter(|(weight, _)| *weight > 1e-290) {
                    close(probability(&network, from, to), weight / kept_total, 1e-6);
                }
            }
        }
    }
}

/// Rectangles measured from edge to edge, which is where the search under `open` may stop soonest.
struct EdgesOfRectangles<'a>(&'a Landscape);

impl Distances for EdgesOfRectangles<'_> {
    fn beyond_within(&self, patch: usize, beyond_km: f64, km: f64) -> Vec<(usize, f64)> {
        let others = (0..self.0.patches.len()).filter(|other| *other != patch);
        let measured = others.map(|other| (other, self.distance_km(patch, other)));
        measured.filter(|(_, apart)| *apart > beyond_km && *apart <= km).collect()
    }

    fn distance_km(&self, a: usize, b: usize) -> f64 {
        let [a, b] = [a, b].map(|patch| self.0.patches[patch].outline_km.bounding_rect().unwrap());
        let apart = |low_a: f64, high_a: f64, low_b: f64, high_b: f64| (low_b - high_a).max(low_a - high_b).max(0.0);
        let x = apart(a.min().x, a.max().x, b.min().x, b.max().x);
        let y = apart(a.min().y, a.max().y, b.min().y, b.max().y);
        (x * x + y * y).sqrt()
    }
}

/// Under `open` too the search misses nothing that the tail would keep, and the cut share is lost: the rows with a tail
/// against those with none, cut here.
#[test]
fn under_open_the_cut_share_is_lost() {
    let mut landscape = scattered(120, 25.0, 5);
    for (position, patch) in landscape.patches.iter_mut().enumerate() {
        let wide = 0.1 + 0.05 * (position % 17) as f64;
        *patch = rectangle(&patch.name, patch.centroid_km, [wide, patch.area_ha / 100.0 / wide]);
    }
    let tail = 0.01;
    for between_centroids in [false, true] {
        landscape.between_centroids = between_centroids;
        let edges = EdgesOfRectangles(&landscape);
        let centroids = AllPairs(&landscape);
        let distances: &dyn Distances = if between_centroids { &centroids } else { &edges };
        for (name, kernel) in kernels() {
            let build =
                |tail| Network::build(&landscape, &table(&kernel, Settlement::Open, tail), distances).unwrap().value;
            let (whole, cut) = (build(0.0), build(tail));
            for from in 0..120 {
                let mut row: Vec<f64> = whole.row(from).iter().map(|link| link.probability).collect();
                row.sort_by(f64::total_cmp);
                let landed: f64 = row.iter().sum();
                let mut gone = 0.0;
                while gone + row[0] <= tail * landed {
                    gone += row.remove(0);
                }
                assert_eq!(cut.row(from).len(), row.len(), "{name} from {from}");
                close(cut.cut_share[from] * landed, gone, 2e-3);
                close(cut.lost[from] - whole.lost[from], gone, 2e-3);
                for link in cut.row(from) {
                    close(link.probability, probability(&whole, from, link.to as usize), 1e-12);
                }
            }
        }
    }
}

/// Rows and losses sum to 1 under every settlement, and nothing arrives from a network of one patch.
#[test]
fn rows_and_losses_sum_to_one() {
    let scattered = scattered(200, 25.0, 11);
    for (name, kernel) in kernels() {
        for settlement in [Settlement::Shared, Settlement::Open] {
            for mortality in [0.0, 0.2] {
                let network = build(&scattered, &with_mortality(table(&kernel, settlement, 1e-4), mortality));
                assert!(!network.links.is_empty());
                for from in 0..200 {
                    let sum: f64 = network.row(from).iter().map(|link| link.probability).sum();
                    assert!((sum + network.lost[from] - 1.0).abs() < 1e-12, "{name} {settlement:?} {from}");
                }
            }
            let alone = landscape(vec![point("only".into(), [0.0, 0.0], 5.0)]);
            let alone = Network::build(&alone, &table(&kernel, settlement, 1e-4), &AllPairs(&alone)).unwrap();
            assert!(alone.value.links.is_empty() && (alone.value.lost[0] - 1.0).abs() < f64::EPSILON);
            assert_eq!(alone.warnings.len(), 1);
        }
    }
}

/// Patches in another order: the same rows in that order, to the last bit; and the same for one thread as for four.
#[test]
fn order_and_threads_change_nothing() {
    let first = scattered(150, 20.0, 3);
    let n = first.patches.len();
    let moved = |position: usize| (position * 37 + 11) % n;
    let mut patches = first.patches.clone();
    for position in 0..n {
        patches[moved(position)] = first.patches[position].clone();
    }
    let second = landscape(patches);
    for (name, kernel) in kernels() {
        for settlement in [Settlement::Shared, Settlement::Open] {
            let table = with_mortality(table(&kernel, settlement, 1e-4), 0.1);
            let pool = |threads| rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
            let one = pool(1).install(|| build(&first, &table));
            let four = pool(4).install(|| build(&first, &table));
            assert_eq!(one.links, four.links);
            let other = build(&second, &table);
            assert_eq!(one.links.len(), other.links.len());
            for link in &one.links {
                let (from, to) = (moved(link.from as usize), moved(link.to as usize));
                let same = probability(&other, from, to).to_bits() == link.probability.to_bits();
                assert!(same, "{name} {settlement:?}: {link:?}");
                assert_eq!(other.lost[from].to_bits(), one.lost[link.from as usize].to_bits());
            }
        }
    }
}

/// A far neighbour under a thin tail is still the only place to go, and the study is told.
#[test]
fn a_far_gaussian_does_not_vanish_under_shared() {
    let landscape = landscape(vec![point("a".into(), [0.0, 0.0], 1.0), point("b".into(), [90.0, 0.0], 1.0)]);
    let gaussian = Kernel::new(Gaussian::new(Scale::MeanKm(1.0)));
    let shared =
        Network::build(&landscape, &table(&gaussian, Settlement::Shared, 1e-4), &AllPairs(&landscape)).unwrap();
    close(probability(&shared.value, 0, 1), 1.0, 1e-12);
    assert!(shared.warnings[0].found.contains("three mean distances"), "{:?}", shared.warnings);
    assert!(shared.warnings[0].advice.as_ref().unwrap().contains("path_mortality_per_km"));
    let open = Network::build(&landscape, &table(&gaussian, Settlement::Open, 1e-4), &AllPairs(&landscape)).unwrap();
    assert!(open.value.links.is_empty() && open.warnings[0].found.contains("no link out of a, b"));
}

/// Components, cut patches and cut links of a graph of eleven nodes. Tarjan 1972; computed with an independent library.
#[test]
fn structure_of_a_small_graph() {
    let pairs = [(1, 2), (2, 3), (3, 1), (3, 4), (4, 5), (5, 6), (6, 7), (7, 5), (8, 9), (9, 10)];
    let both_ways = pairs.into_iter().chain([(2, 1), (10, 9)]).map(|(a, b): (u32, u32)| (a - 1, b - 1));
    let graph = Graph::new(11, both_ways);
    assert_eq!(graph.component, [0, 0, 0, 0, 0, 0, 0, 1, 1, 1, 2]);
    assert_eq!(graph.n_components, 3);
    assert_eq!(graph.cut_patches, [2, 3, 4, 8]);
    assert_eq!(graph.cut_links, [(2, 3), (3, 4), (7, 8), (8, 9)]);
}

/// Probability of connectivity. Saura & Pascual-Hortal 2007, Landsc. Urban Plan. 83 (from memory); values by hand: the
/// double sum is 193 + 2 (12 + 24 + 8 + 3 + 1 + 8) = 305.
#[test]
fn probability_of_connectivity_by_hand() {
    let links = [(0, 1, 0.6), (1, 2, 0.5), (0, 2, 0.1), (2, 3, 0.2)];
    let both_ways: Vec<(u32, u32, f64)> = links.into_iter().flat_map(|(a, b, p)| [(a, b, p), (b, a, p)]).collect();
    let direct = Sparse::new(4, both_ways.into_iter());
    let connectivity = Connectivity::new(&[10.0, 2.0, 8.0, 5.0], 100.0, &direct);
    close(connectivity.probability, 0.0305, 1e-12);
    agrees(connectivity.equivalent_area_ha, "17.464249");
    let losses = connectivity.loss_percent.unwrap();
    for (loss, printed) in losses.iter().zip(["58.3607", "26.8852", "49.8361", "16.0656"]) {
        agrees(*loss, printed);
    }
}

fn capacity_matrix(places: &[([f64; 2], f64)], alpha: f64) -> Sparse {
    let n = u32::try_from(places.len()).unwrap();
    let pairs = (0..n).flat_map(|i| (0..n).filter(move |j| i != *j).map(move |j| (i, j)));
    let entries = pairs.map(|(i, j)| {
        let [(a, area_i), (b, area_j)] = [i, j].map(|patch| places[patch as usize]);
        let apart = ((a[0] - b[0]) * (a[0] - b[0]) + (a[1] - b[1]) * (a[1] - b[1])).sqrt();
        (i, j, num::exp(-alpha * apart) * area_i * area_j)
    });
    Sparse::new(places.len(), entries)
}

/// Two and three identical patches: Hanski & Ovaskainen 2000, Nature 404; closed forms A2 exp(-alpha d) and twice that.
#[test]
fn metapopulation_capacity_of_identical_patches() {
    let corners = [([0.0, 0.0], 2.0), ([1.5, 0.0], 2.0), ([0.75, 0.75 * 3.0_f64.sqrt()], 2.0)];
    let two = Capacity::new(&capacity_matrix(&corners[..2], 0.8));
    agrees(two.value, "1.20477685");
    close(two.shares[0], two.value / 2.0, 1e-9);
    agrees(Capacity::new(&capacity_matrix(&corners, 0.8)).value, "2.40955370");
}

/// Five patches, their shares, and the capacity without each: Ovaskainen & Hanski 2001; values computed independently.
#[test]
fn metapopulation_capacity_and_its_shares() {
    let places = [([0.0, 0.0], 3.0), ([2.0, 0.0], 1.0), ([1.0, 3.0], 2.0), ([6.0, 1.0], 1.5), ([6.5, 2.5], 0.5)];
    let capacity = Capacity::new(&capacity_matrix(&places, 0.5));
    agrees(capacity.value, "1.94802403");
    close(capacity.shares.iter().sum(), capacity.value, 1e-12);
    let shares = ["0.8155303", "0.4875257", "0.5636866", "0.0701206", "0.0111608"];
    let without = ["0.6388970", "1.3197870", "1.1911021", "1.8772278", "1.9370910"];
    for patch in 0..5 {
        agrees(capacity.shares[patch], shares[patch]);
        let mut rest = places.to_vec();
        rest.remove(patch);
        agrees(Capacity::new(&capacity_matrix(&rest, 0.5)).value, without[patch]);
    }
}

/// The five patches again, through a study's table and the links kept: the exponential kernel over its value at 0 is
/// exp(-alpha d) with mean 2 / alpha; and x = 1, b = 0.5 against the leading eigenvalue by plain iteration here.
#[test]
fn the_structure_of_a_network_has_the_same_capacity() {
    let places = [([0.0, 0.0], 3.0), ([2.0, 0.0], 1.0), ([1.0, 3.0], 2.0), ([6.0, 1.0], 1.5), ([6.5, 2.5], 0.5)];
    let patches = places.iter().enumerate().map(|(name, (at, area))| point(name.to_string(), *at, *area));
    let landscape = landscape(patches.collect());
    let mut dispersal = table(&Kernel::new(Exponential::new(Scale::MeanKm(4.0))), Settlement::Shared, 0.0);
    let network = build(&landscape, &dispersal);
    let structure = Structure::new(&landscape, &dispersal, &network, 1.0);
    agrees(structure.capacity.value, "1.94802403");
    agrees(structure.capacity.shares[2], "0.5636866");
    assert_eq!(structure.graph.n_components, 1);

    dispersal.area_exponent = 0.5;
    let structure = Structure::new(&landscape, &dispersal, &network, 1.0);
    let mut vector = [1.0_f64; 5];
    let mut value = 0.0;
    for _ in 0..2_000 {
        let mut next = [0.0; 5];
        for i in 0..5 {
            for j in (0..5).filter(|j| *j != i) {
                let shape = num::exp(-0.5 * distance(&landscape, i, j));
                next[i] += shape * places[i].1 * places[j].1.sqrt() * vector[j];
            }
        }
        value = next.iter().fold(0.0, |most: f64, x| most.max(*x));
        vector = next.map(|x| x / value);
    }
    close(structure.capacity.value, value, 1e-9);
}

/// A study's own measured table: its probabilities as they stand, distances beside them, and every mistake by its line.
#[test]
fn a_measured_table_is_taken_as_it_stands() {
    let folder = tempfile::tempdir().unwrap();
    let study = folder.path().join("study.toml");
    let places = [([0.0, 0.0], 3.0), ([3.0, 4.0], 1.0), ([1.0, 3.0], 2.0)];
    let patches = places.iter().enumerate().map(|(name, (at, area))| point(name.to_string(), *at, *area));
    let landscape = landscape(patches.collect());
    let read = |text: &str, keys: &str| {
        std::fs::write(folder.path().join("moves.csv"), text).unwrap();
        let document =
            Document::parse(Path::new(&study), format!("[dispersal]\nkernel = {{ table = 'moves.csv' }}\n{keys}"));
        let table = DispersalTable::read(document.root().table("dispersal").unwrap());
        (table, document.verdict().err().map_or(Vec::new(), |mistakes| mistakes.into_vec()))
    };
    let (table, mistakes) = read("from,to,probability\n0,1,0.25\n2,0,0.5\n0,2,0.75\n", "");
    assert!(mistakes.is_empty(), "{mistakes:?}");
    let network = build(&landscape, &table.unwrap());
    close(probability(&network, 0, 1), 0.25, 1e-15);
    close(network.row(0)[0].distance_km, 5.0, 1e-15);
    assert_eq!(network.lost, [0.0, 1.0, 0.5]);

    let (table, mistakes) = read("from,to,probability\n0,0,0.1\n0,1,1.5\n", "tail = 0.1\n");
    assert!(table.is_none());
    let words: Vec<&str> = mistakes.iter().map(|mistake| mistake.found.as_str()).collect();
    assert_eq!(words, ["dispersal.tail = 0.1", "from 0 to 0", "probability = 1.5"]);
    let (_, mistakes) = read("from,to,probability\n0,1,0.6\n0,2,0.5\n0,1,0.1\n", "");
    assert!(mistakes[0].found.contains("add up to more than 1") && mistakes[1].found.contains("again"), "{mistakes:?}");
    assert!(mistakes[0].to_string().contains("moves.csv:3"), "{}", mistakes[0]);

    let (table, _) = read("from,to,probability\n0,1,0.6\n0,pond,0.1\n", "");
    let unknown = Network::build(&landscape, &table.unwrap(), &AllPairs(&landscape)).unwrap_err();
    assert!(unknown.to_string().contains("moves.csv:3") && unknown.to_string().contains("to = pond"), "{unknown}");
}

//! Which patches lie near which, and how far.

use geo::Coord;
use kiddo::{ImmutableKdTree, SquaredEuclidean};

use super::edges::EdgeTree;
use super::measure::round_distance_km;
use super::patch::Landscape;

/// Searches look this much farther than asked, so that no rounding loses a neighbour: a tenth of the millimetre to which
/// distances are rounded would do.
const SLACK_KM: f64 = 1e-6;

/// Patches prepared for the search of neighbours.
///
/// Centroids stand in kd-trees, one for every class of sizes, so that one huge patch does not make every small one a
/// candidate of every other. What a tree lets through is measured from edge to edge.
///
/// # Units
/// kilometres, rounded to 1 mm
#[derive(Debug)]
pub struct Neighbours {
    between_centroids: bool,
    centroids_km: Vec<[f64; 2]>,
    radii_km: Vec<f64>,
    outlines: Vec<EdgeTree>,
    classes: Vec<SizeClass>,
}

/// Patches of like radius.
#[derive(Debug)]
struct SizeClass {
    largest_radius_km: f64,
    patches: Vec<usize>,
    tree: ImmutableKdTree<f64, 2>,
}

impl Neighbours {
    /// Prepares the patches of a landscape.
    pub fn new(landscape: &Landscape) -> Self {
        let patches = &landscape.patches;
        let centroids_km: Vec<[f64; 2]> = patches.iter().map(|patch| patch.centroid_km).collect();
        let radii_km: Vec<f64> =
            patches.iter().map(|patch| if landscape.between_centroids { 0.0 } else { patch.radius_km }).collect();
        let outlines = if landscape.between_centroids {
            Vec::new()
        } else {
            patches
                .iter()
                .map(|patch| {
                    let [x, y] = patch.centroid_km;
                    let is_point = patch.outline_km.0.is_empty();
                    if is_point { EdgeTree::point(Coord { x, y }) } else { EdgeTree::new(&patch.outline_km) }
                })
                .collect()
        };
        let classes = size_classes(&centroids_km, &radii_km);
        Self { between_centroids: landscape.between_centroids, centroids_km, radii_km, outlines, classes }
    }

    /// All other patches whose distance is at most `km`, by position in the landscape, with their distances; sorted by
    /// position. Distances run between nearest edges (0 where patches meet or one lies in the other) or centroids, as the
    /// landscape says.
    pub fn within(&self, patch: usize, km: f64) -> Vec<(usize, f64)> {
        self.beyond_within(patch, f64::NEG_INFINITY, km)
    }

    /// The same without those nearer than or at `beyond_km`: what a wider search adds to an earlier one.
    pub fn beyond_within(&self, patch: usize, beyond_km: f64, km: f64) -> Vec<(usize, f64)> {
        let mut found: Vec<(usize, f64)> = self
            .candidates(patch, km)
            .filter(|other| !self.surely_within(patch, *other, beyond_km))
            .filter_map(|other| Some((other, self.distance_up_to(patch, other, km)?)))
            .filter(|(_, distance_km)| *distance_km > beyond_km && *distance_km <= km)
            .collect();
        found.sort_by_key(|(other, _)| *other);
        found
    }

    /// A distance within which all other patches lie: a search up to it finds everything.
    pub fn reach_km(&self, patch: usize) -> f64 {
        let farthest = (0..self.centroids_km.len())
            .map(|other| self.between_centroids_km(patch, other) + self.radii_km[other])
            .fold(0.0, f64::max);
        farthest + SLACK_KM
    }

    /// The distance between two patches.
    pub fn distance_km(&self, a: usize, b: usize) -> f64 {
        self.distance_up_to(a, b, f64::INFINITY).unwrap_or(f64::INFINITY)
    }

    /// Patches that may lie within `km`.
    fn candidates(&self, patch: usize, km: f64) -> impl Iterator<Item = usize> {
        let centre = self.centroids_km[patch];
        self.classes
            .iter()
            .flat_map(move |class| {
                let reach = km + self.radii_km[patch] + class.largest_radius_km + SLACK_KM;
                let found = class.tree.query(&centre).within::<SquaredEuclidean<f64>>(reach * reach).execute();
                found.into_iter().map(|result| class.patches[result.item as usize])
            })
            .filter(move |other| *other != patch)
    }

    /// Whether two patches lie within `km`, as far as their centroids and radii tell.
    fn surely_within(&self, a: usize, b: usize, km: f64) -> bool {
        self.between_centroids_km(a, b) + self.radii_km[a] + self.radii_km[b] <= km - SLACK_KM
    }

    /// The distance, if it is hardly more than `km`. The same whichever way round it is asked for.
    fn distance_up_to(&self, a: usize, b: usize, km: f64) -> Option<f64> {
        let (a, b) = (a.min(b), a.max(b));
        let distance = if self.between_centroids {
            self.between_centroids_km(a, b)
        } else {
            self.outlines[a].distance_within(&self.outlines[b], km + SLACK_KM)?
        };
        Some(round_distance_km(distance))
    }

    fn between_centroids_km(&self, a: usize, b: usize) -> f64 {
        let (a, b) = (self.centroids_km[a], self.centroids_km[b]);
        let (dx, dy) = (b[0] - a[0], b[1] - a[1]);
        (dx * dx + dy * dy).sqrt()
    }
}

/// Classes in which no radius is more than twice another, but for the smallest.
fn size_classes(centroids_km: &[[f64; 2]], radii_km: &[f64]) -> Vec<SizeClass> {
    let mut by_size: Vec<usize> = (0..radii_km.len()).collect();
    by_size.sort_by(|a, b| radii_km[*b].total_cmp(&radii_km[*a]));
    let mut classes = Vec::new();
    let mut rest = by_size.as_slice();
    while let Some(largest) = rest.first() {
        let largest_radius_km = radii_km[*largest];
        // Below 50 m a radius matters to no search: those patches and all points share a class.
        let least = if largest_radius_km > 0.05 { largest_radius_km / 2.0 } else { 0.0 };
        let count = rest.partition_point(|patch| radii_km[*patch] >= least);
        let (class, smaller) = rest.split_at(count);
        rest = smaller;
        let points: Vec<[f64; 2]> = class.iter().map(|patch| centroids_km[*patch]).collect();
        let tree = ImmutableKdTree::new_from_slice(&points).expect("centroids are finite and fewer than 2^32");
        classes.push(SizeClass { largest_radius_km, patches: class.to_vec(), tree });
    }
    classes
}

#[cfg(test)]
mod tests {
    use geo::{Distance, Euclidean, Geometry, MultiPolygon, Rect};
    use proptest::prelude::*;

    use super::*;
    use crate::landscape::{CapacityOverTime, Crs, Patch, Start};
    use crate::mistake::Place;

    /// A square of a half-width around a centre, a point where that is 0; kilometres.
    fn square(index: usize, [x, y]: [f64; 2], half: f64) -> Patch {
        let shape = Rect::new((x - half, y - half), (x + half, y + half)).to_polygon();
        let outline = if half > 0.0 { MultiPolygon::new(vec![shape.clone()]) } else { MultiPolygon::new(Vec::new()) };
        Patch {
            name: format!("{index:05}"),
            area_ha: 4.0 * half * half * 100.0,
            capacity: 1.0,
            start: Start::Total(1.0),
            centroid_km: [x, y],
            radius_km: half * 2.0_f64.sqrt(),
            outline_km: outline,
            shape: Geometry::Polygon(shape),
            place: Place::file("p.geojson"),
        }
    }

    fn landscape(squares: &[([f64; 2], f64)], between_centroids: bool) -> Landscape {
        let patches = squares.iter().enumerate().map(|(index, (centre, half))| square(index, *centre, *half)).collect();
        Landscape {
            patches,
            crs: Crs::Metres,
            crs_member: None,
            landscape_area_ha: 1.0,
            between_centroids,
            capacity_over_time: CapacityOverTime::default(),
        }
    }

    fn squares() -> impl Strategy<Value = Vec<([f64; 2], f64)>> {
        // One patch may be far larger than the others, and some are points.
        let half = prop_oneof![Just(0.0), 0.01..0.3, 0.01..0.3, 2.0..6.0];
        prop::collection::vec(([0.0..20.0, 0.0..20.0], half), 2..40)
    }

    proptest! {
        /// Against all pairs, measured with the geometry library.
        #[test]
        fn the_search_finds_what_all_pairs_find(squares in squares(), km in 0.0..12.0, centroids in any::<bool>()) {
            let landscape = landscape(&squares, centroids);
            let neighbours = Neighbours::new(&landscape);
            for (i, a) in landscape.patches.iter().enumerate() {
                let expected: Vec<(usize, f64)> = landscape
                    .patches
                    .iter()
                    .enumerate()
                    .filter(|(j, _)| *j != i)
                    .map(|(j, b)| (j, if centroids { between(a, b) } else { Euclidean.distance(&a.shape, &b.shape) }))
                    .filter(|(_, distance)| *distance <= km)
                    .collect();
                let found = neighbours.within(i, km);
                prop_assert_eq!(found.len(), expected.len());
                for ((j, distance), (expected_j, expected_distance)) in found.iter().zip(&expected) {
                    prop_assert_eq!(j, expected_j);
                    prop_assert!((distance - expected_distance).abs() <= 5.1e-7);
                    for either_way in [neighbours.distance_km(i, *j), neighbours.distance_km(*j, i)] {
                        prop_assert_eq!(either_way.to_bits(), distance.to_bits());
                    }
                }
            }
        }

        #[test]
        fn wider_searches_add_up(squares in squares(), km in 0.1..3.0) {
            let landscape = landscape(&squares, false);
            let neighbours = Neighbours::new(&landscape);
            let reach = neighbours.reach_km(0);
            let (mut found, mut to) = (neighbours.within(0, km), km);
            while to < reach {
                found.extend(neighbours.beyond_within(0, to, 2.0 * to));
                to *= 2.0;
            }
            found.sort_by_key(|(other, _)| *other);
            prop_assert_eq!(found.len(), squares.len() - 1);
            prop_assert_eq!(found, neighbours.within(0, reach));
        }
    }

    fn between(a: &Patch, b: &Patch) -> f64 {
        let (dx, dy) = (a.centroid_km[0] - b.centroid_km[0], a.centroid_km[1] - b.centroid_km[1]);
        (dx * dx + dy * dy).sqrt()
    }

    #[test]
    fn a_regular_grid_has_its_neighbours() {
        let squares: Vec<_> = (0..10_000).map(|i| ([f64::from(i % 100), f64::from(i / 100)], 0.25)).collect();
        let neighbours = Neighbours::new(&landscape(&squares, false));
        let found = neighbours.within(5050, 0.5);
        let expected = [4950, 5049, 5051, 5150].map(|other| (other, 0.5));
        assert_eq!(found, expected);
    }

    #[test]
    fn one_huge_patch_makes_no_candidates_of_small_ones() {
        let mut squares: Vec<_> = (0..10_000).map(|i| ([f64::from(i % 100), f64::from(i / 100)], 0.25)).collect();
        squares.push(([50.0, 250.0], 100.0));
        let neighbours = Neighbours::new(&landscape(&squares, false));
        assert!(neighbours.candidates(5050, 0.5).count() < 20);
        // By hand: its lower edge runs at 150, the upper edges of the top row at 99.25, of the next at 98.25.
        assert_eq!(neighbours.within(10_000, 51.0).len(), 100);
    }
}

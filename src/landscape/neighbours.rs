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
/// # Units    kilometres, rounded to 1 mm
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

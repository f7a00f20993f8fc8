//! Ground that counts twice: the same outline given twice, and patches that overlap.

use std::cmp::Ordering;
use std::ops::ControlFlow;
use std::path::Path;

use geo::line_intersection::line_intersection;
use geo::{Area, BooleanOps, Coord, CoordsIter, Geometry, Line};

use super::edges::{EdgeTree, Search};
use super::findings::Findings;
use super::geojson::Feature;
use super::patch::Patch;
use crate::mistake::Mistake;

/// Overlaps below this share of the smaller patch are slips of the pen and no warning.
const SLIP: f64 = 0.001;

/// Overlaps are measured until so many vertices have gone into it, some seconds of work: a layer with more of them has been
/// warned enough.
const MOST_VERTICES: usize = 20_000_000;

/// Notes every geometry that an earlier feature already has, coordinate for coordinate.
pub(super) fn refuse_duplicates(features: &[Feature], file: &Path, findings: &Findings<'_>) {
    let mut sorted: Vec<(&Feature, &Geometry<f64>)> =
        features.iter().filter_map(|feature| Some((feature, feature.geometry.as_ref()?))).collect();
    sorted.sort_by(|a, b| compare(a.1, b.1).then(a.0.index.cmp(&b.0.index)));
    let mut again: Vec<(&Feature, &Feature)> = sorted
        .chunk_by(|a, b| compare(a.1, b.1).is_eq())
        .flat_map(|same| same[1..].iter().map(|(later, _)| (*later, same[0].0)))
        .collect();
    again.sort_by_key(|(later, _)| later.index);
    for (later, first) in again {
        let found = format!("the same geometry as feature {}", first.index);
        let mistake = Mistake::new(later.place(file), found, "every piece of ground once");
        findings.mistake("duplicate", mistake.advise("delete one of the two in the GIS"));
    }
}

fn compare(a: &Geometry<f64>, b: &Geometry<f64>) -> Ordering {
    let by_coordinate = |a: Coord<f64>, b: Coord<f64>| a.x.total_cmp(&b.x).then(a.y.total_cmp(&b.y));
    let (mut first, mut second) = (a.coords_iter(), b.coords_iter());
    loop {
        match (first.next(), second.next()) {
            (Some(a), Some(b)) => match by_coordinate(a, b) {
                Ordering::Equal => {}
                unequal => return unequal,
            },
            (None, None) => return Ordering::Equal,
            (None, Some(_)) => return Ordering::Less,
            (Some(_), None) => return Ordering::Greater,
        }
    }
}

/// Warns of patches that overlap, so that ground and animals count twice. Patches side by side are none of its business.
pub(super) fn warn_of_overlaps(patches: &[Patch], findings: &Findings<'_>) {
    let trees: Vec<Option<EdgeTree>> = patches
        .iter()
        .map(|patch| (!patch.outline_km.0.is_empty()).then(|| EdgeTree::new(&patch.outline_km)))
        .collect();
    let west_east = |tree: &EdgeTree| {
        let (low, high) = tree.bounds().corners();
        (low.x, high.x)
    };
    let mut from_west: Vec<(usize, &EdgeTree)> =
        trees.iter().enumerate().filter_map(|(position, tree)| Some((position, tree.as_ref()?))).collect();
    from_west.sort_by(|a, b| west_east(a.1).0.total_cmp(&west_east(b.1).0));
    let mut vertices = 0;
    for (rank, (i, first)) in from_west.iter().enumerate() {
        let east = west_east(first).1;
        for (j, second) in from_west[rank + 1..].iter().take_while(|(_, second)| west_east(second).0 < east) {
            if vertices < MOST_VERTICES && share_ground(first, second) {
                vertices += first.edges().len() + second.edges().len();
                warn_of_overlap(&patches[*i.min(j)], &patches[*i.max(j)], findings);
            }
        }
    }
}

fn warn_of_overlap(a: &Patch, b: &Patch, findings: &Findings<'_>) {
    let common = a.outline_km.intersection(&b.outline_km).unsigned_area();
    let smaller = a.outline_km.unsigned_area().min(b.outline_km.unsigned_area());
    if common > SLIP * smaller {
        let found = format!("{} overlaps {} over {:.4} ha", b.name, a.name, common * 100.0);
        let warning = Mistake::new(b.place.clone(), found, "common ground counts in both, and so do its animals");
        findings.warning("overlap", warning.advise("cut one from the other in the GIS"));
    }
}

/// Whether an edge of one outline passes through one of the other, or a part of one begins within the other: then they may
/// share ground.
fn share_ground(first: &EdgeTree, second: &EdgeTree) -> bool {
    if first.bounds().gap_squared(&second.bounds()) > 0.0 {
        return false;
    }
    let mut crossing = Crossing { first: first.edges(), second: second.edges() };
    first.walk(second, &mut crossing).is_break() || first.holds_part_of(second) || second.holds_part_of(first)
}

struct Crossing<'a> {
    first: &'a [Line<f64>],
    second: &'a [Line<f64>],
}

impl Search for Crossing<'_> {
    fn wants(&self, gap_squared: f64) -> bool {
        gap_squared <= 0.0
    }

    fn visit(&mut self, first: usize, second: usize) -> ControlFlow<()> {
        match line_intersection(self.first[first], self.second[second]) {
            Some(meeting) if meeting.is_proper() => ControlFlow::Break(()),
            _ => ControlFlow::Continue(()),
        }
    }
}

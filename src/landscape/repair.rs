//! Outlines that cross or touch themselves: found by a search over near edges, mended where they can be.
//!
//! The areas and distances of a patch are right only if its rings are simple and nested. Rings that merely touch are left
//! as they are where that changes no area.

use std::ops::{ControlFlow, Range};

use geo::line_intersection::{LineIntersection, line_intersection};
use geo::orient::Direction;
use geo::{
    Area, BoundingRect, Coord, CoordsIter, Line, MakeValid, MapCoords, MultiPolygon, Orient, Polygon, Rect, Validation,
    unary_union,
};

use super::edges::{EdgeTree, Search};

/// So many pairs of edges are looked at before a polygon counts as too intricate to be checked: seconds of work, met only
/// where most of a great many edges lie across each other's boxes.
const MOST_PAIRS: u64 = 50_000_000;

/// Areas that differ by less than this share are the same.
const SAME_AREA: f64 = 1e-9;

/// Parts that overlap by less than this share of their area count as side by side: it is more than the union rounds.
const SAME_UNION: f64 = 1e-6;

/// The repair merges vertices nearer than a ten-thousandth of a unit, which in degrees would be eleven metres. Enlarged so
/// much it is a hundredth of a millimetre; a power of two loses no digit.
const FINER: f64 = 1_048_576.0;

/// What is to be said of an outline.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Verdict {
    /// it is right as it is
    Sound,
    /// it was wrong in this way; this is what it must have meant
    Mended(MultiPolygon<f64>, Fault),
    /// it is wrong in this way and cannot be mended
    Hopeless(Fault),
    /// too many of its edges lie across each other's boxes for it to be checked
    Unchecked,
}

/// What is wrong with an outline.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Fault {
    /// a ring crosses, overlaps or passes through itself or another ring of its part, here
    Crossing(Coord<f64>),
    /// a hole lies outside of its part, or in another hole, here
    StrayHole(Coord<f64>),
    /// parts overlap
    OverlappingParts,
    /// nothing is enclosed
    NoArea,
}

/// Checks an outline, and mends it if need be. Coordinates are finite, rings closed, no edge has length 0.
pub(super) fn check(outline: &MultiPolygon<f64>) -> Verdict {
    let mut parts = Vec::with_capacity(outline.0.len());
    let mut fault = None;
    for part in outline {
        match check_part(part) {
            Verdict::Sound => parts.push(part.clone()),
            Verdict::Mended(mended, found) => {
                parts.extend(mended);
                fault = fault.or(Some(found));
            }
            other => return other,
        }
    }
    if let Some(joined) = join_overlapping(&parts) {
        return Verdict::Mended(joined, fault.unwrap_or(Fault::OverlappingParts));
    }
    fault.map_or(Verdict::Sound, |fault| Verdict::Mended(MultiPolygon::new(parts), fault))
}

fn check_part(part: &Polygon<f64>) -> Verdict {
    let tree = EdgeTree::new(&MultiPolygon::new(vec![part.clone()]));
    let contacts = Contacts::within(&tree);
    if contacts.pairs_left == 0 {
        return Verdict::Unchecked;
    }
    if let Some(at) = contacts.crossing {
        return mend(part, Fault::Crossing(at));
    }
    if let Some(at) = stray_hole(&tree) {
        return Verdict::Hopeless(Fault::StrayHole(at));
    }
    let Some(at) = contacts.touch else { return Verdict::Sound };
    // A ring that passes through one of its own vertices touches itself just as one that turns back there does. The area
    // tells the two apart.
    match mend(part, Fault::Crossing(at)) {
        Verdict::Mended(mended, _) if same_area(part, &mended) => Verdict::Sound,
        other => other,
    }
}

fn same_area(part: &Polygon<f64>, mended: &MultiPolygon<f64>) -> bool {
    (mended.unsigned_area() - part.unsigned_area()).abs() <= SAME_AREA * part.unsigned_area()
}

fn mend(part: &Polygon<f64>, fault: Fault) -> Verdict {
    match overlay(|| part.map_coords(|at| at * FINER).make_valid()) {
        Some(Ok(mended)) if mended.unsigned_area() <= 0.0 => Verdict::Hopeless(Fault::NoArea),
        Some(Ok(mended)) if is_right(&mended) => Verdict::Mended(mended.map_coords(|at| at / FINER), fault),
        _ => Verdict::Hopeless(fault),
    }
}

/// A few rings that double back on themselves break an assertion within the overlay: they count as beyond repair.
fn overlay<T>(work: impl FnOnce() -> T) -> Option<T> {
    std::panic::catch_unwind(std::panic::AssertUnwindSafe(work)).ok()
}

/// Whether a repair came out sound. Large ones, for which that takes long, are taken at their word.
fn is_right(mended: &MultiPolygon<f64>) -> bool {
    mended.coords_count() > MOST_LOOKED_AT || mended.is_valid()
}

/// The most vertices of a repair that is looked at again.
const MOST_LOOKED_AT: usize = 2_000;

/// A point on a hole that does not lie in the shell and outside the other holes, given that no rings cross.
fn stray_hole(tree: &EdgeTree) -> Option<Coord<f64>> {
    tree.rings().iter().skip(1).find_map(|hole| {
        let edges = &tree.edges()[hole.clone()];
        // Rings touch at vertices if they touch, so the middle of an edge is on one side or the other.
        let on_hole = (edges[0].start + edges[0].end) / 2.0;
        // Without the hole itself, the point is inside by the even-odd rule.
        let alone = EdgeTree::of_ring(edges.to_vec());
        (tree.contains(on_hole) == alone.contains(on_hole)).then_some(on_hole)
    })
}

/// The union of the parts, if some of them overlap.
fn join_overlapping(parts: &[Polygon<f64>]) -> Option<MultiPolygon<f64>> {
    if !boxes_overlap(parts) {
        return None;
    }
    let separate: f64 = parts.iter().map(Area::unsigned_area).sum();
    let oriented: Vec<Polygon<f64>> = parts.iter().map(|part| part.orient(Direction::Default)).collect();
    let joined = overlay(|| unary_union(&oriented))?;
    (joined.unsigned_area() < separate * (1.0 - SAME_UNION)).then_some(joined)
}

fn boxes_overlap(parts: &[Polygon<f64>]) -> bool {
    let mut boxes: Vec<Rect<f64>> = parts.iter().filter_map(BoundingRect::bounding_rect).collect();
    boxes.sort_by(|a, b| a.min().x.total_cmp(&b.min().x));
    boxes.iter().enumerate().any(|(position, a)| {
        boxes[position + 1..]
            .iter()
            .take_while(|b| b.min().x < a.max().x)
            .any(|b| b.min().y < a.max().y && a.min().y < b.max().y)
    })
}

/// Where the edges of a part meet that are not neighbours in a ring.
struct Contacts<'a> {
    edges: &'a [Line<f64>],
    rings: &'a [Range<usize>],
    crossing: Option<Coord<f64>>,
    touch: Option<Coord<f64>>,
    pairs_left: u64,
}

impl<'a> Contacts<'a> {
    fn within(tree: &'a EdgeTree) -> Self {
        let mut contacts =
            Self { edges: tree.edges(), rings: tree.rings(), crossing: None, touch: None, pairs_left: MOST_PAIRS };
        // It breaks off at the first crossing, and where there are too many pairs.
        let _ = tree.walk(tree, &mut contacts);
        contacts
    }

    fn are_neighbours(&self, first: usize, second: usize) -> bool {
        let ring = &self.rings[self.rings.partition_point(|ring| ring.end <= first)];
        second == first + 1 && second < ring.end || first == ring.start && second + 1 == ring.end
    }
}

impl Search for Contacts<'_> {
    fn wants(&self, gap_squared: f64) -> bool {
        gap_squared <= 0.0
    }

    fn visit(&mut self, first: usize, second: usize) -> ControlFlow<()> {
        if second <= first {
            return ControlFlow::Continue(());
        }
        self.pairs_left -= 1;
        if self.pairs_left == 0 {
            return ControlFlow::Break(());
        }
        match line_intersection(self.edges[first], self.edges[second]) {
            Some(LineIntersection::SinglePoint { is_proper: false, intersection }) => {
                if !self.are_neighbours(first, second) {
                    self.touch = Some(intersection);
                }
                ControlFlow::Continue(())
            }
            Some(LineIntersection::SinglePoint { intersection, .. }) => {
                self.crossing = Some(intersection);
                ControlFlow::Break(())
            }
            Some(LineIntersection::Collinear { intersection }) => {
                self.crossing = Some(intersection.start);
                ControlFlow::Break(())
            }
            None => ControlFlow::Continue(()),
        }
    }
}

#[cfg(test)]
mod tests {
    use geo::wkt;

    use super::*;

    fn mended(outline: MultiPolygon<f64>) -> (f64, Fault) {
        match check(&outline) {
            Verdict::Mended(mended, fault) => (mended.unsigned_area(), fault),
            other => panic!("{other:?}"),
        }
    }

    #[test]
    fn simple_rings_with_holes_are_sound() {
        let ring = wkt!(POLYGON((0. 0., 10. 0., 10. 10., 0. 10., 0. 0.), (2. 2., 4. 2., 4. 4., 2. 4., 2. 2.)));
        assert_eq!(check(&ring.into()), Verdict::Sound);
    }

    #[test]
    fn a_bow_tie_becomes_two_triangles() {
        // The lobes wind contrariwise: the area by the surveyor's formula is 0, by hand 25 + 25.
        let (area, fault) = mended(wkt!(POLYGON((0. 0., 0. 10., 10. 0., 10. 10., 0. 0.))).into());
        assert!((area - 50.0).abs() < 1e-9);
        assert_eq!(fault, Fault::Crossing(Coord { x: 5.0, y: 5.0 }));
    }

    #[test]
    fn a_bow_tie_that_has_its_crossing_as_a_vertex_is_found_too() {
        let (area, _) = mended(wkt!(POLYGON((0. 0., 0. 10., 5. 5., 10. 0., 10. 10., 5. 5., 0. 0.))).into());
        assert!((area - 50.0).abs() < 1e-9);
    }

    #[test]
    fn a_bow_tie_in_degrees_keeps_its_small_features() {
        // Two triangles of 4e-5 by 2e-5 degrees: smaller than the repair's own snapping.
        let (area, _) = mended(wkt!(POLYGON((5. 52., 5. 52.00004, 5.00004 52., 5.00004 52.00004, 5. 52.))).into());
        assert!((area / 8e-10 - 1.0).abs() < 1e-6, "{area}");
    }

    #[test]
    fn a_ring_that_touches_itself_is_left_alone() {
        // Two squares that meet at a corner, drawn in one line.
        let ring = wkt!(POLYGON((0. 0., 5. 0., 5. 5., 10. 5., 10. 10., 5. 10., 5. 5., 0. 5., 0. 0.)));
        assert_eq!(check(&ring.into()), Verdict::Sound);
    }

    #[test]
    fn a_spike_is_cut_off() {
        let (area, fault) = mended(wkt!(POLYGON((0. 0., 4. 0., 4. 4., 2. 4., 2. 6., 2. 4., 0. 4., 0. 0.))).into());
        assert!((area - 16.0).abs() < 1e-9);
        assert!(matches!(fault, Fault::Crossing(_)));
    }

    #[test]
    fn a_hole_outside_of_its_part_is_hopeless() {
        let ring = wkt!(POLYGON((0. 0., 4. 0., 4. 4., 0. 4., 0. 0.), (6. 6., 7. 6., 7. 7., 6. 6.)));
        assert!(matches!(check(&ring.into()), Verdict::Hopeless(Fault::StrayHole(_))));
        let nested = wkt!(POLYGON((0. 0., 9. 0., 9. 9., 0. 9., 0. 0.), (1. 1., 8. 1., 8. 8., 1. 1.),
            (6. 3., 7. 3., 7. 4., 6. 3.)));
        assert!(matches!(check(&nested.into()), Verdict::Hopeless(Fault::StrayHole(_))));
    }

    #[test]
    fn a_hole_that_fills_its_part_is_hopeless() {
        let ring = wkt!(POLYGON((0. 0., 4. 0., 4. 4., 0. 0.), (0. 0., 4. 0., 4. 4., 0. 0.)));
        assert!(matches!(check(&ring.into()), Verdict::Hopeless(_)));
    }

    #[test]
    fn overlapping_parts_are_joined_and_neighbouring_ones_left() {
        let overlapping =
            wkt!(MULTIPOLYGON(((0. 0., 4. 0., 4. 4., 0. 4., 0. 0.)), ((2. 0., 2. 4., 6. 4., 6. 0., 2. 0.))));
        let (area, fault) = mended(overlapping);
        assert!((area - 24.0).abs() < 1e-6);
        assert_eq!(fault, Fault::OverlappingParts);
        let beside = wkt!(MULTIPOLYGON(((0. 0., 4. 0., 4. 4., 0. 4., 0. 0.)), ((4. 0., 4. 4., 6. 4., 6. 0., 4. 0.))));
        assert_eq!(check(&beside), Verdict::Sound);
        let island = wkt!(MULTIPOLYGON(
            ((0. 0., 9. 0., 9. 9., 0. 9., 0. 0.), (2. 2., 7. 2., 7. 7., 2. 7., 2. 2.)),
            ((3. 3., 4. 3., 4. 4., 3. 3.))));
        assert_eq!(check(&island), Verdict::Sound);
    }

    fn wavy(edges: u32, depth: f64) -> MultiPolygon<f64> {
        let ring = (0..edges).map(|step| {
            let angle = std::f64::consts::TAU * f64::from(step) / f64::from(edges);
            let radius = 10.0 + depth * f64::from(step % 2);
            Coord { x: radius * crate::num::cos(angle), y: radius * crate::num::sin(angle) }
        });
        Polygon::new(geo::LineString::new(ring.collect()), Vec::new()).into()
    }

    #[test]
    fn a_million_edges_are_checked_without_trying_all_pairs() {
        assert_eq!(check(&wavy(1_000_000, 1e-4)), Verdict::Sound);
    }

    #[test]
    fn what_would_take_too_long_is_said_to_be_unchecked() {
        // Every needle lies across the boxes of thousands of others.
        assert_eq!(check(&wavy(200_000, 9.0)), Verdict::Unchecked);
    }
}

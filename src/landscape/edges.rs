//! The edges of an outline under a tree of boxes, which finds near and meeting edges without trying all pairs.
//!
//! The edges keep the order of their rings, so neighbours in the list are neighbours on the ground and the boxes around
//! short runs of them are small; no sorting is needed. An outline of a million edges is searched about as fast as a small
//! one.

use std::ops::{ControlFlow, Range};

use geo::{Coord, Intersects, Line, MultiPolygon};

/// Edges to a box, and boxes to a box above it.
const RUN: usize = 4;

/// Outlines of up to so many edges are scanned, which beats walking their trees.
const FEW: usize = 256;

/// The edges of one or more closed rings, or a single point.
#[derive(Debug, Clone)]
pub(super) struct EdgeTree {
    edges: Vec<Line<f64>>,
    /// the edges of each ring
    rings: Vec<Range<usize>>,
    /// the first vertex of each part
    anchors: Vec<Coord<f64>>,
    /// `levels[0]` holds a box for every run of edges, each further level one for every run of boxes below; the last has
    /// one box
    levels: Vec<Vec<Bounds>>,
}

/// A box with sides along the axes.
#[derive(Debug, Clone, Copy)]
pub(super) struct Bounds {
    low: Coord<f64>,
    high: Coord<f64>,
}

/// What a walk over pairs of edges looks for.
pub(super) trait Search {
    /// Whether pairs of edges matter whose boxes lie the root of this apart.
    fn wants(&self, gap_squared: f64) -> bool;
    /// Looks at one pair, given by their positions in the two outlines.
    fn visit(&mut self, first: usize, second: usize) -> ControlFlow<()>;
}

/// A box of a tree.
#[derive(Clone, Copy)]
struct Node {
    level: usize,
    position: usize,
}

impl EdgeTree {
    /// The edges of all rings of an outline, which must have at least one.
    pub(super) fn new(outline: &MultiPolygon<f64>) -> Self {
        let mut edges = Vec::new();
        let mut rings = Vec::new();
        for ring in outline.iter().flat_map(|part| std::iter::once(part.exterior()).chain(part.interiors())) {
            let start = edges.len();
            edges.extend(ring.lines());
            rings.push(start..edges.len());
        }
        let anchors = outline.iter().filter_map(|part| part.exterior().0.first().copied()).collect();
        Self { levels: levels(&edges), edges, rings, anchors }
    }

    /// A point, as an edge of length 0.
    pub(super) fn point(at: Coord<f64>) -> Self {
        Self::of_ring(vec![Line::new(at, at)])
    }

    /// The edges of one ring, at least one.
    pub(super) fn of_ring(edges: Vec<Line<f64>>) -> Self {
        Self {
            levels: levels(&edges),
            rings: std::iter::once(0..edges.len()).collect(),
            anchors: vec![edges[0].start],
            edges,
        }
    }

    /// The edges, ring after ring.
    pub(super) fn edges(&self) -> &[Line<f64>] {
        &self.edges
    }

    /// Which edges belong to each ring.
    pub(super) fn rings(&self) -> &[Range<usize>] {
        &self.rings
    }

    /// The box around everything.
    pub(super) fn bounds(&self) -> Bounds {
        *self.bounds_of(self.root())
    }

    /// The distance between the nearest points of two outlines, 0 where they meet or one lies within the other, if it is at
    /// most `limit`.
    pub(super) fn distance_within(&self, other: &Self, limit: f64) -> Option<f64> {
        let apart = self.bounds().gap_squared(&other.bounds());
        if apart > limit * limit {
            return None;
        }
        if apart <= 0.0 && (self.holds_part_of(other) || other.holds_part_of(self)) {
            return Some(0.0);
        }
        let beyond = (limit * limit).next_up();
        let best_squared = if self.edges.len() <= FEW && other.edges.len() <= FEW {
            self.scan(other, beyond)
        } else {
            let mut nearest = Nearest { first: &self.edges, second: &other.edges, best_squared: beyond };
            // It breaks off where the distance is 0.
            let _ = self.walk(other, &mut nearest);
            nearest.best_squared
        };
        (best_squared < beyond || limit.is_infinite()).then(|| best_squared.sqrt())
    }

    /// Square of the distance between the nearest edges of two outlines of at most [`FEW`] each, or `beyond` if it is not
    /// below. Two vertices that face each other bound it from above; few edges are near enough to the other outline to do
    /// better, and only those are paired.
    fn scan(&self, other: &Self, beyond: f64) -> f64 {
        let facing = self.vertex_near(other.bounds().centre());
        let mut best_squared = beyond.min(squared(facing - other.vertex_near(facing)));
        let (mut mine, mut theirs) = ([0; FEW], [0; FEW]);
        let (mine, around_mine) = self.edges_near(&other.bounds(), best_squared, &mut mine);
        let (theirs, _) = other.edges_near(&around_mine, best_squared, &mut theirs);
        for i in mine {
            let bounds = Bounds::of(&self.edges[*i]);
            for j in theirs.iter().copied() {
                if bounds.gap_squared(&Bounds::of(&other.edges[j])) < best_squared {
                    best_squared = best_squared.min(distance_squared(&self.edges[*i], &other.edges[j]));
                }
            }
        }
        best_squared
    }

    fn vertex_near(&self, point: Coord<f64>) -> Coord<f64> {
        let mut best = (f64::INFINITY, point);
        for edge in &self.edges {
            let away = squared(edge.start - point);
            if away < best.0 {
                best = (away, edge.start);
            }
        }
        best.1
    }

    /// The edges whose boxes lie less than the root of `within_squared` from a box, and the box around those edges.
    fn edges_near<'f>(&self, from: &Bounds, within_squared: f64, found: &'f mut [usize; FEW]) -> (&'f [usize], Bounds) {
        let mut count = 0;
        let mut around = Bounds::NOTHING;
        for (position, edge) in self.edges.iter().enumerate() {
            let bounds = Bounds::of(edge);
            if bounds.gap_squared(from) < within_squared {
                found[count] = position;
                count += 1;
                around = around.join(&bounds);
            }
        }
        (&found[..count], around)
    }

    /// Whether the first vertex of any part of `other` lies inside this outline.
    pub(super) fn holds_part_of(&self, other: &Self) -> bool {
        other.anchors.iter().any(|anchor| self.contains(*anchor))
    }

    /// Whether a point lies inside, by the even-odd rule; holes are outside. On the outline itself it may say either.
    pub(super) fn contains(&self, point: Coord<f64>) -> bool {
        self.crossings_east(self.root(), point) % 2 == 1
    }

    /// Visits the pairs of an edge of this outline and one of the other whose boxes the search wants, near ones first.
    pub(super) fn walk(&self, other: &Self, search: &mut impl Search) -> ControlFlow<()> {
        walk((self, self.root()), (other, other.root()), search)
    }

    /// How many edges below a box a line from the point due east crosses.
    fn crossings_east(&self, node: Node, point: Coord<f64>) -> usize {
        let bounds = self.bounds_of(node);
        if point.y < bounds.low.y || point.y > bounds.high.y || point.x > bounds.high.x {
            return 0;
        }
        if node.level == 0 {
            self.below(node).filter(|edge| crosses_east(&self.edges[*edge], point)).count()
        } else {
            self.nodes_below(node).map(|below| self.crossings_east(below, point)).sum()
        }
    }

    fn root(&self) -> Node {
        Node { level: self.levels.len() - 1, position: 0 }
    }

    fn bounds_of(&self, node: Node) -> &Bounds {
        &self.levels[node.level][node.position]
    }

    /// Positions of the edges or boxes that a box holds.
    fn below(&self, node: Node) -> Range<usize> {
        let end = if node.level == 0 { self.edges.len() } else { self.levels[node.level - 1].len() };
        node.position * RUN..((node.position + 1) * RUN).min(end)
    }

    fn nodes_below(&self, node: Node) -> impl Iterator<Item = Node> {
        let level = node.level - 1;
        self.below(node).map(move |position| Node { level, position })
    }
}

/// A box, and the tree it belongs to.
type Side<'a> = (&'a EdgeTree, Node);

fn walk(first: Side<'_>, second: Side<'_>, search: &mut impl Search) -> ControlFlow<()> {
    let gap = |first: Side<'_>, second: Side<'_>| first.0.bounds_of(first.1).gap_squared(second.0.bounds_of(second.1));
    if !search.wants(gap(first, second)) {
        return ControlFlow::Continue(());
    }
    if first.1.level == 0 && second.1.level == 0 {
        return visit_edges(first, second, search);
    }
    // The higher box is opened, its boxes taken in the order of their distance.
    let first_is_opened = first.1.level >= second.1.level;
    let (opened, closed) = if first_is_opened { (first, second) } else { (second, first) };
    let mut inside = [(f64::INFINITY, opened.1); RUN];
    let mut count = 0;
    for node in opened.0.nodes_below(opened.1) {
        inside[count] = (gap((opened.0, node), closed), node);
        count += 1;
    }
    inside[..count].sort_by(|a, b| a.0.total_cmp(&b.0));
    for (_, node) in &inside[..count] {
        let inner = (opened.0, *node);
        if first_is_opened { walk(inner, closed, search)? } else { walk(closed, inner, search)? }
    }
    ControlFlow::Continue(())
}

fn visit_edges(first: Side<'_>, second: Side<'_>, search: &mut impl Search) -> ControlFlow<()> {
    for i in first.0.below(first.1) {
        let bounds = Bounds::of(&first.0.edges[i]);
        for j in second.0.below(second.1) {
            if search.wants(bounds.gap_squared(&Bounds::of(&second.0.edges[j]))) {
                search.visit(i, j)?;
            }
        }
    }
    ControlFlow::Continue(())
}

struct Nearest<'a> {
    first: &'a [Line<f64>],
    second: &'a [Line<f64>],
    best_squared: f64,
}

impl Search for Nearest<'_> {
    fn wants(&self, gap_squared: f64) -> bool {
        gap_squared < self.best_squared
    }

    fn visit(&mut self, first: usize, second: usize) -> ControlFlow<()> {
        self.best_squared = self.best_squared.min(distance_squared(&self.first[first], &self.second[second]));
        if self.best_squared > 0.0 { ControlFlow::Continue(()) } else { ControlFlow::Break(()) }
    }
}

fn distance_squared(a: &Line<f64>, b: &Line<f64>) -> f64 {
    if Bounds::of(a).gap_squared(&Bounds::of(b)) <= 0.0 && a.intersects(b) {
        return 0.0;
    }
    let from_ends = [to_edge_squared(a.start, b), to_edge_squared(a.end, b)];
    let to_ends = [to_edge_squared(b.start, a), to_edge_squared(b.end, a)];
    from_ends.into_iter().chain(to_ends).fold(f64::INFINITY, f64::min)
}

fn to_edge_squared(point: Coord<f64>, edge: &Line<f64>) -> f64 {
    let along = edge.end - edge.start;
    let away = point - edge.start;
    let length_squared = along.x * along.x + along.y * along.y;
    let share = if length_squared > 0.0 {
        ((away.x * along.x + away.y * along.y) / length_squared).clamp(0.0, 1.0)
    } else {
        0.0
    };
    squared(away - along * share)
}

/// Square of the length of a vector.
fn squared(vector: Coord<f64>) -> f64 {
    vector.x * vector.x + vector.y * vector.y
}

fn levels(edges: &[Line<f64>]) -> Vec<Vec<Bounds>> {
    let mut levels = vec![runs(edges, Bounds::of)];
    while let Some(top) = levels.last().filter(|top| top.len() > 1) {
        levels.push(runs(top, |bounds| *bounds));
    }
    levels
}

fn runs<T>(items: &[T], bounds: impl Fn(&T) -> Bounds) -> Vec<Bounds> {
    items.chunks(RUN).filter_map(|run| run.iter().map(&bounds).reduce(|a, b| a.join(&b))).collect()
}

fn crosses_east(edge: &Line<f64>, point: Coord<f64>) -> bool {
    let (start, end) = (edge.start, edge.end);
    (start.y > point.y) != (end.y > point.y)
        && point.x < start.x + (point.y - start.y) / (end.y - start.y) * (end.x - start.x)
}

impl Bounds {
    /// A box that holds nothing and joins with any other to that other.
    const NOTHING: Self = Self {
        low: Coord { x: f64::INFINITY, y: f64::INFINITY },
        high: Coord { x: f64::NEG_INFINITY, y: f64::NEG_INFINITY },
    };

    fn centre(&self) -> Coord<f64> {
        (self.low + self.high) / 2.0
    }

    fn of(edge: &Line<f64>) -> Self {
        let (a, b) = (edge.start, edge.end);
        Self { low: Coord { x: a.x.min(b.x), y: a.y.min(b.y) }, high: Coord { x: a.x.max(b.x), y: a.y.max(b.y) } }
    }

    fn join(&self, other: &Self) -> Self {
        let (a, b) = (self, other);
        Self {
            low: Coord { x: a.low.x.min(b.low.x), y: a.low.y.min(b.low.y) },
            high: Coord { x: a.high.x.max(b.high.x), y: a.high.y.max(b.high.y) },
        }
    }

    /// Square of the distance between two boxes, 0 where they meet.
    pub(super) fn gap_squared(&self, other: &Self) -> f64 {
        let dx = (other.low.x - self.high.x).max(self.low.x - other.high.x).max(0.0);
        let dy = (other.low.y - self.high.y).max(self.low.y - other.high.y).max(0.0);
        dx * dx + dy * dy
    }

    /// The corner with the least coordinates and the one with the greatest.
    pub(super) fn corners(&self) -> (Coord<f64>, Coord<f64>) {
        (self.low, self.high)
    }
}

#[cfg(test)]
mod tests {
    use geo::{Distance, Euclidean, LineString, Polygon};
    use proptest::prelude::*;

    use super::*;

    /// A star-shaped ring: simple, whatever the radii.
    fn star(x: f64, y: f64, radii: &[f64]) -> Polygon<f64> {
        let ring = radii.iter().enumerate().map(|(position, radius)| {
            let angle = std::f64::consts::TAU * position as f64 / radii.len() as f64;
            Coord { x: x + radius * crate::num::cos(angle), y: y + radius * crate::num::sin(angle) }
        });
        Polygon::new(LineString::new(ring.collect()), Vec::new())
    }

    fn stars() -> impl Strategy<Value = Polygon<f64>> {
        (0.0..20.0, 0.0..20.0, prop::collection::vec(0.3..4.0, 3..120)).prop_map(|(x, y, radii)| star(x, y, &radii))
    }

    proptest! {
        /// Against the distance of the geometry library, which searches in another way.
        #[test]
        fn distances_are_those_of_the_geometry_library(a in stars(), b in stars()) {
            let (first, second) = (EdgeTree::new(&a.clone().into()), EdgeTree::new(&b.clone().into()));
            let known = Euclidean.distance(&a, &b);
            let ours = first.distance_within(&second, f64::INFINITY).unwrap();
            prop_assert!((ours - known).abs() < 1e-9, "{ours} against {known}");
            prop_assert_eq!(first.distance_within(&second, known - 1e-6).is_some(), known <= 0.0);
            prop_assert!(first.distance_within(&second, known + 1e-9).is_some());
        }

        #[test]
        fn inside_is_what_the_geometry_library_calls_inside(a in stars(), x in 0.0..20.0, y in 0.0..20.0) {
            let tree = EdgeTree::new(&a.clone().into());
            prop_assert_eq!(tree.contains(Coord { x, y }), a.intersects(&Coord { x, y }));
        }
    }

    #[test]
    fn a_patch_in_the_hole_of_another_has_the_distance_to_the_hole() {
        let hole = LineString::from(vec![(2.0, 2.0), (8.0, 2.0), (8.0, 8.0), (2.0, 8.0)]);
        let shell = LineString::from(vec![(0.0, 0.0), (10.0, 0.0), (10.0, 10.0), (0.0, 10.0)]);
        let ring = EdgeTree::new(&Polygon::new(shell.clone(), vec![hole]).into());
        let disc = EdgeTree::new(&Polygon::new(shell, Vec::new()).into());
        let inner = EdgeTree::point(Coord { x: 3.5, y: 5.0 });
        assert_eq!(ring.distance_within(&inner, f64::INFINITY), Some(1.5));
        assert_eq!(inner.distance_within(&ring, 1.5), Some(1.5));
        assert_eq!(inner.distance_within(&ring, 1.4), None);
        assert_eq!(inner.distance_within(&disc, 1.0), Some(0.0));
    }
}

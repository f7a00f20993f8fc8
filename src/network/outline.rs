//! Patches as ground that is left and landed on: their outlines, seen from points.

use std::f64::consts::TAU;

use geo::{LineString, MultiPolygon};

use super::kernel::Kernel;
use crate::landscape::Patch;
use crate::num;

/// Hectares in a km2.
const HA_PER_KM2: f64 = 100.0;
/// Corners of the polygon that stands for a disc.
const DISC_CORNERS: usize = 32;
/// Length of a panel of the boundary integral, in lengths over which the kernel changes.
const PANEL: f64 = 0.75;

/// A point in the plane of the landscape, km.
pub(super) type Point = [f64; 2];

/// The ground of a patch; a point with an area is a disc.
#[derive(Debug)]
pub(super) struct Outline {
    pub(super) centre: Point,
    pub(super) radius_km: f64,
    /// the patch's area as the study has it
    pub(super) area_km2: f64,
    /// the area within the rings
    ground_km2: f64,
    /// outer rings counterclockwise, holes clockwise; the last corner is followed by the first
    rings: Vec<Vec<Point>>,
}

impl Outline {
    pub(super) fn of(patch: &Patch) -> Self {
        let area_km2 = patch.area_ha / HA_PER_KM2;
        let (rings, radius_km) = if patch.outline_km.0.is_empty() {
            let radius_km = (area_km2 / std::f64::consts::PI).sqrt();
            (vec![disc(patch.centroid_km, area_km2)], radius_km)
        } else {
            (rings(&patch.outline_km), patch.radius_km)
        };
        let ground_km2 = rings.iter().map(|ring| signed_area(ring)).sum::<f64>().max(0.0);
        Self { centre: patch.centroid_km, radius_km, area_km2, ground_km2, rings }
    }

    /// `n` points spread evenly over the ground: on equally spaced lines across it, at equal steps along the part of the
    /// lines that is inside. One point is the centroid.
    pub(super) fn spread(&self, n: usize) -> Vec<Point> {
        if n == 1 {
            return vec![self.centre];
        }
        let (low, high) =
            self.rings.iter().flatten().fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), corner| {
                (low.min(corner[1]), high.max(corner[1]))
            });
        let n_lines = ((high - low) / (self.ground_km2 / count(n)).sqrt()).ceil().clamp(1.0, 1e6);
        let mut stretches: Vec<(f64, f64, f64)> = Vec::new();
        let mut line = 0.0;
        while line < n_lines {
            let y = low + (line + 0.5) * (high - low) / n_lines;
            stretches.extend(self.crossings(y).chunks_exact(2).map(|ends| (y, ends[0], ends[1])));
            line += 1.0;
        }
        let total: f64 = stretches.iter().map(|(_, left, right)| right - left).sum();
        if total <= 0.0 {
            return vec![self.centre];
        }
        let step = total / count(n);
        let mut points = Vec::with_capacity(n);
        let mut passed = 0.0;
        for (y, left, right) in stretches {
            // Never more than n, should rounding find room for another at the very end.
            while points.len() < n && (count(points.len()) + 0.5) * step < passed + right - left {
                points.push([left + (count(points.len()) + 0.5) * step - passed, y]);
            }
            passed += right - left;
        }
        points
    }

    /// Probability of landing within the outline, starting from a point: (1 / 2 pi) times the integral of P(distance <= r)
    /// over the angle at which the boundary, at distance r, is seen; exact for any kernel without direction.
    ///
    /// # Numerics
    /// Gauss-Legendre on short panels. Close by, P(distance <= r) is small where the angle turns fast; farther off the
    /// integral of P(distance > r), with the full turn taken out, loses nothing to cancellation.
    pub(super) fn landing(&self, start: Point, kernel: &Kernel) -> f64 {
        let close_by = self.edges().any(|(a, b)| distance_to_edge(start, a, b) <= kernel.bulk_km());
        let integral = |radial: &dyn Fn(f64) -> f64| -> f64 {
            self.edges().map(|(a, b)| seen_along(minus(a, start), minus(b, start), kernel.bulk_km(), radial)).sum()
        };
        let landing = if close_by {
            integral(&|km| 1.0 - kernel.beyond(km)) / TAU
        } else {
            let turns = if self.contains(start) { 1.0 } else { 0.0 };
            turns - integral(&|km| kernel.beyond(km)) / TAU
        };
        landing.clamp(0.0, 1.0)
    }

    /// The area that the study gives the patch over the area of its outline: what landing on the outline counts.
    pub(super) fn stated_over_ground(&self) -> f64 {
        if self.ground_km2 > 0.0 { self.area_km2 / self.ground_km2 } else { 0.0 }
    }

    fn edges(&self) -> impl Iterator<Item = (Point, Point)> {
        self.rings.iter().flat_map(|ring| {
            let next = ring.iter().skip(1).chain(ring.first());
            ring.iter().copied().zip(next.copied())
        })
    }

    fn contains(&self, point: Point) -> bool {
        self.crossings(point[1]).iter().filter(|x| **x > point[0]).count() % 2 == 1
    }

    /// Where the line at height `y` crosses the boundary, from left to right; an even number of places.
    fn crossings(&self, y: f64) -> Vec<f64> {
        let mut crossings: Vec<f64> = self
            .edges()
            .filter(|(a, b)| (a[1] <= y) != (b[1] <= y))
            .map(|(a, b)| a[0] + (y - a[1]) / (b[1] - a[1]) * (b[0] - a[0]))
            .collect();
        crossings.sort_by(f64::total_cmp);
        crossings
    }
}

#[expect(clippy::cast_precision_loss, reason = "numbers of points are small")]
fn count(n: usize) -> f64 {
    n as f64
}

fn minus(a: Point, b: Point) -> Point {
    [a[0] - b[0], a[1] - b[1]]
}

/// A regular polygon of a disc's area.
fn disc(centre: Point, area_km2: f64) -> Vec<Point> {
    let turn = TAU / count(DISC_CORNERS);
    let radius = (2.0 * area_km2 / (count(DISC_CORNERS) * num::sin(turn))).sqrt();
    let corner = |position| {
        let angle = turn * count(position);
        [centre[0] + radius * num::cos(angle), centre[1] + radius * num::sin(angle)]
    };
    (0..DISC_CORNERS).map(corner).collect()
}

fn rings(outline: &MultiPolygon<f64>) -> Vec<Vec<Point>> {
    outline
        .iter()
        .flat_map(|polygon| {
            let holes = polygon.interiors().iter().map(|hole| ring(hole, -1.0));
            std::iter::once(ring(polygon.exterior(), 1.0)).chain(holes)
        })
        .collect()
}

/// The corners of a ring, each once, turned so that its area has the sign `way`.
fn ring(line: &LineString<f64>, way: f64) -> Vec<Point> {
    let mut corners: Vec<Point> = line.coords().map(|corner| [corner.x, corner.y]).collect();
    corners.dedup();
    if corners.len() > 1 && corners.first() == corners.last() {
        corners.pop();
    }
    if signed_area(&corners) * way < 0.0 {
        corners.reverse();
    }
    corners
}

/// Area within a ring, above 0 if it runs counterclockwise; taken from its first corner, for the sake of far coordinates.
fn signed_area(ring: &[Point]) -> f64 {
    let Some(&first) = ring.first() else { return 0.0 };
    let crosses = ring.windows(2).map(|edge| {
        let [a, b] = [minus(edge[0], first), minus(edge[1], first)];
        a[0] * b[1] - a[1] * b[0]
    });
    crosses.sum::<f64>() / 2.0
}

fn distance_to_edge(point: Point, a: Point, b: Point) -> f64 {
    let [edge, to_point] = [minus(b, a), minus(point, a)];
    let length_squared = edge[0] * edge[0] + edge[1] * edge[1];
    let along = ((edge[0] * to_point[0] + edge[1] * to_point[1]) / length_squared).clamp(0.0, 1.0);
    let off = minus(to_point, [along * edge[0], along * edge[1]]);
    (off[0] * off[0] + off[1] * off[1]).sqrt()
}

/// Integral of `radial`(distance) over the angle along an edge from `a` to `b`, seen from the origin.
fn seen_along(a: Point, b: Point, bulk_km: f64, radial: &dyn Fn(f64) -> f64) -> f64 {
    let edge = minus(b, a);
    let length = (edge[0] * edge[0] + edge[1] * edge[1]).sqrt();
    let direction = [edge[0] / length, edge[1] / length];
    let height = a[0] * direction[1] - a[1] * direction[0];
    let begin = a[0] * direction[0] + a[1] * direction[1];
    let end = begin + length;
    let squared = height * height;
    let seen = |along: f64| {
        let r_squared = squared + along * along;
        if r_squared > 0.0 { radial(r_squared.sqrt()) * height / r_squared } else { 0.0 }
    };
    // Both ways from the foot of the perpendicular, where the distance has its kink.
    let part =
        |from: f64, to: f64, sign: f64| if to > from { panels(from, to, bulk_km, &|s| seen(sign * s)) } else { 0.0 };
    part(begin.max(0.0), end, 1.0) + part((-end).max(0.0), -begin, -1.0)
}

/// Integral of `f` from `from`, at least 0, to `to`, over panels that grow with the distance from 0.
fn panels(from: f64, to: f64, bulk_km: f64, f: &dyn Fn(f64) -> f64) -> f64 {
    let mut sum = 0.0;
    let mut left = from;
    while left < to {
        let longest = left.clamp(0.1 * bulk_km, PANEL * bulk_km).max(left / 20.0);
        let right = if to - left <= longest { to } else { left + longest };
        sum += gauss_legendre(left, right, right - left <= 0.1 * bulk_km, f);
        left = right;
    }
    sum
}

/// The rule of two nodes for a short panel, of four for a longer one (Abramowitz & Stegun 1964, table 25.4).
fn gauss_legendre(left: f64, right: f64, short: bool, f: &dyn Fn(f64) -> f64) -> f64 {
    const TWO: &[(f64, f64)] = &[(0.577_350_269_189_625_8, 1.0)];
    const FOUR: &[(f64, f64)] =
        &[(0.339_981_043_584_856_3, 0.652_145_154_862_546_1), (0.861_136_311_594_052_6, 0.347_854_845_137_453_9)];
    let (middle, half) = ((left + right) / 2.0, (right - left) / 2.0);
    let nodes = if short { TWO } else { FOUR };
    nodes.iter().map(|(node, weight)| weight * (f(middle - half * node) + f(middle + half * node))).sum::<f64>() * half
}

#[cfg(test)]
mod tests {
    use super::super::kernel::{Exponential, ExponentialPower, Gaussian, Lognormal, Scale, TwoDt};
    use super::*;

    fn outline(rings: Vec<Vec<Point>>) -> Outline {
        let ground_km2 = rings.iter().map(|ring| signed_area(ring)).sum();
        Outline { centre: [0.0, 0.0], radius_km: 0.0, area_km2: ground_km2, ground_km2, rings }
    }

    fn square(x: f64, y: f64, side: f64) -> Vec<Point> {
        vec![[x, y], [x + side, y], [x + side, y + side], [x, y + side]]
    }

    fn kernels() -> [Kernel; 5] {
        let scale = Scale::MeanKm(1.4);
        [
            Kernel::new(Exponential::new(scale)),
            Kernel::new(Gaussian::new(scale)),
            Kernel::new(ExponentialPower::new(0.5, scale)),
            Kernel::new(TwoDt::new(2.5, scale)),
            Kernel::new(Lognormal::new(0.8, scale)),
        ]
    }

    /// The kernels of mean 1.4 km integrated over a square of side 0.5 km centred 2 km away and over a disc of radius 0.3
    /// km centred 1 km away; computed independently by quadrature, eight decimals. The disc is a polygon of 32 corners.
    #[test]
    fn landing_from_a_point_is_the_integral_of_the_kernel() {
        let exact = [
            (0.00472757, 0.02215547),
            (0.00648293, 0.02389772),
            (0.00327712, 0.01800131),
            (0.00386577, 0.02472452),
            (0.00353897, 0.02301319),
        ];
        let square = outline(vec![square(1.75, -0.25, 0.5)]);
        let disc = outline(vec![disc([0.0, 1.0], 0.09 * std::f64::consts::PI)]);
        for (kernel, (in_square, in_disc)) in kernels().iter().zip(exact) {
            let landing = square.landing([0.0, 0.0], kernel);
            assert!((landing - in_square).abs() < 1e-8, "{landing} against {in_square}, {kernel:?}");
            let landing = disc.landing([0.0, 0.0], kernel);
            assert!((landing - in_disc).abs() < 1e-6, "{landing} against {in_disc}, {kernel:?}");
        }
    }

    /// Inside, on the edge and at a corner of a large square, from symmetry: the whole of P(distance <= r) at most, a
    /// half, a quarter; and a disc around the start holds P(distance <= radius) exactly.
    #[test]
    fn landing_where_the_start_is_inside_or_on_the_boundary() {
        let large = outline(vec![square(0.0, 0.0, 4_000.0)]);
        let around = outline(vec![disc([0.0, 0.0], std::f64::consts::PI * 4.0)]);
        for kernel in kernels() {
            for (start, truth) in [([2_000.0, 2_000.0], 1.0), ([2_000.0, 0.0], 0.5), ([0.0, 0.0], 0.25)] {
                let landing = large.landing(start, &kernel);
                assert!((landing - truth).abs() < 1e-5, "{landing} against {truth}, {kernel:?}");
            }
            let landing = around.landing([0.0, 0.0], &kernel);
            assert!((landing - (1.0 - kernel.beyond(2.0))).abs() < 1e-4, "{landing}, {kernel:?}");
        }
    }

    /// Areas add up: parts of a square, seen from near and from inside one of them, hold together what the whole holds,
    /// and a hole what fills it.
    #[test]
    fn landing_adds_up_over_parts_and_holes() {
        let whole = outline(vec![square(0.0, 0.0, 3.0)]);
        let hole = square(1.0, 1.0, 1.0);
        let inner = outline(vec![hole.clone()]);
        let turned: Vec<Point> = hole.into_iter().rev().collect();
        let frame = outline(vec![square(0.0, 0.0, 3.0), turned]);
        for kernel in kernels() {
            for start in [[1.5, 1.5], [1.01, 1.2], [0.5, 0.1], [-0.2, 1.0], [-9.0, 4.0]] {
                let parts = frame.landing(start, &kernel) + inner.landing(start, &kernel);
                let all = whole.landing(start, &kernel);
                assert!((parts - all).abs() < 1e-4 * all, "{parts} against {all} from {start:?}, {kernel:?}");
            }
        }
    }

    #[test]
    fn points_are_spread_evenly_and_inside() {
        let thin = outline(vec![vec![[0.0, 0.0], [10.0, 9.9], [10.0, 10.0], [0.0, 0.1]]]);
        let holed = {
            let turned: Vec<Point> = square(1.0, 1.0, 1.0).into_iter().rev().collect();
            outline(vec![square(0.0, 0.0, 3.0), turned])
        };
        for (outline, middle) in [(thin, [5.0, 5.0]), (holed, [1.5, 1.5])] {
            for n in [4, 16, 64, 1024] {
                let points = outline.spread(n);
                assert_eq!(points.len(), n);
                for point in &points {
                    assert!(outline.contains(*point), "{point:?} of {n}");
                }
                for axis in 0..2 {
                    let mean = points.iter().map(|point| point[axis]).sum::<f64>() / count(n);
                    assert!((mean - middle[axis]).abs() < 2.0 / count(n).sqrt(), "{mean} of {n}");
                }
            }
        }
    }
}

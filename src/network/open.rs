//! Settlement `open`: emigrants land where the kernel takes them.

use super::kernel::Kernel;
use super::outline::{Outline, Point};
use crate::landscape::Landscape;

/// The finest spread has four to this power points, the coarsest just one.
const FINEST: u32 = 7;
/// The least spread from which a near patch is seen.
const NEAR: u32 = 2;
/// Points lie closer than this part of the length over which the kernel changes, and of the gap between two patches.
const SPACING: f64 = 1.0 / 6.0;

/// The landscape as ground that is left and landed on.
#[derive(Debug)]
pub(super) struct Ground<'a> {
    kernel: &'a Kernel,
    patches: Vec<PatchGround>,
}

#[derive(Debug)]
struct PatchGround {
    outline: Outline,
    /// evenly spread points: one, the centroid, and four times as many from each spread to the next
    spreads: Vec<Vec<Point>>,
}

impl<'a> Ground<'a> {
    pub(super) fn new(landscape: &Landscape, kernel: &'a Kernel) -> Self {
        let patches = landscape.patches.iter().map(|patch| PatchGround::new(Outline::of(patch), kernel)).collect();
        Self { kernel, patches }
    }

    /// Areas of the patches in km2.
    pub(super) fn areas_km2(&self) -> Vec<f64> {
        self.patches.iter().map(|patch| patch.outline.area_km2).collect()
    }

    /// The radius of a patch around its centroid, in km.
    pub(super) fn radius_km(&self, patch: usize) -> f64 {
        self.patches[patch].outline.radius_km
    }

    /// Whether even the finest spread over a patch leaves its points farther apart than the kernel's bulk.
    pub(super) fn is_coarse(&self, patch: usize) -> bool {
        spread_for(&self.patches[patch].outline, self.kernel.bulk_km()) > FINEST
    }

    /// Probability that somebody who starts in a patch lands outside of it.
    pub(super) fn leaving(&self, patch: usize) -> f64 {
        let PatchGround { outline, spreads } = &self.patches[patch];
        1.0 - mean(finest(spreads), |start| outline.landing(start, self.kernel))
    }

    /// Probability that somebody who starts in one patch lands in another, those who land in the first included.
    pub(super) fn landing(&self, from: usize, to: usize) -> f64 {
        let [source, target] = [&self.patches[from], &self.patches[to]];
        let between = distance(source.outline.centre, target.outline.centre);
        let gap = between - source.outline.radius_km - target.outline.radius_km;
        let spacing = SPACING * self.kernel.bulk_km().min(gap);
        match (source.spread_to(spacing), target.spread_to(spacing)) {
            (Some(starts), Some(ends)) => {
                let density = mean(starts, |start| mean(ends, |end| self.kernel.density(distance(start, end))));
                density * target.outline.area_km2
            }
            _ => {
                let landing = mean(finest(&source.spreads), |start| target.outline.landing(start, self.kernel));
                landing * target.outline.stated_over_ground()
            }
        }
    }
}

impl PatchGround {
    fn new(outline: Outline, kernel: &Kernel) -> Self {
        let finest = spread_for(&outline, SPACING * kernel.bulk_km()).clamp(NEAR, FINEST);
        let spreads = (0..=finest).map(|power| outline.spread(4_usize.pow(power))).collect();
        Self { outline, spreads }
    }

    /// The coarsest spread whose points lie no farther apart than `spacing`, if there is one.
    fn spread_to(&self, spacing: f64) -> Option<&[Point]> {
        if spacing <= 0.0 {
            return None;
        }
        self.spreads.get(spread_for(&self.outline, spacing) as usize).map(Vec::as_slice)
    }
}

/// The power of four that spreads points over a patch no farther apart than `spacing`, counted along its length where it
/// is a strip; one above the finest if that is not enough.
fn spread_for(outline: &Outline, spacing: f64) -> u32 {
    let over_area = outline.area_km2 / (spacing * spacing);
    let along_side = outline.radius_km * std::f64::consts::SQRT_2 / spacing;
    let mut left = over_area.max(along_side);
    let mut power = 0;
    while left > 1.0 && power <= FINEST {
        left /= 4.0;
        power += 1;
    }
    power
}

fn finest(spreads: &[Vec<Point>]) -> &[Point] {
    spreads.last().map_or(&[], Vec::as_slice)
}

fn distance(a: Point, b: Point) -> f64 {
    let [x, y] = [a[0] - b[0], a[1] - b[1]];
    (x * x + y * y).sqrt()
}

fn mean(points: &[Point], f: impl Fn(Point) -> f64) -> f64 {
    #[expect(clippy::cast_precision_loss, reason = "a spread has few points")]
    let n = points.len() as f64;
    points.iter().map(|point| f(*point)).sum::<f64>() / n
}

//! The exact field for networks that are not large: a dense Cholesky factor.

use std::collections::BTreeMap;

use crate::num::exp;
use crate::random::{Purpose, ReplicateKey, standard_normal};

/// The most places that a dense field takes: drawing costs as much a patch as there are patches.
pub const MOST_CORRELATED_PLACES: usize = 2000;

/// Years that are drawn side by side, so that each row of the factor is read once for all.
const LANES: usize = 16;

/// One number a year, for the years of a block.
type Years = [f64; LANES];

/// A field with correlation exp(-d / reach) between centroids. Patches of one centroid share its innovations, which are
/// those of the first of them.
///
/// A patch that is added behind the others changes nothing for them: their rows of the factor stay.
#[derive(Debug, Clone)]
pub struct DenseField {
    /// by place
    keys: Vec<u64>,
    /// by patch
    place_of: Vec<u32>,
    /// lower Cholesky factor, row after row: row i has i + 1 numbers
    factor: Vec<f64>,
}

/// The innovations of a block of years, by place.
#[derive(Debug, Clone, Default)]
pub(super) struct Block(Vec<Years>);

impl DenseField {
    /// The field over patches with these centroids (kilometres in a plane) and keys.
    ///
    /// # Errors
    /// If the patches lie at more than [`MOST_CORRELATED_PLACES`] places.
    pub fn new(centroids_km: &[[f64; 2]], patch_keys: &[u64], reach_km: f64) -> Result<Self, String> {
        let (places_km, place_of) = places(centroids_km);
        if places_km.len() > MOST_CORRELATED_PLACES {
            return Err(format!(
                "weather correlated by distance over at most {MOST_CORRELATED_PLACES} patches; these are {}",
                places_km.len()
            ));
        }
        let mut keys = vec![None; places_km.len()];
        for (place, key) in place_of.iter().zip(patch_keys) {
            keys[*place as usize].get_or_insert(*key);
        }
        let factor = cholesky(places_km.len(), |i, j| {
            let [x, y] = [0, 1].map(|axis| places_km[i][axis] - places_km[j][axis]);
            exp(-(x * x + y * y).sqrt() / reach_km)
        });
        Ok(Self { keys: keys.into_iter().flatten().collect(), place_of, factor })
    }

    /// Rows of the lower Cholesky factor of the correlation matrix, one a place.
    pub fn factor_rows(&self) -> impl DoubleEndedIterator<Item = &[f64]> + ExactSizeIterator {
        (0..self.keys.len()).map(|row| &self.factor[row_start(row)..row_start(row + 1)])
    }

    pub(super) fn block(&self) -> Block {
        Block(vec![[0.0; LANES]; self.keys.len()])
    }

    pub(super) fn draw(
        &self,
        block: &mut Block,
        replicate: ReplicateKey,
        year: u32,
        purpose: Purpose,
        innovations: &mut [f64],
    ) {
        let lane = year as usize % LANES;
        if lane == 0 {
            self.fill(block, replicate, year, purpose);
        }
        for (innovation, place) in innovations.iter_mut().zip(&self.place_of) {
            *innovation = block.0[*place as usize][lane];
        }
    }

    fn fill(&self, block: &mut Block, replicate: ReplicateKey, first_year: u32, purpose: Purpose) {
        let years: [_; LANES] = std::array::from_fn(|lane| replicate.year(first_year + lane as u32));
        for (lanes, key) in block.0.iter_mut().zip(&self.keys) {
            *lanes = years.map(|year| standard_normal(&mut year.patch(*key).draw(purpose)));
        }
        // From the last place to the first, as a row needs only itself and those before it.
        for (place, row) in self.factor_rows().enumerate().rev() {
            block.0[place] = combine(row, &block.0);
        }
    }
}

/// The sum of the first places' years, each times its number in the row.
fn combine(row: &[f64], years: &[Years]) -> Years {
    let mut sum = [0.0; LANES];
    for (weight, years) in row.iter().zip(years) {
        for (sum, innovation) in sum.iter_mut().zip(years) {
            *sum += weight * innovation;
        }
    }
    sum
}

/// The distinct centroids in the order of their first patches, and by patch the place of its centroid.
fn places(centroids_km: &[[f64; 2]]) -> (Vec<[f64; 2]>, Vec<u32>) {
    let mut known = BTreeMap::new();
    let mut places_km = Vec::new();
    let place_of = centroids_km.iter().map(|centroid| {
        // Adding 0 makes one of the two zeros.
        let bits = centroid.map(|coordinate| (coordinate + 0.0).to_bits());
        *known.entry(bits).or_insert_with(|| {
            places_km.push(*centroid);
            places_km.len() as u32 - 1
        })
    });
    let place_of = place_of.collect();
    (places_km, place_of)
}

fn row_start(row: usize) -> usize {
    row * (row + 1) / 2
}

/// The lower Cholesky factor, row after row, of the positive definite matrix of `n` rows with these entries (asked for on
/// and below the diagonal).
fn cholesky(n: usize, entry: impl Fn(usize, usize) -> f64) -> Vec<f64> {
    let mut factor = vec![0.0; row_start(n)];
    for i in 0..n {
        let (done, row) = factor.split_at_mut(row_start(i));
        for j in 0..i {
            let other = &done[row_start(j)..row_start(j + 1)];
            row[j] = (entry(i, j) - dot(&row[..j], &other[..j])) / other[j];
        }
        // Places a hair apart may leave less than nothing to rounding.
        row[i] = (entry(i, i) - dot(&row[..i], &row[..i])).max(f64::EPSILON).sqrt();
    }
    factor
}

/// Sum of products, in eight sums side by side: an order of its own, but always the same.
fn dot(a: &[f64], b: &[f64]) -> f64 {
    let (a_eights, a_rest) = a.as_chunks::<8>();
    let (b_eights, b_rest) = b.as_chunks::<8>();
    let mut sums = [0.0; 8];
    for (a, b) in a_eights.iter().zip(b_eights) {
        for lane in 0..8 {
            sums[lane] += a[lane] * b[lane];
        }
    }
    let rest: f64 = a_rest.iter().zip(b_rest).map(|(a, b)| a * b).sum();
    sums.iter().sum::<f64>() + rest
}

//! Small dense matrices, and what a projection matrix says before any run.

use std::ops::{Index, IndexMut};

/// A small square matrix of non-negative numbers; `m[(to, from)]`.
#[derive(Debug, Clone, PartialEq)]
pub struct Matrix {
    size: usize,
    cells: Vec<f64>,
}

impl Index<(usize, usize)> for Matrix {
    type Output = f64;
    fn index(&self, (row, column): (usize, usize)) -> &f64 {
        &self.cells[row * self.size + column]
    }
}

impl IndexMut<(usize, usize)> for Matrix {
    fn index_mut(&mut self, (row, column): (usize, usize)) -> &mut f64 {
        &mut self.cells[row * self.size + column]
    }
}

impl Matrix {
    /// All zeros.
    pub fn zero(size: usize) -> Self {
        Self { size, cells: vec![0.0; size * size] }
    }

    /// Rows and columns.
    pub fn size(&self) -> usize {
        self.size
    }

    /// The matrix times a column vector of its size.
    pub fn times(&self, vector: &[f64]) -> Vec<f64> {
        (0..self.size).map(|row| (0..self.size).map(|column| self[(row, column)] * vector[column]).sum()).collect()
    }

    /// The rows and columns of these stages alone.
    fn among(&self, stages: &[usize]) -> Self {
        let mut part = Self::zero(stages.len());
        for (row, to) in stages.iter().enumerate() {
            for (column, from) in stages.iter().enumerate() {
                part[(row, column)] = self[(*to, *from)];
            }
        }
        part
    }

    /// b/g + M b/g^2 + M^2 b/g^3 + ..., for a matrix whose dominant eigenvalue is below `g`: the sum over ages where `b`
    /// are born to a population that grows by `g` a year.
    fn discounted_sum(&self, b: &[f64], g: f64) -> Vec<f64> {
        let mut power = self.clone();
        power.cells.iter_mut().for_each(|cell| *cell /= g);
        let mut sum: Vec<f64> = b.iter().map(|born| born / g).collect();
        // (1 + T)(1 + T^2)(1 + T^4)... holds every power of T once.
        for _ in 0..64 {
            let more = power.times(&sum);
            sum.iter_mut().zip(more).for_each(|(sum, more)| *sum += more);
            power = power.squared();
        }
        sum
    }

    fn transposed(&self) -> Self {
        let mut result = Self::zero(self.size);
        for row in 0..self.size {
            for column in 0..self.size {
                result[(column, row)] = self[(row, column)];
            }
        }
        result
    }

    fn squared(&self) -> Self {
        let mut result = Self::zero(self.size);
        for row in 0..self.size {
            for inner in 0..self.size {
                for column in 0..self.size {
                    result[(row, column)] += self[(row, inner)] * self[(inner, column)];
                }
            }
        }
        result
    }

    /// The dominant eigenvalue (spectral radius) and its right eigenvector, summing to 1.
    ///
    /// The matrix plus a multiple of the identity has the same eigenvectors and, having a positive diagonal, no other
    /// eigenvalue as large: its 2^64th power, by squaring, holds nothing but the dominant direction, even where the matrix
    /// cycles. The multiple is as large as the eigenvalue may be: the root of the product of the largest sums of a row and of
    /// a column, at least 1.
    pub fn dominant(&self) -> (f64, Vec<f64>) {
        let largest_sum = |matrix: &Self| {
            let rows = matrix.cells.chunks(matrix.size).map(|row| row.iter().sum::<f64>());
            rows.fold(0.0, f64::max)
        };
        let shift = (largest_sum(self).sqrt() * largest_sum(&self.transposed()).sqrt()).max(1.0);
        let mut power = self.clone();
        for stage in 0..self.size {
            power[(stage, stage)] += shift;
        }
        for _ in 0..64 {
            power = power.squared();
            let largest = power.cells.iter().copied().fold(0.0, f64::max);
            power.cells.iter_mut().for_each(|cell| *cell /= largest);
        }
        let direction = normalised(power.times(&vec![1.0; self.size]));
        let growth = self.times(&direction).iter().sum();
        (growth, direction)
    }
}

fn normalised(mut vector: Vec<f64>) -> Vec<f64> {
    let sum: f64 = vector.iter().sum();
    vector.iter_mut().for_each(|value| *value /= sum);
    vector
}

/// A projection matrix in its two parts: what becomes of individuals, and the young that they leave.
#[derive(Debug, Clone, PartialEq)]
pub struct ProjectionMatrix {
    /// `fates[(to, from)]`: probability of being alive in stage `to` a year later
    pub fates: Matrix,
    /// `young[(to, from)]`: mean young alive in stage `to` a year later, per individual
    pub young: Matrix,
    /// the stages that alone decide on growth (the females, of both sexes), in order; `None` where all do. No other stage
    /// has young, and none becomes one of these.
    pub leading: Option<Vec<usize>>,
}

impl ProjectionMatrix {
    /// No stage survives or breeds.
    pub fn zero(stages: usize) -> Self {
        Self { fates: Matrix::zero(stages), young: Matrix::zero(stages), leading: None }
    }

    /// The part that decides on growth: the leading stages alone.
    #[must_use]
    pub fn leading_part(&self) -> Self {
        match &self.leading {
            None => self.clone(),
            Some(stages) => Self { fates: self.fates.among(stages), young: self.young.among(stages), leading: None },
        }
    }

    /// The same with its two parts multiplied by `on_fates` and `on_young`.
    #[must_use]
    pub fn acted_on(&self, on_fates: f64, on_young: f64) -> Self {
        let times = |part: &Matrix, by: f64| Matrix {
            size: part.size,
            cells: part.cells.iter().map(|cell| by * cell).collect(),
        };
        Self { fates: times(&self.fates, on_fates), young: times(&self.young, on_young), leading: self.leading.clone() }
    }

    /// The whole matrix, with the two parts multiplied by `on_fates` and `on_young`.
    pub fn scaled(&self, on_fates: f64, on_young: f64) -> Matrix {
        let mut whole = Matrix::zero(self.fates.size);
        for (cell, (fate, young)) in whole.cells.iter_mut().zip(self.fates.cells.iter().zip(&self.young.cells)) {
            *cell = on_fates * fate + on_young * young;
        }
        whole
    }

    /// The whole matrix.
    pub fn whole(&self) -> Matrix {
        self.scaled(1.0, 1.0)
    }

    /// Growth a year in the long run in an average year at low numbers: the dominant eigenvalue.
    pub fn growth(&self) -> f64 {
        self.leading_part().whole().dominant().0
    }

    /// Share of each stage once the proportions have settled; sums to 1.
    ///
    /// Stages that do not lead settle beside those that do. Where they last longer than the leading ones are replaced, no
    /// proportions settle: their numbers are then taken in the ratio in which the two are born, in the
    /// proportions among themselves that would settle without births.
    pub fn stable_distribution(&self) -> Vec<f64> {
        let Some(leading) = &self.leading else { return self.whole().dominant().1 };
        let (growth, lead) = self.leading_part().whole().dominant();
        let followers: Vec<usize> = (0..self.fates.size).filter(|stage| !leading.contains(stage)).collect();
        let mut shares = vec![0.0; self.fates.size];
        for (stage, share) in leading.iter().zip(&lead) {
            shares[*stage] = *share;
        }
        let born = self.young.times(&shares);
        let born: Vec<f64> = followers.iter().map(|stage| born[*stage]).collect();
        let beside = if self.settles() {
            self.fates.among(&followers).discounted_sum(&born, growth)
        } else {
            let to_leading = leading.iter().map(|stage| self.young.times(&shares)[*stage]).sum::<f64>();
            let ratio = if to_leading > 0.0 { born.iter().sum::<f64>() / to_leading } else { 1.0 };
            self.fates.among(&followers).dominant().1.iter().map(|share| share * ratio).collect()
        };
        for (stage, share) in followers.iter().zip(beside) {
            shares[*stage] = share;
        }
        normalised(shares)
    }

    /// Whether the proportions of the stages settle: not so where stages that do not lead (males) last longer than the
    /// leading ones are replaced.
    pub fn settles(&self) -> bool {
        let Some(leading) = &self.leading else { return true };
        let followers: Vec<usize> = (0..self.fates.size).filter(|stage| !leading.contains(stage)).collect();
        self.fates.among(&followers).dominant().0 < self.growth()
    }

    /// What an individual of each stage is worth for future numbers, the first stage that leads being worth 1 (all left as
    /// they are where it is worth nothing); those that do not lead are worth nothing. Fisher 1930.
    pub fn reproductive_values(&self) -> Vec<f64> {
        let values = self.leading_part().whole().transposed().dominant().1;
        let first = values[0];
        let scale = if first > 0.0 { first } else { 1.0 };
        self.spread(&values.iter().map(|value| value / scale).collect::<Vec<_>>())
    }

    /// Values of the leading stages put in the places of all stages, 0 in the others.
    fn spread(&self, values: &[f64]) -> Vec<f64> {
        let Some(leading) = &self.leading else { return values.to_vec() };
        let mut all = vec![0.0; self.fates.size];
        for (stage, value) in leading.iter().zip(values) {
            all[*stage] = *value;
        }
        all
    }

    /// Elasticities of the growth rate to the entries of the two parts, `(fates, young)`; all together sum to 1.
    /// de Kroon, Plaisier, van Groenendael & Caswell 1986, Ecology 67.
    pub fn elasticities(&self) -> (Matrix, Matrix) {
        let (growth, stable) = self.leading_part().whole().dominant();
        let stable = self.spread(&stable);
        let values = self.reproductive_values();
        let scale: f64 = growth * values.iter().zip(&stable).map(|(value, share)| value * share).sum::<f64>();
        let part = |entries: &Matrix| {
            let mut result = Matrix::zero(entries.size);
            for to in 0..entries.size {
                for from in 0..entries.size {
                    result[(to, from)] = entries[(to, from)] * values[to] * stable[from] / scale;
                }
            }
            result
        };
        (part(&self.fates), part(&self.young))
    }

    /// Mean age of mothers at the stable distribution in years: 1 over the summed elasticities of the young.
    /// Bienvenu & Legendre 2015, Am. Nat. 185. `None` where nothing breeds.
    pub fn generation_time(&self) -> Option<f64> {
        let (_, young) = self.elasticities();
        let sum: f64 = young.cells.iter().sum();
        (sum > 0.0).then(|| 1.0 / sum)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_cycling_matrix_has_its_dominant_eigenvalue() {
        let mut leslie = Matrix::zero(3);
        leslie[(0, 2)] = 8.0;
        leslie[(1, 0)] = 0.5;
        leslie[(2, 1)] = 0.25;
        let (growth, stable) = leslie.dominant();
        assert!((growth - 1.0).abs() < 1e-12, "{growth}");
        let next = leslie.times(&stable);
        for (now, then) in stable.iter().zip(next) {
            assert!((now - then).abs() < 1e-12);
        }
    }

    #[test]
    fn a_matrix_without_young_does_not_grow() {
        let mut dying = Matrix::zero(2);
        dying[(1, 0)] = 0.3;
        assert!(dying.dominant().0.abs() < 1e-12);
    }
}

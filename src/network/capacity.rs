//! Metapopulation capacity.

use petgraph::algo::kosaraju_scc;
use petgraph::graph::{DiGraph, NodeIndex};

use super::sparse::Sparse;

/// The eigenvectors are good when they miss by this part of the eigenvalue.
const MISS: f64 = 1e-10;
/// A bound on the steps, reached only where two clusters of patches are all but equally strong; the eigenvalue is right
/// long before that.
const STEPS: usize = 20_000;

/// Metapopulation capacity, and what each patch contributes to it.
#[derive(Debug, Clone, PartialEq)]
pub struct Capacity {
    /// the leading eigenvalue; 0 where no two patches reach each other both ways
    pub value: f64,
    /// by patch, the first-order part that it has in the value; they sum to it
    pub shares: Vec<f64>,
}

impl Capacity {
    /// The capacity of a landscape matrix: its entry in row i and column j, 0 or above, is what patch j in full
    /// does for patch i, the diagonal being 0.
    ///
    /// The shares are lambda u_i v_i over the sum of u v, with u and v the left and right eigenvectors: lambda x_i^2 of the
    /// normalised eigenvector x where the matrix is symmetric. They do not change when rows and columns are scaled
    /// inversely, D M / D, so that A_i^x A_j^b and its symmetric form (A_i A_j)^((x + b) / 2) give the same. Where patches
    /// fall into groups without a link both ways, the strongest group alone has shares (the first of equal ones).
    ///
    /// # Source
    /// Hanski & Ovaskainen 2000; shares: Ovaskainen & Hanski 2001. Power iteration, shifted so that it converges where
    /// -lambda is an eigenvalue too (two patches).
    pub fn new(matrix: &Sparse) -> Self {
        let mut groups = groups(matrix);
        groups.sort_by(|a, b| b.bound.total_cmp(&a.bound).then(a.patches.cmp(&b.patches)));
        let mut best = Self { value: 0.0, shares: vec![0.0; matrix.n()] };
        for group in &groups {
            if group.bound <= best.value {
                break;
            }
            let (value, shares) = leading(&group.matrix);
            if value > best.value {
                best = Self { value, shares: vec![0.0; matrix.n()] };
                for (patch, share) in group.patches.iter().zip(shares) {
                    best.shares[*patch] = share;
                }
            }
        }
        best
    }
}

/// Patches of which each reaches each other one.
struct Group {
    patches: Vec<usize>,
    matrix: Sparse,
    /// an upper bound of its leading eigenvalue: the largest row sum
    bound: f64,
}

fn groups(matrix: &Sparse) -> Vec<Group> {
    let positive = || matrix.entries().filter(|(row, column, value)| row != column && *value > 0.0);
    let mut graph: DiGraph<(), (), u32> = DiGraph::with_capacity(matrix.n(), positive().count());
    for _ in 0..matrix.n() {
        graph.add_node(());
    }
    graph.extend_with_edges(positive().map(|(row, column, _)| (NodeIndex::new(row), NodeIndex::new(column))));
    kosaraju_scc(&graph)
        .into_iter()
        .filter(|members| members.len() > 1)
        .map(|members| {
            let mut patches: Vec<usize> = members.into_iter().map(NodeIndex::index).collect();
            patches.sort_unstable();
            group(matrix, patches)
        })
        .collect()
}

fn group(matrix: &Sparse, patches: Vec<usize>) -> Group {
    let local = |patch: usize| patches.binary_search(&patch).ok().and_then(|position| u32::try_from(position).ok());
    let entries: Vec<(u32, u32, f64)> = patches
        .iter()
        .flat_map(|patch| {
            matrix.row(*patch).filter_map(move |(column, value)| Some((local(*patch)?, local(column)?, value)))
        })
        .filter(|(row, column, _)| row != column)
        .collect();
    let matrix = Sparse::new(patches.len(), entries.iter().copied());
    let sum = |row: usize| matrix.row(row).map(|(_, value)| value).sum::<f64>();
    let bound = (0..patches.len()).map(sum).fold(0.0, f64::max);
    Group { patches, matrix, bound }
}

/// The leading eigenvalue of a matrix whose patches all reach each other, and its shares.
fn leading(matrix: &Sparse) -> (f64, Vec<f64>) {
    let turned = matrix.transposed();
    let mut right = Side::new(matrix);
    let mut left = Side::new(&turned);
    let mut value = 0.0;
    for _ in 0..STEPS {
        right.multiply();
        left.multiply();
        // Both vectors together: the error of the quotient is the product of their errors.
        value = dot(&left.vector, &right.product) / dot(&left.vector, &right.vector);
        if right.miss(value).max(left.miss(value)) <= MISS * value {
            break;
        }
        right.step(value);
        left.step(value);
    }
    let products: Vec<f64> = left.vector.iter().zip(&right.vector).map(|(u, v)| u * v).collect();
    let sum: f64 = products.iter().sum();
    (value, products.into_iter().map(|product| value * product / sum).collect())
}

/// A vector of sum 1 on its way to an eigenvector, and the matrix times it.
struct Side<'a> {
    matrix: &'a Sparse,
    vector: Vec<f64>,
    product: Vec<f64>,
}

impl<'a> Side<'a> {
    fn new(matrix: &'a Sparse) -> Self {
        #[expect(clippy::cast_precision_loss, reason = "numbers of patches are far below 2^53")]
        let vector = vec![1.0 / matrix.n() as f64; matrix.n()];
        Self { matrix, product: vector.clone(), vector }
    }

    fn multiply(&mut self) {
        self.matrix.times(&self.vector, &mut self.product);
    }

    fn miss(&self, value: f64) -> f64 {
        self.vector.iter().zip(&self.product).map(|(x, y)| (y - value * x).abs()).sum()
    }

    /// One step of the iteration with M + value/4, whose other eigenvalues lie nearer to 0 than the leading one.
    fn step(&mut self, value: f64) {
        for (x, y) in self.vector.iter_mut().zip(&self.product) {
            *x = y + 0.25 * value * *x;
        }
        let sum: f64 = self.vector.iter().sum();
        self.vector.iter_mut().for_each(|x| *x /= sum);
    }
}

fn dot(a: &[f64], b: &[f64]) -> f64 {
    a.iter().zip(b).map(|(a, b)| a * b).sum()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn capacity(n: usize, entries: &[(u32, u32, f64)]) -> Capacity {
        Capacity::new(&Sparse::new(n, entries.iter().copied()))
    }

    /// A star has the eigenvalues plus and minus the root of the sum of squares, the hub half of the shares.
    #[test]
    fn a_matrix_whose_least_eigenvalue_is_as_large() {
        let star = capacity(4, &[(0, 1, 1.0), (1, 0, 1.0), (0, 2, 2.0), (2, 0, 2.0), (0, 3, 2.0), (3, 0, 2.0)]);
        assert!((star.value - 3.0).abs() < 1e-9);
        for (share, truth) in star.shares.iter().zip([1.5, 1.5 / 9.0, 6.0 / 9.0, 6.0 / 9.0]) {
            assert!((share - truth).abs() < 1e-8);
        }
    }

    #[test]
    fn one_way_links_close_no_circle() {
        assert!(capacity(3, &[(0, 1, 5.0), (1, 2, 5.0)]).value.abs() < f64::EPSILON);
        assert!(capacity(0, &[]).value.abs() < f64::EPSILON);
        // A pair of root 2 x 8, a weaker pair, and one-way links between them, which change nothing.
        let pairs = capacity(4, &[(0, 1, 1.0), (1, 0, 1.0), (2, 3, 2.0), (3, 2, 8.0), (0, 2, 9.0), (1, 3, 9.0)]);
        assert!((pairs.value - 4.0).abs() < 1e-9);
        for (share, truth) in pairs.shares.iter().zip([0.0, 0.0, 2.0, 2.0]) {
            assert!((share - truth).abs() < 1e-8);
        }
    }

    /// A circle of three in one direction: the cube root of the product, shares alike.
    #[test]
    fn a_circle_in_one_direction() {
        let circle = capacity(3, &[(0, 1, 1.0), (1, 2, 4.0), (2, 0, 16.0)]);
        assert!((circle.value - 4.0).abs() < 1e-8);
        assert!(circle.shares.iter().all(|share| (share - 4.0 / 3.0).abs() < 1e-7));
    }
}

//! Gamma variables.

use super::{Stream, standard_normal};
use crate::num::{exp, ln, ln_1p};

/// A gamma variable of this shape and scale 1: its mean and variance are the shape. 0 where the shape is not above 0,
/// infinite where it is.
///
/// # Source
/// Marsaglia & Tsang (2000), A simple method for generating gamma variables, ACM Trans. Math. Softw. 26: a normal variable,
/// cubed and held to the gamma density; shapes below 1 by way of the shape above, times a power of a uniform number. Their
/// logarithm is written here by its distance from 1, so that it is right at the largest shapes too.
pub fn gamma(stream: &mut Stream, shape: f64) -> f64 {
    if shape >= 1.0 {
        from_1(stream, shape)
    } else if shape > 0.0 {
        let whole = from_1(stream, shape + 1.0);
        whole * exp(ln(stream.open_uniform()) / shape)
    } else {
        0.0
    }
}

fn from_1(stream: &mut Stream, shape: f64) -> f64 {
    if shape == f64::INFINITY {
        return shape;
    }
    let d = shape - 1.0 / 3.0;
    let c = 1.0 / (9.0 * d).sqrt();
    loop {
        let x = standard_normal(stream);
        let step = c * x;
        if step <= -1.0 {
            continue;
        }
        // (1 + step)^3 - 1, without losing what is small.
        let off = step * (3.0 + step * (3.0 + step));
        let u = stream.open_uniform();
        let squared = x * x;
        if u < 1.0 - 0.0331 * squared * squared || ln(u) < 0.5 * squared + d * (ln_1p(off) - off) {
            return d * (1.0 + off);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::num::gamma::{lower, upper};
    use crate::random::{Purpose, ReplicateKey};

    const DRAWS: u32 = 200_000;
    const CELLS: usize = 500;

    fn draws(shape: f64) -> impl Iterator<Item = f64> {
        let replicate = ReplicateKey::new(33, 1);
        (0..DRAWS).map(move |i| {
            gamma(&mut replicate.year(i / 1000).patch(u64::from(i % 1000)).draw(Purpose::Heterogeneity), shape)
        })
    }

    /// Null: the exact distribution, by the regularised incomplete gamma function (itself held to values made elsewhere).
    /// The exact cdf of each of 200,000 draws falls into 500 cells of equal chance; Pearson's chi-square with 499 degrees
    /// of freedom has p above 1e-4, and the mean is the shape within 4 standard errors.
    #[test]
    fn the_distribution_is_exact() {
        for shape in [0.02, 0.3, 0.9, 1.0, 1.7, 5.0, 42.0, 1e3, 1e6] {
            let mut counts = vec![0.0_f64; CELLS];
            for x in draws(shape) {
                let cell = (lower(shape, x) * CELLS as f64) as usize;
                counts[cell.min(CELLS - 1)] += 1.0;
            }
            let expected = f64::from(DRAWS) / CELLS as f64;
            let chi_square: f64 = counts.iter().map(|seen| (seen - expected) * (seen - expected) / expected).sum();
            let p = upper((CELLS - 1) as f64 / 2.0, chi_square / 2.0);
            assert!(p > 1e-4, "shape {shape}: p = {p}");
            let mean = draws(shape).sum::<f64>() / f64::from(DRAWS);
            assert!((mean - shape).abs() < 4.0 * (shape / f64::from(DRAWS)).sqrt(), "shape {shape}: {mean}");
        }
    }

    /// At the largest shapes a draw is its mean to all that a count can show, and never odd.
    #[test]
    fn large_and_odd_shapes_are_no_trouble() {
        for shape in [1e12, 1e21, 1e30] {
            let largest = draws(shape).take(1000).map(|x| ((x - shape) / shape.sqrt()).abs()).fold(0.0, f64::max);
            assert!(largest > 2.0 && largest < 5.5, "{shape}: {largest}");
        }
        let mut stream = ReplicateKey::new(33, 2).year(0).network().draw(Purpose::Heterogeneity);
        assert!(gamma(&mut stream, f64::INFINITY) > f64::MAX);
        assert!([0.0, -1.0, f64::NAN].iter().all(|shape| gamma(&mut stream, *shape).abs() <= 0.0));
        assert!(gamma(&mut stream, 1e-300) >= 0.0);
    }
}

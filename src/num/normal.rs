//! The normal distribution.

/// Probability that a standard normal variable is at most `x`; right to its own size in the lower tail.
pub fn normal_cdf(x: f64) -> f64 {
    0.5 * libm::erfc(-x * std::f64::consts::FRAC_1_SQRT_2)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Values of the standard normal distribution function; Abramowitz & Stegun 1964, table 26.1 (from memory).
    #[test]
    fn it_meets_the_tables() {
        for (x, p) in
            [(0.0, 0.5), (1.0, 0.841_344_746_068_543), (1.96, 0.975_002_104_851_780), (-3.0, 0.001_349_898_031_630)]
        {
            assert!((normal_cdf(x) - p).abs() < 1e-14, "{x}");
        }
    }
}

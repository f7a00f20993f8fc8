//! What replicates say about a number, and how surely.

/// The 0.975 quantile of the standard normal distribution: 95 % of it lie within this of 0.
pub const Z: f64 = 1.959_963_984_540_054;

/// A number estimated from replicates, with its 95 % Monte Carlo interval. The one type in which a probability leaves
/// this room.
///
/// The interval speaks of the luck of a finite number of replicates, not of how well the vital rates are known. A bound
/// that the replicates cannot give (a mean of a single one) is infinite.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Estimate {
    /// the estimate
    pub value: f64,
    /// lower end of the interval
    pub low: f64,
    /// upper end of the interval
    pub high: f64,
    /// replicates it rests on, at least 1
    pub n: u64,
}

impl Estimate {
    /// The probability of something seen in `seen` of `n` replicates (`n` at least 1), with the score interval of Wilson
    /// 1927 (Journal of the American Statistical Association 22: 209-212).
    pub fn proportion(seen: u64, n: u64) -> Self {
        debug_assert!(0 < n && seen <= n, "{seen} of {n} is no proportion");
        let (size, value) = (n as f64, seen as f64 / n as f64);
        let spread = Z * Z / size;
        let centre = (value + spread / 2.0) / (1.0 + spread);
        let half = (spread * (value * (1.0 - value) + spread / 4.0)).sqrt() / (1.0 + spread);
        // At the ends the interval meets 0 and 1 exactly, which rounding would miss by a hair.
        let low = if seen == 0 { 0.0 } else { (centre - half).clamp(0.0, value) };
        let high = if seen == n { 1.0 } else { (centre + half).clamp(value, 1.0) };
        Self { value, low, high, n }
    }

    /// The mean of a whole number that each replicate has, divided by `per` (such as the years it was summed over), with
    /// the normal interval of 1.96 standard errors.
    pub fn mean(sums: &Sums, per: f64) -> Self {
        let value = sums.mean() / per;
        let half = match sums.variance() {
            Some(variance) => Z * (variance / sums.n as f64).sqrt() / per,
            None => f64::INFINITY,
        };
        Self { value, low: value - half, high: value + half, n: sums.n }
    }

    /// Half the width of the interval.
    pub fn half_width(&self) -> f64 {
        (self.high - self.low) / 2.0
    }

    /// Whether the interval is as narrow as `precision`, the half-width asked for.
    pub fn is_within(&self, precision: f64) -> bool {
        self.half_width() <= precision
    }
}

/// The least number of replicates whose Wilson interval around a probability of `value` has at most this half-width:
/// Wilson's formula solved for n, a quadratic.
pub fn replicates_needed(value: f64, half_width: f64) -> f64 {
    let (z2, h2, variance) = (Z * Z, half_width * half_width, value * (1.0 - value));
    let (a, half_b, c) = (h2, h2 * z2 - z2 * variance / 2.0, z2 * z2 * (h2 - 0.25));
    ((-half_b + (half_b * half_b - a * c).sqrt()) / a).ceil().max(1.0)
}

/// The sum, and the sum of squares, of one whole number a replicate: integers, so that no order of adding matters.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub struct Sums {
    /// how many were added
    pub n: u64,
    /// their sum
    pub sum: i128,
    /// the sum of their squares, below 2^127
    pub squares: u128,
}

impl Sums {
    /// Adds the number of one more replicate.
    pub fn add(&mut self, number: u64) {
        self.n += 1;
        self.sum += i128::from(number);
        self.squares += u128::from(number) * u128::from(number);
    }

    /// The mean; NaN of nothing.
    pub fn mean(&self) -> f64 {
        self.sum as f64 / self.n as f64
    }

    /// The sample variance (divisor n - 1), rounded once; `None` of fewer than two.
    ///
    /// # Numerics
    /// With sum = q n + r, the squared deviations add up to squares - q (sum + r) - r^2/n. The first two terms are whole
    /// and, unlike n squares - sum^2, never larger than what was summed.
    pub fn variance(&self) -> Option<f64> {
        if self.n < 2 {
            return None;
        }
        let n = i128::from(self.n);
        let (q, r) = (self.sum.div_euclid(n), self.sum.rem_euclid(n));
        let whole = i128::try_from(self.squares).unwrap_or(i128::MAX) - q * (self.sum + r);
        let deviations = match whole.checked_mul(n) {
            Some(scaled) => (scaled - r * r) as f64 / n as f64,
            None => whole as f64,
        };
        Some(deviations / (n - 1) as f64)
    }
}

impl FromIterator<u64> for Sums {
    fn from_iter<I: IntoIterator<Item = u64>>(numbers: I) -> Self {
        let mut sums = Self::default();
        numbers.into_iter().for_each(|number| sums.add(number));
        sums
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn one_replicate_says_nothing_about_the_spread() {
        let mean = Estimate::mean(&[7].into_iter().collect(), 2.0);
        assert_eq!((mean.value, mean.low, mean.high, mean.n), (3.5, f64::NEG_INFINITY, f64::INFINITY, 1));
    }

    #[test]
    fn large_numbers_keep_a_small_variance() {
        // Variance of 1, 2, 3, 4 is 5/3, wherever they begin.
        let begin = 1u64 << 62;
        let sums: Sums = (1..=4).map(|step| begin + step).collect();
        assert_eq!(sums.variance(), Some(5.0 / 3.0));
    }

    #[test]
    fn negative_sums_have_a_variance() {
        let sums = Sums { n: 3, sum: -7, squares: 25 + 1 + 1 };
        // -5, -1, -1: mean -7/3, squared deviations 64/9 + 16/9 + 16/9 = 32/3.
        assert!((sums.variance().unwrap() - 16.0 / 3.0).abs() < 1e-14);
    }

    #[test]
    fn the_number_needed_is_the_least_that_does() {
        for (seen, share, half_width) in [(1, 2, 0.02), (9, 10, 0.01), (99, 100, 0.005)] {
            let needed = replicates_needed(seen as f64 / share as f64, half_width) as u64;
            let up = needed.next_multiple_of(share);
            assert!(Estimate::proportion(up / share * seen, up).is_within(half_width));
            let down = needed / share * share - share;
            assert!(!Estimate::proportion(down / share * seen, down).is_within(half_width));
        }
    }

    proptest! {
        #[test]
        fn the_wilson_interval_holds_the_estimate_within_0_and_1(n in 1..10_000_000u64, share in 0.0..=1.0f64) {
            let seen = (share * n as f64) as u64;
            let e = Estimate::proportion(seen, n);
            prop_assert!(0.0 <= e.low && e.low <= e.value && e.value <= e.high && e.high <= 1.0);
            prop_assert!(e.low < e.high);
        }

        #[test]
        fn the_variance_is_that_of_deviations_from_the_mean(sample in prop::collection::vec(0..100_000u64, 2..50)) {
            let sums: Sums = sample.iter().copied().collect();
            let mean = sums.mean();
            let direct = sample.iter().map(|x| (*x as f64 - mean) * (*x as f64 - mean)).sum::<f64>();
            let expected = direct / (sample.len() - 1) as f64;
            prop_assert!((sums.variance().unwrap() - expected).abs() <= 1e-9 * expected.max(1e-9));
        }
    }
}

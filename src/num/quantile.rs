//! Quantiles of a sample.

/// The `p` quantile of a sample in rising order, of type 7 (Hyndman & Fan 1996, Am. Stat. 50): linear between the order
/// statistics, the least at p = 0 and the greatest at p = 1. `None` for an empty sample or `p` outside 0 to 1.
pub fn of_sorted(sorted: &[f64], p: f64) -> Option<f64> {
    if !(0.0..=1.0).contains(&p) {
        return None;
    }
    let last = sorted.len().checked_sub(1)?;
    let position = last as f64 * p;
    let below = position.floor() as usize;
    let low = sorted[below];
    let high = sorted[(below + 1).min(last)];
    Some(low + (position - position.floor()) * (high - low))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Recomputed independently: 5, 25, 50, 75 and 95 % of 3 1 4 1 5 9 2 6 5 3.
    #[test]
    fn type_7_as_hyndman_and_fan_have_it() {
        let sorted = [1.0, 1.0, 2.0, 3.0, 3.0, 4.0, 5.0, 5.0, 6.0, 9.0];
        for (p, expected) in [(0.05, 1.0), (0.25, 2.25), (0.5, 3.5), (0.75, 5.0), (0.95, 7.65)] {
            assert!((of_sorted(&sorted, p).unwrap() - expected).abs() < 1e-12);
        }
        assert_eq!(of_sorted(&sorted, 1.0), Some(9.0));
        assert_eq!(of_sorted(&[2.0], 0.3), Some(2.0));
        assert_eq!(of_sorted(&[], 0.3), None);
        assert_eq!(of_sorted(&sorted, f64::NAN), None);
    }
}

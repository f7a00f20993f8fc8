//! Quantiles of a sample.

/// The `p` quantile of a sample in ascending order, type 7 of Hyndman & Fan 1996 (American Statistician 50): linear
/// between the order statistics, the smallest at `p = 0` and the largest at `p = 1`.
///
/// `p` outside [0, 1] counts as the nearer end. NaN for an empty sample.
pub fn quantile(sorted: &[f64], p: f64) -> f64 {
    let Some(last) = sorted.len().checked_sub(1) else { return f64::NAN };
    let position = p.clamp(0.0, 1.0) * last as f64;
    let below = (position as usize).min(last);
    let above = (below + 1).min(last);
    let share = position - below as f64;
    // Rounding must not carry the result past the upper neighbour, or quantiles would cross.
    (sorted[below] + share * (sorted[above] - sorted[below])).min(sorted[above])
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    #[expect(clippy::float_cmp, reason = "values that binary fractions hold exactly")]
    fn ends_middle_and_nothing() {
        assert_eq!([0.0, 0.5, 1.0].map(|p| quantile(&[1.0, 2.0, 4.0, 9.0], p)), [1.0, 3.0, 9.0]);
        assert_eq!(quantile(&[7.0], 0.3), 7.0);
        assert!(quantile(&[], 0.5).is_nan());
    }

    proptest! {
        #[test]
        fn quantiles_rise_with_p_and_stay_within_the_sample(
            mut sample in prop::collection::vec(-1e9..1e9f64, 1..40), p in 0.0..=1.0f64, q in 0.0..=1.0f64,
        ) {
            sample.sort_unstable_by(f64::total_cmp);
            let (low, high) = (quantile(&sample, p.min(q)), quantile(&sample, p.max(q)));
            prop_assert!(low <= high);
            prop_assert!(sample[0] <= low && high <= sample[sample.len() - 1]);
        }
    }
}

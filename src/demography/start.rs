//! Start numbers: whole individuals from totals and shares.

/// Splits `total` individuals over stages in the proportions of `shares` by largest remainders; ties go to the earlier
/// stage. The parts sum to `total`.
pub fn split_total(total: u32, shares: &[f64]) -> Vec<u32> {
    let sum: f64 = shares.iter().sum();
    let exact: Vec<f64> = shares.iter().map(|share| f64::from(total) * share / sum).collect();
    let mut parts: Vec<u32> = exact.iter().map(|part| part.floor() as u32).collect();
    let mut order: Vec<usize> = (0..shares.len()).collect();
    let remainder = |stage: usize| exact[stage] - exact[stage].floor();
    order.sort_by(|a, b| remainder(*b).total_cmp(&remainder(*a)));
    let short = total - parts.iter().sum::<u32>();
    for stage in order.into_iter().take(short as usize) {
        parts[stage] += 1;
    }
    parts
}

/// Cuts start numbers to the whole part of the capacity, over the stages that count toward it in their own proportions.
/// `None` where they are within it already.
pub fn ceiling_cut(counts: &[u32], weights: &[f64], capacity: f64) -> Option<Vec<u32>> {
    let most = capacity.floor().min(f64::from(u32::MAX)) as u32;
    let counted: Vec<f64> =
        counts.iter().zip(weights).map(|(count, weight)| if *weight > 0.0 { f64::from(*count) } else { 0.0 }).collect();
    if counted.iter().sum::<f64>() <= f64::from(most) {
        return None;
    }
    let kept = split_total(most, &counted);
    Some((0..counts.len()).map(|stage| if weights[stage] > 0.0 { kept[stage] } else { counts[stage] }).collect())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ties_go_to_the_earlier_stage() {
        assert_eq!(split_total(3, &[0.5, 0.5]), [2, 1]);
        assert_eq!(split_total(0, &[0.5, 0.5]), [0, 0]);
    }

    #[test]
    fn a_ceiling_cuts_only_the_stages_that_count() {
        assert_eq!(ceiling_cut(&[10, 6, 4], &[0.0, 1.0, 1.0], 5.9), Some(vec![10, 3, 2]));
        assert_eq!(ceiling_cut(&[10, 3, 2], &[0.0, 1.0, 1.0], 5.9), None);
    }
}

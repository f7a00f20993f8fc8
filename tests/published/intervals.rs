//! Intervals, sample statistics and quantiles against published values.

#![expect(clippy::float_cmp, reason = "ends that must be met exactly")]

use eyot::num::{pow, quantile};
use eyot::outcome::{Estimate, Sums, replicates_needed};

fn near(found: f64, expected: f64, tolerance: f64) {
    assert!((found - expected).abs() <= tolerance, "{found} is not {expected} within {tolerance}");
}

/// Wilson 1927 (J. Am. Stat. Assoc. 22: 209-212), 95 %. The first four are the worked examples of Newcombe 1998 (Stat.
/// Med. 17: 857-872), printed 0.2553-0.3662, 0.0624-0.1605, 0-0.1611 and 0.0061-0.1718 (from memory). All eight digits
/// computed with scipy from the formula; the tolerance is half of the last digit given.
#[test]
fn wilson_intervals() {
    let cases = [
        (81, 263, 0.25528852, 0.36620958),
        (15, 148, 0.06238640, 0.16048724),
        (0, 20, 0.0, 0.16112516),
        (1, 29, 0.00611321, 0.17175522),
        (1000, 1000, 0.99617324, 1.0),
        (830, 1000, 0.80546594, 0.85200840),
        (5, 10000, 0.00021359, 0.00117003),
    ];
    for (seen, n, low, high) in cases {
        let estimate = Estimate::proportion(seen, n);
        near(estimate.low, low, 5e-9);
        near(estimate.high, high, 5e-9);
        assert_eq!(estimate.n, n);
    }
    assert_eq!(Estimate::proportion(0, 20).low, 0.0);
    assert_eq!(Estimate::proportion(1000, 1000).high, 1.0);
}

/// Replicates for a Wilson half-width, from the formula of Wilson 1927 (at p = 0.5: n = z^2 / 4 h^2 - z^2, rounded up);
/// computed with scipy.
#[test]
fn replicates_for_a_half_width() {
    for (half_width, value, n) in [(0.01, 0.5, 9600.0), (0.02, 0.5, 2398.0), (0.01, 0.9, 3461.0), (0.005, 0.99, 1606.0)]
    {
        assert_eq!(replicates_needed(value, half_width), n, "half-width {half_width} at {value}");
    }
}

/// Where an event was seen in none of n trials, its chance has the one-sided 95 % bound 1 - 0.05^(1/n), about 3/n (the
/// rule of three: Hanley & Lippman-Hand 1983, JAMA 249, from memory): 0.0029912 at n = 1000 (computed). A two-sided 95 %
/// interval must reach at least as far, or it would claim to know more than can be known; and Wilson's, z^2 / (n + z^2)
/// there, stays within 1.3 times of it.
#[test]
fn none_seen_is_not_taken_for_impossible() {
    near(1.0 - pow(0.05, 1.0 / 1000.0), 0.0029912, 5e-8);
    for n in [20, 100, 1000, 10_000, 1_000_000] {
        let bound = 1.0 - pow(0.05, 1.0 / n as f64);
        let high = Estimate::proportion(0, n).high;
        assert!(bound < high && high < 1.3 * bound, "{n}: {high} against {bound}");
    }
}

/// Mean, standard deviation and standard error of 3 1 4 1 5 9 2 6 5 3, and its quantiles of type 7 (Hyndman & Fan 1996,
/// Am. Stat. 50: 361-365); computed with numpy.
#[test]
fn sample_statistics() {
    let sample = [3, 1, 4, 1, 5, 9, 2, 6, 5, 3];
    let sums: Sums = sample.into_iter().collect();
    near(sums.mean(), 3.9, 1e-15);
    near(sums.variance().unwrap().sqrt(), 2.46981781, 5e-9);
    near(Estimate::mean(&sums, 1.0).half_width() / 1.959963984540054, 0.78102497, 5e-9);
    let mut sorted = sample.map(|number| number as f64);
    sorted.sort_by(f64::total_cmp);
    for (p, expected) in [(0.05, 1.0), (0.25, 2.25), (0.5, 3.5), (0.75, 5.0), (0.95, 7.65)] {
        near(quantile(&sorted, p), expected, 1e-12);
    }
}

//! The regularised incomplete gamma function.

use super::{exp, ln, ln_gamma};

/// Regularised upper incomplete gamma function Q(a, x), for `a` above 0 and `x` from 0: the probability that a gamma
/// variable of shape `a` and scale 1 exceeds `x`. NaN outside this domain.
///
/// # Numerics
/// Below `a + 1` one minus the power series (NIST Digital Library of Mathematical Functions, 8.7.1), above it the
/// continued fraction (8.9.2), which keeps the far tail right to its own size.
pub fn gamma_q(a: f64, x: f64) -> f64 {
    if !(a > 0.0 && x >= 0.0) {
        return f64::NAN;
    }
    if x == 0.0 {
        return 1.0;
    }
    if x == f64::INFINITY {
        return 0.0;
    }
    let front = exp(a * ln(x) - x - ln_gamma(a));
    if x < a + 1.0 { 1.0 - front * series(a, x) } else { front * fraction(a, x) }
}

/// Sum over n of x^n / (a (a + 1) ... (a + n)).
fn series(a: f64, x: f64) -> f64 {
    let mut term = 1.0 / a;
    let mut sum = term;
    let mut next = a + 1.0;
    while term > sum * f64::EPSILON {
        term *= x / next;
        sum += term;
        next += 1.0;
    }
    sum
}

/// 1 / (x + 1 - a - 1 (1 - a) / (x + 3 - a - 2 (2 - a) / (x + 5 - a - ...))), from the front (Lentz's method).
fn fraction(a: f64, x: f64) -> f64 {
    const TINY: f64 = 1e-300;
    let away = |value: f64| if value.abs() < TINY { TINY } else { value };
    let mut below = x + 1.0 - a;
    let mut upper = 1.0 / TINY;
    let mut lower = 1.0 / away(below);
    let mut value = lower;
    let mut n = 1.0;
    loop {
        let factor = n * (a - n);
        below += 2.0;
        lower = 1.0 / away(below + factor * lower);
        upper = away(below + factor / upper);
        let step = upper * lower;
        value *= step;
        // Convergence takes about the square root of a steps; the bound only guards against a rounding standstill.
        if (step - 1.0).abs() <= 2.0 * f64::EPSILON || n > 10_000.0 {
            return value;
        }
        n += 1.0;
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::num::normal_cdf;

    #[test]
    fn it_meets_the_closed_forms() {
        // Q(1, x) = e^-x; Q(2, x) = (1 + x) e^-x; Q(4, x) a Poisson sum; Q(1/2, x^2) = erfc(x) = 2 (1 - Phi(x sqrt 2)).
        for x in [1e-6, 0.01, 0.5, 1.0, 2.9, 3.1, 7.0, 40.0, 300.0_f64] {
            let e = exp(-x);
            let close = |value: f64, truth: f64| assert!((value - truth).abs() <= 1e-13 * truth.abs(), "{x}: {value}");
            close(gamma_q(1.0, x), e);
            close(gamma_q(2.0, x), (1.0 + x) * e);
            close(gamma_q(4.0, x), (1.0 + x + x * x / 2.0 + x * x * x / 6.0) * e);
            close(gamma_q(0.5, x), 2.0 * normal_cdf(-(2.0 * x).sqrt()));
        }
    }

    #[test]
    fn its_ends_and_its_domain() {
        assert!((gamma_q(3.0, 0.0) - 1.0).abs() < f64::EPSILON);
        assert!(gamma_q(3.0, f64::INFINITY).abs() < f64::EPSILON);
        assert!(gamma_q(3.0, -1.0).is_nan() && gamma_q(0.0, 1.0).is_nan() && gamma_q(1.0, f64::NAN).is_nan());
    }
}

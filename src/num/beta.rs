//! The beta distribution.

use super::gamma::never_0;
use super::saddle::{LN_TAU, deviance, stirling_error};
use super::{exp, ln, ln_1p};

/// The sd that no distribution on 0 to 1 with this mean reaches: sqrt(m (1 - m)).
pub fn largest_sd(mean: f64) -> f64 {
    (mean * (1.0 - mean)).sqrt()
}

/// A beta distribution on 0 to 1.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Beta {
    a: f64,
    b: f64,
    /// ln of 1 / B(a, b), less what the deviances of [`Beta::ln_slope`] add
    ln_scale: f64,
}

impl Beta {
    /// The distribution with these shape parameters; `None` unless both are above 0 and finite.
    pub fn new(a: f64, b: f64) -> Option<Self> {
        let lawful = |shape: f64| shape > 0.0 && shape.is_finite();
        if !lawful(a) || !lawful(b) {
            return None;
        }
        let n = a + b;
        let ln_scale = stirling_error(n) - stirling_error(a) - stirling_error(b) + 0.5 * (ln(a) + ln(b / n) - LN_TAU);
        Some(Self { a, b, ln_scale })
    }

    /// The distribution with this mean and sd; `None` unless 0 < mean < 1 and 0 < sd < [`largest_sd`].
    pub fn with_mean_and_sd(mean: f64, sd: f64) -> Option<Self> {
        let n = mean * (1.0 - mean) / (sd * sd) - 1.0;
        Self::new(mean * n, (1.0 - mean) * n)
    }

    /// The shape parameters.
    pub fn shapes(&self) -> (f64, f64) {
        (self.a, self.b)
    }

    /// The mean, a / (a + b).
    pub fn mean(&self) -> f64 {
        self.a / (self.a + self.b)
    }

    /// Regularised incomplete beta function: the chance of at most `x`; 0 below 0 and 1 above 1.
    pub fn cdf(&self, x: f64) -> f64 {
        if x <= 0.0 {
            return 0.0;
        }
        exp(self.ln_lower(&Logit { x, rest: 1.0 - x, ln_x: ln(x), ln_rest: ln_1p(-x.min(1.0)) }))
    }

    /// The value below which a share `lower` lies, and 1 minus that value, each to full relative precision. Both tails are
    /// asked for, `upper` being 1 - `lower`, so that neither loses its digits in the other.
    pub fn quantile(&self, lower: f64, upper: f64) -> (f64, f64) {
        if lower <= upper {
            let at = self.solve(ln(lower));
            (at.x, at.rest)
        } else {
            let at = self.mirrored().solve(ln(upper));
            (at.rest, at.x)
        }
    }

    /// ln of d cdf / d logit(x) where x / (1 - x) = `x` / `rest`: density times x (1 - x).
    pub fn ln_slope(&self, x: f64, rest: f64) -> f64 {
        self.ln_slope_at(&Logit { x, rest, ln_x: ln(x), ln_rest: ln(rest) })
    }

    fn mirrored(&self) -> Self {
        Self { a: self.b, b: self.a, ln_scale: self.ln_scale }
    }

    /// x^a (1-x)^b / B(a, b) as a binomial mass of real arguments (Loader 2000).
    fn ln_slope_at(&self, at: &Logit) -> f64 {
        let n = self.a + self.b;
        self.ln_scale - shortfall(self.a, n, at.x, at.ln_x) - shortfall(self.b, n, at.rest, at.ln_rest)
    }

    /// ln of the chance of at most x: the continued fraction on the side where it converges fast.
    fn ln_lower(&self, at: &Logit) -> f64 {
        if at.x * (self.a + self.b + 2.0) <= self.a + 1.0 {
            self.ln_tail(at)
        } else {
            ln_1p(-exp(self.mirrored().ln_tail(&at.mirrored())).min(1.0))
        }
    }

    fn ln_tail(&self, at: &Logit) -> f64 {
        self.ln_slope_at(at) - ln(self.a) + ln(fraction(self.a, self.b, at.x))
    }

    /// The place where ln cdf is `target`, at most ln 1/2.
    ///
    /// In the logit of x the density is log-concave and so is the cdf (Prékopa 1973), hence Newton's steps on its
    /// logarithm converge from wherever they start, and from the left after the first.
    fn solve(&self, target: f64) -> Logit {
        if target == f64::NEG_INFINITY {
            return Logit::new(f64::NEG_INFINITY);
        }
        let mut at = Logit::new(ln(self.a) - ln(self.b));
        let mut t = at.ln_x - at.ln_rest;
        for _ in 0..200 {
            let reached = self.ln_lower(&at);
            let step = (target - reached) / exp(self.ln_slope_at(&at) - reached);
            t += step;
            at = Logit::new(t);
            if step.abs() <= 1e-14 * (1.0 + t.abs()) {
                break;
            }
        }
        at
    }
}

/// A place between 0 and 1, as near to either end as need be.
struct Logit {
    x: f64,
    rest: f64,
    ln_x: f64,
    ln_rest: f64,
}

impl Logit {
    fn new(t: f64) -> Self {
        let small = exp(-t.abs());
        let ln_large = -ln_1p(small);
        let large = 1.0 / (1.0 + small);
        let low = Self { x: small * large, rest: large, ln_x: ln_large - t.abs(), ln_rest: ln_large };
        if t <= 0.0 { low } else { low.mirrored() }
    }

    fn mirrored(&self) -> Self {
        Self { x: self.rest, rest: self.x, ln_x: self.ln_rest, ln_rest: self.ln_x }
    }
}

/// The deviance of `shape` from `n * share`, also where the share is too small for a double.
fn shortfall(shape: f64, n: f64, share: f64, ln_share: f64) -> f64 {
    if n * share > 1e-290 { deviance(shape, n * share) } else { shape * (ln(shape / n) - ln_share - 1.0) }
}

/// The continued fraction of the incomplete beta function (DLMF 8.17.22), by Lentz's method.
fn fraction(a: f64, b: f64, x: f64) -> f64 {
    let mut c = 1.0;
    let mut d = 1.0 / never_0(1.0 - (a + b) * x / (a + 1.0));
    let mut product = d;
    let mut m = 0.0;
    while m < 1e6 {
        m += 1.0;
        let even = m * (b - m) * x / ((a + 2.0 * m - 1.0) * (a + 2.0 * m));
        d = 1.0 / never_0(1.0 + even * d);
        c = never_0(1.0 + even / c);
        product *= c * d;
        let odd = -(a + m) * (a + b + m) * x / ((a + 2.0 * m) * (a + 2.0 * m + 1.0));
        d = 1.0 / never_0(1.0 + odd * d);
        c = never_0(1.0 + odd / c);
        product *= c * d;
        if (c * d - 1.0).abs() < 4e-16 {
            break;
        }
    }
    product
}

#[cfg(test)]
#[expect(clippy::excessive_precision, reason = "reference values as they were made")]
mod tests {
    use super::*;
    use crate::num::normal;

    /// Made with mpmath 1.4.1 at 50 digits, as a hypergeometric series of positive terms on the shorter side.
    #[test]
    fn cdf_is_right_in_both_tails() {
        let published = [
            (0.52, 0.52, 0.3, 0.365_568_008_516_876_08, 0.634_431_991_483_123_92),
            (0.52, 0.52, 1e-8, 4.473_542_087_758_334_6e-5, 0.999_955_264_579_122_42),
            (7.6125, 14.1375, 0.35, 0.518_051_233_200_124_18, 0.481_948_766_799_875_82),
            (27.253125, 1.434375, 0.2, 3.903_611_847_428_949_7e-19, 1.0),
            (27.253125, 1.434375, 0.99, 0.894_153_049_052_684_42, 0.105_846_950_947_315_58),
            (1.496, 0.0015, 0.5, 5.255_929_168_322_231_2e-4, 0.999_474_407_083_167_78),
            (1.496, 0.0015, 0.999_999, 0.019_614_209_666_419_352, 0.980_385_790_333_580_65),
            (0.01, 0.01, 0.4, 0.498_000_533_881_495_54, 0.501_999_466_118_504_46),
            (500.0, 700.0, 0.45, 0.990_094_777_521_568_38, 0.009_905_222_478_431_624_6),
            (5e5, 5e5, 0.501, 0.977_249_949_038_368_52, 0.022_750_050_961_631_483),
            (2.0, 3e4, 1e-4, 0.800_881_598_520_592_28, 0.199_118_401_479_407_72),
            (1.0, 1.0, 0.3, 0.3, 0.7),
        ];
        for (a, b, x, p, q) in published {
            let found = Beta::new(a, b).unwrap().cdf(x);
            assert!((found / p - 1.0).abs() < 1e-12, "I({a}, {b}; {x}) = {found} for {p}");
            assert!((1.0 - found - q).abs() < 1e-12, "1 - I({a}, {b}; {x})");
        }
    }

    /// Made with mpmath 1.4.1 at 50 digits: bisection on the logit. The value and 1 minus it at normal deviates.
    #[test]
    fn quantile_is_right_at_both_ends() {
        let published = [
            (0.35, 0.1, -7.0, 0.005_774_722_050_051_35, 0.994_225_277_949_949),
            (0.35, 0.1, 4.0, 0.756_318_633_270_574, 0.243_681_366_729_426),
            (0.95, 0.04, -7.0, 0.347_902_088_658_713, 0.652_097_911_341_287),
            (0.95, 0.04, -0.5, 0.939_380_115_861_074, 0.060_619_884_138_925_6),
            (0.95, 0.04, 4.0, 0.999_968_590_253_208, 3.140_974_679_207_55e-5),
            (0.5, 0.35, -7.0, 3.240_736_372_230_1e-23, 1.0),
            (0.5, 0.35, 1.0, 0.934_239_671_467_442, 0.065_760_328_532_557_8),
            (0.5, 0.35, 4.0, 0.999_999_994_778_475, 5.221_524_746_451_8e-9),
            (0.999, 0.02, -7.0, 1.135_098_288_551_53e-6, 0.999_998_864_901_711),
            (0.999, 0.02, -2.5, 0.991_475_607_187_86, 0.008_524_392_812_139_66),
            (0.999, 0.02, -0.5, 1.0, 5.445_855_465_170_6e-108),
            (0.02, 0.05, -7.0, 1.151_611_155_773_61e-88, 1.0),
            (0.02, 0.05, -2.5, 7.325_344_010_162_67e-18, 1.0),
            (0.02, 0.05, -0.5, 1.837_730_944_206e-5, 0.999_981_622_690_558),
            (0.02, 0.05, 1.0, 0.033_017_568_641_388_9, 0.966_982_431_358_611),
            (0.02, 0.05, 4.0, 0.653_095_410_569_271, 0.346_904_589_430_729),
            (0.5, 0.49, -2.5, 3.466_076_987_820_31e-93, 1.0),
            (0.5, 0.49, 4.0, 1.0, 2.221_825_649_424_76e-204),
            (0.3, 0.001, -7.0, 0.293_030_827_973_424, 0.706_969_172_026_576),
            (0.3, 0.001, 1.0, 0.301_000_001_778_131, 0.698_999_998_221_869),
        ];
        for (mean, sd, z, x, rest) in published {
            let beta = Beta::with_mean_and_sd(mean, sd).unwrap();
            let found = beta.quantile(normal::cdf(z), normal::cdf(-z));
            assert!((found.0 / x - 1.0).abs() < 1e-10, "{mean} {sd} at {z}: {} for {x}", found.0);
            assert!((found.1 / rest - 1.0).abs() < 1e-10, "{mean} {sd} at {z}: 1 - x = {} for {rest}", found.1);
        }
    }

    #[test]
    fn what_is_not_a_beta_distribution_is_none() {
        assert!(Beta::with_mean_and_sd(0.35, largest_sd(0.35)).is_none());
        assert!(Beta::with_mean_and_sd(0.35, f64::NAN).is_none());
        assert!(Beta::with_mean_and_sd(1.0, 0.1).is_none());
        assert!(Beta::with_mean_and_sd(0.35, 0.0).is_none());
    }

    #[test]
    fn the_ends_stay_ends() {
        let beta = Beta::new(2.0, 3.0).unwrap();
        assert_eq!(beta.quantile(0.0, 1.0), (0.0, 1.0));
        assert_eq!(beta.quantile(1.0, 0.0), (1.0, 0.0));
        assert_eq!((beta.cdf(-1.0), beta.cdf(0.0), beta.cdf(1.0), beta.cdf(2.0)), (0.0, 0.0, 1.0, 1.0));
    }
}

//! The standard normal distribution.

use super::{exp, ln};

/// 1 / sqrt(2 pi).
const DENSITY_AT_0: f64 = 0.398_942_280_401_432_7;

/// Density at `z`.
pub fn density(z: f64) -> f64 {
    DENSITY_AT_0 * exp(-0.5 * z * z)
}

/// Chance of a deviate at or below `z`, to full relative precision in the lower tail; the upper tail is `cdf(-z)`.
pub fn cdf(z: f64) -> f64 {
    0.5 * libm::erfc(-z * std::f64::consts::FRAC_1_SQRT_2)
}

/// The deviate below which a share `p` lies; infinite at 0 and 1, NaN outside.
///
/// # Source
/// Wichura (1988), Algorithm AS 241: the percentage points of the normal distribution, Appl. Stat. 37; the one of 16
/// digits.
pub fn quantile(p: f64) -> f64 {
    let from_middle = p - 0.5;
    if from_middle.abs() <= 0.425 {
        let r = 0.180_625 - from_middle * from_middle;
        return from_middle * ratio(&MIDDLE, r);
    }
    let tail = if from_middle < 0.0 { p } else { 1.0 - p };
    if tail <= 0.0 {
        return if tail < 0.0 { f64::NAN } else { f64::INFINITY.copysign(from_middle) };
    }
    let r = (-ln(tail)).sqrt();
    let z = if r <= 5.0 { ratio(&NEAR_TAIL, r - 1.6) } else { ratio(&FAR_TAIL, r - 5.0) };
    z.copysign(from_middle)
}

/// Numerator and denominator of a rational approximation, constant term first.
type Rational = [[f64; 8]; 2];

fn ratio(rational: &Rational, x: f64) -> f64 {
    let at = |coefficients: &[f64; 8]| coefficients.iter().rev().fold(0.0, |sum, c| sum * x + c);
    at(&rational[0]) / at(&rational[1])
}

#[expect(clippy::excessive_precision, reason = "the digits as published")]
const MIDDLE: Rational = [
    [
        3.387_132_872_796_366_608,
        1.331_416_678_917_843_774_5e2,
        1.971_590_950_306_551_442_7e3,
        1.373_169_376_550_946_112_5e4,
        4.592_195_393_154_987_145_7e4,
        6.726_577_092_700_870_085_3e4,
        3.343_057_558_358_812_810_5e4,
        2.509_080_928_730_122_672_7e3,
    ],
    [
        1.0,
        4.231_333_070_160_091_125_2e1,
        6.871_870_074_920_579_082_9e2,
        5.394_196_021_424_751_107_7e3,
        2.121_379_430_158_659_586_7e4,
        3.930_789_580_009_271_061_0e4,
        2.872_908_573_572_194_267_4e4,
        5.226_495_278_852_854_561_0e3,
    ],
];

#[expect(clippy::excessive_precision, reason = "the digits as published")]
const NEAR_TAIL: Rational = [
    [
        1.423_437_110_749_683_577_34,
        4.630_337_846_156_545_295_90,
        5.769_497_221_460_691_405_50,
        3.647_848_324_763_204_605_04,
        1.270_458_252_452_368_382_58,
        2.417_807_251_774_506_117_70e-1,
        2.272_384_498_926_918_458_33e-2,
        7.745_450_142_783_414_076_40e-4,
    ],
    [
        1.0,
        2.053_191_626_637_758_821_87,
        1.676_384_830_183_803_849_40,
        6.897_673_349_851_000_045_50e-1,
        1.481_039_764_274_800_745_90e-1,
        1.519_866_656_361_645_719_66e-2,
        5.475_938_084_995_344_946_00e-4,
        1.050_750_071_644_416_843_24e-9,
    ],
];

#[expect(clippy::excessive_precision, reason = "the digits as published")]
const FAR_TAIL: Rational = [
    [
        6.657_904_643_501_103_777_20,
        5.463_784_911_164_114_369_90,
        1.784_826_539_917_291_335_80,
        2.965_605_718_285_048_912_30e-1,
        2.653_218_952_657_612_309_30e-2,
        1.242_660_947_388_078_438_60e-3,
        2.711_555_568_743_487_578_15e-5,
        2.010_334_399_292_288_132_65e-7,
    ],
    [
        1.0,
        5.998_322_065_558_879_376_90e-1,
        1.369_298_809_227_358_053_10e-1,
        1.487_536_129_085_061_485_25e-2,
        7.868_691_311_456_132_591_00e-4,
        1.846_318_317_510_054_681_80e-5,
        1.421_511_758_316_445_888_70e-7,
        2.044_263_103_389_939_785_64e-15,
    ],
];

#[cfg(test)]
#[expect(clippy::excessive_precision, reason = "reference values as they were made")]
mod tests {
    use super::*;

    /// Made with mpmath 1.4.1 at 60 digits from the doubles nearest to the shares given: a root of its normal CDF.
    #[test]
    fn quantile_is_right_to_1e_15() {
        let published = [
            (0.4, -0.253_347_103_135_799_741_3),
            (0.1, -1.281_551_565_544_600_435),
            (0.075, -1.439_531_470_938_455_935),
            (0.075_000_1, -1.439_530_764_501_729_686),
            (0.024_25, -1.972_961_051_311_884_838),
            (0.001, -3.090_232_306_167_813_535),
            (1e-6, -4.753_424_308_822_898_957),
            (1.388e-11, -6.657_988_759_749_570_122),
            (1e-20, -9.262_340_089_798_407_58),
            (1e-100, -21.273_453_560_965_324_29),
            (1e-300, -37.047_096_299_361_199_24),
            (0.9, 1.281_551_565_544_600_593),
            (0.999, 3.090_232_306_167_813_278),
        ];
        for (p, z) in published {
            assert!((quantile(p) / z - 1.0).abs() < 1e-15, "{p}: {} for {z}", quantile(p));
        }
        assert_eq!(quantile(0.5).to_bits(), 0.0_f64.to_bits());
        assert!(quantile(0.0) == f64::NEG_INFINITY && quantile(1.0) == f64::INFINITY);
        assert!(quantile(-0.1).is_nan() && quantile(1.1).is_nan() && quantile(f64::NAN).is_nan());
    }

    /// Made with mpmath 1.4.1 at 60 digits.
    #[test]
    fn cdf_keeps_relative_precision_in_the_lower_tail() {
        let published = [
            (-37.0, 5.725_571_222_524_576_823e-300, 5e-13),
            (-8.5, 9.479_534_822_203_318_354e-18, 2e-14),
            (-3.0, 0.001_349_898_031_630_094_527, 2e-15),
            (-1.0, 0.158_655_253_931_457_051_4, 1e-15),
            (0.5, 0.691_462_461_274_013_103_6, 1e-15),
            (2.0, 0.977_249_868_051_820_792_8, 1e-15),
            (6.0, 0.999_999_999_013_412_355, 1e-15),
        ];
        for (z, p, tolerance) in published {
            assert!((cdf(z) / p - 1.0).abs() < tolerance, "{z}: {} for {p}", cdf(z));
        }
    }
}

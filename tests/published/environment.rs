//! Weather: distributions of rates, series in time, fields in space.
//!
//! "Computed" values were recomputed independently with numpy, scipy and mpmath. Statistical tests pass within 4 standard
//! errors of the null (false alarm 6e-5 a number).

use eyot::environment::field::DenseField;
use eyot::environment::{Correlation, EnvironmentTable, RateCurves, Weather, YearlyRate};
use eyot::mistake::Place;
use eyot::num::beta::{Beta, largest_sd};
use eyot::num::{exp, ln, normal, pow};
use eyot::random::{ReplicateKey, patch_key};
use eyot::study::Said;

const SEED: u64 = 5_005;

fn table(correlation: Correlation, between_rates: f64, autocorrelation: f64) -> EnvironmentTable {
    let correlation = Some(Said { value: correlation, place: Place::Call, words: String::new() });
    EnvironmentTable { correlation, between_rates, autocorrelation, ..EnvironmentTable::default() }
}

fn keys(n: usize) -> Vec<u64> {
    (0..n).map(|i| patch_key(&format!("reed bed {i}"))).collect()
}

fn independent(n_patches: usize, between_rates: f64, autocorrelation: f64) -> Weather {
    let table = table(Correlation::None, between_rates, autocorrelation);
    Weather::compile(&table, &vec![[0.0; 2]; n_patches], &keys(n_patches), 2).expect("no field to make")
}

/// Computed (scipy, both tails): shape parameters, and the value at the deviates -2.5, -1, 0, 1, 2.5, to 1e-9.
#[test]
fn survival_is_beta_distributed_through_the_normal_quantile() {
    let published: [(f64, f64, f64, f64, [f64; 5]); 4] = [
        (0.35, 0.10, 7.6125, 14.1375, [0.132510356, 0.248208169, 0.345324794, 0.452059244, 0.613874363]),
        (0.80, 0.10, 12.0, 3.0, [0.498013917, 0.698872202, 0.813525897, 0.899913863, 0.972205575]),
        (0.95, 0.04, 27.253125, 1.434375, [0.802326129, 0.913081056, 0.960106654, 0.986202618, 0.998738150]),
        (0.50, 0.35, 0.520408, 0.520408, [1.326749849e-4, 0.065760329, 0.5, 0.934239671, 0.999867325]),
    ];
    for (mean, sd, a, b, values) in published {
        let shapes = Beta::with_mean_and_sd(mean, sd).unwrap().shapes();
        assert!((shapes.0 - a).abs() < 5e-7 && (shapes.1 - b).abs() < 5e-7, "{shapes:?}");
        let rate = YearlyRate::beta(mean, sd).unwrap();
        for (z, value) in [-2.5, -1.0, 0.0, 1.0, 2.5].into_iter().zip(values) {
            assert!((rate.at(z) - value).abs() < 1e-9, "{mean} {sd} at {z}: {} for {value}", rate.at(z));
        }
    }
}

/// Computed, from sigma^2 = ln(1 + sd^2/m^2) and mu = ln m - sigma^2/2.
#[test]
fn fecundity_is_lognormally_distributed() {
    let published: [(f64, f64, f64, f64, [f64; 5]); 3] = [
        (0.9, 0.4, -0.19549143, 0.42457252, [0.2845283, 0.5379100, 0.8224304, 1.2574440, 2.3772393]),
        (1.05, 0.2, 0.03097091, 0.18878166, [0.6434035, 0.8540114, 1.0314555, 1.2457684, 1.6535509]),
        (3.0, 3.0, 0.75203870, 0.83255461, [0.2646498, 0.9226402, 2.1213203, 4.8773074, 17.0036024]),
    ];
    for (mean, sd, mu, sigma, values) in published {
        let rate = YearlyRate::lognormal(mean, sd).unwrap();
        let YearlyRate::Lognormal(distribution) = rate else { panic!("not a lognormal: {rate:?}") };
        let found = distribution.mu_sigma();
        assert!((found.0 - mu).abs() < 5.1e-9 && (found.1 - sigma).abs() < 5.1e-9, "{found:?}");
        for (z, value) in [-2.5, -1.0, 0.0, 1.0, 2.5].into_iter().zip(values) {
            assert!((rate.at(z) - value).abs() < 5.1e-8, "{mean} {sd} at {z}: {} for {value}", rate.at(z));
        }
    }
}

/// Computed: a survival of mean m needs sd < sqrt(m (1 - m)).
#[test]
fn an_impossible_sd_is_no_rate() {
    for (mean, most) in [(0.35, 0.47696960), (0.95, 0.21794495)] {
        assert!((largest_sd(mean) - most).abs() < 5e-9);
        assert!(YearlyRate::beta(mean, most - 1e-4).is_some());
        assert_eq!(YearlyRate::beta(mean, largest_sd(mean)), None);
        assert_eq!(YearlyRate::beta(mean, most + 1e-4), None);
    }
    for (mean, sd) in [(0.5, -0.1), (0.5, f64::NAN), (f64::NAN, 0.1), (1.0, 0.1), (0.0, 0.1), (1.2, 0.0), (-0.1, 0.0)] {
        assert_eq!(YearlyRate::beta(mean, sd), None, "{mean} {sd}");
    }
    for (mean, sd) in [(0.0, 0.1), (-1.0, 0.1), (2.0, -0.1), (2.0, f64::NAN), (f64::INFINITY, 0.0)] {
        assert_eq!(YearlyRate::lognormal(mean, sd), None, "{mean} {sd}");
    }
    assert_eq!(YearlyRate::beta(1.0, 0.0), Some(YearlyRate::Fixed(1.0)));
    assert_eq!(YearlyRate::lognormal(0.0, 0.0), Some(YearlyRate::Fixed(0.0)));
}

/// What the model promises of its tables: within 1e-6 of the exact quantile in value, mean and sd (relative to the value
/// where that is above 1, as lognormals are), and rising with z but for rounding. Each is held against the exact function, and mean and sd
/// against those stated, integrated over the deviate in steps of 1/512.
#[test]
fn tables_are_within_1e_6_in_value_mean_and_sd() {
    let shares = [
        (0.35, 0.10),
        (0.80, 0.10),
        (0.95, 0.04),
        (0.5, 0.35),
        (0.999, 0.02),
        (0.02, 0.05),
        (0.3, 0.001),
        (0.01, 0.0995 * 0.5),
        (0.5, 0.47),
        (0.97, 0.15),
    ];
    let numbers = [(0.9, 0.4), (1.05, 0.2), (3.0, 3.0), (1.0, 3.0), (120.0, 40.0), (0.02, 0.05)];
    let mut cases: Vec<(f64, f64, YearlyRate)> = Vec::new();
    cases.extend(shares.map(|(mean, sd)| (mean, sd, YearlyRate::beta(mean, sd).unwrap())));
    cases.extend(numbers.map(|(mean, sd)| (mean, sd, YearlyRate::lognormal(mean, sd).unwrap())));
    let all = RateCurves::new(&cases.iter().map(|(_, _, rate)| *rate).collect::<Vec<_>>());
    for (i, (mean, sd, rate)) in cases.iter().enumerate() {
        let alone = RateCurves::new(&[*rate]);
        for (curves, index) in [(&all, i), (&alone, 0)] {
            let at = |z: f64| curves.rate(index, &curves.locate(z));
            let (mut sum, mut squares, mut last) = (0.0, 0.0, 0.0);
            for step in -4352..=4352 {
                let z = f64::from(step) / 512.0;
                let value = at(z);
                assert!(value >= last * (1.0 - 4e-16), "{mean} {sd} falls at {z}");
                last = value;
                let weight = normal::density(z) / 512.0;
                sum += weight * value;
                squares += weight * (value - mean) * (value - mean);
            }
            assert!((sum - mean).abs() < 1e-6 * mean.max(1.0), "mean of {mean} {sd}: {sum}");
            assert!((squares.sqrt() - sd).abs() < 1e-6 * sd.max(1.0), "sd of {mean} {sd}: {}", squares.sqrt());
        }
        // Steps that meet knots of no grid.
        for step in -740..=740 {
            let z = f64::from(step) * 0.011_459;
            let found = alone.rate(0, &alone.locate(z));
            assert!((found - rate.at(z)).abs() < 1e-6 * rate.at(z).max(1.0), "{mean} {sd} at {z}: {found}");
        }
    }
}

/// Next to the largest sd there is, where survival is nearly a coin's toss, the exact function stands in for a table.
#[test]
fn no_rate_is_too_steep() {
    let rate = YearlyRate::beta(0.5, 0.499_99).unwrap();
    let curves = RateCurves::new(&[rate, YearlyRate::Fixed(0.25)]);
    for z in [-9.0, -1.0, -0.01, 0.0, 0.0001, 0.3, 2.0, 9.0] {
        let located = curves.locate(z);
        assert!((curves.rate(0, &located) - rate.at(z)).abs() < 1e-6);
        assert!((curves.rate(1, &located) - 0.25).abs() < 1e-15);
    }
}

/// Correlation of pairs, and its standard error from the influence of each pair.
fn correlation(pairs: &[(f64, f64)]) -> (f64, f64) {
    let n = pairs.len() as f64;
    let mean = |value: &dyn Fn(&(f64, f64)) -> f64| pairs.iter().map(value).sum::<f64>() / n;
    let (x_mean, y_mean) = (mean(&|p| p.0), mean(&|p| p.1));
    let x_sd = mean(&|p| (p.0 - x_mean) * (p.0 - x_mean)).sqrt();
    let y_sd = mean(&|p| (p.1 - y_mean) * (p.1 - y_mean)).sqrt();
    let standard = |p: &(f64, f64)| ((p.0 - x_mean) / x_sd, (p.1 - y_mean) / y_sd);
    let r = mean(&|p| {
        let (u, v) = standard(p);
        u * v
    });
    let influence = mean(&|p| {
        let (u, v) = standard(p);
        let influence = u * v - r * (u * u + v * v) / 2.0;
        influence * influence
    });
    (r, (influence / n).sqrt())
}

/// Computed (the lognormal pair also by (e^{rho sigma^2} - 1)/(e^{sigma^2} - 1)): what correlation realised rates show
/// whose deviates are correlated by rho. 200,000 pairs: 1,000 independent patches, 200 years.
#[test]
fn rates_show_the_correlation_of_their_deviates() {
    let survival = YearlyRate::beta(0.35, 0.10).unwrap();
    let high_survival = YearlyRate::beta(0.95, 0.04).unwrap();
    let fecundity = YearlyRate::lognormal(0.9, 0.4).unwrap();
    let curves = RateCurves::new(&[survival, high_survival, fecundity]);
    let pairs_of_rates = [(0, 0), (1, 1), (2, 2), (0, 2)];
    let published = [
        (0.3, [0.298974, 0.275451, 0.281311, 0.287500]),
        (0.7, [0.698916, 0.675314, 0.680856, 0.675406]),
        (1.0, [1.0, 1.0, 1.0, 0.969367]),
    ];
    for (replicate, (rho, expected)) in (0..).zip(published) {
        let weather = independent(1000, rho, 0.0);
        let mut state = weather.state();
        state.start(ReplicateKey::new(SEED, replicate));
        let mut pairs: [Vec<(f64, f64)>; 4] = Default::default();
        for _ in 0..200 {
            state.advance(&weather);
            for (x, y) in state.deviates(0).iter().zip(state.deviates(1)) {
                for (pairs, (first, second)) in pairs.iter_mut().zip(pairs_of_rates) {
                    pairs.push((curves.rate(first, &curves.locate(*x)), curves.rate(second, &curves.locate(*y))));
                }
            }
        }
        for (pairs, expected) in pairs.iter().zip(expected) {
            let (r, error) = correlation(pairs);
            assert!((r - expected).abs() < (4.0 * error).max(1e-9), "rho {rho}: {r} for {expected}, error {error}");
        }
    }
}

/// Variance about a known mean of 0.
fn variance(values: impl Iterator<Item = f64>, n: f64) -> f64 {
    values.map(|value| value * value).sum::<f64>() / n
}

/// Computed: an autoregressive series of variance 1 in every year, the first included, with lag-k correlation rho^k;
/// variance of the sum of 50 years 74.375 (rho = 0.2), 267.777778 (0.7), 27.278107 (-0.3), as for Foley (1994, Ecol. Appl.
/// 4; verified). 20,000 replicates; the error of a normal variance is sqrt(2/n) of it.
#[test]
fn weather_is_stationary_from_the_first_year_and_keeps_its_memory() {
    const REPLICATES: u32 = 20_000;
    let n = f64::from(REPLICATES);
    for (rho, of_sum) in [(0.2, 74.375), (0.7, 267.777_778), (-0.3, 27.278_107)] {
        let weather = independent(1, 1.0, rho);
        let mut state = weather.state();
        let series: Vec<[f64; 50]> = (0..REPLICATES)
            .map(|replicate| {
                state.start(ReplicateKey::new(SEED + 1, replicate));
                std::array::from_fn(|_| {
                    state.advance(&weather);
                    state.deviates(0)[0]
                })
            })
            .collect();
        let found = variance(series.iter().map(|years| years.iter().sum()), n);
        assert!((found / of_sum - 1.0).abs() < 4.0 * (2.0 / n).sqrt(), "rho {rho}: {found} for {of_sum}");
        for year in [0, 1, 2, 20, 49] {
            let found = variance(series.iter().map(|years| years[year]), n);
            assert!((found - 1.0).abs() < 4.0 * (2.0 / n).sqrt(), "rho {rho}, year {year}: {found}");
        }
        for (year, lag) in [(0, 1), (0, 3), (15, 1), (30, 2)] {
            let pairs: Vec<(f64, f64)> = series.iter().map(|years| (years[year], years[year + lag])).collect();
            let (r, error) = correlation(&pairs);
            let expected = pow(rho, lag as f64);
            assert!((r - expected).abs() < 4.0 * error, "rho {rho}, years {year} + {lag}: {r} for {expected}");
        }
    }
}

/// Lewontin & Cohen (1969, PNAS 62; from memory), computed: ln growth N(-0.01, 0.04) has mean growth 1.01005017, and after
/// 50 years the mean is 1.648721 of the start, the median 0.606531, and 0.638163 of all have fallen. 20,000 replicates.
#[test]
fn most_trajectories_fall_while_the_mean_rises() {
    const REPLICATES: u32 = 20_000;
    let n = f64::from(REPLICATES);
    let mean: f64 = 1.010_050_17;
    let rate = YearlyRate::lognormal(mean, mean * (exp(0.04) - 1.0).sqrt()).unwrap();
    let curves = RateCurves::new(&[rate]);
    let weather = independent(1, 1.0, 0.0);
    let mut state = weather.state();
    let growth: Vec<f64> = (0..REPLICATES)
        .map(|replicate| {
            state.start(ReplicateKey::new(SEED + 2, replicate));
            (0..50).fold(1.0, |grown, _| {
                state.advance(&weather);
                grown * curves.rate(0, &curves.locate(state.deviates(0)[0]))
            })
        })
        .collect();
    let share_below = |edge: f64| growth.iter().filter(|grown| **grown < edge).count() as f64 / n;
    let fallen: f64 = 0.638_163;
    assert!((share_below(1.0) - fallen).abs() < 4.0 * (fallen * (1.0 - fallen) / n).sqrt(), "{}", share_below(1.0));
    assert!((share_below(0.606_531) - 0.5).abs() < 4.0 * (0.25 / n).sqrt(), "{}", share_below(0.606_531));
    // ln of the whole growth is N(-0.5, 2), hence its sd.
    let sd = 1.648_721 * (exp(2.0) - 1.0_f64).sqrt();
    let found = growth.iter().sum::<f64>() / n;
    assert!((found - 1.648_721).abs() < 4.0 * sd / n.sqrt(), "{found}");
}

const FOUR_KM: [[f64; 2]; 4] = [[0.0, 0.0], [6.0, 0.0], [0.0, 8.0], [20.0, 15.0]];

/// Lower Cholesky rows of 0.8 exp(-d/12) + 0.2 I over the four points; computed.
const WITH_NUGGET: [&[f64]; 4] = [
    &[1.0],
    &[0.485224528, 0.874389591],
    &[0.410733695, 0.169696100, 0.895824238],
    &[0.099611577, 0.110224711, 0.086201228, 0.985138262],
];

/// The entry of the covariance that lower rows imply.
fn implied(rows: &[&[f64]], i: usize, j: usize) -> f64 {
    rows[i].iter().zip(rows[j]).map(|(a, b)| a * b).sum()
}

/// Computed: lower Cholesky rows of exp(-d/12) over four points, the logarithm of the determinant, and the same with a
/// nugget of 0.2.
#[test]
fn the_factor_of_the_field_is_exact() {
    let published: [&[f64]; 4] = [
        &[1.0],
        &[0.606530660, 0.795060098],
        &[0.513417119, 0.154950531, 0.844033882],
        &[0.124514471, 0.132530618, 0.102585994, 0.977961091],
    ];
    let field = DenseField::new(&FOUR_KM, &keys(4), 12.0).unwrap();
    let rows: Vec<&[f64]> = field.factor_rows().collect();
    for (row, published) in rows.iter().zip(published) {
        assert_eq!(row.len(), published.len());
        assert!(row.iter().zip(published).all(|(found, value)| (found - value).abs() < 1e-9), "{row:?}");
    }
    let ln_det: f64 = rows.iter().map(|row| 2.0 * ln(row[row.len() - 1])).sum();
    assert!((ln_det + 0.842_371_213).abs() < 1e-9);
    for i in 0..4 {
        for j in 0..=i {
            let own = if i == j { 0.2 } else { 0.0 };
            assert!((0.8 * implied(&rows, i, j) + own - implied(&WITH_NUGGET, i, j)).abs() < 2e-9);
        }
    }
}

/// Null: the covariance that the published factor with a nugget implies, in one year, and between the years and rate groups
/// that times the stated correlations. 20,000 replicates; year 20 lies in the second block of years.
#[test]
fn deviates_have_the_covariance_of_the_field() {
    const REPLICATES: u32 = 20_000;
    let stated = table(Correlation::Reach { reach_km: 12.0, nugget: 0.2 }, 0.6, 0.3);
    let weather = Weather::compile(&stated, &FOUR_KM, &keys(4), 2).unwrap();
    let mut state = weather.state();
    let seen: Vec<[[f64; 4]; 3]> = (0..REPLICATES)
        .map(|replicate| {
            state.start(ReplicateKey::new(SEED + 3, replicate));
            (0..20).for_each(|_| state.advance(&weather));
            let last: [f64; 4] = state.deviates(0).try_into().unwrap();
            state.advance(&weather);
            let [first, second] = [0, 1].map(|group| state.deviates(group).try_into().unwrap());
            [first, second, last]
        })
        .collect();
    for (x, y, factor) in [(0, 0, 1.0), (1, 1, 1.0), (0, 1, 0.6), (0, 2, 0.3), (1, 2, 0.6 * 0.3)] {
        for i in 0..4 {
            for j in 0..4 {
                let expected = factor * implied(&WITH_NUGGET, i.max(j), i.min(j));
                let products = seen.iter().map(|deviates| deviates[x][i] * deviates[y][j]);
                let found = products.sum::<f64>() / f64::from(REPLICATES);
                // Isserlis: the variance of a product of standard normals with this covariance.
                let error = ((1.0 + expected * expected) / f64::from(REPLICATES)).sqrt();
                assert!((found - expected).abs() < 4.0 * error, "{x}{y} at {i}, {j}: {found} for {expected}");
            }
        }
    }
}

/// Deviates of both groups over some years of a replicate, by year and patch.
fn years(weather: &Weather, replicate: u32, n_years: usize) -> Vec<[Vec<f64>; 2]> {
    let mut state = weather.state();
    state.start(ReplicateKey::new(SEED + 4, replicate));
    (0..n_years)
        .map(|_| {
            state.advance(weather);
            [0, 1].map(|group| state.deviates(group).to_vec())
        })
        .collect()
}

#[test]
fn independent_weather_does_not_know_the_order_of_patches() {
    let stated = table(Correlation::None, 0.4, 0.2);
    let forwards = keys(7);
    let backwards: Vec<u64> = forwards.iter().rev().copied().collect();
    let compile = |keys: &[u64]| Weather::compile(&stated, &[[0.0; 2]; 7], keys, 2).unwrap();
    for (year, turned) in years(&compile(&forwards), 1, 20).iter().zip(years(&compile(&backwards), 1, 20)) {
        for (deviates, turned) in year.iter().zip(turned) {
            assert!(deviates.iter().eq(turned.iter().rev()));
        }
    }
}

#[test]
fn a_replicate_has_its_weather_whatever_came_before() {
    for correlation in [Correlation::None, Correlation::Full, Correlation::Reach { reach_km: 5.0, nugget: 0.1 }] {
        let weather = Weather::compile(&table(correlation, 0.5, 0.3), &FOUR_KM, &keys(4), 2).unwrap();
        let alone = years(&weather, 7, 40);
        let mut state = weather.state();
        for (replicate, n_years) in [(3, 21), (7, 5), (7, 40)] {
            state.start(ReplicateKey::new(SEED + 4, replicate));
            for expected in &alone[..n_years] {
                state.advance(&weather);
                for group in [0, 1] {
                    assert_eq!(replicate == 7, state.deviates(group) == expected[group]);
                }
            }
        }
    }
}

#[test]
fn a_patch_more_leaves_the_others_their_weather_and_one_place_has_one_weather() {
    let stated = table(Correlation::Reach { reach_km: 9.0, nugget: 0.0 }, 1.0, 0.2);
    let as_is = Weather::compile(&stated, &FOUR_KM, &keys(4), 1).unwrap();
    let more_km = [FOUR_KM.as_slice(), &[[3.0, 3.0], FOUR_KM[1]]].concat();
    let more = Weather::compile(&stated, &more_km, &keys(6), 1).unwrap();
    for (before, after) in years(&as_is, 2, 20).iter().zip(years(&more, 2, 20)) {
        assert_eq!(before[0], after[0][..4]);
        assert_eq!(after[0][5].to_bits(), after[0][1].to_bits());
        assert!((after[0][4] - after[0][0]).abs() > 0.0);
    }
}

#[test]
fn common_weather_is_common_and_rates_may_be_opposed() {
    let weather = Weather::compile(&table(Correlation::Full, -1.0, 0.0), &FOUR_KM, &keys(4), 2).unwrap();
    for [first, second] in years(&weather, 1, 5) {
        assert!(first.iter().all(|z| z.to_bits() == first[0].to_bits()));
        assert!(first.iter().zip(&second).all(|(z, opposed)| (z + opposed).abs() < 1e-15));
    }
}

#[test]
fn what_cannot_be_compiled_says_why() {
    let missing = EnvironmentTable::default();
    assert!(Weather::compile(&missing, &FOUR_KM, &keys(4), 1).unwrap_err().contains("correlation"));
    assert!(Weather::compile(&missing, &FOUR_KM[..1], &keys(1), 1).is_ok());
    let by_distance = table(Correlation::Reach { reach_km: 9.0, nugget: 0.0 }, 1.0, 0.0);
    let many: Vec<[f64; 2]> = (0..2001).map(|i| [f64::from(i), 0.0]).collect();
    assert!(Weather::compile(&by_distance, &many, &keys(2001), 1).unwrap_err().contains("2001"));
}

//! Weather in the engine: chains under continuous weather, solved by quadrature over the deviate (converged to 1e-7); the
//! growth of an unlimited population; the correlation of two patches under one climate.

use eyot::num;

use crate::support::{Case, Point, patch, sample_mean, sample_sd};

fn beta_and_lognormal(survival_sd: f64, fecundity: f64, fecundity_sd: f64, rest: &str) -> String {
    format!(
        "[life_history]\nkind = \"stages\"\ndensity_dependence = {{ form = \"ceiling\" }}\n\
         [[life_history.stage]]\nname = \"all\"\nsurvival = {{ mean = 0.6, sd = {survival_sd} }}\n\
         fecundity = {{ mean = {fecundity}, sd = {fecundity_sd} }}\n{rest}"
    )
}

/// Year, P(extinct), mean, sd.
type Row = (usize, f64, f64, f64);

fn one_patch(name: &'static str, life: &str, rows: &[Row]) {
    let seen = Case::new(name, vec![patch(12.0, &[8])], &["all"], life).run(50);
    for &(census, extinct, mean, sd) in rows {
        seen.extinct(census, extinct);
        seen.total(census, mean, sd);
    }
}

#[test]
fn independent_years() {
    one_patch(
        "independent years",
        &beta_and_lognormal(0.15, 0.5, 0.3, ""),
        &[
            (1, 0.002_044, 8.154_32, 3.0540),
            (5, 0.083_779, 6.646_03, 4.1891),
            (10, 0.241_215, 5.217_52, 4.4984),
            (20, 0.504_611, 3.345_78, 4.3594),
            (50, 0.865_898, 0.904_48, 2.7094),
        ],
    );
}

#[test]
fn years_that_remember() {
    one_patch(
        "years that remember",
        &beta_and_lognormal(0.15, 0.5, 0.3, "[environment]\nautocorrelation = 0.6\n"),
        &[
            (1, 0.002_044, 8.154_32, 3.0540),
            (5, 0.129_641, 6.721_99, 4.5974),
            (10, 0.308_920, 5.286_63, 4.9103),
            (20, 0.565_993, 3.318_23, 4.6541),
            (50, 0.892_506, 0.821_86, 2.7233),
        ],
    );
}

#[test]
fn no_weather() {
    one_patch(
        "no weather",
        &crate::support::one_stage(0.6, 0.5, "poisson", "ceiling"),
        &[
            (1, 0.000_012, 8.676_14, 2.1926),
            (5, 0.009_049, 9.217_10, 3.1810),
            (10, 0.038_480, 9.041_77, 3.5582),
            (20, 0.099_204, 8.517_60, 4.0800),
            (50, 0.255_420, 7.048_86, 4.9156),
        ],
    );
}

/// Two patches under weather correlated 0, 0.5 or 1 between them; 0.5 is exp(-d / reach) at d = reach ln 2. Positively
/// correlated weather raises the network's extinction at every year (common practice).
#[test]
fn correlated_weather() {
    let reach = 1.0 / std::f64::consts::LN_2;
    let cases: [(&str, String, [Row; 5], [f64; 2]); 3] = [
        (
            "weather correlated 0",
            "\"none\"".to_owned(),
            [
                (1, 0.003_683, 6.219_94, 2.3208),
                (5, 0.113_635, 5.008_08, 3.2097),
                (10, 0.289_911, 3.859_03, 3.4393),
                (20, 0.559_878, 2.368_72, 3.2716),
                (50, 0.896_683, 0.555_82, 1.8757),
            ],
            [0.090_039, 0.089_752],
        ),
        (
            "weather correlated 0.5",
            format!("{{ reach_km = {reach} }}"),
            [
                (1, 0.007_291, 6.165_45, 2.5065),
                (5, 0.145_205, 4.752_23, 3.3473),
                (10, 0.344_747, 3.498_16, 3.4796),
                (20, 0.628_337, 1.965_37, 3.1212),
                (50, 0.933_088, 0.353_71, 1.5241),
            ],
            [0.057_918, 0.057_464],
        ),
        (
            "weather correlated 1",
            "\"full\"".to_owned(),
            [
                (1, 0.012_259, 6.110_38, 2.6721),
                (5, 0.178_931, 4.506_88, 3.4608),
                (10, 0.398_921, 3.164_78, 3.4865),
                (20, 0.688_996, 1.622_31, 2.9451),
                (50, 0.957_465, 0.221_81, 1.2232),
            ],
            [0.036_679, 0.036_183],
        ),
    ];
    let mut extinct_before: Option<Vec<usize>> = None;
    for (name, correlation, rows, occupied) in cases {
        let life = beta_and_lognormal(0.2, 0.6, 0.4, "emigration = 0.2\n")
            + &format!("[environment]\ncorrelation = {correlation}\n");
        let points = vec![
            Point { at_km: [10.0, 0.0], area_ha: 1.0, capacity: 6.0, start: vec![4] },
            Point { at_km: [11.0, 0.0], area_ha: 1.0, capacity: 4.0, start: vec![2] },
        ];
        let seen = Case::new(name, points, &["all"], &life).arriving(&[&[0.0, 0.8], &[0.8, 0.0]]).run(50);
        for (census, extinct, mean, sd) in rows {
            seen.extinct(census, extinct);
            seen.total(census, mean, sd);
        }
        seen.occupied_at_end(&occupied);
        let extinct: Vec<usize> = [5, 10, 20, 50]
            .iter()
            .map(|census| seen.tallies.records.iter().filter(|record| record.totals[*census] == 0).count())
            .collect();
        if let Some(before) = extinct_before {
            assert!(before.iter().zip(&extinct).all(|(less, more)| less < more), "{name}: {before:?} {extinct:?}");
        }
        extinct_before = Some(extinct);
    }
}

/// Uncorrelated lognormal growth, ln growth ~ N(-0.01, 0.04): after 50 years the median is 0.606531 of the start and
/// P(N_50 < N_0) = 0.638163, while the mean rises (Lewontin & Cohen 1969, PNAS 62, from memory).
#[test]
fn most_trajectories_fall_while_the_mean_rises() {
    let mean = num::exp(-0.01 + 0.02);
    let sd = mean * num::exp_m1(0.04).sqrt();
    let life = format!(
        "[life_history]\nkind = \"counts\"\ngrowth = {{ mean = {mean}, sd = {sd} }}\n\
         density_dependence = {{ form = \"none\" }}\n"
    );
    let seen = Case::new("lognormal growth", vec![patch(1e9, &[1_000_000])], &["all"], &life).run(50);
    let below = seen.tallies.records.iter().filter(|record| record.totals[50] < 1_000_000).count();
    seen.probability("below the start", below as u64, 0.638_163);
    let logs: Vec<f64> = seen.tallies.records.iter().map(|record| num::ln(record.totals[50] as f64 / 1e6)).collect();
    seen.mean("ln of relative numbers", sample_mean(&logs), -0.5, (50.0_f64 * 0.04).sqrt());
    let relative: Vec<f64> = seen.tallies.records.iter().map(|record| record.totals[50] as f64 / 1e6).collect();
    // Its exact sd is that of a lognormal with variance 2 on the log scale.
    let sd = 1.648_721 * num::exp_m1(2.0).sqrt();
    seen.mean("relative numbers", sample_mean(&relative), 1.648_721, sd);
}

/// Two unconnected patches under one climate vary together as their weather does (Moran 1953, Aust. J. Zool. 1, from
/// memory): Ricker with r = 0.8, noise sd 0.05 on the log scale correlated 0.5; ln N then has correlation 0.5 and sd
/// sqrt(0.05^2 / (1 - 0.2^2)). 10,000 replicates at one census; the band is 4 standard errors of a correlation, and 0.01
/// for curvature.
#[test]
fn moran_effect() {
    let r = 0.8_f64;
    let mean = num::exp(r);
    let sd = mean * num::exp_m1(0.0025).sqrt();
    let reach = 1.0 / std::f64::consts::LN_2;
    let life = format!(
        "[life_history]\nkind = \"counts\"\ngrowth = {{ mean = {mean}, sd = {sd} }}\n\
         density_dependence = {{ form = \"ricker\" }}\n[environment]\ncorrelation = {{ reach_km = {reach} }}\n"
    );
    let points =
        [10.0, 11.0].map(|x| Point { at_km: [x, 0.0], area_ha: 1.0, capacity: 1e6, start: vec![1_000_000] }).to_vec();
    let mut case = Case::new("moran effect", points, &["all"], &life);
    case.replicates = 10_000;
    let seen = case.run(50);
    // Only totals are kept by replicate; the correlation follows from the variances of the sum and of the parts, which
    // near K are linear in N.
    let totals: Vec<f64> = seen.tallies.records.iter().map(|record| record.totals[50] as f64).collect();
    let variance_of_sum = sample_sd(&totals) * sample_sd(&totals);
    let n = totals.len() as f64;
    let variances: Vec<f64> = seen
        .tallies
        .patches
        .iter()
        .map(|patch| {
            let mean = patch.abundance_at_end as f64 / n;
            (patch.abundance_at_end_squares as f64 / n - mean * mean) * n / (n - 1.0)
        })
        .collect();
    let correlation = (variance_of_sum - variances[0] - variances[1]) / (2.0 * (variances[0] * variances[1]).sqrt());
    assert!((0.4594..=0.5394).contains(&correlation), "correlation {correlation}");
    let relative_sd = variances[0].sqrt() / 1e6;
    assert!((relative_sd - 0.051_03).abs() < 0.05 * 0.051_03, "sd {relative_sd}");
}

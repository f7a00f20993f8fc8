//! Means and variances. Pollard 1966, Biometrika 53 (from memory); the mean projection is the matrix itself.

use crate::support::{Case, patch, sample_mean, sample_sd};

/// Mean and variance from demographic chance, Poisson young, from 10 juveniles and 20 adults.
#[test]
fn demographic_chance() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        [[life_history.stage]]\nname = \"juvenile\"\nsurvival = 0.4\n\
        [[life_history.stage]]\nname = \"adult\"\nsurvival = 0.7\nfecundity = 0.9\n";
    let case = Case::new("demographic chance", vec![patch(1e9, &[10, 20])], &["juvenile", "adult"], life);
    let seen = case.run(10);
    for (census, mean, sd) in [(1, 36.0, 4.9598), (5, 41.5080, 11.4135), (10, 51.6127, 18.8555)] {
        seen.total(census, mean, sd);
    }
}

/// One step from large numbers: the mean over replicates is the matrix times the vector within 4 standard errors, and
/// the relative error that this can see is below 1e-4.
#[test]
fn one_step_is_the_matrix_times_the_vector() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        matrix = [[0.1, 0.6, 1.4], [0.5, 0.2, 0], [0, 0.3, 0.85]]\nfirst_row_fates = [1, 0.25, 0]\n";
    let start = [20_000, 30_000, 10_000];
    let mut case = Case::new("one step", vec![patch(1e9, &start)], &["stage 1", "stage 2", "stage 3"], life);
    case.replicates = 2_000;
    let seen = case.run(1);
    let expected = 0.6 * 20_000.0 + 1.1 * 30_000.0 + 2.25 * 10_000.0;
    let totals: Vec<f64> = seen.tallies.records.iter().map(|record| record.totals[1] as f64).collect();
    assert!(4.0 * sample_sd(&totals) / (2_000.0_f64).sqrt() < 1e-3 * expected, "the test can see a per mille");
    seen.mean("total", sample_mean(&totals), expected, sample_sd(&totals));
}

/// Weather leaves the mean projection alone where years are independent: killer whale, 50 years, survival sd 0.01 and
/// fecundity cv 0.3 (matrix of Brault & Caswell 1993, Ecology 74).
#[test]
fn weather_leaves_the_mean_projection_alone() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        matrix = [[0, 0.0043, 0.1132, 0], [0.9775, 0.9111, 0, 0], [0, 0.0736, 0.9534, 0], [0, 0, 0.0452, 0.9804]]\n\
        survival_sd = [0.01, 0.01, 0.001, 0.01]\nfecundity_sd = [0, 0.00129, 0.03396, 0]\n\
        [environment]\nbetween_rates = 0\n";
    let stages = ["stage 1", "stage 2", "stage 3", "stage 4"];
    let seen = Case::new("weather leaves the mean alone", vec![patch(1e9, &[10, 40, 40, 35])], &stages, life).run(50);
    let totals: Vec<f64> = seen.tallies.records.iter().map(|record| record.totals[50] as f64).collect();
    let expected = 17.0190 + 145.4958 + 148.6429 + 146.0764;
    seen.mean("total at 50", sample_mean(&totals), expected, sample_sd(&totals));
}

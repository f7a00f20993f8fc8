//! Matrices, start numbers and density dependence. Values recomputed independently with a general numerical library unless
//! a test says that they were seen or are recalled.

use std::path::Path;

use eyot::demography::{LifeHistory, ProjectionMatrix, split_total};
use eyot::num;
use eyot::study::Document;

/// Reads a life history from the text of a study.
fn life_history(text: &str) -> LifeHistory {
    let document = Document::parse(Path::new("study.toml"), text.to_owned());
    let read = LifeHistory::read(document.root().table("life_history").expect("the table is there"));
    if let Err(mistakes) = document.verdict() {
        panic!("{mistakes}");
    }
    read.expect("no mistake was noted")
}

/// Crouse, Crowder & Caswell 1987, Ecology 68: loggerhead turtle, seven stages.
fn loggerhead() -> LifeHistory {
    life_history(
        r#"
        [life_history]
        kind = "stages"
        density_dependence = { form = "none" }
        matrix = [
            [0, 0, 0, 0, 127, 4, 80],
            [0.6747, 0.7370, 0, 0, 0, 0, 0],
            [0, 0.0486, 0.6610, 0, 0, 0, 0],
            [0, 0, 0.0147, 0.6907, 0, 0, 0],
            [0, 0, 0, 0.0518, 0, 0, 0],
            [0, 0, 0, 0, 0.8091, 0, 0],
            [0, 0, 0, 0, 0, 0.8091, 0.8089],
        ]
        "#,
    )
}

/// Brault & Caswell 1993, Ecology 74: killer whale, four stages. The matrix was seen.
fn killer_whale(density: &str) -> LifeHistory {
    life_history(&format!(
        r#"
        [life_history]
        kind = "stages"
        density_dependence = {density}
        matrix = [
            [0, 0.0043, 0.1132, 0],
            [0.9775, 0.9111, 0, 0],
            [0, 0.0736, 0.9534, 0],
            [0, 0, 0.0452, 0.9804],
        ]
        "#
    ))
}

fn near(value: f64, expected: f64, relative: f64) {
    assert!((value - expected).abs() <= relative * expected.abs(), "{value} is not {expected}");
}

/// `value` agrees with a printed number to half a unit of its last digit.
fn printed(value: f64, expected: f64, digits: i32) {
    assert!((value - expected).abs() <= 0.5001 * num::pow(10.0, f64::from(-digits)), "{value} is not {expected}");
}

fn projected(matrix: &ProjectionMatrix, start: &[f64], years: usize) -> Vec<f64> {
    let whole = matrix.whole();
    (0..years).fold(start.to_vec(), |now, _| whole.times(&now))
}

#[test]
fn loggerhead_turtle() {
    let matrix = loggerhead().matrix;
    near(matrix.growth(), 0.945_030_98, 1e-6);
    printed(matrix.growth(), 0.9450, 4);
    let stable = [20.650, 66.975, 11.460, 0.6624, 0.0363, 0.0311, 0.1848];
    for ((share, expected), digits) in matrix.stable_distribution().iter().zip(stable).zip([3, 3, 3, 4, 4, 4, 4]) {
        printed(share * 100.0, expected, digits);
    }
    let values = [1.0, 1.4007, 5.9955, 115.845, 568.78, 507.37, 587.67];
    for ((value, expected), digits) in matrix.reproductive_values().iter().zip(values).zip([4, 4, 4, 3, 2, 2, 2]) {
        printed(*value, expected, digits);
    }
    let after = projected(&matrix, &[300_000.0, 800_000.0, 700_000.0, 10_000.0, 500.0, 400.0, 2_000.0], 10);
    let expected = [271_660.95, 745_641.75, 114_753.19, 7_643.939, 442.6036, 407.2872, 2_461.175];
    for (value, expected) in after.iter().zip(expected) {
        near(*value, expected, 1e-6);
    }
    near(matrix.generation_time().unwrap(), 19.607_06, 1e-6);
}

/// Elasticities, de Kroon et al. 1986; all sum to 1.
#[test]
fn elasticities_of_turtle_and_whale() {
    for (life_history, expected) in [
        (loggerhead(), (0.051_002, 0.667_411, 0.281_587)),
        (killer_whale(r#"{ form = "none" }"#), (0.042_208, 0.874_888, 0.082_903)),
    ] {
        let (fates, young) = life_history.matrix.elasticities();
        let size = fates.size();
        let sum = |chosen: fn(usize, usize) -> bool| -> f64 {
            (0..size)
                .flat_map(|to| (0..size).map(move |from| (to, from)))
                .filter(|(to, from)| chosen(*to, *from))
                .map(|at| fates[at])
                .sum()
        };
        let born: f64 = (0..size).flat_map(|to| (0..size).map(move |from| (to, from))).map(|at| young[at]).sum();
        printed(born, expected.0, 6);
        printed(sum(|to, from| to == from), expected.1, 6);
        printed(sum(|to, from| to != from), expected.2, 6);
        near(born + sum(|_, _| true), 1.0, 1e-12);
    }
}

#[test]
fn killer_whale_in_an_average_year() {
    let matrix = killer_whale(r#"{ form = "none" }"#).matrix;
    near(matrix.growth(), 1.025_441_33, 1e-8);
    // Printed 1.0254, from memory.
    printed(matrix.growth(), 1.0254, 4);
    for (share, expected) in matrix.stable_distribution().iter().zip([3.6972, 31.6071, 32.2910, 32.4047]) {
        printed(share * 100.0, expected, 4);
    }
    for (value, expected) in matrix.reproductive_values().iter().zip([1.0, 1.049_045, 1.571_320, 0.0]) {
        printed(*value, expected, 6);
    }
    let start = [10.0, 40.0, 40.0, 35.0];
    for (value, expected) in projected(&matrix, &start, 1).iter().zip([4.7, 46.219, 41.08, 36.122]) {
        near(*value, expected, 1e-9);
    }
    for (value, expected) in projected(&matrix, &start, 50).iter().zip([17.0190, 145.4958, 148.6429, 146.0764]) {
        printed(*value, expected, 4);
    }
    let (fates, _) = matrix.elasticities();
    near(fates[(2, 2)], 0.538_563, 1e-6);
}

/// Mean age of mothers at the stable distribution, Bienvenu & Legendre 2015, Am. Nat. 185 (formula from memory).
#[test]
fn generation_time_is_the_mean_age_of_mothers() {
    near(killer_whale(r#"{ form = "none" }"#).matrix.generation_time().unwrap(), 23.692_05, 1e-6);
}

/// Largest remainders over the stable distribution.
#[test]
fn start_numbers_are_whole() {
    let whale = killer_whale(r#"{ form = "none" }"#).matrix.stable_distribution();
    assert_eq!(split_total(100, &whale), [4, 32, 32, 32]);
    assert_eq!(split_total(7, &whale), [0, 2, 2, 3]);
    assert_eq!(split_total(1000, &loggerhead().matrix.stable_distribution()), [206, 670, 115, 7, 0, 0, 2]);
}

/// The multiplier that holds growth at 1: 1/R0 for fecundities (R0 = 2.0131440), 1/growth for both.
#[test]
fn density_dependence_is_scaled_to_hold_growth_at_capacity() {
    for (acts_on, expected) in [
        (r#"["fecundity"]"#, 0.496_735_45),
        (r#"["survival"]"#, 0.974_103_94),
        (r#"["survival", "fecundity"]"#, 0.975_189_88),
    ] {
        let density = killer_whale(&format!(r#"{{ form = "ricker", acts_on = {acts_on} }}"#)).density;
        near(density.at_capacity.unwrap(), expected, 1e-8);
        near(density.curve.unwrap().multiplier(1.0), expected, 1e-8);
    }
}

/// A population that does not grow has nothing to scale.
#[test]
fn a_declining_population_is_not_pressed() {
    let text = r#"
        [life_history]
        kind = "counts"
        growth = 0.97
        density_dependence = { form = "ricker" }
    "#;
    let density = life_history(text).density;
    assert!(density.is_idle() && density.curve.is_none());
}

/// One stage, deterministic, from 10 with K = 100; Beverton-Holt's closed form K N0 / (N0 + (K - N0) R^-t), May 1976,
/// Nature 261 for the Ricker map (from memory).
#[test]
fn forms_in_one_stage() {
    let counts = |growth: f64, form: &str| {
        life_history(&format!(
            "[life_history]\nkind = \"counts\"\ngrowth = {growth}\ndensity_dependence = {{ {form} }}"
        ))
    };
    let cases = [
        (1.5, r#"form = "beverton-holt""#, [14.285_714, 20.0, 45.762_712, 86.499_670, 99.730_075]),
        (1.5, r#"form = "ricker""#, [14.403_968, 20.380_239, 48.496_196, 91.208_967, 99.945_181]),
        (
            num::exp(0.4),
            r#"form = "theta-logistic", theta = 2"#,
            [14.858_693, 21.971_669, 63.078_450, 99.911_787, 100.0],
        ),
    ];
    for (growth, form, expected) in cases {
        let curve = counts(growth, form).density.curve.unwrap();
        let mut numbers = 10.0;
        let mut seen = Vec::new();
        for year in 1..=20 {
            numbers *= growth * curve.multiplier(numbers / 100.0);
            if [1, 2, 5, 10, 20].contains(&year) {
                seen.push(numbers);
            }
        }
        for (value, expected) in seen.iter().zip(expected) {
            printed(*value, expected, 6);
        }
    }
}

/// The two-cycle of the Ricker map in units of K, May 1976, Nature 261 (from memory); its points sum to 2.
#[test]
fn ricker_cycles_where_growth_is_large() {
    for (r, low, high) in [(2.2_f64, 0.497_059_4, 1.502_940_6), (2.5, 0.289_588_2, 1.710_411_8)] {
        let text = format!(
            "[life_history]\nkind = \"counts\"\ngrowth = {}\ndensity_dependence = {{ form = \"ricker\" }}",
            num::exp(r)
        );
        let curve = life_history(&text).density.curve.unwrap();
        let mut numbers = 0.7;
        for _ in 0..4_000 {
            numbers *= num::exp(r) * curve.multiplier(numbers);
        }
        let next = numbers * num::exp(r) * curve.multiplier(numbers);
        printed(numbers.min(next), low, 7);
        printed(numbers.max(next), high, 7);
    }
}

/// One stage of survival 0.5 and fecundity 0.9, pressed on fecundity alone, K = 50 from 10.
#[test]
fn pressure_on_part_of_the_rates() {
    for (form, expected) in [
        ("beverton-holt", [12.758_621, 26.629_515, 40.922_343, 49.931_290]),
        ("ricker", [13.001_806, 29.055_888, 44.358_970, 49.993_963]),
    ] {
        let text = format!(
            r#"
            [life_history]
            kind = "stages"
            density_dependence = {{ form = "{form}" }}
            [[life_history.stage]]
            name = "all"
            survival = 0.5
            fecundity = 0.9
            "#
        );
        let density = life_history(&text).density;
        near(density.at_capacity.unwrap(), 5.0 / 9.0, 1e-12);
        let curve = density.curve.unwrap();
        let mut numbers = 10.0;
        let mut seen = Vec::new();
        for year in 1..=30 {
            numbers *= 0.5 + 0.9 * curve.multiplier(numbers / 50.0);
            if [1, 5, 10, 30].contains(&year) {
                seen.push(numbers);
            }
        }
        for (value, expected) in seen.iter().zip(expected) {
            printed(*value, expected, 6);
        }
    }
}

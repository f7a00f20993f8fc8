//! The Allee effect, litters, spread between individuals, and both sexes.

use eyot::demography::allee::{Balance, balance};
use std::path::Path;

use eyot::engine::{Overrides, prepare};
use eyot::num;

use crate::support::{Case, Seen, patch};

/// Capacity plays no part where the form is `none`; it only has to be above 0.
const ROOMY: f64 = 1e9;

fn check(seen: &Seen, rows: &[(usize, f64, f64, f64)]) {
    for &(census, extinct, mean, sd) in rows {
        seen.extinct(census, extinct);
        seen.total(census, mean, sd);
    }
}

/// One stage under an Allee effect.
fn allee(survival: f64, fecundity: f64, half_at: f64, density: &str) -> String {
    format!(
        "[life_history]\nkind = \"stages\"\ndensity_dependence = {{ form = \"{density}\" }}\n\
         allee_effect = {{ half_at = {half_at} }}\n\
         [[life_history.stage]]\nname = \"all\"\nsurvival = {survival}\nfecundity = {fecundity}\n"
    )
}

/// Chain under a ceiling, fecundity 0.8 N/(N + 3) (hyperbola of Dennis 1989, Nat. Resour. Model. 3, from memory; values
/// computed by a second method too).
#[test]
fn an_allee_effect_under_a_ceiling() {
    let cases = [
        (
            "allee from 4",
            4,
            [
                (1, 0.004_112, 4.228_57, 1.6699),
                (10, 0.334_339, 7.363_34, 6.7180),
                (20, 0.431_268, 7.960_39, 7.2343),
                (50, 0.452_325, 7.951_81, 7.3088),
            ],
            0.547_675,
        ),
        (
            "allee from 8",
            8,
            [
                (1, 0.000_006, 9.432_03, 2.5048),
                (10, 0.034_665, 13.449_52, 3.7325),
                (20, 0.059_012, 13.589_47, 3.7962),
                (50, 0.073_693, 13.450_15, 4.0504),
            ],
            0.926_307,
        ),
        (
            "allee from 12",
            12,
            [
                (1, 0.0, 13.652_09, 1.8685),
                (10, 0.002_367, 14.462_16, 1.6966),
                (20, 0.007_017, 14.415_34, 1.9126),
                (50, 0.018_944, 14.245_28, 2.4595),
            ],
            0.981_056,
        ),
    ];
    for (name, start, rows, occupied) in cases {
        let case = Case::new(name, vec![patch(15.0, &[start])], &["all"], &allee(0.6, 0.8, 3.0, "ceiling"));
        let seen = case.run(50);
        check(&seen, &rows);
        seen.occupied_at_end(&[occupied]);
    }
    let case = Case::new("allee balance", vec![patch(15.0, &[4])], &["all"], &allee(0.6, 0.8, 3.0, "ceiling"));
    let between = balance(&case.prepare(1).life_history, 15.0);
    let Some(Balance::Between { threshold, settles: Some(settles) }) = between else { panic!("{between:?}") };
    assert!((threshold - 3.0).abs() < 1e-9 && (settles - 15.0).abs() < 1e-9, "{between:?}");
}

/// s = 0.5, f = 1, A = 10, nothing that holds numbers back: the threshold A (1 - s)/(f + s - 1) is 10 (Dennis 1989, as
/// above); the mean of a step from 9 is 8.763158, from 11 it is 11.261905, from 10 it stays.
#[test]
fn the_threshold_of_an_allee_effect() {
    for (name, start, mean) in
        [("step from 9", 9_u32, 8.763_158), ("step from 10", 10, 10.0), ("step from 11", 11, 11.261_905)]
    {
        let case = Case::new(name, vec![patch(ROOMY, &[start])], &["all"], &allee(0.5, 1.0, 10.0, "none"));
        let n = f64::from(start);
        // Binomial survivors and Poisson young.
        case.run(1).total(1, mean, (0.25 * n + n * n / (n + 10.0)).sqrt());
        let Some(Balance::Between { threshold, settles: None }) = balance(&case.prepare(1).life_history, ROOMY) else {
            panic!("{name} has a threshold")
        };
        assert!((threshold - 10.0).abs() < 1e-9, "{threshold}");
    }
}

/// Under Beverton-Holt on fecundity the balance is a root of a quadratic: with s = 0.6, f = 0.8, K = 30, A = 2 the
/// multiplier at capacity is 1/2, so (N/(N + 2))/(1 + N/30) = 1/2, or N^2 - 28 N + 60 = 0: 14 -/+ sqrt(136).
/// Where K is 10, N^2 - 8 N + 20 = 0 has no root, and numbers fall from anywhere.
#[test]
fn the_balance_below_capacity() {
    let case = Case::new("balance", vec![patch(30.0, &[20])], &["all"], &allee(0.6, 0.8, 2.0, "beverton-holt"));
    let life_history = case.prepare(1).life_history;
    let found = balance(&life_history, 30.0);
    let Some(Balance::Between { threshold, settles: Some(settles) }) = found else { panic!("{found:?}") };
    let half = f64::sqrt(136.0);
    assert!((threshold - (14.0 - half)).abs() < 1e-9 && (settles - (14.0 + half)).abs() < 1e-9, "{found:?}");
    assert_eq!(balance(&life_history, 10.0), Some(Balance::Never));
}

/// Growth of a model of counts under the effect: one step is Poisson with mean N g N/(N + A).
#[test]
fn an_allee_effect_on_counts() {
    let life = "[life_history]\nkind = \"counts\"\ngrowth = 1.5\ndensity_dependence = { form = \"none\" }\n\
        allee_effect = { half_at = 4 }\n";
    let mean = 8.0 * 1.5 * 8.0 / 12.0;
    Case::new("allee on counts", vec![patch(ROOMY, &[8])], &["all"], life).run(1).total(1, mean, mean.sqrt());
}

/// Only the stages that breed are counted, in their own patch: 6 juveniles beside 4 adults, A = 4, f = 2: 4 young.
#[test]
fn an_allee_effect_counts_breeders_of_the_patch() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        allee_effect = { half_at = 4 }\n\
        [[life_history.stage]]\nname = \"juvenile\"\nsurvival = 0\n\
        [[life_history.stage]]\nname = \"adult\"\nsurvival = 0\nfecundity = 2\n";
    let patches = vec![patch(ROOMY, &[6, 4]), patch(ROOMY, &[0, 4])];
    Case::new("allee counts breeders", patches, &["juvenile", "adult"], life).run(1).total(1, 8.0, f64::sqrt(8.0));
}

/// Chances of 0, 1, 2 and 3 young in a litter; their mean is 1.7.
const LITTER: [f64; 4] = [0.1, 0.3, 0.4, 0.2];

/// Generating function of the litter, by Horner's rule.
fn litter_at(x: f64) -> f64 {
    LITTER.iter().rev().fold(0.0, |sum, chance| sum * x + chance)
}

/// Mean of size to the power `power`.
fn litter_moment(power: f64) -> f64 {
    LITTER.iter().enumerate().map(|(size, chance)| chance * num::pow(size as f64, power)).sum()
}

/// A two-type branching process (Harris 1963, The Theory of Branching Processes; Caswell 2001, Matrix Population Models,
/// ch. 15, both from memory), extinction by iterating the generating functions: juveniles survive 0.4 and become adults;
/// adults survive 0.7, half of them breed, and each of these has a litter.
#[test]
fn litters_as_a_branching_process() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        young = { litter = [0.1, 0.3, 0.4, 0.2] }\n\
        [[life_history.stage]]\nname = \"juvenile\"\nsurvival = 0.4\n\
        [[life_history.stage]]\nname = \"adult\"\nsurvival = 0.7\nfecundity = 0.85\n";
    for (name, start) in [("litters from an adult", [0, 1]), ("litters from 3 and 2", [3, 2])] {
        let seen = Case::new(name, vec![patch(ROOMY, &start)], &["juvenile", "adult"], life).run(30);
        let (mut juvenile, mut adult) = (0.0, 0.0);
        for census in 1..=30 {
            let (before, young) = (adult, juvenile);
            juvenile = 0.6 + 0.4 * before;
            adult = (0.3 + 0.7 * before) * (0.5 + 0.5 * litter_at(young));
            if [1, 3, 10, 30].contains(&census) {
                let by_type = |q: f64, count: u32| (0..count).fold(1.0, |product, _| product * q);
                seen.extinct(census, by_type(juvenile, start[0]) * by_type(adult, start[1]));
            }
        }
    }
}

/// One step of 20 individuals: survivors are binomial; a share b breeds, and the young of one individual have the second
/// moment b times the litter's. (As a matrix, to hold that form to the same.)
#[test]
fn mean_and_variance_of_a_step_with_litters() {
    let (n, survival, share) = (20.0, 0.6, 0.5);
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        young = { litter = [0.1, 0.3, 0.4, 0.2] }\nmatrix = [[1.45]]\nfirst_row_fates = [0.41379310344827586]\n";
    let young = share * litter_moment(1.0);
    let variance = survival * (1.0 - survival) + share * litter_moment(2.0) - young * young;
    let seen = Case::new("step with litters", vec![patch(ROOMY, &[20])], &["stage 1"], life).run(1);
    seen.total(1, n * (survival + young), f64::sqrt(n * variance));
}

/// Weather acts on the share that breeds, with the beta: mean share 0.5, sd of fecundity 0.595 over the litter's mean 1.7
/// is 0.35. Nobody survives; P(4 individuals leave none) = E (1 - 0.9 B)^4, by the moments of the beta distribution, whose
/// k-th is the product of (alpha + i)/(alpha + beta + i).
#[test]
fn weather_on_the_share_that_breeds() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        young = { litter = [0.1, 0.3, 0.4, 0.2] }\n\
        [[life_history.stage]]\nname = \"all\"\nsurvival = 0\nfecundity = { mean = 0.85, sd = 0.595 }\n";
    let (mean, sd, n) = (0.5, 0.35, 4.0);
    let both = mean * (1.0 - mean) / (sd * sd) - 1.0;
    let moments: Vec<f64> = (0..4)
        .scan(1.0, |product, i| {
            *product *= (mean * both + f64::from(i)) / (both + f64::from(i));
            Some(*product)
        })
        .collect();
    let none = 1.0 - 4.0 * 0.9 * moments[0] + 6.0 * 0.81 * moments[1] - 4.0 * 0.729 * moments[2] + 0.6561 * moments[3];
    let seen = Case::new("weather on breeding", vec![patch(ROOMY, &[4])], &["all"], life).run(1);
    seen.extinct(1, none);
    let (size, square) = (litter_moment(1.0), litter_moment(2.0));
    let within = n * (square * moments[0] - size * size * moments[1]);
    seen.total(1, n * 0.85, f64::sqrt(within + n * n * 0.595 * 0.595));
}

/// Negative binomial offspring of mean m and variance v m have the generating function (1 + (v - 1)(1 - x))^(-m/(v - 1))
/// (Johnson, Kemp & Kotz 2005, Univariate Discrete Distributions, ch. 5, from memory); extinction by iterating it.
#[test]
fn spread_between_individuals_of_counts() {
    for (name, growth, spread, start) in [
        ("spread 3 from 5", 1.1, 3.0, 5_u32),
        ("spread 1.5 from 3", 1.3, 1.5, 3),
        ("spread 20 from 40", 0.95, 20.0, 40),
    ] {
        let life = format!(
            "[life_history]\nkind = \"counts\"\ngrowth = {growth}\noffspring_variance = {spread}\n\
             density_dependence = {{ form = \"none\" }}\n"
        );
        let seen = Case::new(name, vec![patch(ROOMY, &[start])], &["all"], &life).run(20);
        let n = f64::from(start);
        seen.total(1, n * growth, f64::sqrt(n * growth * spread));
        let mut none = 0.0;
        for census in 1..=20 {
            let excess = spread - 1.0;
            none = num::pow(1.0 + excess * (1.0 - none), -growth / excess);
            if [1, 2, 5, 20].contains(&census) {
                seen.extinct(census, num::pow(none, n));
            }
        }
    }
}

/// Both sexes of one stage each.
fn pairs(female: f64, male: f64, fecundity: f64, harem_size: f64, density: &str) -> String {
    format!(
        "[life_history]\nkind = \"stages\"\nindividuals = \"both sexes\"\nharem_size = {harem_size}\n\
         density_dependence = {{ form = \"{density}\" }}\n\
         [[life_history.stage]]\nname = \"female\"\nsex = \"female\"\nsurvival = {female}\nfecundity = {fecundity}\n\
         [[life_history.stage]]\nname = \"male\"\nsex = \"male\"\nsurvival = {male}\n"
    )
}

const BOTH: [&str; 2] = ["female", "male"];

/// Chain over both sexes: females survive 0.65, males 0.55, as many females breed as males allow, Poisson(0.9) young of
/// both sexes each, half of them female, ceiling 12 on the total, from 4 + 4. A sex that is gone stays away, so that its
/// presence is 1 - P(below one at least once). (Solved as an absorbing Markov chain, and by a second method.)
#[test]
fn both_sexes_under_a_ceiling() {
    type Row = (usize, f64, f64, f64, f64, f64);
    let cases: [(f64, [&'static str; 2], [Row; 5]); 2] = [
        (
            1.0,
            ["pairs, females", "pairs, males"],
            [
                (1, 0.000_017, 8.322_27, 2.1810, 0.997_519, 0.993_221),
                (5, 0.065_011, 5.582_66, 3.6548, 0.874_130, 0.763_528),
                (10, 0.391_997, 2.874_10, 3.5774, 0.551_488, 0.414_472),
                (20, 0.844_177, 0.668_20, 2.0685, 0.140_474, 0.097_617),
                (50, 0.998_208, 0.007_61, 0.2315, 0.001_615, 0.001_112),
            ],
        ),
        (
            3.0,
            ["harems, females", "harems, males"],
            [
                (1, 0.000_017, 8.322_27, 2.1810, 0.997_519, 0.993_221),
                (5, 0.041_035, 7.862_17, 3.9219, 0.908_388, 0.890_375),
                (10, 0.207_106, 6.489_72, 4.7639, 0.745_765, 0.717_982),
                (20, 0.478_165, 4.328_60, 4.9720, 0.492_706, 0.474_257),
                (50, 0.845_148, 1.285_84, 3.3555, 0.146_236, 0.140_834),
            ],
        ),
    ];
    for (harem_size, names, rows) in cases {
        let case = |name| {
            let life = pairs(0.65, 0.55, 0.9, harem_size, "ceiling");
            Case::new(name, vec![patch(12.0, &[4, 4])], &BOTH, &life)
        };
        let females = case(names[0]).below_of(1, "female").run(50);
        let males = case(names[1]).below_of(1, "male").run(50);
        for (census, extinct, mean, sd, any_female, any_male) in rows {
            females.extinct(census, extinct);
            females.total(census, mean, sd);
            females.quasi_extinct(census as u32, 1.0 - any_female);
            males.quasi_extinct(census as u32, 1.0 - any_male);
        }
    }
}

/// With males that never die and a harem without end, the females alone are the branching process of survival 0.6 and
/// Poisson 0.5 female young: the same values as for one stage of females (Harris 1963, from memory; generating functions).
#[test]
fn males_without_end_leave_the_female_model() {
    let case = Case::new("males without end", vec![patch(ROOMY, &[1, 1])], &BOTH, &pairs(0.6, 1.0, 1.0, 1e9, "none"));
    let seen = case.below_of(1, "female").run(20);
    for (census, null) in [(5, 0.555_135_0), (10, 0.661_513_7), (20, 0.724_448_9)] {
        seen.quasi_extinct(census, null);
    }
}

/// Who breeds is drawn over the stages of females: of 6 with 2 young each and 4 with 0.5, 5 males mate with 5. K of the
/// first stage is hypergeometric, of mean 3 and variance 5 (0.6) (0.4) (5/9) = 2/3; given K young are Poisson with mean
/// 2.5 + 1.5 K. A female without fecundity takes no male, a male that does not mate takes no female.
#[test]
fn who_breeds_is_drawn_at_random() {
    let life = |harem_size: f64, survival: f64| {
        format!(
            "[life_history]\nkind = \"stages\"\nindividuals = \"both sexes\"\nharem_size = {harem_size}\n\
             density_dependence = {{ form = \"none\" }}\n\
             [[life_history.stage]]\nname = \"chick\"\nsex = \"female\"\nsurvival = 0\n\
             [[life_history.stage]]\nname = \"cock\"\nsex = \"male\"\nsurvival = 0\nmates = true\n\
             [[life_history.stage]]\nname = \"hen\"\nsex = \"female\"\nsurvival = {survival}\nfecundity = 2\n\
             [[life_history.stage]]\nname = \"old cock\"\nsex = \"male\"\nsurvival = 0\n\
             [[life_history.stage]]\nname = \"old hen\"\nsex = \"female\"\nsurvival = 0\nfecundity = 0.5\n"
        )
    };
    let stages = ["chick", "cock", "hen", "old cock", "old hen"];
    let start = vec![patch(ROOMY, &[7, 5, 6, 30, 4])];
    let case = Case::new("who breeds", start.clone(), &stages, &life(1.0, 0.0));
    case.run(1).total(1, 7.0, f64::sqrt(7.0 + 2.25 * 2.0 / 3.0));
    // Half a female to a male: 2.5, so 2 of the 10 breed; K has mean 1.2 and variance 2 (0.6) (0.4) (8/9).
    let case = Case::new("half a female to a male", start, &stages, &life(0.5, 1.0));
    let variance = 2.8 + 2.25 * 0.48 * 8.0 / 9.0;
    let seen = case.below_of(4, "old hen").run(1);
    seen.total(1, 6.0 + 2.8, f64::sqrt(variance));
    // Hens advance to the next row of their own sex: 6 of them stand where 4 died.
    seen.quasi_extinct(1, 0.0);
}

/// Females survive 0.6 and males 0.5; 1.6 young of both sexes, half female: females grow by 1.4, the multiplier of
/// fecundity at capacity is (1 - 0.6)/0.8 = 1/2, and of stable numbers there are 0.8/(1.4 - 0.5) males to a female.
#[test]
fn the_females_lead() {
    let case =
        Case::new("females lead", vec![patch(50.0, &[9, 9])], &BOTH, &pairs(0.6, 0.5, 1.6, 1.0, "beverton-holt"));
    let life_history = case.prepare(1).life_history;
    let near = |value: f64, expected: f64| assert!((value - expected).abs() < 1e-9, "{value} is not {expected}");
    near(life_history.matrix.growth(), 1.4);
    near(life_history.density.at_capacity.unwrap(), 0.5);
    let stable = life_history.matrix.stable_distribution();
    near(stable[1] / stable[0], 0.8 / 0.9);
    assert_eq!(life_history.matrix.reproductive_values(), [1.0, 0.0]);
    assert_eq!(life_history.individuals, "females and males");
    // Mean age of mothers: the growth over the part of it that is births.
    near(life_history.matrix.generation_time().unwrap(), 1.4 / 0.8);
    // Males that outlast the females settle nowhere, and are taken as many as are born.
    let case = Case::new("males outlast", vec![patch(50.0, &[9, 9])], &BOTH, &pairs(0.4, 0.9, 0.5, 1.0, "ceiling"));
    let matrix = case.prepare(1).life_history.matrix;
    assert!(!matrix.settles());
    near(matrix.growth(), 0.65);
    near(matrix.stable_distribution()[0], 0.5);
}

/// The example of both sexes: it reads without a mistake or a warning, and is laid out as its page says.
#[test]
fn the_example_of_both_sexes_is_sound() {
    let file = Path::new(env!("CARGO_MANIFEST_DIR")).join("examples/orrisay/study.toml");
    let checked = prepare(&file, Overrides::default()).unwrap_or_else(|failure| panic!("{failure}"));
    assert_eq!(checked.warnings, []);
    let patches = &checked.value.landscape.patches;
    assert_eq!(patches.len(), 16);
    assert_eq!(patches.iter().filter(|patch| patch.area_ha < 1.0).count(), 6);
    let total: f64 = patches.iter().map(|patch| patch.area_ha).sum();
    assert!((total - 36.0).abs() < 0.5, "{total}");
    // Both answers that an Allee effect has are there.
    let balances: Vec<_> = patches.iter().map(|patch| balance(&checked.value.life_history, patch.capacity)).collect();
    assert!(balances.contains(&Some(Balance::Never)));
    assert!(balances.iter().any(|balance| matches!(balance, Some(Balance::Between { settles: Some(_), .. }))));
}

//! Branching processes: no ceiling, no weather. Harris 1963, The Theory of Branching Processes; Caswell 2001, Matrix
//! Population Models, ch. 15 (both from memory); values by iterating the generating functions.

use crate::support::{Case, one_stage, patch};

/// Capacity plays no part where the form is `none`; it only has to be above 0.
const ROOMY: f64 = 1e9;

fn counts(growth: f64) -> String {
    format!("[life_history]\nkind = \"counts\"\ngrowth = {growth}\ndensity_dependence = {{ form = \"none\" }}\n")
}

/// Galton-Watson with Poisson young: f_t(0) by iterating q -> exp(m (q - 1)).
#[test]
fn galton_watson() {
    for (name, growth, nulls) in [
        ("galton-watson 1.5", 1.5, [0.223_130_2, 0.311_827_6, 0.356_201_5, 0.394_978_6, 0.415_139_7]),
        ("galton-watson 2", 2.0, [0.135_335_3, 0.177_403_3, 0.192_975_2, 0.201_525_3, 0.203_169_5]),
    ] {
        let seen = Case::new(name, vec![patch(ROOMY, &[1])], &["all"], &counts(growth)).run(10);
        for (census, null) in [1, 2, 3, 5, 10].into_iter().zip(nulls) {
            seen.extinct(census, null);
        }
    }
}

#[test]
fn galton_watson_in_decline() {
    let seen = Case::new("galton-watson in decline", vec![patch(ROOMY, &[20])], &["all"], &counts(0.95)).run(100);
    for (census, null) in [(10, 0.079_958_8), (50, 0.857_441_7), (100, 0.989_011_4)] {
        seen.extinct(census, null);
    }
}

#[test]
fn survivors_and_young() {
    let mut case = Case::new(
        "survivors and at most one young",
        vec![patch(ROOMY, &[1])],
        &["all"],
        &one_stage(0.8, 0.3, "at most one", "none"),
    );
    let seen = case.run(100);
    for (census, null) in [(5, 0.382_347_3), (10, 0.486_769_7), (20, 0.554_572_2), (100, 0.583_327_5)] {
        seen.extinct(census, null);
    }
    case.name = "survivors and poisson young";
    case.tables = one_stage(0.6, 0.5, "poisson", "none");
    let seen = case.run(100);
    for (census, null) in [(5, 0.555_135_0), (10, 0.661_513_7), (20, 0.724_448_9), (100, 0.751_279_8)] {
        seen.extinct(census, null);
    }
}

/// Juveniles survive 0.4 and become adults; adults survive 0.7 and have 0.9 young a year.
fn two_stages(young: &str) -> String {
    format!(
        "[life_history]\nkind = \"stages\"\nyoung = \"{young}\"\ndensity_dependence = {{ form = \"none\" }}\n\
         [[life_history.stage]]\nname = \"juvenile\"\nsurvival = 0.4\n\
         [[life_history.stage]]\nname = \"adult\"\nsurvival = 0.7\nfecundity = 0.9\n"
    )
}

#[test]
fn two_type_branching() {
    let cases: [(&str, &str, [u32; 2], [f64; 5]); 6] = [
        ("poisson from a juvenile", "poisson", [1, 0], [0.6, 0.768_821_1, 0.837_658_5, 0.884_358_0, 0.914_813_5]),
        ("poisson from an adult", "poisson", [0, 1], [0.121_970_9, 0.472_208_1, 0.613_551_1, 0.717_042_2, 0.787_872_1]),
        ("poisson from 4 and 3", "poisson", [4, 3], [2.352e-4, 0.036_787_6, 0.113_715_6, 0.225_500_0, 0.342_529_1]),
        ("one young from a juvenile", "at most one", [1, 0], [0.6, 0.743_414_6, 0.814_835_3, 0.864_457_8, 0.897_404_1]),
        ("one young from an adult", "at most one", [0, 1], [0.03, 0.409_914_2, 0.557_518_4, 0.667_758_6, 0.744_416_6]),
        (
            "one young from 4 and 3",
            "at most one",
            [4, 3],
            [3.499e-6, 0.021_037_9, 0.076_393_6, 0.166_277_6, 0.267_547_2],
        ),
    ];
    for (name, young, start, nulls) in cases {
        let seen = Case::new(name, vec![patch(ROOMY, &start)], &["juvenile", "adult"], &two_stages(young)).run(50);
        for (census, null) in [1, 5, 10, 20, 50].into_iter().zip(nulls) {
            seen.extinct(census, null);
        }
    }
}

/// Small steps approach the linear birth-death process (Kendall 1948): with 100 steps a year, P(extinct) of the chain
/// itself, (1-s)(1-b)/(b s) in the end, is within 0.001 of the process's.
#[test]
fn small_steps_approach_birth_and_death() {
    let life = one_stage(0.998, 0.003, "at most one", "none");
    for (name, founders, by_5, by_20) in [
        ("birth and death from one", 1, 0.440_383_7, 0.633_609_6),
        ("birth and death from five", 5, 0.016_563_7, 0.102_119_5),
    ] {
        let seen = Case::new(name, vec![patch(ROOMY, &[founders])], &["all"], &life).run(2_000);
        let n = seen.tallies.records.len() as f64;
        for (census, null) in [(500, by_5), (2_000, by_20)] {
            let extinct = seen.tallies.records.iter().filter(|record| record.totals[census] == 0).count() as f64 / n;
            let tolerance = 4.0 * f64::sqrt(null * (1.0 - null) / n) + 0.001;
            assert!((extinct - null).abs() <= tolerance, "{name} at step {census}: {extinct} is not {null}");
        }
    }
}

/// Brault & Caswell 1993, Ecology 74: killer whale, multinomial fates and Poisson young; post-reproductive animals count
/// as present.
#[test]
fn killer_whale() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        matrix = [[0, 0.0043, 0.1132, 0], [0.9775, 0.9111, 0, 0], [0, 0.0736, 0.9534, 0], [0, 0, 0.0452, 0.9804]]\n";
    let stages = ["stage 1", "stage 2", "stage 3", "stage 4"];
    let cases: [(&str, [u32; 4], [f64; 3]); 5] = [
        ("whale from stage 1", [1, 0, 0, 0], [0.305_258, 0.430_355, 0.537_318]),
        ("whale from stage 2", [0, 1, 0, 0], [0.292_590, 0.419_135, 0.527_192]),
        ("whale from stage 3", [0, 0, 1, 0], [0.202_203, 0.337_820, 0.450_196]),
        ("whale from stage 4", [0, 0, 0, 1], [0.628_323, 0.861_857, 0.980_916]),
        ("whales 0 1 2 1", [0, 1, 2, 1], [0.007_516_5, 0.041_225_0, 0.104_810_2]),
    ];
    for (name, start, nulls) in cases {
        let seen = Case::new(name, vec![patch(ROOMY, &start)], &stages, life).run(200);
        for (census, null) in [50, 100, 200].into_iter().zip(nulls) {
            seen.extinct(census, null);
        }
    }
}

//! Weather in detail: recorded years against chains whose rates change from year to year, built and iterated here; stages that
//! have years of their own against the correlation that realised rates show.

use std::fmt::Write;

use eyot::environment::{Correlation, EnvironmentTable, RateCurves, Weather, YearlyRate};
use eyot::mistake::Place;
use eyot::random::{ReplicateKey, patch_key};
use eyot::study::Said;

use crate::movement::alive;
use crate::support::{Case, patch, sample_mean, sample_sd};

const CAPACITY: usize = 8;
const START: usize = 5;
/// The most individuals that a patch is followed to within a year; what lies beyond has chance below 1e-9 here.
const MOST: usize = 60;

/// Mean 0, and sd 1 but for a little.
const DEVIATES: [f64; 7] = [1.2, 0.4, -1.5, -0.9, 0.1, -0.4, 1.1];

fn table(n: usize) -> String {
    let mut table = "year,deviate\n".to_owned();
    for (position, deviate) in DEVIATES.iter().cycle().take(n).enumerate() {
        writeln!(table, "{},{deviate}", 1990 + position).expect("a text takes what is written");
    }
    table
}

/// One year of the chain at a deviate: survival is beta and fecundity lognormal, both at that deviate (or, for fecundity, at
/// its opposite), then the ceiling.
fn step(now: &[f64], z: f64, between_rates: f64) -> Vec<f64> {
    let survival = YearlyRate::beta(0.6, 0.15).expect("a lawful survival").at(z);
    let fecundity = YearlyRate::lognormal(0.5, 0.3).expect("a lawful fecundity").at(between_rates * z);
    let mut next = vec![0.0; CAPACITY + 1];
    for (n, chance) in now.iter().enumerate() {
        for (there, alive) in alive(n, survival, fecundity, MOST).into_iter().enumerate() {
            next[there.min(CAPACITY)] += chance * alive;
        }
    }
    next
}

fn start() -> Vec<f64> {
    let mut start = vec![0.0; CAPACITY + 1];
    start[START] = 1.0;
    start
}

fn recorded(name: &'static str, keys: &str, rows: usize, between_rates: f64) -> Case {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"ceiling\" }\n\
        [[life_history.stage]]\nname = \"all\"\nsurvival = { mean = 0.6, sd = 0.15 }\n\
        fecundity = { mean = 0.5, sd = 0.3 }\n";
    let weather =
        format!("[environment]\nbetween_rates = {between_rates}\nrecorded = {{ table = \"years.csv\", {keys} }}\n");
    Case::new(name, vec![patch(CAPACITY as f64, &[START as u32])], &["all"], &format!("{life}{weather}"))
        .file("years.csv", table(rows))
}

fn check(case: &Case, censuses: &[Vec<f64>]) {
    let last = censuses.len() - 1;
    let seen = case.run(last as u32);
    for census in [1, 4, last] {
        seen.distribution(census, censuses[census].iter().copied().enumerate());
    }
}

#[test]
fn a_record_is_replayed() {
    for (name, between_rates) in [("a record is replayed", 1.0), ("a record is replayed, rates opposed", -1.0)] {
        let mut censuses = vec![start()];
        for year in 0..12 {
            censuses.push(step(&censuses[year], DEVIATES[year % 7], between_rates));
        }
        check(&recorded(name, "use = \"replay\"", 12, between_rates), &censuses);
    }
}

/// Blocks begin at any year of the record with the same chance, so that the distribution at the end of a block is the mean over
/// the beginnings.
#[test]
fn a_record_is_resampled_in_blocks() {
    let cases = [
        ("a record is resampled", "use = \"resample\"", 1),
        ("a record is resampled in blocks", "use = \"resample\", block_years = 4", 4),
    ];
    let mut ends = Vec::new();
    for (name, keys, block) in cases {
        let mut censuses = vec![start()];
        while censuses.len() <= 12 {
            let at_its_start = censuses[censuses.len() - 1].clone();
            let mut runs = vec![at_its_start; DEVIATES.len()];
            for year in 0..block {
                for (first, run) in runs.iter_mut().enumerate() {
                    *run = step(run, DEVIATES[(first + year) % DEVIATES.len()], 1.0);
                }
                let mean = |n: usize| runs.iter().map(|run| run[n]).sum::<f64>() / runs.len() as f64;
                censuses.push((0..=CAPACITY).map(mean).collect());
            }
        }
        check(&recorded(name, keys, 7, 1.0), &censuses);
        ends.push(censuses[12][0]);
    }
    // 4 standard errors of a proportion: single years in place of blocks would not pass.
    assert!((ends[0] - ends[1]).abs() > 4.0 * 0.5 / 20_000_f64.sqrt(), "{ends:?}");
}

/// All patches have the recorded years in common: the total of two patches that are alike has the variance of common weather.
/// Huge numbers, all of which is survival: total / n = 2 s(z), z one of the record's with the same chance.
#[test]
fn patches_have_recorded_years_in_common() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        [[life_history.stage]]\nname = \"all\"\nsurvival = { mean = 0.6, sd = 0.15 }\n\
        [environment]\nrecorded = { table = \"years.csv\", use = \"resample\" }\n";
    let n = 1e6;
    let points = vec![patch(1e7, &[1_000_000]), patch(1e7, &[1_000_000])];
    let seen = Case::new("recorded years in common", points, &["all"], life).file("years.csv", table(7)).run(1);
    let survival = YearlyRate::beta(0.6, 0.15).expect("a lawful survival");
    let rates = DEVIATES.map(|z| survival.at(z));
    let mean = rates.iter().sum::<f64>() / 7.0;
    let between = rates.iter().map(|s| (s - mean) * (s - mean)).sum::<f64>() / 7.0;
    let within = rates.iter().map(|s| s * (1.0 - s)).sum::<f64>() / 7.0;
    seen.total(1, 2.0 * n * mean, (4.0 * n * n * between + 2.0 * n * within).sqrt());
}

/// Computed independently (scipy): survivals of mean 0.35 and sd 0.10 whose deviates are correlated 0.3 are themselves
/// correlated 0.298974, and with a fecundity of mean 0.9 and sd 0.4 at 0.3 (the product of between_stages 0.6 and
/// between_rates 0.5) by 0.287500. 200,000 pairs, 4 standard errors of a correlation.
#[test]
fn stages_have_years_of_their_own() {
    let survival = YearlyRate::beta(0.35, 0.10).expect("a lawful survival");
    let fecundity = YearlyRate::lognormal(0.9, 0.4).expect("a lawful fecundity");
    let curves = RateCurves::new(&[survival, fecundity]);
    let keys: Vec<u64> = (0..1000).map(|i| patch_key(&format!("fen {i}"))).collect();
    let seen = |between_stages, between_rates, groups: [usize; 2], stages: [usize; 2]| {
        let correlation = Some(Said { value: Correlation::None, place: Place::Call, words: String::new() });
        let table = EnvironmentTable { correlation, between_stages, between_rates, ..EnvironmentTable::default() };
        let weather = Weather::compile(&table, &vec![[0.0; 2]; 1000], &keys, 2).expect("a field").with_stages(3);
        let mut state = weather.state();
        state.start(ReplicateKey::new(7_117, 1));
        let mut pairs = Vec::new();
        for _ in 0..200 {
            state.advance(&weather);
            let [x, y] = [0, 1].map(|at| state.stage_deviates(groups[at], stages[at]).to_vec());
            let rate = |group, z: f64| curves.rate(group, &curves.locate(z));
            pairs.extend(x.into_iter().zip(y).map(|(x, y)| (rate(groups[0], x), rate(groups[1], y))));
        }
        correlation_of(&pairs)
    };
    for (between_stages, between_rates, groups, stages, expected) in [
        (0.3, 1.0, [0, 0], [0, 2], 0.298_974),
        (0.7, 1.0, [0, 0], [1, 2], 0.698_916),
        (0.7, 0.2, [1, 1], [0, 1], 0.680_856),
        (0.6, 0.5, [0, 1], [0, 2], 0.287_500),
        (0.2, 0.7, [0, 1], [1, 1], 0.675_406),
        (0.0, 1.0, [0, 0], [0, 1], 0.0),
    ] {
        let (r, error) = seen(between_stages, between_rates, groups, stages);
        assert!((r - expected).abs() < 4.0 * error, "{between_stages}, {between_rates}: {r} for {expected}, {error}");
    }
}

/// Correlation of pairs, and its standard error from the influence of each pair.
fn correlation_of(pairs: &[(f64, f64)]) -> (f64, f64) {
    let standard = |values: Vec<f64>| {
        let (mean, sd) = (sample_mean(&values), sample_sd(&values));
        values.into_iter().map(move |value| (value - mean) / sd).collect::<Vec<f64>>()
    };
    let x = standard(pairs.iter().map(|pair| pair.0).collect());
    let y = standard(pairs.iter().map(|pair| pair.1).collect());
    let products: Vec<f64> = x.iter().zip(&y).map(|(x, y)| x * y).collect();
    let r = sample_mean(&products);
    let influences: Vec<f64> = x.iter().zip(&y).map(|(x, y)| x * y - 0.5 * r * (x * x + y * y)).collect();
    (r, sample_sd(&influences) / (pairs.len() as f64).sqrt())
}

/// The same through the engine, which must give each stage its own: of a million in each of two stages survive s1 and s2, so
/// that the variance of the total is n^2 sd^2 (2 + 2 r) + 2 n E[s (1 - s)], r = 0.298974 (as above) or 1.
#[test]
fn the_engine_gives_each_stage_its_years() {
    let run = |name, environment: &str| {
        let stage =
            |name| format!("[[life_history.stage]]\nname = \"{name}\"\nsurvival = {{ mean = 0.35, sd = 0.1 }}\n");
        let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n";
        let tables = format!("{life}{}{}{environment}", stage("young"), stage("old"));
        Case::new(name, vec![patch(1e7, &[1_000_000, 1_000_000])], &["young", "old"], &tables).run(1)
    };
    let n = 1e6;
    let sd = |r: f64| (n * n * 0.01 * (2.0 + 2.0 * r) + 2.0 * n * (0.35 - 0.1225 - 0.01)).sqrt();
    run("stages apart", "[environment]\nbetween_stages = 0.3\n").total(1, 2.0 * 0.35 * n, sd(0.298_974));
    run("stages together", "[environment]\n").total(1, 2.0 * 0.35 * n, sd(1.0));
}

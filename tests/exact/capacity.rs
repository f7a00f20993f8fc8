//! Capacity that changes from year to year: chains solved outside this crate (Kemeny & Snell 1960, Finite Markov Chains,
//! from memory), and what can be reckoned by hand.

use std::fs;
use std::sync::atomic::AtomicBool;

use eyot::engine::{Overrides, Prepared, Stopping, Tallies, prepare, run};

use crate::support::{one_stage, sample_mean, sample_sd};

/// A study of one or two patches of 8 individuals, whose capacity is `capacity` in TOML, a table standing in `capacity.csv`.
fn study(capacity: &str, table: &str, life: &str, patches: usize) -> Prepared {
    let folder = tempfile::tempdir().expect("a temporary folder can be made");
    let write = |name: &str, text: &str| fs::write(folder.path().join(name), text).expect("a file can be written");
    let features: Vec<String> = (1..=patches)
        .map(|patch| {
            format!(
                r#"{{"type":"Feature","properties":{{"patch":"p{patch}","k":8,"n":6,"ha":1}},"geometry":{{"type":"Point","coordinates":[{},500000]}}}}"#,
                500_000 + 1000 * patch
            )
        })
        .collect();
    write("patches.geojson", &format!(r#"{{"type":"FeatureCollection","features":[{}]}}"#, features.join(",")));
    write("capacity.csv", table);
    write(
        "study.toml",
        &format!(
            "title = \"capacity\"\nseed = 190610\nhorizon = 50\nreplicates = 20000\n[landscape]\npatches = \"patches.geojson\"\n\
             id = \"patch\"\ncrs = \"metres\"\narea = {{ property = \"ha\" }}\ncapacity = {capacity}\n\
             start = {{ property = \"n\" }}\n{life}"
        ),
    );
    match prepare(&folder.path().join("study.toml"), Overrides::default()) {
        Ok(checked) => checked.value,
        Err(failure) => panic!("{failure}"),
    }
}

fn tallies(prepared: &Prepared, replicates: u32) -> Tallies {
    let stop = AtomicBool::new(false);
    let mut tallies = run(&prepared.model, &Stopping::After(replicates), 0, &stop, &|_, _| {}).tallies;
    tallies.records.sort_by_key(|record| record.replicate);
    tallies
}

/// Capacity 8 until the step from census 9 to 10, 4 from the step from 10 to 11 on. Until census 10 no replicate differs
/// from one whose capacity stays.
#[test]
fn a_step_in_capacity() {
    let life = one_stage(0.55, 0.55, "poisson", "ceiling");
    let as_is = study("{ property = \"k\" }", "", &life, 1);
    let step = study("{ table = \"capacity.csv\" }", "patch,year,capacity\np1,9,8\np1,10,4\n", &life, 1);
    let (as_is, step) = (tallies(&as_is, 20_000), tallies(&step, 20_000));
    for (before, after) in as_is.records.iter().zip(&step.records) {
        assert_eq!(before.totals[..=10], after.totals[..=10]);
    }
    let n = 20_000.0_f64;
    let rows_as_is = [
        (1, 0.000_306, 6.244_56, 1.6552),
        (5, 0.038_153, 5.792_48, 2.4331),
        (10, 0.120_515, 5.193_28, 2.8588),
        (20, 0.279_216, 4.227_57, 3.2640),
        (50, 0.607_531, 2.300_69, 3.1981),
    ];
    let rows_step = [(20, 0.455_553, 1.586_94, 1.6759), (50, 0.920_002, 0.232_65, 0.8520)];
    for (name, tallies, rows) in [("as is", &as_is, &rows_as_is[..]), ("step", &step, &rows_step[..])] {
        for &(census, extinct, mean, sd) in rows {
            let totals: Vec<f64> = tallies.records.iter().map(|record| record.totals[census] as f64).collect();
            let seen = totals.iter().filter(|total| **total == 0.0).count() as f64 / n;
            let tolerance = 4.0 * (extinct * (1.0 - extinct) / n).sqrt();
            assert!((seen - extinct).abs() < tolerance, "{name}: extinct at {census}: {seen}, not {extinct}");
            let seen = sample_mean(&totals);
            assert!((seen - mean).abs() < 4.0 * sd / n.sqrt() + 1e-5, "{name}: mean at {census}: {seen}, not {mean}");
        }
    }
    for (census, more) in [(20, 0.176_338), (50, 0.312_472)] {
        let gone = |tallies: &Tallies, at: usize| f64::from(tallies.records[at].totals[census] == 0);
        let differences: Vec<f64> = (0..20_000).map(|at| gone(&step, at) - gone(&as_is, at)).collect();
        let (seen, error) = (sample_mean(&differences), sample_sd(&differences) / n.sqrt());
        assert!((seen - more).abs() < 4.0 * error, "more extinct at {census}: {seen}, not {more} +- {error}");
    }
}

/// Of a population that fills every capacity at once, census t + 1 counts the whole part of the capacity of year t.
fn overflowing() -> String {
    one_stage(1.0, 1e6, "poisson", "ceiling")
}

/// Totals of the only replicate that matters, since nothing in it is left to chance.
fn certain_totals(capacity: &str, table: &str, patches: usize) -> Vec<u64> {
    tallies(&study(capacity, table, &overflowing(), patches), 1).records[0].totals.clone()
}

/// Linear between the years of the table, constant before the first and after the last; a patch with one row never changes.
#[test]
fn capacities_by_years() {
    let table = "patch,year,capacity\np1,10,100\np1,20,60\np2,0,7\np1,22,61.5\n";
    let totals = certain_totals("{ table = \"capacity.csv\" }", table, 2);
    let expected = |year: usize| match year {
        0..=10 => 107,
        11..=19 => 107 - 4 * (year as u64 - 10),
        20 => 67,
        21 => 67, // 60.75 and 7
        _ => 68,  // 61.5 and 7
    };
    for year in 0..50 {
        assert_eq!(totals[year + 1], expected(year), "year {year}");
    }
}

/// 8 (1 - 0.05)^t, 8 (1 + 0.1)^t (compound growth).
#[test]
fn a_trend_compounds() {
    for trend in [-0.05_f64, 0.1] {
        let totals = certain_totals(&format!("{{ property = \"k\", trend_per_year = {trend} }}"), "", 1);
        let mut capacity = 8.0;
        for year in 0..50 {
            assert_eq!(totals[year + 1], capacity as u64, "year {year}");
            capacity *= 1.0 + trend;
        }
    }
}

/// Nothing changes where the change is none.
#[test]
fn no_change_changes_no_byte() {
    let life = one_stage(0.6, 0.5, "poisson", "ricker");
    let bytes = |capacity: &str, table: &str| format!("{:?}", tallies(&study(capacity, table, &life, 2), 300));
    let plain = bytes("{ property = \"k\" }", "");
    assert_eq!(plain, bytes("{ property = \"k\", trend_per_year = 0, variation = 0 }", ""));
    assert_eq!(plain, bytes("{ table = \"capacity.csv\" }", "patch,year,capacity\np1,3,8\np2,0,8\np2,9,8\n"));
    assert_ne!(plain, bytes("{ property = \"k\", variation = 0.1 }", ""));
}

/// A capacity that varies has the stated mean and relative sd in every year, is lognormal (P(K < its median) = 1/2), and is
/// independent between patches and years: 20,000 replicates, 4 standard errors.
#[test]
fn a_capacity_that_varies() {
    let table = "patch,capacity\np1,1000000\np2,1000000\n";
    let (mean, cv) = (1e6, 0.4_f64);
    let prepared = study("{ table = \"capacity.csv\", variation = 0.4 }", table, &overflowing(), 1 + 1);
    let seen = tallies(&prepared, 20_000);
    let relative = |census: usize| -> Vec<f64> {
        seen.records.iter().map(|record| (record.totals[census] as f64 - 2.0 * mean) / mean).collect()
    };
    let judge = |what: &str, values: &[f64], null: f64| {
        let error = sample_sd(values) / (values.len() as f64).sqrt();
        let seen = sample_mean(values);
        assert!((seen - null).abs() < 4.0 * error, "{what}: {seen}, not {null} +- {error}");
    };
    let (first, second) = (relative(1), relative(2));
    judge("mean", &first, 0.0);
    judge("variance of two patches", &first.iter().map(|x| x * x).collect::<Vec<_>>(), 2.0 * cv * cv);
    let products: Vec<f64> = first.iter().zip(&second).map(|(x, y)| x * y).collect();
    judge("covariance of two years", &products, 0.0);
    let one = study("{ table = \"capacity.csv\", variation = 0.4 }", "patch,capacity\np1,1000000\n", &overflowing(), 1);
    let median = mean / (1.0 + cv * cv).sqrt();
    let below: Vec<f64> = tallies(&one, 20_000)
        .records
        .iter()
        .map(|record| f64::from(u8::from((record.totals[50] as f64) < median)))
        .collect();
    judge("below the median", &below, 0.5);
}

/// Start numbers, and the capacity that tables of patches show, are those of census 0.
#[test]
fn census_0_has_the_first_capacity() {
    let table = "patch,year,capacity\np1,0,5\np1,10,50\n";
    let prepared = study("{ table = \"capacity.csv\" }", table, &one_stage(0.5, 0.5, "poisson", "ceiling"), 1);
    assert_eq!(prepared.landscape.patches[0].capacity.to_string(), "5");
    assert_eq!(prepared.model.start_totals(), [5]);
}

//! The yearly loop allocates nothing: a run of many years asks the allocator as often as a run of few.

use std::alloc::System;
use std::fs;
use std::path::Path;
use std::sync::atomic::AtomicBool;

use eyot::engine::{Overrides, Prepared, Stopping, prepare, run};
use stats_alloc::{INSTRUMENTED_SYSTEM, Region, StatsAlloc};

#[global_allocator]
static ALLOCATOR: &StatsAlloc<System> = &INSTRUMENTED_SYSTEM;

/// Every feature of the loop at once: correlated weather, catastrophes, changing capacity, dispersal, a life history.
fn study(horizon: u32, life_history: &str) -> Prepared {
    let folder = tempfile::tempdir().expect("a temporary folder can be made");
    let features: Vec<String> = (0..12)
        .map(|i| {
            format!(
                r#"{{"type":"Feature","properties":{{"patch":"p{i}","area":{},"k":{}}},"geometry":{{"type":"Point","coordinates":[{},{}]}}}}"#,
                1 + i,
                10 + 5 * i,
                500_000 + i * 700,
                500_000 + (i % 4) * 900
            )
        })
        .collect();
    let patches = format!(r#"{{"type":"FeatureCollection","features":[{}]}}"#, features.join(","));
    fs::write(folder.path().join("patches.geojson"), patches).expect("a temporary file can be written");
    let text = format!(
        r#"
        title = "allocation"
        seed = 5
        horizon = {horizon}
        replicates = 40
        quasi_extinction = 5
        [landscape]
        patches = "patches.geojson"
        id = "patch"
        crs = "metres"
        area = {{ property = "area" }}
        capacity = {{ property = "k", trend_per_year = -0.001, variation = 0.2 }}
        start = {{ share_of_capacity = 0.8 }}
        {life_history}
        [environment]
        correlation = {{ reach_km = 3, nugget = 0.1 }}
        autocorrelation = 0.2
        between_stages = 0.5
        [dispersal]
        kernel = {{ shape = "exponential", mean_km = 1.0 }}
        settlement = "shared"
        rises_with_crowding = {{ exponent = 1 }}
        avoids_full = true
        [[removal]]
        name = "trapping"
        share = 0.1
        floor = 2
        [[catastrophe]]
        name = "storm"
        yearly_probability = 0.1
        strikes = {{ radius_km = 1.5 }}
        lasts = 2
        survival = 0.7
        capacity = 0.5
        [[catastrophe]]
        name = "disease"
        yearly_probability = 0.05
        years = [2]
        strikes = "each patch"
        lasts = {{ chance_of_another_year = 0.5 }}
        fecundity = 0.4
        "#
    );
    // A model of counts has growth in place of survival and fecundity.
    let text = if life_history.contains("growth") {
        text.replace("survival = 0.7", "growth = 0.7").replace("fecundity = 0.4", "growth = 0.4")
    } else {
        text
    };
    fs::write(folder.path().join("study.toml"), text).expect("a temporary file can be written");
    match prepare(&folder.path().join("study.toml"), Overrides::default()) {
        Ok(checked) => checked.value,
        Err(failure) => panic!("{failure}"),
    }
}

fn allocations(prepared: &Prepared) -> usize {
    let stop = AtomicBool::new(false);
    let region = Region::new(ALLOCATOR);
    let run = run(&prepared.model, &Stopping::After(40), 1, &stop, &|_, _| {});
    let count = region.change().allocations;
    assert_eq!(run.tallies.records.len(), 40);
    count
}

/// The example of patches full or empty, over so many years.
fn full_or_empty(horizon: u32) -> Prepared {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let text = fs::read_to_string(root.join("examples/tessary/study.toml")).expect("the example is there");
    let text = text
        .replace("horizon = 100", &format!("horizon = {horizon}"))
        .replace("../..", root.to_str().expect("the folder has a plain name"));
    let folder = tempfile::tempdir().expect("a temporary folder can be made");
    fs::write(folder.path().join("study.toml"), text).expect("a temporary file can be written");
    match prepare(&folder.path().join("study.toml"), Overrides::default()) {
        Ok(checked) => checked.value,
        Err(failure) => panic!("{failure}"),
    }
}

const FEMALES: &str = r#"
        [life_history]
        kind = "stages"
        density_dependence = { form = "FORM" }
        [[life_history.stage]]
        name = "juvenile"
        survival = { mean = 0.5, sd = 0.1 }
        emigration = 0.3
        [[life_history.stage]]
        name = "adult"
        survival = { mean = 0.7, sd = 0.1 }
        fecundity = { mean = 0.9, sd = 0.3 }
        emigration = 0.05
"#;

/// Pairs with litters, under an Allee effect.
const PAIRS: &str = r#"
        [life_history]
        kind = "stages"
        individuals = "both sexes"
        young = { litter = [0.2, 0.3, 0.5] }
        allee_effect = { half_at = 1 }
        density_dependence = { form = "beverton-holt" }
        [[life_history.stage]]
        name = "female"
        sex = "female"
        survival = { mean = 0.7, sd = 0.1 }
        fecundity = { mean = 1.0, sd = 0.2 }
        emigration = 0.1
        [[life_history.stage]]
        name = "male"
        sex = "male"
        survival = { mean = 0.6, sd = 0.1 }
        emigration = 0.1
"#;

/// Individuals that differ widely.
const COUNTS: &str = r#"
        [life_history]
        kind = "counts"
        growth = { mean = 1.2, sd = 0.2 }
        offspring_variance = 3
        emigration = 0.1
        density_dependence = { form = "ricker" }
"#;

#[test]
fn years_cost_no_allocation() {
    let females = |form: &str| FEMALES.replace("FORM", form);
    let histories = [females("ceiling"), females("ricker"), PAIRS.to_owned(), COUNTS.to_owned()];
    let mut pairs: Vec<_> = histories.iter().map(|history| (study(5, history), study(300, history))).collect();
    pairs.push((full_or_empty(5), full_or_empty(300)));
    for (short, long) in pairs {
        // A first run pays for what is made once in the life of the process.
        allocations(&short);
        let (few, many) = (allocations(&short), allocations(&long));
        // Starting a thread is not exact to the allocation; 40 replicates of 295 more years would show as 11,800.
        assert!(few.abs_diff(many) <= 8, "{few} in short runs, {many} in long ones");
    }
}

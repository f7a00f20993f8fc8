//! The yearly loop allocates nothing: a run of many years asks the allocator as often as a run of few.

use std::alloc::System;
use std::fs;
use std::sync::atomic::AtomicBool;

use eyot::engine::{Overrides, Prepared, Stopping, prepare, run};
use stats_alloc::{INSTRUMENTED_SYSTEM, Region, StatsAlloc};

#[global_allocator]
static ALLOCATOR: &StatsAlloc<System> = &INSTRUMENTED_SYSTEM;

/// Every feature of the loop at once: stages, correlated weather, dispersal, density dependence, a ceiling elsewhere.
fn study(horizon: u32, density: &str) -> Prepared {
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
        capacity = {{ property = "k" }}
        start = {{ share_of_capacity = 0.8 }}
        [life_history]
        kind = "stages"
        density_dependence = {{ form = "{density}" }}
        [[life_history.stage]]
        name = "juvenile"
        survival = {{ mean = 0.5, sd = 0.1 }}
        emigration = 0.3
        [[life_history.stage]]
        name = "adult"
        survival = {{ mean = 0.7, sd = 0.1 }}
        fecundity = {{ mean = 0.9, sd = 0.3 }}
        emigration = 0.05
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
        "#
    );
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

#[test]
fn years_cost_no_allocation() {
    for density in ["ceiling", "ricker"] {
        let (short, long) = (study(5, density), study(300, density));
        // A first run pays for what is made once in the life of the process.
        allocations(&short);
        let (few, many) = (allocations(&short), allocations(&long));
        // Starting a thread is not exact to the allocation; 40 replicates of 295 more years would show as 11,800.
        assert!(few.abs_diff(many) <= 8, "{few} in short runs, {many} in long ones");
    }
}

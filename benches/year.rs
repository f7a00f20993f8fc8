//! The yearly loop, in patch-years a second on one thread, beside the bare random draws that it cannot do without.
//!
//! The model: three stages under a ceiling of 50, independent weather, juveniles that disperse over the eight nearest of P
//! patches strewn over a square. Read the two lines of one run against each other; absolute figures are the machine's.

use std::fmt::Write;
use std::fs;
use std::hint::black_box;
use std::sync::atomic::AtomicBool;

use divan::Bencher;
use divan::counter::ItemsCount;
use eyot::engine::{Overrides, Prepared, Stopping, prepare, run};
use eyot::num;
use eyot::random::{Purpose, ReplicateKey, binomial, patch_key, poisson, remove_at_random, standard_normal};

const YEARS: u32 = 100;

fn main() {
    divan::main();
}

/// Mean and sd of `value(z)` over a standard normal z, by the trapezium rule.
fn moments(value: impl Fn(f64) -> f64) -> (f64, f64) {
    let step = 0.001;
    let (mut mean, mut square) = (0.0, 0.0);
    for position in -9_000..=9_000 {
        let z = f64::from(position) * step;
        let mass = step * num::exp(-z * z / 2.0) / (2.0 * std::f64::consts::PI).sqrt();
        mean += mass * value(z);
        square += mass * value(z) * value(z);
    }
    (mean, (square - mean * mean).sqrt())
}

fn rate(value: impl Fn(f64) -> f64) -> String {
    let (mean, sd) = moments(value);
    format!("{{ mean = {mean}, sd = {sd} }}")
}

/// The benchmark study over `n` patches.
fn benchmark(n: usize, weather: bool) -> Prepared {
    let frac = |x: f64| x - x.floor();
    let place = |i: usize| {
        let k = (i + 1) as f64;
        [frac(0.5 + k * 0.754_877_666_246_692_7), frac(0.5 + k * 0.569_840_290_998_053_2)]
    };
    let places: Vec<[f64; 2]> = (0..n).map(place).collect();
    let folder = tempfile::tempdir().expect("a temporary folder");
    let write = |name: &str, text: &str| fs::write(folder.path().join(name), text).expect("the folder can be written");
    let features: Vec<String> = places
        .iter()
        .enumerate()
        .map(|(i, [x, y])| {
            let at = (x * 100_000.0, y * 100_000.0);
            format!(
                r#"{{"type":"Feature","properties":{{"patch":"{i}","area":1,"capacity":50}},"geometry":{{"type":"Point","coordinates":[{},{}]}}}}"#,
                at.0, at.1
            )
        })
        .collect();
    write("patches.geojson", &format!(r#"{{"type":"FeatureCollection","features":[{}]}}"#, features.join(",")));
    let mut start = String::from("patch,juvenile,subadult,adult\n");
    let mut links = String::from("from,to,probability\n");
    let scale = 0.5 / (n as f64).sqrt();
    for (i, [x, y]) in places.iter().enumerate() {
        writeln!(start, "{i},24,10,16").expect("writing to a text");
        let mut near: Vec<(f64, usize)> = places
            .iter()
            .enumerate()
            .filter(|(j, _)| *j != i)
            .map(|(j, [u, v])| (((x - u) * (x - u) + (y - v) * (y - v)).sqrt(), j))
            .collect();
        near.select_nth_unstable_by(7, |a, b| a.0.total_cmp(&b.0));
        near.truncate(8);
        let sum: f64 = near.iter().map(|(distance, _)| num::exp(-distance / scale)).sum();
        for (distance, j) in near {
            // Rounded down, so that a row never sums to more than 1.
            let probability = (num::exp(-distance / scale) / sum * 1e12).floor() / 1e12;
            writeln!(links, "{i},{j},{probability}").expect("writing to a text");
        }
    }
    write("start.csv", &start);
    write("links.csv", &links);
    let survival = |mean: f64| {
        if weather { rate(|z| 1.0 / (1.0 + (1.0 - mean) / mean * num::exp(-0.3 * z))) } else { mean.to_string() }
    };
    let fecundity = if weather { rate(|z| 1.8 * num::exp(0.3 * z - 0.045)) } else { "1.8".to_owned() };
    write(
        "study.toml",
        &format!(
            "title = \"benchmark\"\nseed = 1\nhorizon = {YEARS}\nreplicates = 1\n\
             [landscape]\npatches = \"patches.geojson\"\nid = \"patch\"\ncrs = \"metres\"\narea = {{ property = \"area\" }}\n\
             capacity = {{ property = \"capacity\" }}\nstart = {{ table = \"start.csv\" }}\n\
             [life_history]\nkind = \"stages\"\ndensity_dependence = {{ form = \"ceiling\" }}\n\
             [[life_history.stage]]\nname = \"juvenile\"\nsurvival = {}\nadvance = 0.7\nemigration = 0.1\n\
             [[life_history.stage]]\nname = \"subadult\"\nsurvival = {}\nadvance = 0.5\n\
             [[life_history.stage]]\nname = \"adult\"\nsurvival = {}\nfecundity = {fecundity}\n\
             [environment]\ncorrelation = \"none\"\n[dispersal]\nkernel = {{ table = \"links.csv\" }}\n",
            survival(0.40),
            survival(0.65),
            survival(0.80),
        ),
    );
    match prepare(&folder.path().join("study.toml"), Overrides::default()) {
        Ok(checked) => checked.value,
        Err(failure) => panic!("{failure}"),
    }
}

fn run_replicates(bencher: Bencher<'_, '_>, n: usize, weather: bool, replicates: u32) {
    let prepared = benchmark(n, weather);
    let stop = AtomicBool::new(false);
    bencher
        .counter(ItemsCount::new(n * YEARS as usize * replicates as usize))
        .bench_local(|| run(&prepared.model, &Stopping::After(replicates), 1, &stop, &|_, _| {}));
}

/// The model of the benchmark.
#[divan::bench(args = [200, 10_000], sample_count = 5, sample_size = 1)]
fn engine(bencher: Bencher<'_, '_>, n: usize) {
    run_replicates(bencher, n, true, (400_000 / (n * YEARS as usize)).max(1) as u32);
}

/// The same without weather: what years that vary cost.
#[divan::bench(args = [200], sample_count = 5, sample_size = 1)]
fn engine_without_weather(bencher: Bencher<'_, '_>, n: usize) {
    run_replicates(bencher, n, false, 20);
}

/// The draws of a patch-year alone, at the benchmark's typical numbers, keyed as the engine keys them.
#[divan::bench(args = [200], sample_count = 5, sample_size = 1)]
fn bare_draws(bencher: Bencher<'_, '_>, n: usize) {
    let replicates = 20;
    let keys: Vec<u64> = (0..n).map(|i| patch_key(&i.to_string())).collect();
    bencher.counter(ItemsCount::new(n * YEARS as usize * replicates)).bench_local(|| {
        for replicate in 0..replicates as u32 {
            let replicate = ReplicateKey::new(1, replicate);
            for year in 0..YEARS {
                let year = replicate.year(year);
                for key in &keys {
                    let place = year.patch(*key);
                    let z = standard_normal(&mut place.draw(Purpose::Weather(0)));
                    black_box(z);
                    for (stage, (count, survival)) in [(24, 0.40), (10, 0.65), (16, 0.80)].into_iter().enumerate() {
                        black_box(binomial(&mut place.draw(Purpose::Fates(stage as u32)), black_box(count), survival));
                    }
                    black_box(binomial(&mut place.draw(Purpose::Advance(0)), black_box(10), 0.7));
                    black_box(binomial(&mut place.draw(Purpose::Advance(1)), black_box(6), 0.5));
                    black_box(poisson(&mut place.draw(Purpose::Young(0)), black_box(27.0)));
                    let leaving = binomial(&mut place.draw(Purpose::Leaving(0)), black_box(32), 0.1);
                    let mut stream = place.draw(Purpose::Destinations(0));
                    for _ in 0..leaving {
                        black_box(binomial(&mut stream, 1, 0.5));
                    }
                    let mut counts = [black_box(29), 10, 16];
                    remove_at_random(&mut place.draw(Purpose::Surplus), &mut counts, 5);
                    black_box(counts);
                }
            }
        }
    });
}

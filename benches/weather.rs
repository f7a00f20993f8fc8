//! What the weather costs a patch and year, by field and number of patches, and what reading rates at its deviates costs.
//! Nine blocks of sixteen years a round.

use divan::{Bencher, black_box};
use eyot::environment::{Correlation, EnvironmentTable, RateCurves, Weather, YearlyRate};
use eyot::mistake::Place;
use eyot::random::{ReplicateKey, patch_key};
use eyot::study::Said;

fn main() {
    divan::main();
}

const YEARS: u32 = 144;
const PATCHES: [usize; 3] = [50, 256, 1000];

fn weather(correlation: Correlation, n_patches: usize, between_rates: f64) -> Weather {
    let correlation = Some(Said { value: correlation, place: Place::Call, words: String::new() });
    let table = EnvironmentTable { correlation, between_rates, autocorrelation: 0.2, ..EnvironmentTable::default() };
    // A low-discrepancy sequence in a square of 10 km.
    let at = |i: usize, step: f64| 10.0 * (0.5 + (i + 1) as f64 * step).fract();
    let centroids: Vec<[f64; 2]> =
        (0..n_patches).map(|i| [at(i, 0.754_877_666_246_692_7), at(i, 0.569_840_290_998_053_2)]).collect();
    let keys: Vec<u64> = (0..n_patches).map(|i| patch_key(&format!("pond {i}"))).collect();
    Weather::compile(&table, &centroids, &keys, 2).expect("patches below the limit")
}

fn years_of(bencher: Bencher<'_, '_>, weather: Weather, n_patches: usize) {
    let mut state = weather.state();
    let mut replicate = 0;
    bencher.counter(n_patches * YEARS as usize).bench_local(move || {
        replicate += 1;
        state.start(ReplicateKey::new(20_261, replicate));
        for _ in 0..YEARS {
            state.advance(&weather);
            black_box(state.deviates(1));
        }
    });
}

#[divan::bench(args = PATCHES)]
fn independent(bencher: Bencher<'_, '_>, n_patches: usize) {
    years_of(bencher, weather(Correlation::None, n_patches, 1.0), n_patches);
}

#[divan::bench(args = PATCHES)]
fn common(bencher: Bencher<'_, '_>, n_patches: usize) {
    years_of(bencher, weather(Correlation::Full, n_patches, 1.0), n_patches);
}

#[divan::bench(args = PATCHES)]
fn by_distance(bencher: Bencher<'_, '_>, n_patches: usize) {
    let correlation = Correlation::Reach { reach_km: 1.2, nugget: 0.0 };
    years_of(bencher, weather(correlation, n_patches, 1.0), n_patches);
}

#[divan::bench(args = PATCHES)]
fn by_distance_with_nugget_and_two_series(bencher: Bencher<'_, '_>, n_patches: usize) {
    let correlation = Correlation::Reach { reach_km: 1.2, nugget: 0.2 };
    years_of(bencher, weather(correlation, n_patches, 0.5), n_patches);
}

#[divan::bench(args = PATCHES)]
fn factoring(bencher: Bencher<'_, '_>, n_patches: usize) {
    bencher.bench(|| weather(Correlation::Reach { reach_km: 1.2, nugget: 0.0 }, black_box(n_patches), 1.0));
}

fn four_rates() -> Option<[YearlyRate; 4]> {
    Some([
        YearlyRate::beta(0.4, 0.07)?,
        YearlyRate::beta(0.65, 0.07)?,
        YearlyRate::beta(0.8, 0.05)?,
        YearlyRate::lognormal(1.8, 0.55)?,
    ])
}

#[divan::bench]
fn four_rates_at_a_deviate(bencher: Bencher<'_, '_>) {
    let curves = RateCurves::new(&four_rates().expect("possible sds"));
    let weather = weather(Correlation::None, 1000, 1.0);
    let mut state = weather.state();
    state.advance(&weather);
    bencher.counter(1000_usize).bench_local(|| {
        for z in state.deviates(0) {
            let located = curves.locate(*z);
            for rate in 0..4 {
                black_box(curves.rate(rate, &located));
            }
        }
    });
}

#[divan::bench]
fn making_four_curves(bencher: Bencher<'_, '_>) {
    bencher.bench(|| RateCurves::new(&four_rates().expect("possible sds")));
}

//! What a draw costs, by sampler and regime, each beside its floor: a key and one word.

use divan::{Bencher, black_box};
use eyot::random::{
    AliasRows, Purpose, ReplicateKey, Stream, binomial, hypergeometric, multinomial, poisson, remove_at_random,
    standard_normal,
};

fn main() {
    divan::main();
}

/// Draws a round, so that the clock costs nothing and draws may overlap as they do in a year.
const DRAWS: u64 = 1000;

/// Times `draw` on streams keyed afresh, as the yearly loop has them; no year comes twice, or the processor would learn
/// by heart which way each draw turns.
fn keyed<T>(bencher: Bencher<'_, '_>, mut draw: impl FnMut(&mut Stream) -> T) {
    let replicate = ReplicateKey::new(20_261, 1);
    let mut years = 0;
    bencher.counter(DRAWS).bench_local(move || {
        years += 1;
        let year = replicate.year(years);
        for patch in 0..DRAWS {
            black_box(draw(&mut year.patch(patch).draw(Purpose::Fates(1))));
        }
    });
}

#[divan::bench]
fn key_and_word(bencher: Bencher<'_, '_>) {
    keyed(bencher, Stream::word);
}

#[divan::bench]
fn normal(bencher: Bencher<'_, '_>) {
    keyed(bencher, standard_normal);
}

#[divan::bench(args = [0, 3, 8, 20, 64, 200, 400, 401, 5_000, 1_000_000])]
fn binomial_third(bencher: Bencher<'_, '_>, n: u32) {
    keyed(bencher, |stream| binomial(stream, black_box(n), black_box(0.3)));
}

#[divan::bench(args = [401, 5_000, 1_000_000])]
fn binomial_rare(bencher: Bencher<'_, '_>, n: u32) {
    keyed(bencher, |stream| binomial(stream, black_box(n), black_box(5.0 / f64::from(n))));
}

#[divan::bench(args = [0.0, 0.3, 3.0, 20.5, 64.5, 65.0, 1e4, 1e8])]
fn poisson_of(bencher: Bencher<'_, '_>, mean: f64) {
    keyed(bencher, |stream| poisson(stream, black_box(mean)));
}

#[divan::bench(args = [2, 8, 40])]
fn destination(bencher: Bencher<'_, '_>, targets: usize) {
    let mut rows = AliasRows::new();
    rows.push(&vec![0.9 / targets as f64; targets]);
    keyed(bencher, |stream| rows.draw(stream, black_box(0)));
}

#[divan::bench(args = [8, 16])]
fn destinations_of_10(bencher: Bencher<'_, '_>, targets: usize) {
    let mut rows = AliasRows::new();
    rows.push(&vec![0.9 / targets as f64; targets]);
    keyed(bencher, |stream| {
        for _ in 0..black_box(10) {
            black_box(rows.draw(stream, black_box(0)));
        }
    });
}

#[divan::bench(args = [3, 8, 16])]
fn multinomial_of_10(bencher: Bencher<'_, '_>, places: usize) {
    let probabilities = vec![0.9 / places as f64; places];
    let mut out = vec![0; places];
    keyed(bencher, |stream| multinomial(stream, black_box(10), &probabilities, &mut out));
}

#[divan::bench(args = [1, 5, 20, 35, 65])]
fn surplus_of_70(bencher: Bencher<'_, '_>, surplus: u64) {
    keyed(bencher, |stream| {
        let mut counts = black_box([34, 12, 24]);
        remove_at_random(stream, &mut counts, black_box(surplus));
        counts
    });
}

#[divan::bench(args = [20, 100, 900])]
fn surplus_of_1000(bencher: Bencher<'_, '_>, surplus: u64) {
    keyed(bencher, |stream| {
        let mut counts = black_box([500, 150, 350]);
        remove_at_random(stream, &mut counts, black_box(surplus));
        counts
    });
}

#[divan::bench(args = [20, 25, 400, 40_000])]
fn hypergeometric_of(bencher: Bencher<'_, '_>, drawn: u64) {
    keyed(bencher, |stream| hypergeometric(stream, black_box(50_000), black_box(70_000), black_box(drawn)));
}

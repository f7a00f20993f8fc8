//! The samplers against exact distributions, whose masses are found here by recurrence from the mode.
//!
//! Unless a test says otherwise: a million draws, each from a stream of its own, keyed as the yearly loop keys them; the
//! null is the exact distribution; a probability passes within 4 standard errors of the null (false alarm 6e-5); a whole
//! support passes when Pearson's chi-square, over cells that expect ten draws or more, has p above 1e-4. With some 70
//! supports here, one false alarm in 140 sets of seeds.

use eyot::num::{gamma, normal};
use eyot::random::{
    AliasRows, Purpose, ReplicateKey, Stream, binomial, hypergeometric, multinomial, poisson, remove_at_random,
    standard_normal,
};

const DRAWS: u32 = 1_000_000;
const SEED: u64 = 14_001;

/// A million results of `draw`; `test` keeps the streams of one test from those of another.
fn million<T>(test: u32, mut draw: impl FnMut(&mut Stream) -> T) -> Vec<T> {
    let replicate = ReplicateKey::new(SEED, test);
    (0..DRAWS).map(|i| draw(&mut replicate.year(i / 1000).patch(u64::from(i % 1000)).draw(Purpose::Fates(0)))).collect()
}

fn share<T>(draws: &[T], what: impl Fn(&T) -> bool) -> f64 {
    draws.iter().filter(|draw| what(draw)).count() as f64 / f64::from(DRAWS)
}

fn assert_within_4_standard_errors(found: f64, null: f64, what: &str) {
    let error = (null * (1.0 - null) / f64::from(DRAWS)).sqrt();
    assert!((found - null).abs() < 4.0 * error, "{what}: {found} for {null}, {:.1} errors", (found - null) / error);
}

/// A distribution on whole numbers: masses from `first` on, to where they fall below 1e-18 of the mode's.
struct Exact {
    first: u64,
    masses: Vec<f64>,
}

impl Exact {
    /// From the mode and the ratio of the mass of k + 1 to that of k, 0 where there is no k + 1.
    fn from_mode(mode: u64, up: impl Fn(f64) -> f64) -> Self {
        let mut below = Vec::new();
        let (mut k, mut mass) = (mode, 1.0);
        while k > 0 {
            k -= 1;
            mass /= up(k as f64);
            if mass < 1e-18 {
                break;
            }
            below.push(mass);
        }
        let first = mode - below.len() as u64;
        let mut masses: Vec<f64> = below.into_iter().rev().collect();
        let (mut k, mut mass) = (mode, 1.0);
        while mass >= 1e-18 {
            masses.push(mass);
            mass *= up(k as f64);
            k += 1;
        }
        let total: f64 = masses.iter().sum();
        masses.iter_mut().for_each(|mass| *mass /= total);
        Self { first, masses }
    }

    fn binomial(n: u64, p: f64) -> Self {
        let mode = (((n + 1) as f64 * p) as u64).min(n);
        Self::from_mode(mode, |k| (n as f64 - k) / (k + 1.0) * (p / (1.0 - p)))
    }

    fn poisson(mean: f64) -> Self {
        Self::from_mode(mean as u64, |k| mean / (k + 1.0))
    }

    fn hypergeometric(marked: f64, others: f64, drawn: f64) -> Self {
        let mode = ((drawn + 1.0) * (marked + 1.0) / (marked + others + 2.0)) as u64;
        Self::from_mode(mode, |k| {
            let up = (marked - k) * (drawn - k) / ((k + 1.0) * (others - drawn + k + 1.0));
            if others - drawn + k + 1.0 <= 0.0 { f64::INFINITY } else { up }
        })
    }

    fn cdf(&self, k: u64) -> f64 {
        self.masses.iter().zip(self.first..).filter(|(_, at)| *at <= k).map(|(mass, _)| mass).sum()
    }

    /// Chance of a chi-square as large as that of these draws.
    fn p_of_fit(&self, draws: impl Iterator<Item = u64>) -> f64 {
        let mut counts = vec![0.0; self.masses.len()];
        for draw in draws {
            match draw.checked_sub(self.first).and_then(|at| counts.get_mut(at as usize)) {
                Some(count) => *count += 1.0,
                None => return 0.0,
            }
        }
        p_of_fit(&counts, &self.masses)
    }
}

/// Pearson's chi-square over neighbouring cells joined until each expects ten draws.
fn p_of_fit(counts: &[f64], masses: &[f64]) -> f64 {
    let mut cells: Vec<(f64, f64)> = Vec::new();
    let (mut counted, mut expected) = (0.0, 0.0);
    for (count, mass) in counts.iter().zip(masses) {
        counted += count;
        expected += mass * f64::from(DRAWS);
        if expected >= 10.0 {
            cells.push((counted, expected));
            (counted, expected) = (0.0, 0.0);
        }
    }
    let last = cells.last_mut().expect("a million draws fill a cell");
    *last = (last.0 + counted, last.1 + expected);
    if cells.len() == 1 {
        return 1.0;
    }
    let chi_square: f64 = cells.iter().map(|(o, e)| (o - e) * (o - e) / e).sum();
    gamma::upper((cells.len() - 1) as f64 / 2.0, chi_square / 2.0)
}

/// Recomputed independently with scipy: P(Bin(40, 0.3) <= 8), P(Bin(1e6, 1e-5) = 0), P(.. > 25) and its third central
/// moment n p q (1 - 2p), P(Bin(1e6, 0.5) <= 499800).
#[test]
fn binomial_probabilities() {
    let draws = million(1, |stream| binomial(stream, 40, 0.3));
    assert_within_4_standard_errors(share(&draws, |k| *k <= 8), 0.111_009_18, "Bin(40, 0.3) <= 8");

    let rare = million(2, |stream| binomial(stream, 1_000_000, 1e-5));
    assert_within_4_standard_errors(share(&rare, |k| *k == 0), 4.539_77e-5, "Bin(1e6, 1e-5) = 0");
    assert_within_4_standard_errors(share(&rare, |k| *k > 25), 1.767_81e-5, "Bin(1e6, 1e-5) > 25");
    // Skewness 0.316223, where a normal stand-in has 0. The sixth central moment of nearly Poisson numbers of mean 10 is
    // 10 + 25 * 100 + 15 * 1000, hence the standard error.
    let third = rare.iter().map(|k| (f64::from(*k) - 10.0) * (f64::from(*k) - 10.0) * (f64::from(*k) - 10.0));
    let skewness = third.sum::<f64>() / f64::from(DRAWS) / (10.0 * 10.0_f64.sqrt());
    let error = ((17_510.0_f64 - 100.0) / f64::from(DRAWS)).sqrt() / (10.0 * 10.0_f64.sqrt());
    assert!((skewness - 0.316_223).abs() < 4.0 * error, "skewness {skewness}");

    let even = million(3, |stream| binomial(stream, 1_000_000, 0.5));
    assert_within_4_standard_errors(share(&even, |k| *k <= 499_800), 0.344_946_61, "Bin(1e6, 0.5) <= 499800");
}

/// Recomputed independently with scipy: P(Poisson(7.3) <= 4), P(Poisson(12.5) > 25), P(Poisson(1e5) <= 99700).
#[test]
fn poisson_probabilities() {
    let draws = million(4, |stream| poisson(stream, 7.3));
    assert_within_4_standard_errors(share(&draws, |k| *k <= 4), 0.147_339_85, "Poisson(7.3) <= 4");
    let draws = million(5, |stream| poisson(stream, 12.5));
    assert_within_4_standard_errors(share(&draws, |k| *k > 25), 5.564_979e-4, "Poisson(12.5) > 25");
    let draws = million(6, |stream| poisson(stream, 1e5));
    assert_within_4_standard_errors(share(&draws, |k| *k <= 99_700), 0.171_807_11, "Poisson(1e5) <= 99700");
}

/// The comparator itself against the same independent values.
#[test]
fn the_exact_distributions_are_those_of_scipy() {
    let near = |found: f64, published: f64| assert!((found / published - 1.0).abs() < 1e-6, "{found} {published}");
    near(Exact::binomial(40, 0.3).cdf(8), 0.111_009_18);
    near(Exact::binomial(1_000_000, 0.5).cdf(499_800), 0.344_946_61);
    near(Exact::poisson(7.3).cdf(4), 0.147_339_85);
    near(1.0 - Exact::poisson(12.5).cdf(25), 5.564_979e-4);
    near(Exact::poisson(1e5).cdf(99_700), 0.171_807_11);
    let removed = Exact::hypergeometric(5.0, 7.0, 6.0);
    near(removed.cdf(2) - removed.cdf(1), 0.378_787_88);
}

/// Every way of drawing, and both sides of each joint: 8 and 256 individuals, n p = 10, p = 1/2.
#[test]
fn binomial_over_its_whole_support() {
    let cases = [
        (1, 0.3),
        (3, 0.004),
        (7, 0.999),
        (7, 0.5),
        (8, 0.5),
        (9, 0.3),
        (20, 0.77),
        (20, 1.0 / 256.0),
        (64, 0.3),
        (65, 0.3),
        (255, 0.01),
        (256, 0.63),
        (257, 0.63),
        (257, 0.5),
        (257, 0.500_001),
        (500, 0.019_99),
        (500, 0.020_01),
        (500, 0.980_01),
        (1000, 0.3),
        (5000, 1e-5),
        (5000, 0.43),
        (1_000_000, 1e-5),
        (1_000_000, 0.999),
        (u32::MAX, 1e-9),
        (u32::MAX, 3e-8),
        (u32::MAX, 0.5),
    ];
    for (case, (n, p)) in (100..).zip(cases) {
        let draws = million(case, |stream| binomial(stream, n, p));
        let fit = Exact::binomial(u64::from(n), p).p_of_fit(draws.into_iter().map(u64::from));
        assert!(fit > 1e-4, "Bin({n}, {p}): p {fit}");
    }
}

/// The table with and without a remainder, and the joint at 65.
#[test]
fn poisson_over_its_whole_support() {
    let cases =
        [1e-3, 0.3, 1.0, 1.9, 3.0, 7.3, 12.5, 20.9, 63.99, 64.0, 64.999, 65.0, 65.001, 100.3, 1e3, 1e5, 1e7, 1e9];
    for (case, mean) in (200..).zip(cases) {
        let draws = million(case, |stream| poisson(stream, mean));
        let fit = Exact::poisson(mean).p_of_fit(draws.into_iter().map(u64::from));
        assert!(fit > 1e-4, "Poisson({mean}): p {fit}");
    }
}

/// Picks and rejection, their joint at 128, and all that symmetry turns round.
#[test]
fn hypergeometric_over_its_whole_support() {
    let cases = [
        (5, 7, 6),
        (1, 1, 1),
        (50, 20, 20),
        (34, 36, 35),
        (34, 36, 65),
        (500, 300, 128),
        (500, 300, 129),
        (500, 300, 671),
        (500, 300, 672),
        (300, 300, 200),
        (131, 10_000, 140),
        (1_000, 9_000, 8_500),
        (500_000_000, 700_000_000, 100_000_000),
        (20_000_000_000, 30_000, 9_000_000_000),
    ];
    for (case, (marked, others, drawn)) in (300..).zip(cases) {
        let draws = million(case, |stream| hypergeometric(stream, marked, others, drawn));
        let exact = if marked > others {
            // Count those that leave a few: the support then begins near 0.
            let exact = Exact::hypergeometric(others as f64, marked as f64, drawn as f64);
            exact.p_of_fit(draws.into_iter().map(|k| drawn - k))
        } else {
            Exact::hypergeometric(marked as f64, others as f64, drawn as f64).p_of_fit(draws.into_iter())
        };
        assert!(exact > 1e-4, "{drawn} of {marked} and {others}: p {exact}");
    }
}

/// Recomputed independently with scipy: of 12 present, 5 of one stage, 6 are removed; 2 of them are of that stage with
/// chance 0.37878788. And three stages together, against products of binomial coefficients.
#[test]
fn removal_takes_individuals_at_random() {
    let removed_first = million(7, |stream| {
        let mut counts = [5, 4, 3];
        remove_at_random(stream, &mut counts, 6);
        counts
    });
    assert!(removed_first.iter().all(|counts| counts.iter().sum::<u32>() == 6));
    assert_within_4_standard_errors(share(&removed_first, |counts| counts[0] == 3), 0.378_787_88, "2 of stage 1");

    let choose = |n: u32, k: u32| (0..k).fold(1.0, |c, i| c * f64::from(n - i) / f64::from(i + 1));
    let mut masses = vec![0.0; 6 * 5 * 4];
    let mut counts = vec![0.0; 6 * 5 * 4];
    let cell = |left: &[u32; 3]| (left[0] * 20 + left[1] * 4 + left[2]) as usize;
    for first in 0..=5 {
        for second in 0..=4 {
            if let Some(third @ 0..=3) = 6_u32.checked_sub(first + second) {
                let ways = choose(5, first) * choose(4, second) * choose(3, third);
                masses[cell(&[first, second, third])] = ways / choose(12, 6);
            }
        }
    }
    for left in &removed_first {
        counts[cell(left)] += 1.0;
    }
    assert!(counts.iter().zip(&masses).all(|(count, mass)| *mass > 0.0 || *count == 0.0));
    assert!(p_of_fit(&counts, &masses) > 1e-4);
}

/// Recomputed independently with scipy: multinomial(10; 0.2 0.5 0.3) at (3, 4, 3) = 0.0567.
#[test]
fn multinomial_probability() {
    let draws = million(8, |stream| {
        let mut out = [0; 3];
        let left = multinomial(stream, 10, &[0.2, 0.5, 0.3], &mut out);
        (out, left)
    });
    assert!(draws.iter().all(|(out, left)| *left == 0 && out.iter().sum::<u32>() == 10));
    assert_within_4_standard_errors(share(&draws, |(out, _)| *out == [3, 4, 3]), 0.0567, "(3, 4, 3)");
}

/// What is left over is a place of its own: all outcomes of 4 over two places and none, against their definition.
#[test]
fn multinomial_over_its_whole_support() {
    let p = [0.15, 0.6, 0.25];
    let draws = million(9, |stream| {
        let mut out = [0; 2];
        multinomial(stream, 4, &p[..2], &mut out);
        out
    });
    let power = |x: f64, times: u32| (0..times).fold(1.0, |product, _| product * x);
    let factorial = |n: u32| (1..=n).map(f64::from).product::<f64>();
    let (mut masses, mut counts) = (vec![0.0; 25], vec![0.0; 25]);
    for a in 0..=4 {
        for b in 0..=4 - a {
            let c = 4 - a - b;
            let ways = factorial(4) / (factorial(a) * factorial(b) * factorial(c));
            masses[(a * 5 + b) as usize] = ways * power(p[0], a) * power(p[1], b) * power(p[2], c);
        }
    }
    for [a, b] in draws {
        counts[(a * 5 + b) as usize] += 1.0;
    }
    assert!(counts.iter().zip(&masses).all(|(count, mass)| *mass > 0.0 || *count == 0.0));
    assert!(p_of_fit(&counts, &masses) > 1e-4);
}

/// Rows with and without a loss, against the probabilities that made them.
#[test]
fn destinations_have_their_probabilities() {
    let rows: [&[f64]; 4] =
        [&[0.5, 0.2, 0.05, 0.0, 0.15], &[1.0], &[0.001, 0.96, 0.03, 0.009], &[0.02, 0.01, 1e-4, 0.3]];
    let mut alias = AliasRows::new();
    rows.iter().for_each(|row| alias.push(row));
    let mut first = 0;
    for (row, probabilities) in rows.iter().enumerate() {
        let draws = million(400 + row as u32, |stream| alias.draw(stream, row));
        let mut masses = probabilities.to_vec();
        masses.push((1.0 - probabilities.iter().sum::<f64>()).max(0.0));
        let mut counts = vec![0.0; masses.len()];
        for place in draws {
            counts[place.map_or(probabilities.len(), |place| (place - first) as usize)] += 1.0;
        }
        assert!(counts.iter().zip(&masses).all(|(count, mass)| *mass > 0.0 || *count == 0.0), "{counts:?}");
        assert!(p_of_fit(&counts, &masses) > 1e-4, "row {row}: {counts:?}");
        first += probabilities.len() as u32;
    }
}

/// Normal deviates over 1,000 cells of one chance, and over the tails beyond the ziggurat's last layer, against the
/// cdf (itself held against mpmath).
#[test]
fn normal_deviates_are_normal() {
    let draws = million(10, standard_normal);
    let mut counts = vec![0.0; 1000];
    for z in &draws {
        counts[((normal::cdf(*z) * 1000.0) as usize).min(999)] += 1.0;
    }
    assert!(p_of_fit(&counts, &vec![0.001; 1000]) > 1e-4);
    for edge in [3.0, 3.5, 3.654_152_885_361_009, 3.8, 4.2] {
        assert_within_4_standard_errors(share(&draws, |z| *z > edge), normal::cdf(-edge), "upper tail");
        assert_within_4_standard_errors(share(&draws, |z| *z < -edge), normal::cdf(-edge), "lower tail");
    }
}

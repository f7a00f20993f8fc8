//! Dispersal that answers to crowding: chains over the numbers of two patches, built and iterated here from binomial and
//! Poisson masses; binomials in closed form where one year is enough.

use eyot::num;

use crate::support::{Case, Seen, one_stage, patch};

/// The most individuals that a patch is followed to within a year; what lies beyond has chance below 1e-12 here.
const MOST: usize = 30;

/// P(k of n), each with chance p.
pub(crate) fn binomial_mass(k: usize, n: usize, p: f64) -> f64 {
    if k > n {
        return 0.0;
    }
    if p <= 0.0 || p >= 1.0 {
        return f64::from(u8::from(k == if p <= 0.0 { 0 } else { n }));
    }
    let ln_choose = num::ln_gamma(n as f64 + 1.0) - num::ln_gamma(k as f64 + 1.0) - num::ln_gamma((n - k) as f64 + 1.0);
    num::exp(ln_choose + k as f64 * num::ln(p) + (n - k) as f64 * num::ln_1p(-p))
}

/// P(k) of a Poisson number.
pub(crate) fn poisson_mass(k: usize, mean: f64) -> f64 {
    if mean <= 0.0 {
        return f64::from(u8::from(k == 0));
    }
    num::exp(k as f64 * num::ln(mean) - mean - num::ln_gamma(k as f64 + 1.0))
}

/// P(m alive after a year's survival and births) from n, for m up to `most`.
pub(crate) fn alive(n: usize, survival: f64, fecundity: f64, most: usize) -> Vec<f64> {
    (0..=most)
        .map(|m| {
            let of = |k| binomial_mass(k, n, survival) * poisson_mass(m - k, fecundity * n as f64);
            (0..=n.min(m)).map(of).sum()
        })
        .collect()
}

/// Two patches under a ceiling whose individuals leave with a chance that depends on how many there are.
struct TwoPatches {
    capacity: [usize; 2],
    survival: f64,
    fecundity: f64,
    arriving: f64,
}

impl TwoPatches {
    /// P(stays, arrives elsewhere) of a patch that had n at the census.
    fn parting(&self, n: usize, leaving: impl Fn(usize) -> f64) -> Vec<Vec<f64>> {
        let mut parting = vec![vec![0.0; MOST + 1]; MOST + 1];
        for (alive, chance) in alive(n, self.survival, self.fecundity, MOST).into_iter().enumerate() {
            for left in 0..=alive {
                let chance = chance * binomial_mass(left, alive, leaving(alive));
                for (arrived, cell) in parting[alive - left].iter_mut().enumerate().take(left + 1) {
                    *cell += chance * binomial_mass(arrived, left, self.arriving);
                }
            }
        }
        parting
    }

    /// Distribution over the numbers of both at each census up to `years`.
    fn iterate(&self, start: [usize; 2], years: usize, leaving: impl Fn(usize, usize) -> f64) -> Vec<Vec<Vec<f64>>> {
        let [k1, k2] = self.capacity;
        let partings: [Vec<_>; 2] = [0, 1].map(|patch: usize| {
            let from = |n| self.parting(n, |alive| leaving(patch, alive));
            (0..=self.capacity[patch]).map(from).collect()
        });
        let mut now = vec![vec![0.0; k2 + 1]; k1 + 1];
        now[start[0]][start[1]] = 1.0;
        let mut censuses = vec![now];
        for _ in 0..years {
            let mut next = vec![vec![0.0; k2 + 1]; k1 + 1];
            for (n1, row) in censuses[censuses.len() - 1].iter().enumerate() {
                for (n2, chance) in row.iter().enumerate() {
                    meet(&partings[0][n1], &partings[1][n2], *chance, &mut next);
                }
            }
            censuses.push(next);
        }
        censuses
    }
}

/// Adds what two patches become that part from their emigrants like this.
fn meet(first: &[Vec<f64>], second: &[Vec<f64>], chance: f64, next: &mut [Vec<f64>]) {
    let (k1, k2) = (next.len() - 1, next[0].len() - 1);
    let all = |table: &[Vec<f64>]| {
        let mut cells = Vec::new();
        for (stays, row) in table.iter().enumerate() {
            cells.extend(row.iter().enumerate().filter(|(_, p)| **p > 1e-14).map(|(goes, p)| (stays, goes, *p)));
        }
        cells
    };
    let second = all(second);
    for (stays_1, goes_1, p1) in all(first) {
        for &(stays_2, goes_2, p2) in &second {
            next[(stays_1 + goes_2).min(k1)][(stays_2 + goes_1).min(k2)] += chance * p1 * p2;
        }
    }
}

/// Holds extinction and the total against the chain at these censuses.
fn check(seen: &Seen, censuses: &[Vec<Vec<f64>>], years: &[usize]) {
    for &year in years {
        let rows = censuses[year].iter().enumerate();
        let totals = rows.flat_map(|(n1, row)| row.iter().enumerate().map(move |(n2, chance)| (n1 + n2, *chance)));
        seen.distribution(year, totals);
    }
}

/// The power form of the chance to leave, min(1, d (N/K)^x): chain computed here, 20,000 replicates, 4 standard errors. The
/// plain chance must lie well outside of what is seen, or the test could not tell them apart.
#[test]
fn emigration_that_rises_with_crowding() {
    let patches = TwoPatches { capacity: [5, 3], survival: 0.6, fecundity: 0.7, arriving: 0.4 };
    let life = one_stage(0.6, 0.7, "poisson", "ceiling") + "emigration = 0.5\n";
    let case = |name, keys| {
        Case::new(name, vec![patch(5.0, &[4]), patch(3.0, &[1])], &["all"], &life)
            .arriving(&[&[0.0, 0.4], &[0.4, 0.0]])
            .dispersing(keys)
    };
    let crowded = |exponent: f64| {
        let leaving =
            move |patch: usize, alive: usize| (0.5 * num::pow(alive as f64 / [5.0, 3.0][patch], exponent)).min(1.0);
        patches.iterate([4, 1], 20, leaving)
    };
    let plain = patches.iterate([4, 1], 20, |_, _| 0.5);
    for (name, keys, exponent) in [
        ("leaving in proportion to crowding", "rises_with_crowding = { exponent = 1 }\n", 1.0),
        ("leaving as the square of crowding", "rises_with_crowding = { exponent = 2 }\n", 2.0),
        ("leaving as the root of crowding", "rises_with_crowding = { exponent = 0.5 }\n", 0.5),
    ] {
        let censuses = crowded(exponent);
        check(&case(name, keys).run(20), &censuses, &[1, 5, 20]);
        let difference = (plain[20][0][0] - censuses[20][0][0]).abs();
        assert!(difference > 0.02, "extinction by 20 differs from that of a plain chance by {difference} only");
    }
    check(&case("leaving whatever the crowding", "").run(20), &plain, &[1, 5, 20]);
}

/// Crowding is weighted toward capacity, while those of all stages answer to it.
#[test]
fn only_those_who_count_make_a_crowd() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        [[life_history.stage]]\nname = \"young\"\nsurvival = 1\nadvance = 0\nemigration = 0.2\ntoward_capacity = 0\n\
        [[life_history.stage]]\nname = \"old\"\nsurvival = 1\nemigration = 0.1\n";
    let points = vec![patch(20.0, &[30, 50]), patch(10.0, &[40, 0])];
    let seen = Case::new("only those who count make a crowd", points, &["young", "old"], life)
        .arriving(&[&[0.0, 0.5], &[0.0, 0.0]])
        .dispersing("rises_with_crowding = { exponent = 1 }\n")
        .run(1);
    // N/K is 50/20 in the first, 0 in the second: 0.5 of 30 leave and 0.25 of 50, and nobody.
    let emigrants = seen.tallies.patches[0].emigrants as f64 / 20_000.0;
    seen.mean("emigrants", emigrants, 15.0 + 12.5, (30.0 * 0.25 + 50.0 * 0.1875_f64).sqrt());
    assert_eq!(seen.tallies.patches[1].emigrants, 0);
}

/// Full patches are passed by: one year in which all survive and none is born, so that movers along each link are binomial.
/// From the first patch so many leave that they are drawn together, from the others one by one.
#[test]
fn full_patches_are_passed_by() {
    let life = one_stage(1.0, 0.0, "poisson", "none") + "emigration = 0.5\n";
    let points = vec![patch(100.0, &[60]), patch(10.0, &[10]), patch(50.0, &[6]), patch(9.5, &[9])];
    let rows: [&[f64]; 4] =
        [&[0.0, 0.4, 0.3, 0.1], &[0.5, 0.0, 0.2, 0.0], &[0.2, 0.6, 0.0, 0.1], &[0.0, 1.0, 0.0, 0.0]];
    let case = Case::new("full patches are passed by", points, &["all"], &life)
        .arriving(&rows)
        .dispersing("avoids_full = true\n");
    // Only the second is full. It keeps nobody from leaving; the last one has no other target and is sent there all the same.
    let expected = [[0.0, 0.0, 0.6, 0.2], [0.5, 0.0, 0.2, 0.0], [0.6, 0.0, 0.0, 0.3], [0.0, 1.0, 0.0, 0.0]];
    let (seen, links) = (case.run(1), case.prepare(1).network.links);
    for (link, movers) in links.iter().zip(&seen.tallies.movers) {
        let start = [60.0, 10.0, 6.0, 9.0][link.from as usize];
        let chance = 0.5 * expected[link.from as usize][link.to as usize];
        let what = format!("movers from {} to {}", link.from + 1, link.to + 1);
        seen.mean(&what, *movers as f64 / 20_000.0, start * chance, (start * chance * (1.0 - chance)).sqrt());
        assert!(chance > 0.0 || *movers == 0, "{what}: {movers}");
    }
}

/// Where no patch is ever full, the key changes no draw.
#[test]
fn passing_by_nobody_changes_nothing() {
    let life = one_stage(0.6, 0.6, "poisson", "none") + "emigration = 0.3\n";
    let case = Case::new("passing by nobody", vec![patch(1e9, &[9]), patch(1e9, &[5])], &["all"], &life)
        .arriving(&[&[0.0, 0.7], &[0.6, 0.0]]);
    assert_eq!(case.run(30).tallies, case.dispersing("avoids_full = true\n").run(30).tallies);
}

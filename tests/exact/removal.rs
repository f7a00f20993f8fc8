//! Removal against absorbing chains over the numbers of one patch, built and iterated here from binomial and Poisson masses,
//! and against what can be counted by hand where nothing else happens.

use crate::movement::{alive, binomial_mass};
use crate::support::{Case, Seen, one_stage, patch};

/// The most individuals that a patch is followed to within a year; what lies beyond has chance below 1e-12 here.
const MOST: usize = 40;
const CAPACITY: usize = 8;
const START: usize = 6;
const SURVIVAL: f64 = 0.6;
const FECUNDITY: f64 = 0.7;

/// What the chain says of a run of years: the distribution at each census, and the mean taken up to it.
struct Chain {
    censuses: Vec<Vec<f64>>,
    taken: Vec<f64>,
}

/// The chain under a ceiling, of which `taking(year, there)` gives the chance of each number taken of those there.
fn chain(years: usize, taking: impl Fn(usize, usize) -> Vec<f64>) -> Chain {
    let mut now = vec![0.0; CAPACITY + 1];
    now[START] = 1.0;
    let mut chain = Chain { censuses: vec![now], taken: vec![0.0] };
    for year in 0..years {
        let mut next = vec![0.0; CAPACITY + 1];
        let mut taken_now = 0.0;
        for (n, chance) in chain.censuses[year].iter().enumerate() {
            for (there, alive) in alive(n, SURVIVAL, FECUNDITY, MOST).into_iter().enumerate() {
                for (taken, p) in taking(year, there).into_iter().enumerate() {
                    next[(there - taken).min(CAPACITY)] += chance * alive * p;
                    taken_now += chance * alive * p * taken as f64;
                }
            }
        }
        chain.censuses.push(next);
        chain.taken.push(chain.taken[year] + taken_now);
    }
    chain
}

/// Chances of the numbers taken: each individual with chance `share`, down to the floor.
fn by_share(there: usize, share: f64, floor: usize) -> Vec<f64> {
    let most = there.saturating_sub(floor);
    let mut chances = vec![0.0; most + 1];
    for taken in 0..=there {
        chances[taken.min(most)] += binomial_mass(taken, there, share);
    }
    chances
}

/// The chance 1 of so many.
fn just(taken: usize) -> Vec<f64> {
    let mut chances = vec![0.0; taken + 1];
    chances[taken] = 1.0;
    chances
}

fn run(name: &'static str, removal: &str, years: u32) -> Seen {
    let life = one_stage(SURVIVAL, FECUNDITY, "poisson", "ceiling");
    let tables = format!("{life}[[removal]]\nname = \"trapping\"\n{removal}");
    Case::new(name, vec![patch(CAPACITY as f64, &[START as u32])], &["all"], &tables).run(years)
}

fn check(seen: &Seen, chain: &Chain) {
    for census in [1, 5, 10, 20] {
        seen.distribution(census, chain.censuses[census].iter().copied().enumerate());
    }
    let removed = seen.tallies.removed.expect("the study has a removal");
    let n = seen.tallies.records.len() as f64;
    let mean = removed.sum as f64 / n;
    let sd = (removed.squares as f64 / n - mean * mean).sqrt();
    seen.mean("taken in all", mean, chain.taken[20], sd);
    assert_eq!(removed.sum, u128::from(seen.tallies.patches[0].removed), "the only patch's are all");
}

#[test]
fn a_share_is_taken_every_year() {
    check(&run("a share is taken", "share = 0.15\n", 20), &chain(20, |_, there| by_share(there, 0.15, 0)));
}

/// The floor spares the last two. A floor that did nothing would show: extinction by 20 differs by more than 0.05.
#[test]
fn a_share_is_taken_down_to_a_floor() {
    let with_floor = chain(20, |_, there| by_share(there, 0.3, 2));
    let without = chain(20, |_, there| by_share(there, 0.3, 0));
    assert!((with_floor.censuses[20][0] - without.censuses[20][0]).abs() > 0.05);
    check(&run("a share is taken down to a floor", "share = 0.3\nfloor = 2\n", 20), &with_floor);
}

#[test]
fn a_number_is_taken_in_some_years() {
    let acting = |year: usize| (2..=9).contains(&year);
    let taking = move |year, there: usize| just(if acting(year) { there.saturating_sub(1).min(2) } else { 0 });
    let removal = "number = 2\nfloor = 1\nfrom_year = 2\nto_year = 9\n";
    check(&run("a number is taken in some years", removal, 20), &chain(20, taking));
}

/// Nobody is born and nobody dies. Year t lies between census t and t + 1; a patch that is not named is left alone; the
/// second removal finds what the first has left.
#[test]
fn years_patches_and_order() {
    let life = one_stage(1.0, 0.0, "poisson", "none");
    let removals = "[[removal]]\nname = \"first\"\npatches = [\"p2\"]\nnumber = 1\nyears = [1, 3]\n\
                    [[removal]]\nname = \"second\"\nnumber = 9\nfloor = 7\nfrom_year = 4\n";
    let points = vec![patch(50.0, &[8]), patch(50.0, &[10])];
    let mut case = Case::new("years, patches and order", points, &["all"], &format!("{life}{removals}"));
    case.replicates = 2;
    let seen = case.run(6);
    for record in &seen.tallies.records {
        assert_eq!(record.totals, [18, 18, 17, 17, 16, 14, 14]);
    }
    let removed: Vec<u64> = seen.tallies.patches.iter().map(|patch| patch.removed).collect();
    assert_eq!(removed, [2, 6], "in two replicates");
}

/// Number and floor count the stage named; without one they count all.
#[test]
fn a_stage_or_all() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        [[life_history.stage]]\nname = \"young\"\nsurvival = 1\nadvance = 0\n\
        [[life_history.stage]]\nname = \"old\"\nsurvival = 1\n";
    for (name, removal, left) in [
        ("a stage", "stage = \"young\"\nnumber = 30\nfloor = 4\n", 4 + 20),
        ("a stage to the last", "stage = \"old\"\nshare = 1\n", 10),
        ("all stages", "number = 8\n", 22),
        ("all stages to a floor", "share = 1\nfloor = 25\n", 25),
    ] {
        let tables = format!("{life}[[removal]]\nname = \"hunting\"\nyears = [0]\n{removal}");
        let seen = Case::new(name, vec![patch(9.0, &[10, 20])], &["young", "old"], &tables).run(1);
        assert!(seen.tallies.records.iter().all(|record| record.totals[1] == left), "{name}");
        assert_eq!(seen.tallies.patches[0].removed, (30 - left) * 20_000, "{name}");
    }
}

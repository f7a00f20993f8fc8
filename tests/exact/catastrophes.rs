//! Bad years, solved as absorbing Markov chains over the counts and the state of the year (Kemeny & Snell 1960, Finite
//! Markov Chains, from memory; the values computed outside this crate).

use eyot::random::ReplicateKey;

use crate::support::{Case, Point, Seen, one_stage, patch, sample_mean, sample_sd};

/// Year, P(extinct), mean and sd of the total, P(patch occupied).
type Row<const N: usize> = (usize, f64, f64, f64, [f64; N]);

/// Two patches of capacity 6 and 4 that exchange 0.2 of their individuals, 0.8 of whom arrive.
fn two_patches(name: &'static str, catastrophe: &str) -> Case {
    let life = one_stage(0.7, 0.7, "poisson", "ceiling") + "emigration = 0.2\n" + catastrophe;
    Case::new(name, vec![patch(6.0, &[4]), patch(4.0, &[2])], &["all"], &life).arriving(&[&[0.0, 0.8], &[0.8, 0.0]])
}

/// A bad year multiplies survival by 0.4 and young by 0.5.
fn bad_year(rest: &str) -> String {
    format!("[[catastrophe]]\nname = \"bad year\"\nsurvival = 0.4\nfecundity = 0.5\n{rest}\n")
}

fn check<const N: usize>(case: &Case, rows: &[Row<N>]) {
    let last = rows.last().expect("a table has rows").0;
    let seen = case.run(last as u32);
    for (census, extinct, mean, sd, occupied) in rows {
        seen.extinct(*census, *extinct);
        seen.total(*census, *mean, *sd);
        // A run to a shorter horizon is the beginning of the longer one.
        case.run(*census as u32).occupied_at_end(occupied);
    }
}

#[test]
fn struck_together() {
    let case = two_patches("struck together", &bad_year("yearly_probability = 0.15\nstrikes = \"landscape\""));
    check(
        &case,
        &[
            (1, 0.003_072, 6.850_95, 2.1764, [0.983_385, 0.944_337]),
            (5, 0.047_979, 6.777_84, 3.0957, [0.902_167, 0.888_952]),
            (10, 0.116_845, 6.219_85, 3.4728, [0.830_889, 0.824_143]),
            (20, 0.245_330, 5.294_31, 3.8835, [0.708_904, 0.703_661]),
            (50, 0.530_777, 3.291_00, 3.9955, [0.440_730, 0.437_480]),
        ],
    );
}

#[test]
fn struck_each_for_itself() {
    let case = two_patches("struck each for itself", &bad_year("yearly_probability = 0.15\nstrikes = \"each patch\""));
    check(
        &case,
        &[
            (1, 0.000_768, 6.874_87, 1.9774, [0.986_088, 0.953_937]),
            (5, 0.025_986, 7.077_56, 2.7526, [0.929_332, 0.922_921]),
            (10, 0.069_660, 6.741_68, 3.0842, [0.883_749, 0.882_305]),
            (20, 0.154_136, 6.119_05, 3.5218, [0.802_912, 0.801_921]),
            (50, 0.365_282, 4.591_00, 4.0397, [0.602_460, 0.601_721]),
        ],
    );
}

#[test]
fn struck_one_at_a_time() {
    let case = two_patches("struck one at a time", &bad_year("yearly_probability = 0.15\nstrikes = \"one patch\""));
    check(
        &case,
        &[
            (1, 0.000_192, 7.151_11, 1.8389, [0.992_025, 0.965_268]),
            (5, 0.009_593, 7.912_18, 2.3361, [0.964_894, 0.960_839]),
            (10, 0.024_752, 7.883_33, 2.4912, [0.950_562, 0.949_767]),
            (20, 0.052_509, 7.679_65, 2.7747, [0.924_188, 0.923_448]),
            (50, 0.129_767, 7.054_74, 3.3892, [0.848_879, 0.848_191]),
        ],
    );
}

/// The state of the year is Markov: good to bad 0.1, bad to good 0.4, stationary in the first year.
#[test]
fn bad_years_with_memory() {
    let memory = "yearly_probability = 0.1\nstrikes = \"landscape\"\nlasts = { chance_of_another_year = 0.6 }";
    let seen = two_patches("bad years with memory", &bad_year(memory)).run(50);
    for (census, extinct, mean) in [
        (1, 0.004_089, 6.660_23),
        (5, 0.105_276, 6.389_02),
        (10, 0.224_741, 5.513_59),
        (20, 0.419_447, 4.121_00),
        (50, 0.756_525, 1.728_15),
    ] {
        seen.extinct(census, extinct);
        let totals = totals(&seen, census);
        seen.mean(&format!("total at {census}"), sample_mean(&totals), mean, sample_sd(&totals));
    }
}

/// Events of radius 3 km about a patch drawn at random strike {1, 2} with 2/15 and {3} with 1/15.
#[test]
fn struck_within_a_radius() {
    let life = one_stage(0.7, 0.7, "poisson", "ceiling")
        + "emigration = 0.15\n[[catastrophe]]\nname = \"storm\"\nyearly_probability = 0.2\nstrikes = { radius_km = 3 }\n\
           survival = 0.2\nfecundity = 0.2\n";
    let at = |x, capacity, start| Point { at_km: [x, 0.0], area_ha: 1.0, capacity, start: vec![start] };
    let points = vec![at(0.0, 4.0, 3), at(2.0, 3.0, 2), at(10.0, 2.0, 1)];
    let case = Case::new("struck within a radius", points, &["all"], &life).arriving(&[
        &[0.0, 0.5, 0.2],
        &[0.6, 0.0, 0.3],
        &[0.3, 0.5, 0.0],
    ]);
    check(
        &case,
        &[
            (1, 0.005_351, 6.250_66, 2.0122, [0.936_032, 0.902_708, 0.792_556]),
            (5, 0.096_467, 4.841_60, 2.8360, [0.727_407, 0.708_119, 0.623_919]),
            (10, 0.249_375, 3.716_66, 3.0337, [0.566_991, 0.563_026, 0.497_478]),
            (20, 0.507_447, 2.370_69, 2.9638, [0.363_714, 0.364_461, 0.320_827]),
            (50, 0.865_177, 0.647_46, 1.8731, [0.099_386, 0.099_669, 0.087_666]),
        ],
    );
}

/// Yearly 0.04: at least one in 25 years 1 - 0.96^25, in 100 years 1 - 0.96^100; mean number in 100 years 4 (closed forms).
/// Where it takes everyone and nothing else kills, the network is extinct once it has struck.
#[test]
fn frequency() {
    let life = one_stage(1.0, 0.0, "poisson", "none")
        + "[[catastrophe]]\nname = \"end\"\nyearly_probability = 0.04\nstrikes = \"landscape\"\nsurvival = 0\n";
    let case = Case::new("frequency", vec![patch(10.0, &[5])], &["all"], &life);
    let seen = case.run(100);
    seen.extinct(25, 0.639_603_3);
    seen.extinct(100, 0.983_129_7);
    let struck = struck_years(&case, 100, 20_000);
    let numbers: Vec<f64> = struck.iter().map(|years| years.iter().filter(|year| year[0]).count() as f64).collect();
    seen.mean("strikes in 100 years", sample_mean(&numbers), 4.0, (100.0_f64 * 0.04 * 0.96).sqrt());
}

/// With q the chance of another year and p that of a first, struck years make up p / (p + 1 - q) of all, from the first year
/// on, and spells last 1 / (1 - q) years (two-state Markov chain): also where the state belongs to an event at one patch,
/// which then keeps its place.
#[test]
fn an_event_with_memory_keeps_its_place() {
    let (p, q, n) = (0.1, 0.6, 3.0);
    let case = struck_case("an event with memory", p, "\"one patch\"", "{ chance_of_another_year = 0.6 }");
    let seen = case.run(1);
    let struck = struck_years(&case, 12, 20_000);
    let share = p / (p + 1.0 - q);
    for year in [0, 1, 11] {
        let at_patch = |patch: usize| struck.iter().filter(|years| years[year][patch]).count() as u64;
        for patch in 0..3 {
            seen.probability(&format!("patch {patch} struck in {year}"), at_patch(patch), share / n);
        }
    }
    let moved = struck.iter().flat_map(|years| years.windows(2)).filter(|pair| {
        let at = |year: &[bool]| year.iter().position(|struck| *struck);
        matches!((at(&pair[0]), at(&pair[1])), (Some(before), Some(after)) if before != after)
    });
    assert_eq!(moved.count(), 0, "an event that runs never moves");
    let going_on = struck.iter().filter(|years| years[0] == years[1] && years[0].contains(&true)).count();
    seen.probability("struck in years 0 and 1", going_on as u64, share * q);
}

/// A clock of 3 years: struck in year t unless quiet for the last 3, P = 1 - (1 - p)^min(t + 1, 3) (closed form): none runs
/// at the start, and an event that reaches a struck patch starts its clock again.
#[test]
fn a_clock_runs_in_each_patch() {
    for (name, strikes, p) in [
        ("clock in each patch", "\"each patch\"", 0.1),
        ("clock of a radius", "{ radius_km = 0.5 }", 0.1 / 3.0),
        ("clock in the landscape", "\"landscape\"", 0.1),
    ] {
        let case = struck_case(name, 0.1, strikes, "3");
        let seen = case.run(1);
        let struck = struck_years(&case, 10, 20_000);
        for (year, quiet_years) in [(0, 1), (1, 2), (2, 3), (9, 3)] {
            let count = struck.iter().filter(|years| years[year][1]).count() as u64;
            seen.probability(
                &format!("struck in {year}"),
                count,
                1.0 - eyot::num::pow(1.0 - p, f64::from(quiet_years)),
            );
        }
    }
}

/// Where the chance of another year is that of a first, years are independent: the same as one year at a time.
#[test]
fn memory_without_memory_is_one_year_at_a_time() {
    let memory = "yearly_probability = 0.15\nstrikes = \"landscape\"\nlasts = { chance_of_another_year = 0.15 }";
    let seen = two_patches("memory without memory", &bad_year(memory)).run(50);
    for (census, extinct) in [(1, 0.003_072), (5, 0.047_979), (20, 0.245_330), (50, 0.530_777)] {
        seen.extinct(census, extinct);
    }
}

/// A radius that reaches everything is the landscape, whose chain is solved above.
#[test]
fn a_radius_beyond_everything_is_the_landscape() {
    let wide = bad_year("yearly_probability = 0.15\nstrikes = { radius_km = 1000 }");
    let seen = two_patches("radius beyond everything", &wide).run(50);
    for (census, extinct, mean, sd) in
        [(1, 0.003_072, 6.850_95, 2.1764), (10, 0.116_845, 6.219_85, 3.4728), (50, 0.530_777, 3.291_00, 3.9955)]
    {
        seen.extinct(census, extinct);
        seen.total(census, mean, sd);
    }
}

/// Of a year in the list the step from its census is struck, and no other.
#[test]
fn years_that_are_known() {
    let life = one_stage(1.0, 0.0, "poisson", "none")
        + "[[catastrophe]]\nname = \"drought\"\nyears = [2, 7]\nlasts = 2\nstrikes = \"each patch\"\nsurvival = 0.9\n";
    let case = Case::new("known years", vec![patch(10.0, &[5]), patch(10.0, &[5])], &["all"], &life);
    for years in struck_years(&case, 10, 5) {
        let struck: Vec<usize> = (0..10).filter(|year| years[*year] == [true, true]).collect();
        let quiet = years.iter().filter(|year| **year == [false, false]).count();
        assert_eq!((struck, quiet), (vec![2, 3, 7, 8], 6));
    }
}

/// What changes nothing changes no byte: a chance of 0, shares of 1, and the order in which catastrophes stand.
#[test]
fn what_changes_nothing_changes_no_byte() {
    let bad = bad_year("yearly_probability = 0.15\nstrikes = \"each patch\"");
    let storm =
        "[[catastrophe]]\nname = \"storm\"\nyearly_probability = 0.1\nstrikes = { radius_km = 2 }\nsurvival = 0.3\n";
    let frost =
        "[[catastrophe]]\nname = \"frost\"\nyearly_probability = 0.3\nstrikes = \"one patch\"\nfecundity = 0.7\n";
    let never = "[[catastrophe]]\nname = \"a never\"\nyearly_probability = 0\nstrikes = \"landscape\"\nsurvival = 0\n";
    let harmless = "[[catastrophe]]\nname = \"b harmless\"\nyearly_probability = 0.5\nstrikes = \"landscape\"\n\
                    survival = 1\ncapacity = 1.0\n";
    let bytes = |catastrophes: &str| {
        let mut case = two_patches("no byte", catastrophes);
        case.replicates = 500;
        let mut tallies = case.run(30).tallies;
        // Threads finish in any order.
        tallies.records.sort_by_key(|record| record.replicate);
        format!("{tallies:?}")
    };
    assert_eq!(bytes(""), bytes(&format!("{never}{harmless}")));
    let plain = bytes(&format!("{bad}{storm}{frost}"));
    assert_eq!(plain, bytes(&format!("{frost}{never}{bad}{storm}")));
    assert_eq!(plain, bytes(&format!("{storm}{frost}{harmless}{bad}")));
    assert_ne!(plain, bytes(&format!("{bad}{storm}")));
}

/// A share of 0 capacity empties the census under every form, and there are no young; those who leave in that year are
/// saved. By hand: adults live (but for one in a million), all of them leave, each arrives; where one of the two patches
/// has no capacity, its own adults are all that is left.
#[test]
fn without_capacity_only_emigrants_live() {
    let flood = "[[catastrophe]]\nname = \"flood\"\nyears = [0]\ncapacity = 0\n";
    for form in ["none", "ceiling", "ricker", "beverton-holt"] {
        let life = one_stage(0.999_999, 0.5, "poisson", form);
        let case = |rest: &str| {
            let points = vec![patch(9.0, &[5]), patch(9.0, &[3])];
            let mut case = Case::new("no capacity", points, &["all"], &(life.clone() + rest));
            case.replicates = 100;
            case
        };
        let seen = case(&format!("{flood}strikes = \"landscape\"\n")).run(2);
        assert!(seen.tallies.records.iter().all(|record| record.totals == [8, 0, 0]), "{form}");
        let one = case(&format!("emigration = 1\n{flood}strikes = \"one patch\"\n"));
        let left = totals(&one.arriving(&[&[0.0, 1.0], &[1.0, 0.0]]).run(1), 1);
        assert!(left.iter().all(|total| [3.0, 5.0].contains(total)), "{form}: {left:?}");
        assert!(left.contains(&3.0) && left.contains(&5.0), "{form}: either patch is struck at times");
    }
}

/// The capacity that a struck year leaves counts in N/K: growth is exactly 1 where N is the capacity left (the scaling of
/// both forms; mean and variance of one step by hand).
#[test]
fn the_capacity_left_counts_in_crowding() {
    for form in ["ricker", "beverton-holt"] {
        let life = one_stage(0.5, 0.8, "poisson", form)
            + "[[catastrophe]]\nname = \"drought\"\nyears = [0]\nstrikes = \"landscape\"\ncapacity = 0.25\n";
        let seen = Case::new("crowding in a drought", vec![patch(400.0, &[100])], &["all"], &life).run(1);
        // Variance of a step at capacity: survival 0.5 and 0.5 Poisson young each.
        seen.total(1, 100.0, (100.0_f64 * (0.25 + 0.5)).sqrt());
    }
}

fn struck_case(name: &'static str, p: f64, strikes: &str, lasts: &str) -> Case {
    let life = one_stage(0.7, 0.7, "poisson", "none")
        + &format!(
            "[[catastrophe]]\nname = \"event\"\nyearly_probability = {p}\nstrikes = {strikes}\nlasts = {lasts}\nsurvival = 0.5\n"
        );
    Case::new(name, vec![patch(9.0, &[1]), patch(9.0, &[1]), patch(9.0, &[1])], &["all"], &life)
}

/// `[replicate][year][patch]`: whether the case's only catastrophe strikes.
fn struck_years(case: &Case, years: u32, replicates: u32) -> Vec<Vec<Vec<bool>>> {
    let prepared = case.prepare(1);
    let patches = &prepared.landscape.patches;
    let centroids: Vec<[f64; 2]> = patches.iter().map(|patch| patch.centroid_km).collect();
    let keys: Vec<u64> = patches.iter().map(|patch| eyot::random::patch_key(&patch.name)).collect();
    let catastrophes =
        eyot::environment::Catastrophes::compile(&prepared.catastrophes, &centroids, &keys).expect("one that acts");
    let mut state = catastrophes.state();
    let mut year = |replicate, year| {
        catastrophes.draw(&mut state, ReplicateKey::new(prepared.settings.seed, replicate).year(year), year);
        (0..patches.len()).map(|patch| state.left(patch).survival < 1.0).collect()
    };
    (1..=replicates).map(|replicate| (0..years).map(|at| year(replicate, at)).collect()).collect()
}

fn totals(seen: &Seen, census: usize) -> Vec<f64> {
    seen.tallies.records.iter().map(|record| record.totals[census] as f64).collect()
}

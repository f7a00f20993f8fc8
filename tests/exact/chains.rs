//! Whole individuals under a ceiling, solved as absorbing Markov chains (Kemeny & Snell 1960, Finite Markov Chains,
//! from memory). Columns: year, P(extinct), mean and sd of the total, P(patch occupied).

use crate::support::{Case, Seen, one_stage, patch, sample_mean};

/// Year, P(extinct), mean, sd.
type Row = (usize, f64, f64, f64);

fn check(seen: &Seen, rows: &[Row]) {
    for &(census, extinct, mean, sd) in rows {
        seen.extinct(census, extinct);
        seen.total(census, mean, sd);
    }
}

#[test]
fn one_patch() {
    let case = Case::new("one patch", vec![patch(10.0, &[5])], &["all"], &one_stage(0.6, 0.45, "poisson", "ceiling"));
    let seen = case.below(3).run(100);
    check(
        &seen,
        &[
            (1, 0.001_079, 5.242_85, 1.8357),
            (5, 0.074_611, 5.467_54, 3.2693),
            (10, 0.193_452, 5.094_86, 3.7051),
            (20, 0.363_649, 4.178_02, 3.9619),
            (50, 0.666_758, 2.203_45, 3.5614),
            (100, 0.885_800, 0.755_12, 2.3325),
        ],
    );
    for (census, below) in [(1, 0.056_831), (5, 0.310_839), (10, 0.454_711), (20, 0.624_701), (50, 0.874_086)] {
        seen.quasi_extinct(census, below);
    }
    // Expected minimum abundance, McCarthy & Thompson 2001, Anim. Conserv. 4 (formula from memory).
    seen.lowest(10, 2.693_099);
    seen.lowest(50, 0.754_936);
    seen.occupied_at_end(&[0.114_200]);
}

/// In one patch the patch's own threshold is the network's: the same exact numbers.
#[test]
fn a_threshold_in_each_patch() {
    let life = one_stage(0.6, 0.45, "poisson", "ceiling");
    let mut case = Case::new("a threshold in each patch", vec![patch(10.0, &[5]), patch(10.0, &[2])], &["all"], &life);
    case.quasi_extinction = Some("{ below = 1, in_each_patch = 3 }".to_owned());
    let seen = case.run(20);
    seen.probability("patch 1 below 3 by 20", seen.tallies.patches[0].quasi_extinct, 0.624_701);
    assert_eq!(seen.tallies.patches[1].quasi_extinct, u64::from(crate::support::REPLICATES), "it starts below 3");
}

#[test]
fn at_most_one_young() {
    let life = one_stage(0.6, 0.45, "at most one", "ceiling");
    let case = Case::new("at most one young", vec![patch(10.0, &[5])], &["all"], &life);
    check(
        &case.run(50),
        &[
            (1, 0.000_515, 5.250_00, 1.5612),
            (5, 0.043_075, 5.792_25, 3.0496),
            (10, 0.123_758, 5.731_04, 3.5162),
            (20, 0.247_180, 5.194_88, 3.8922),
            (50, 0.486_564, 3.598_64, 4.0550),
        ],
    );
}

#[test]
fn counts() {
    let life = "[life_history]\nkind = \"counts\"\ngrowth = 1.10\ndensity_dependence = { form = \"ceiling\" }\n";
    let case = Case::new("counts", vec![patch(12.0, &[6])], &["all"], life);
    check(
        &case.run(50),
        &[
            (1, 0.001_360, 6.568_55, 2.4866),
            (5, 0.081_189, 7.239_59, 4.1235),
            (10, 0.184_610, 6.929_82, 4.6057),
            (20, 0.322_065, 5.942_44, 4.9831),
            (50, 0.590_766, 3.598_71, 4.8496),
        ],
    );
}

fn two_patches(name: &'static str, emigration: f64, survival: f64, fecundity: f64) -> Case {
    let life = one_stage(survival, fecundity, "poisson", "ceiling") + &format!("emigration = {emigration}\n");
    let case = Case::new(name, vec![patch(6.0, &[4]), patch(4.0, &[2])], &["all"], &life);
    if emigration > 0.0 { case.arriving(&[&[0.0, 0.8], &[0.8, 0.0]]) } else { case }
}

#[test]
fn two_patches_with_dispersal() {
    let case = two_patches("two patches with dispersal", 0.2, 0.6, 0.6).below(3);
    let seen = case.run(50);
    check(
        &seen,
        &[
            (1, 0.000_183, 6.572_08, 1.8251),
            (5, 0.023_071, 6.636_87, 2.6756),
            (10, 0.073_579, 6.249_81, 3.0325),
            (20, 0.174_763, 5.543_57, 3.4626),
            (50, 0.419_828, 3.895_24, 3.8519),
        ],
    );
    for (census, below) in [(5, 0.127_630), (10, 0.238_854), (20, 0.414_289), (50, 0.732_396)] {
        seen.quasi_extinct(census, below);
    }
    seen.lowest(20, 2.913_939);
    seen.occupied_at_end(&[0.544_539, 0.543_675]);
    case.run(1).occupied_at_end(&[0.992_770, 0.952_904]);
    case.run(10).occupied_at_end(&[0.871_376, 0.869_155]);
    case.run(20).occupied_at_end(&[0.774_702, 0.773_447]);
}

/// Events and movers over 20 years: means a replicate. Their sd is not in the table of nulls; a variance of ten times the mean
/// stands for it, which sees errors of 2 to 5 % in emigrants, immigrants, years and numbers, and of 12 to 15 % in the rarer
/// extinctions and recolonisations.
#[test]
fn events_and_movers_of_two_patches() {
    let seen = two_patches("events and movers of two patches", 0.2, 0.6, 0.6).run(20);
    let n = f64::from(crate::support::REPLICATES);
    let nulls: [[f64; 2]; 6] = [
        [0.570_381, 0.701_166],
        [0.345_083, 0.474_613],
        [17.426_77, 17.260_35],
        [17.318_96, 12.535_24],
        [10.028_20, 13.855_17],
        [3.157_35, 2.386_22],
    ];
    for (position, patch) in seen.tallies.patches.iter().enumerate() {
        let means = [
            patch.local_extinctions as f64,
            patch.recolonisations as f64,
            patch.years_occupied as f64,
            patch.emigrants as f64,
            patch.immigrants as f64,
            patch.abundance_at_end as f64,
        ];
        for (what, (sum, null)) in ["extinctions", "recolonisations", "years", "emigrants", "immigrants", "at end"]
            .iter()
            .zip(means.iter().zip(nulls))
        {
            seen.mean(
                &format!("{what} of patch {}", position + 1),
                sum / n,
                null[position],
                (10.0 * null[position]).sqrt(),
            );
        }
    }
    let lost: u64 = seen.tallies.patches.iter().map(|patch| patch.emigrants - patch.arrived_elsewhere).sum();
    seen.mean("lost on the way", lost as f64 / n, 5.970_84, (10.0 * 5.970_84_f64).sqrt());
    let arrived: u64 = seen.tallies.patches.iter().map(|patch| patch.immigrants).sum();
    assert_eq!(arrived, seen.tallies.movers.iter().sum::<u64>(), "every mover arrives once");
}

/// Settlement `shared` with path mortality gives the same arrival of 0.8 as the measured table: exp(-mu d) = 0.8.
#[test]
fn two_patches_through_a_kernel() {
    let life = one_stage(0.6, 0.6, "poisson", "ceiling")
        + "emigration = 0.2\n[dispersal]\nkernel = { shape = \"exponential\", mean_km = 1.4 }\nsettlement = \"shared\"\n\
           path_mortality_per_km = 0.22314355131420976\n";
    let case = Case::new("two patches through a kernel", vec![patch(6.0, &[4]), patch(4.0, &[2])], &["all"], &life);
    check(&case.run(20), &[(5, 0.023_071, 6.636_87, 2.6756), (20, 0.174_763, 5.543_57, 3.4626)]);
}

/// Without dispersal, P(all extinct) is the product of the patches' own.
#[test]
fn two_patches_apart() {
    let case = two_patches("two patches apart", 0.0, 0.6, 0.6);
    let seen = case.run(50);
    check(
        &seen,
        &[
            (1, 0.000_112, 6.828_30, 1.7902),
            (10, 0.043_931, 6.382_24, 2.7566),
            (20, 0.125_280, 5.275_82, 3.0081),
            (50, 0.399_332, 3.118_79, 2.9766),
        ],
    );
    seen.occupied_at_end(&[0.523_922, 0.161_205]);
    case.run(20).occupied_at_end(&[0.772_623, 0.449_021]);
}

fn three_patches(name: &'static str) -> Case {
    let life = one_stage(0.6, 0.6, "poisson", "ceiling") + "emigration = 0.2\n";
    let points = vec![patch(5.0, &[4]), patch(3.0, &[2]), patch(2.0, &[1])];
    Case::new(name, points, &["all"], &life).arriving(&[&[0.0, 0.5, 0.2], &[0.6, 0.0, 0.3], &[0.3, 0.5, 0.0]])
}

#[test]
fn three_patches_with_a_measured_table() {
    let seen = three_patches("three patches with a measured table").run(20);
    seen.extinct(20, 0.248_426);
    let totals: Vec<f64> = seen.tallies.records.iter().map(|record| record.totals[20] as f64).collect();
    seen.mean("total at 20", sample_mean(&totals), 4.111_92, crate::support::sample_sd(&totals));
    seen.lowest(20, 2.245_03);
    seen.occupied_at_end(&[0.635_435, 0.621_059, 0.464_300]);
}

/// Four patches whose arrivals come from an exponential kernel and `shared` settlement; the arrival rows are the
/// table's too.
#[test]
fn four_patches_with_shared_settlement() {
    let life = one_stage(0.6, 0.55, "poisson", "ceiling")
        + "emigration = 0.25\n[dispersal]\nkernel = { shape = \"exponential\", mean_km = 1.5 }\nsettlement = \"shared\"\n\
           path_mortality_per_km = 0.1\n";
    let places = [[0.0, 0.0], [2.0, 0.0], [2.0, 1.5], [5.0, 1.5]];
    let points = places
        .iter()
        .zip([(3.0, 4.0, 3), (2.0, 3.0, 2), (2.0, 3.0, 2), (1.0, 2.0, 1)])
        .map(|(at_km, (area_ha, capacity, start))| crate::support::Point {
            at_km: *at_km,
            area_ha,
            capacity,
            start: vec![start],
        })
        .collect();
    let case = Case::new("four patches with shared settlement", points, &["all"], &life);
    let arrivals = [
        [0.0, 0.538_552, 0.263_017, 0.002_665],
        [0.347_909, 0.0, 0.474_918, 0.016_651],
        [0.210_472, 0.588_292, 0.0, 0.034_263],
        [0.027_101, 0.262_111, 0.435_422, 0.0],
    ];
    for link in &case.prepare(20).network.links {
        let expected = arrivals[link.from as usize][link.to as usize];
        assert!((link.probability - expected).abs() < 5.1e-7, "{link:?} is not {expected}");
    }
    let seen = case.run(20);
    seen.extinct(20, 0.335_116);
    let totals: Vec<f64> = seen.tallies.records.iter().map(|record| record.totals[20] as f64).collect();
    seen.mean("total at 20", sample_mean(&totals), 3.196_64, crate::support::sample_sd(&totals));
    seen.lowest(20, 1.748_47);
}

#[test]
fn two_stages_under_a_ceiling() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"ceiling\" }\n\
        [[life_history.stage]]\nname = \"juvenile\"\nsurvival = 0.5\n\
        [[life_history.stage]]\nname = \"adult\"\nsurvival = 0.75\nfecundity = 0.6\n";
    let case = Case::new("two stages under a ceiling", vec![patch(12.0, &[4, 4])], &["juvenile", "adult"], life);
    check(
        &case.run(50),
        &[
            (1, 0.000_022, 7.386_24, 1.9995),
            (5, 0.010_631, 7.836_22, 3.2831),
            (10, 0.050_545, 7.529_72, 3.7506),
            (20, 0.145_160, 6.773_82, 4.2411),
            (50, 0.381_875, 4.896_70, 4.7111),
        ],
    );
}

/// Emigration is that of the stage after the advance.
#[test]
fn dispersal_by_stage() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"ceiling\" }\n\
        [[life_history.stage]]\nname = \"juvenile\"\nsurvival = 0.5\nemigration = 0.4\n\
        [[life_history.stage]]\nname = \"adult\"\nsurvival = 0.75\nfecundity = 0.7\nemigration = 0.1\n";
    let case =
        Case::new("dispersal by stage", vec![patch(5.0, &[1, 3]), patch(4.0, &[0, 1])], &["juvenile", "adult"], life)
            .arriving(&[&[0.0, 0.7], &[0.7, 0.0]]);
    let seen = case.run(50);
    check(
        &seen,
        &[
            (1, 0.000_242, 5.587_17, 1.5498),
            (5, 0.045_610, 4.649_46, 2.3903),
            (10, 0.166_591, 3.766_39, 2.6735),
            (20, 0.409_109, 2.559_46, 2.7530),
            (50, 0.804_060, 0.842_19, 1.9793),
        ],
    );
    seen.occupied_at_end(&[0.166_933, 0.166_384]);
    case.run(10).occupied_at_end(&[0.728_027, 0.715_696]);
}

/// Beverton-Holt and Ricker on fecundity (multiplier 2/3 at K); the chain was cut at 60, mass beyond below 1e-12.
#[test]
fn density_dependence_on_fecundity() {
    let case = |name, form| Case::new(name, vec![patch(8.0, &[8])], &["all"], &one_stage(0.6, 0.6, "poisson", form));
    check(
        &case("beverton-holt on fecundity", "beverton-holt").run(50),
        &[
            (1, 0.000_027, 8.000_00, 2.2627),
            (5, 0.016_496, 7.614_25, 3.9195),
            (10, 0.075_032, 6.969_04, 4.4127),
            (20, 0.208_279, 5.864_62, 4.7471),
            (50, 0.514_421, 3.582_94, 4.6751),
        ],
    );
    check(
        &case("ricker on fecundity", "ricker").run(50),
        &[
            (1, 0.000_027, 8.000_00, 2.2627),
            (5, 0.015_775, 7.496_98, 3.7163),
            (10, 0.071_767, 6.789_42, 4.1142),
            (20, 0.201_437, 5.708_02, 4.4470),
            (50, 0.504_217, 3.529_36, 4.4538),
        ],
    );
}

/// After a start-up the hazard is constant.
#[test]
fn constant_hazard_in_the_end() {
    let life = one_stage(0.6, 0.45, "poisson", "ceiling");
    let seen = Case::new("constant hazard in the end", vec![patch(20.0, &[20])], &["all"], &life).run(500);
    for (census, persist) in [(100, 0.653_597_5), (200, 0.385_477_8), (500, 0.079_078_2)] {
        seen.extinct(census, 1.0 - persist);
    }
}

/// Persistence never rises, quasi-extinction never falls, and without dispersal the extinct stay so.
#[test]
fn extinction_is_for_good() {
    let seen = two_patches("extinction is for good", 0.0, 0.6, 0.5).below(3).run(50);
    for record in &seen.tallies.records {
        let first_empty = record.totals.iter().position(|total| *total == 0);
        if let Some(first) = first_empty {
            assert!(record.totals[first..].iter().all(|total| *total == 0));
        }
    }
    assert!(seen.tallies.patches.iter().all(|patch| patch.recolonisations == 0));
}

/// A patch without capacity: it has no young, its survivors may leave, and the census finds it empty. Of 1,000 adults
/// binomial(1000, 0.9 x 0.5) leave alive; the rest are gone. (Under a ceiling nobody starts there.)
#[test]
fn a_patch_without_capacity_is_left_or_emptied() {
    for (name, form) in [("no capacity none", "none"), ("no capacity ricker", "ricker")] {
        let life = one_stage(0.9, 0.6, "poisson", form) + "emigration = 0.5\n";
        let points = vec![patch(0.0, &[1000]), patch(1e6, &[0])];
        let case = Case::new(name, points, &["all"], &life).arriving(&[&[0.0, 1.0], &[0.0, 0.0]]);
        let seen = case.run(1);
        let n = f64::from(crate::support::REPLICATES);
        let [left, founded] = [0, 1].map(|patch: usize| &seen.tallies.patches[patch]);
        let sd = (1000.0 * 0.45 * 0.55_f64).sqrt();
        seen.mean("emigrants", left.emigrants as f64 / n, 450.0, sd);
        seen.mean("founders", founded.abundance_at_end as f64 / n, 450.0, sd);
        assert_eq!(left.abundance_at_end, 0, "{name}");
    }
}

/// Where numbers pass the largest count they stop there, and every replicate says so.
#[test]
fn numbers_that_pass_the_largest_count_are_flagged() {
    let life = "[life_history]\nkind = \"stages\"\ndensity_dependence = { form = \"none\" }\n\
        [[life_history.stage]]\nname = \"juvenile\"\nsurvival = 0.5\n\
        [[life_history.stage]]\nname = \"adult\"\nsurvival = 0.3\nfecundity = 50\n";
    let mut case = Case::new("largest count", vec![patch(1e9, &[1000, 1000])], &["juvenile", "adult"], life);
    case.replicates = 20;
    let seen = case.run(30);
    assert!(seen.tallies.records.iter().all(|record| record.saturated));
    assert!(case.run(3).tallies.records.iter().all(|record| !record.saturated));
}

//! What must hold between the files of an outcome, and between two studies, whatever the numbers are.

#![expect(clippy::unwrap_used, reason = "a test stops where a file is not as it should be")]

#[path = "helpers/site.rs"]
mod site;

use std::collections::BTreeMap;

use proptest::test_runner::{Config, RngAlgorithm, TestRng, TestRunner};
use site::Site;

/// A study with these rates; the form of density dependence as `form` says.
fn site(form: &str, survival: f64, fecundity: f64, emigration: f64, mean_km: f64, seed: u32) -> Site {
    Site::new(&[
        ("seed = 7", &format!("seed = {seed}")),
        ("replicates = 40", "replicates = 60"),
        ("form = \"beverton-holt\", acts_on = [\"fecundity\"]", form),
        ("mean = 0.5, sd = 0.1", &format!("mean = {survival}, sd = 0.1")),
        ("mean = 1.4, sd = 0.5", &format!("mean = {fecundity}, sd = 0.5")),
        ("emigration = 0.2", &format!("emigration = {emigration}")),
        ("mean_km = 1.4", &format!("mean_km = {mean_km}")),
    ])
}

const FORMS: [&str; 3] = [
    "form = \"beverton-holt\", acts_on = [\"fecundity\"]",
    "form = \"ceiling\"",
    "form = \"ricker\", acts_on = [\"fecundity\"]",
];

/// Twenty studies drawn at random, from a generator with a fixed seed.
fn for_studies(check: impl Fn(&Site)) {
    let seed = *b"whole studies, drawn at random .";
    let config = Config { cases: 20, failure_persistence: None, ..Config::default() };
    let mut runner = TestRunner::new_with_rng(config, TestRng::from_seed(RngAlgorithm::ChaCha, &seed));
    let studies = (0..FORMS.len(), 0.15..0.85, 0.1..3.0, 0.01..0.9, 0.3..6.0, 0_u32..1_000_000);
    let result = runner.run(&studies, |(form, survival, fecundity, emigration, mean_km, seed)| {
        let site = site(FORMS[form], survival, fecundity, emigration, mean_km, seed);
        site.call(&["run", "study.toml", "--quiet"], 0);
        check(&site);
        Ok(())
    });
    result.unwrap();
}

/// Nobody is released, so what is empty stays empty, and what fell below the threshold once has done so for good.
#[test]
fn persistence_never_rises_and_quasi_extinction_never_falls() {
    for_studies(|site| {
        let column = |name: &str| site.numbers("outcome/by_year.csv", name);
        let (persistence, quasi_extinction) = (column("persistence"), column("quasi_extinction"));
        assert_eq!((persistence.len(), persistence[0], quasi_extinction[0]), (21, 1.0, 0.0));
        assert!(persistence.windows(2).all(|years| years[1] <= years[0]), "{persistence:?}");
        assert!(quasi_extinction.windows(2).all(|years| years[1] >= years[0]), "{quasi_extinction:?}");
        // An empty network is below any threshold.
        let bound = persistence.iter().zip(&quasi_extinction);
        assert!(bound.clone().all(|(persists, fallen)| *fallen >= 1.0 - persists - 1e-12));
    });
}

/// Who arrives in a patch came along its links; who left it went along them or was lost.
#[test]
fn links_and_patches_tell_of_the_same_movers() {
    for_studies(|site| {
        let sums = |end: &str| {
            let mut sums: BTreeMap<String, f64> = BTreeMap::new();
            let ends = site.column("outcome/by_link.csv", end);
            for (patch, movers) in ends.into_iter().zip(site.numbers("outcome/by_link.csv", "movers_per_year")) {
                *sums.entry(patch).or_default() += movers;
            }
            sums
        };
        let (left, arrived) = (sums("from"), sums("to"));
        let column = |name: &str| site.numbers("outcome/by_patch.csv", name);
        let rows = column("immigrants_per_year").into_iter().zip(column("emigrants_per_year"));
        let rows = rows.zip(column("net_export_per_year"));
        let names = site.column("outcome/by_patch.csv", "patch");
        assert_eq!(names.len(), 6);
        let mut all = 0.0;
        for (name, ((immigrants, emigrants), net_export)) in names.iter().zip(rows) {
            let [left, arrived] = [&left, &arrived].map(|sums| sums.get(name).copied().unwrap_or(0.0));
            let near = |a: f64, b: f64| (a - b).abs() <= 1e-9 * (1.0 + a.abs() + b.abs());
            assert!(near(immigrants, arrived), "{name}: {immigrants} immigrants, {arrived} along links");
            assert!(left <= emigrants + 1e-9, "{name}: {left} along links, {emigrants} emigrants");
            assert!(near(net_export, left - arrived), "{name}: {net_export}, {left}, {arrived}");
            all += immigrants;
        }
        assert!(all > 0.0, "nobody moved: the test looks at nothing");
    });
}

/// Twice the room and twice the animals keep a network at least as well, under every form whose growth falls with N/K
/// alone: common practice, and a limit of the model, since the doubled network is the old one twice over that shares.
///
/// Null: no lower. 1,000 replicates each, seed of the study; fails if lower by more than 4 standard errors of the difference,
/// sqrt((p q + P Q) / n), P and p the two shares. False alarm at most 3e-5 a form. The studies are chosen so that about
/// half of the networks last, and doubling is held to show.
#[test]
fn twice_the_capacity_never_hurts() {
    const N: f64 = 1000.0;
    for form in &FORMS[..2] {
        let persistence = |times: f64| {
            let features: Vec<String> = (0..6)
                .map(|i| {
                    let (capacity, count) = (times * (6.0 + f64::from(i)), times * f64::from(3 + i / 2));
                    site::square(&format!("Fen {i}"), -31.1 + 0.011 * f64::from(i), 47.17, capacity, count as u32)
                })
                .collect();
            let changes = [
                ("replicates = 40", "replicates = 1000"),
                ("mean = 0.35", "mean = 0.2"),
                ("form = \"beverton-holt\", acts_on = [\"fecundity\"]", form),
            ];
            let site = Site::with_patches(&site::collection(&features), &changes);
            site.call(&["run", "study.toml", "--quiet"], 0);
            site.numbers("outcome/by_year.csv", "persistence")[20]
        };
        let (once, twice) = (persistence(1.0), persistence(2.0));
        let se = ((once * (1.0 - once) + twice * (1.0 - twice)) / N).sqrt();
        assert!(twice >= once - 4.0 * se, "{form}: {once}, doubled {twice}, se {se}");
        assert!(once < 0.9 && twice > once + 4.0 * se, "{form}: {once}, doubled {twice}: the study shows nothing");
    }
}

/// Independent patches: the network is empty when all of them are, so its chance is the product of theirs.
///
/// Null: P(all empty at the end) = product of the patches' own. 8,000 replicates, seed of the study. The estimate of the
/// product varies with those of its factors, which come from the same replicates: to first order the difference has
/// variance (P (1 - P) - sum over patches of (P / q)^2 q (1 - q)) / n, q being a patch's chance (delta method, with the
/// covariance of the network's and a patch's indicator P (1 - q)). Passes within 4 of its roots; false alarm 6e-5.
#[test]
fn without_links_and_with_weather_of_their_own_patches_die_alone() {
    const N: f64 = 8000.0;
    let features = &site::fens()[..3];
    let changes = [
        ("horizon = 20", "horizon = 12"),
        ("replicates = 40", "replicates = 8000"),
        ("mean = 0.35", "mean = 0.2"),
        ("emigration = 0.2\n", ""),
        ("{ reach_km = 12.0 }", "\"none\""),
    ];
    let difference = |correlation: &str| {
        let site = Site::with_patches(&site::collection(features), &changes);
        site.write("study.toml", &site.read("study.toml").replace("\"none\"", correlation));
        site.call(&["run", "study.toml", "--quiet"], 0);
        let network = 1.0 - site.numbers("outcome/by_year.csv", "persistence")[12];
        let own: Vec<f64> = site.numbers("outcome/by_patch.csv", "occupied_at_end").iter().map(|p| 1.0 - p).collect();
        assert!(own.iter().all(|q| (0.1..0.9).contains(q)), "{own:?}: the study shows nothing");
        let product: f64 = own.iter().product();
        let explained: f64 = own.iter().map(|q| product * product * (1.0 - q) / q).sum();
        let se = ((product * (1.0 - product) - explained) / N).sqrt();
        (network - product) / se
    };
    let alone = difference("\"none\"");
    assert!(alone.abs() <= 4.0, "{alone} standard errors");
    let together = difference("\"full\"");
    assert!(together > 8.0, "common years must show: {together} standard errors");
}

//! The same study and seed give the same bytes: whatever the threads, the order of the features, or the folder that the
//! call comes from; and more replicates only add to those there are.

#![expect(clippy::unwrap_used, reason = "a test stops where a file is not as it should be")]

#[path = "helpers/site.rs"]
mod site;

use site::{Site, collection, fens};

const REPLICATES: (&str, &str) = ("replicates = 40", "replicates = 1000");

#[test]
fn any_number_of_threads() {
    let site = Site::new(&[("replicates = 40", "replicates = 200")]);
    for threads in ["1", "2", "3"] {
        site.call(&["run", "study.toml", "--threads", threads, "--out", threads], 0);
    }
    site.call(&["run", "study.toml", "--out", "default"], 0);
    let one = site.bytes("1");
    assert!(one.len() > 10_000, "an outcome has more to say than {} bytes", one.len());
    for other in ["2", "3", "default"] {
        assert!(site.bytes(other) == one, "{other} threads give other bytes than 1");
    }
}

#[test]
fn features_in_any_order() {
    let site = Site::new(&[]);
    site.call(&["run", "study.toml"], 0);
    let mut features = fens();
    features.reverse();
    features.swap(1, 3);
    let shuffled = Site::with_patches(&collection(&features), &[]);
    shuffled.call(&["run", "study.toml"], 0);
    assert_ne!(site.read("fens.geojson"), shuffled.read("fens.geojson"));
    for name in
        ["by_year.csv", "by_patch.csv", "by_patch.geojson", "by_link.csv", "by_link.geojson", "by_replicate.csv"]
    {
        let file = format!("outcome/{name}");
        assert!(site.read(&file) == shuffled.read(&file), "{name}");
    }
    let [mut outcome, mut other] = [&site, &shuffled].map(|site| site.json("outcome/outcome.json"));
    assert_ne!(outcome["inputs"], other["inputs"], "the file is another, and its hash says so");
    outcome["inputs"].take();
    other["inputs"].take();
    assert_eq!(outcome, other);
}

#[test]
fn any_path_and_any_folder() {
    let site = Site::new(&[]);
    std::fs::create_dir_all(site.path("a/b")).unwrap();
    let absolute = site.path("study.toml").to_str().unwrap().to_owned();
    for (words, folder, out) in [
        ("study.toml", "", "1"),
        ("./study.toml", "", "2"),
        (absolute.as_str(), "", "3"),
        (absolute.as_str(), "a", "4"),
        ("../../study.toml", "a/b", "5"),
    ] {
        let target = site.path(out);
        let call = ["run", words, "--out", target.to_str().unwrap()];
        site.eyot(&call).current_dir(site.path(folder)).assert().code(0);
        assert!(site.bytes(out) == site.bytes("1"), "{words} from {folder:?}");
    }
}

/// A note names a file, which must not depend on where the call comes from.
#[test]
fn notes_are_the_same_from_any_folder() {
    let far = site::square("Far Fen", -31.5, 47.17, 12.0, 6);
    let mut features = fens();
    features.push(far);
    // Overlapping ground is noted at a feature of the file.
    features.push(site::square("Half Fen", -31.0985, 47.17, 12.0, 6));
    let site = Site::with_patches(&collection(&features), &[]);
    std::fs::create_dir(site.path("a")).unwrap();
    site.call(&["run", "study.toml", "--out", "1"], 0);
    assert!(site.json("1/outcome.json")["warnings"].as_array().unwrap().len() >= 2);
    site.eyot(&["run", "../study.toml", "--out", "../2"]).current_dir(site.path("a")).assert().code(0);
    let absolute = site.path("study.toml").to_str().unwrap().to_owned();
    site.call(&["run", &absolute, "--out", "3"], 0);
    assert_eq!(site.read("1/outcome.json"), site.read("2/outcome.json"));
    assert_eq!(site.read("1/outcome.json"), site.read("3/outcome.json"));
}

#[test]
fn more_replicates_only_add() {
    let site = Site::new(&[REPLICATES]);
    site.call(&["run", "study.toml", "--replicates", "500", "--out", "half"], 0);
    site.call(&["run", "study.toml", "--out", "whole"], 0);
    let (half, whole) = (site.read("half/by_replicate.csv"), site.read("whole/by_replicate.csv"));
    assert_eq!((half.lines().count(), whole.lines().count()), (501, 1001));
    assert!(whole.starts_with(&half));
}

#[test]
fn a_precision_is_a_number_of_replicates_found_out() {
    for (precision, least) in [(0.03, 1000), (0.01, 1500)] {
        // Survival that leaves the network in doubt, so that 1,000 replicates are not enough for the narrower one.
        let doubt = ("mean = 0.35", "mean = 0.2");
        let site = Site::new(&[("replicates = 40", &format!("precision = {precision}")), doubt]);
        site.call(&["run", "study.toml", "--out", "precise"], 0);
        let outcome = site.json("precise/outcome.json");
        let done = outcome["replicates"]["done"].as_u64().unwrap();
        assert!(done >= least && done.is_multiple_of(500), "{done}");
        let half_width = |folder: &str| {
            let last = |name: &str| site.numbers(&format!("{folder}/by_year.csv"), name)[20];
            (last("persistence_high") - last("persistence_low")) / 2.0
        };
        assert!(half_width("precise") <= precision);

        site.call(&["run", "study.toml", "--out", "as-many", "--replicates", &done.to_string()], 0);
        for file in ["by_year.csv", "by_patch.csv", "by_link.csv", "by_replicate.csv"] {
            assert!(site.read(&format!("precise/{file}")) == site.read(&format!("as-many/{file}")), "{file}");
        }
        if done > 1000 {
            let fewer = (done - 500).to_string();
            site.call(&["run", "study.toml", "--out", "fewer", "--replicates", &fewer], 0);
            assert!(half_width("fewer") > precision, "a batch less would have done");
        }
    }
}

/// Null: a patch's name changes its luck and not its distribution. Two independent runs of 4,000 replicates, the seed that
/// of the study; each number passes within 4 standard errors of the difference, sqrt(s1^2 + s2^2), with se of a proportion
/// sqrt(p q / n) at the pooled p, and of a mean from the run's own sd. False alarm 6e-5 a number.
#[test]
fn a_name_is_luck_and_no_more() {
    const N: f64 = 4000.0;
    let changes = [("replicates = 40", "replicates = 4000")];
    let site = Site::new(&changes);
    site.call(&["run", "study.toml"], 0);
    let renamed: Vec<String> = fens().iter().map(|fen| fen.replace(" Fen\"", " Mire\"")).collect();
    let other = Site::with_patches(&collection(&renamed), &changes);
    other.call(&["run", "study.toml"], 0);
    assert_ne!(site.read("outcome/by_year.csv"), other.read("outcome/by_year.csv"), "another name is other luck");

    let both = |file: &str, name: &str| [&site, &other].map(|site| site.numbers(&format!("outcome/{file}"), name));
    let mut compared = 0;
    let mut proportion = |what: &str, a: f64, b: f64| {
        let pooled = (a + b) / 2.0;
        let se = (2.0 * pooled * (1.0 - pooled) / N).sqrt();
        assert!((a - b).abs() <= 4.0 * se, "{what}: {a} and {b}, se {se}");
        compared += 1;
    };
    for (file, name) in
        [("by_year.csv", "persistence"), ("by_year.csv", "quasi_extinction"), ("by_patch.csv", "occupied_at_end")]
    {
        let [first, second] = both(file, name);
        first.iter().zip(&second).for_each(|(a, b)| proportion(name, *a, *b));
    }
    assert_eq!(compared, 21 + 21 + 6);
    let ([mean, other_mean], [sd, other_sd]) =
        (both("by_year.csv", "mean_abundance"), both("by_year.csv", "sd_abundance"));
    for year in 0..=20 {
        let se = (sd[year] * sd[year] + other_sd[year] * other_sd[year]).sqrt() / N.sqrt();
        assert!((mean[year] - other_mean[year]).abs() <= 4.0 * se, "year {year}: {} {}", mean[year], other_mean[year]);
    }
}

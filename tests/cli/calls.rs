//! What is called and what is printed.

use std::fs;

use serde_json::Value;

use super::site::{Site, collection, fens};

#[test]
fn help_goes_to_standard_output_and_has_examples() {
    let site = Site::new(&[]);
    for (words, example) in [
        (&["--help"][..], "eyot run my-study/study.toml"),
        (&["new", "--help"], "eyot new my-study --patches patches.geojson"),
        (&["check", "--help"], "eyot check study.toml"),
        (&["run", "--help"], "eyot run study.toml --out results --replicates 10000"),
    ] {
        let (out, told) = site.call(words, 0);
        assert!(out.contains(example), "{out}");
        assert_eq!(told, "");
    }
    let (version, _) = site.call(&["--version"], 0);
    assert_eq!(version, format!("eyot {}\n", env!("CARGO_PKG_VERSION")));
}

#[test]
fn a_wrong_call_is_code_2_and_writes_nothing() {
    let site = Site::new(&[]);
    fs::create_dir(site.path("folder")).unwrap();
    let before = site.names();
    for words in [
        &[][..],
        &["rum", "study.toml"],
        &["run"],
        &["run", "study.toml", "--thread", "2"],
        &["run", "study.toml", "--replicates", "0"],
        &["run", "study.toml", "--replicates", "many"],
        &["run", "study.toml", "--threads", "0"],
        &["run", "study.toml", "--seed", "-1"],
        &["run", "missing.toml"],
        &["run", "folder"],
        &["run", "fens.geojson"],
        &["check", "missing.toml"],
        &["check", "folder"],
        &["new", "fresh"],
        &["new", "fresh", "--patches", "missing.geojson"],
        &["new", "fresh", "--patches", "folder"],
        &["new", "fresh", "--patches", "study.toml"],
        &["new", "study.toml", "--patches", "fens.geojson"],
    ] {
        let (out, told) = site.call(words, 2);
        assert_eq!(out, "", "{words:?}");
        assert!(!told.is_empty() && !told.contains("os error"), "{words:?}: {told}");
        assert_eq!(site.names(), before, "{words:?}");
    }
}

#[test]
fn the_first_line_is_the_answer_and_the_last_says_where_it_is() {
    let site = Site::new(&[]);
    let (out, told) = site.call(&["run", "study.toml"], 0);
    assert_eq!(told, "", "neither progress nor warnings");
    let first = out.lines().next().unwrap();
    let (chance, rest) = first.split_once(": ").unwrap();
    assert_eq!(rest, "the chance that the network persists for 20 years, from 40 replicates");
    let shown: f64 = chance.split(' ').next().unwrap().parse().unwrap();
    let extinct = site.column("outcome/by_replicate.csv", "extinct_in_year");
    let persisting = extinct.iter().filter(|year| year.is_empty()).count() as f64 / 40.0;
    assert!((shown - persisting).abs() < 0.011, "{first}, but {persisting} of the replicates persist");
    assert!((site.numbers("outcome/by_year.csv", "persistence")[20] - persisting).abs() < 1e-12);
    assert_eq!(out.lines().last().unwrap(), "written to outcome");
}

#[test]
fn json_is_one_document_and_nothing_else() {
    // Quality above 1 gives a warning, which goes to standard error.
    let site = Site::new(&[("{ property = \"capacity\" }", "{ per_hectare = 1.0, quality = \"capacity\" }")]);
    let (out, told) = site.call(&["run", "study.toml", "--json"], 0);
    let document: Value = serde_json::from_str(&out).unwrap();
    assert_eq!(document, site.json("outcome/outcome.json"));
    assert!(told.contains("percentage"), "{told}");
    let (quiet, told) = site.call(&["run", "study.toml", "--json", "--quiet", "--replace"], 0);
    assert_eq!((quiet, told), (out, String::new()));
    let (out, _) = site.call(&["check", "study.toml", "--json"], 0);
    assert!(serde_json::from_str::<Value>(&out).unwrap().is_object());
}

#[test]
fn quiet_says_nothing_and_does_the_same() {
    let site = Site::new(&[]);
    site.call(&["run", "study.toml", "--out", "loud"], 0);
    for words in [&["check", "study.toml", "--quiet"][..], &["run", "study.toml", "--quiet", "--out", "quiet"]] {
        assert_eq!(site.call(words, 0), (String::new(), String::new()));
    }
    assert_eq!(site.bytes("loud"), site.bytes("quiet"));
}

#[test]
fn the_call_overrides_the_study_and_the_outcome_says_so() {
    let site = Site::new(&[]);
    site.call(&["run", "study.toml", "--replicates", "7", "--seed", "99", "--threads", "2", "--out", "called"], 0);
    let outcome = site.json("called/outcome.json");
    assert_eq!(outcome["seed"], 99);
    assert_eq!(outcome["replicates"]["done"], 7);
    assert_eq!(outcome["command"], "eyot run study.toml --seed 99 --replicates 7");
    assert_eq!(site.column("called/by_replicate.csv", "replicate"), ["1", "2", "3", "4", "5", "6", "7"]);
    let said = Site::new(&[("seed = 7", "seed = 99"), ("replicates = 40", "replicates = 7")]);
    said.call(&["run", "study.toml", "--out", "called"], 0);
    for file in ["by_year.csv", "by_patch.csv", "by_link.csv", "by_replicate.csv"] {
        assert_eq!(site.read(&format!("called/{file}")), said.read(&format!("called/{file}")), "{file}");
    }
    site.call(&["run", "study.toml", "--replicates", "7", "--out", "other-seed"], 0);
    assert_ne!(site.read("called/by_replicate.csv"), site.read("other-seed/by_replicate.csv"));
}

#[test]
fn from_a_map_alone_to_an_outcome() {
    let site = Site::new(&[]);
    let (out, told) = site.call(&["new", "mine", "--patches", "fens.geojson"], 0);
    assert_eq!(
        out,
        "written: mine/study.toml\nnext: fill in the vital rates there, then  eyot check mine/study.toml\n"
    );
    assert_eq!(told, "");

    let (_, told) = site.call(&["check", "mine/study.toml"], 2);
    for missing in ["density_dependence", "juvenile.survival", "adult.survival"] {
        assert!(told.contains(&format!("{missing} is missing")), "{missing}: {told}");
    }

    let study = site.read("mine/study.toml");
    let filled: Vec<&str> = study
        .lines()
        .map(|line| if line.contains("FILL IN") { line.strip_prefix("# ").unwrap_or(line) } else { line })
        .map(|line| if line.contains("A first study") { "" } else { line })
        .map(|line| line.strip_prefix("# ").filter(|key| is_a_key_of_dispersal(key)).unwrap_or(line))
        .collect();
    site.write("mine/study.toml", &filled.join("\n"));
    let (out, _) = site.call(&["check", "mine/study.toml"], 0);
    assert!(out.contains("6, in longitude and latitude"), "{out}");
    site.call(&["run", "mine/study.toml", "--replicates", "10"], 0);
    assert_eq!(site.column("mine/outcome/by_patch.csv", "patch").len(), 6);

    let written = site.read("mine/study.toml");
    let (_, told) = site.call(&["new", "mine", "--patches", "fens.geojson"], 2);
    assert!(told.contains("is there already"), "{told}");
    assert_eq!(site.read("mine/study.toml"), written);
}

fn is_a_key_of_dispersal(line: &str) -> bool {
    ["kernel", "settlement", "path_mortality_per_km"].iter().any(|key| line.starts_with(key))
}

#[test]
fn check_says_what_it_understood_and_writes_nothing() {
    let site = Site::new(&[]);
    let before = site.names();
    let (out, told) = site.call(&["check", "study.toml"], 0);
    assert!(out.starts_with("Reed mouse in a chain of fens: 20 years, 40 replicates, seed 7\n"), "{out}");
    for word in
        ["6, in longitude and latitude", "102 individuals", "51 individuals", "exp(-d / 12 km)", "young", "adult"]
    {
        assert!(out.contains(word), "{word}: {out}");
    }
    assert_eq!((told.as_str(), site.names()), ("", before));
}

#[test]
fn one_patch_needs_no_network_and_no_patch_is_refused() {
    let alone = [
        ("emigration = 0.2\n", ""),
        (
            "\n[dispersal]\nkernel = { shape = \"exponential\", mean_km = 1.4 }\nsettlement = \"shared\"\npath_mortality_per_km = 0.2\n",
            "",
        ),
        ("[environment]\ncorrelation = { reach_km = 12.0 }\n", ""),
    ];
    let site = Site::with_patches(&collection(&fens()[..1]), &alone);
    let (_, told) = site.call(&["run", "study.toml"], 0);
    assert_eq!(told, "");
    assert_eq!(site.column("outcome/by_link.csv", "from").len(), 0);
    assert_eq!(site.column("outcome/by_patch.csv", "patch"), ["Alder Fen"]);

    let linked = Site::with_patches(&collection(&fens()[..1]), &[]);
    let (_, told) = linked.call(&["run", "study.toml"], 0);
    assert!(told.contains("no link out of Alder Fen"), "{told}");

    let none = Site::with_patches(&collection(&[]), &alone);
    let (_, told) = none.call(&["run", "study.toml"], 2);
    assert!(told.contains("no patches"), "{told}");
}

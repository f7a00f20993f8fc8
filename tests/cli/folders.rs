//! Where the outcome goes, and what is left alone.

use std::fs;

use super::site::Site;

const FILES: [&str; 7] = [
    "by_link.csv",
    "by_link.geojson",
    "by_patch.csv",
    "by_patch.geojson",
    "by_replicate.csv",
    "by_year.csv",
    "outcome.json",
];

#[test]
fn without_a_word_the_outcome_lies_beside_the_study() {
    let site = Site::new(&[]);
    fs::create_dir(site.path("studies")).unwrap();
    fs::create_dir(site.path("elsewhere")).unwrap();
    fs::rename(site.path("study.toml"), site.path("studies/study.toml")).unwrap();
    fs::rename(site.path("fens.geojson"), site.path("studies/fens.geojson")).unwrap();
    site.eyot(&["run", "../studies/study.toml"]).current_dir(site.path("elsewhere")).assert().code(0);
    assert_eq!(fs::read_dir(site.path("elsewhere")).unwrap().count(), 0);
    let mut names: Vec<_> = fs::read_dir(site.path("studies/outcome"))
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .collect();
    names.sort();
    assert!(FILES.iter().all(|file| names.iter().any(|name| name == file)), "{names:?}");
}

#[test]
fn an_outcome_is_kept_unless_it_may_be_replaced() {
    let site = Site::new(&[]);
    site.call(&["run", "study.toml"], 0);
    let first = site.bytes("outcome");
    let (out, told) = site.call(&["run", "study.toml", "--seed", "8"], 2);
    assert_eq!(out, "");
    assert!(told.contains("an outcome is there already") && told.contains("--replace"), "{told}");
    assert_eq!(site.bytes("outcome"), first);

    site.call(&["run", "study.toml", "--replace"], 0);
    assert_eq!(site.bytes("outcome"), first, "a second run gives the same");

    site.write("outcome/notes.txt", "seen in May");
    site.call(&["run", "study.toml", "--seed", "8", "--replace"], 0);
    assert_ne!(site.bytes("outcome"), first);
    assert_eq!(site.read("outcome/notes.txt"), "seen in May");
    assert_eq!(site.names(), ["fens.geojson", "outcome", "study.toml"]);
}

#[test]
fn what_is_no_outcome_is_not_touched() {
    let site = Site::new(&[]);
    fs::create_dir(site.path("photos")).unwrap();
    site.write("photos/vole.jpg", "not really");
    site.write("photos/outcome.json", "{\"result\": 7}");
    let before = site.bytes("photos");
    site.write("list.txt", "names");
    for place in ["photos", "list.txt"] {
        for more in [&[][..], &["--replace"]] {
            let words = [&["run", "study.toml", "--out", place][..], more].concat();
            let (_, told) = site.call(&words, 2);
            assert!(told.contains("--out"), "{told}");
        }
    }
    assert_eq!(site.bytes("photos"), before);
    assert_eq!(site.read("list.txt"), "names");
    assert_eq!(site.names(), ["fens.geojson", "list.txt", "photos", "study.toml"]);

    fs::create_dir(site.path("empty")).unwrap();
    site.call(&["run", "study.toml", "--out", "empty"], 0);
    assert!(site.path("empty/outcome.json").exists());
}

#[test]
fn a_study_that_became_wrong_leaves_the_outcome_it_had() {
    let site = Site::new(&[]);
    site.call(&["run", "study.toml"], 0);
    let first = site.bytes("outcome");
    site.write("study.toml", &site.read("study.toml").replace("mean = 0.5", "mean = 1.5"));
    site.call(&["run", "study.toml", "--replace"], 2);
    assert_eq!(site.bytes("outcome"), first);
    assert_eq!(site.names(), ["fens.geojson", "outcome", "study.toml"]);
}

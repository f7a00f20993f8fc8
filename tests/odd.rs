//! Studies that are odd but lawful, each in a folder of its own under `tests/odd`, with what the program notes about them
//! beside it. After a change of words, see `tests/broken.rs`.

use std::fs;
use std::path::Path;

use assert_cmd::Command;

/// How many studies there are; the number may only grow.
const CASES: usize = 10;

#[test]
fn every_oddity_is_noted_in_these_words_and_the_study_runs() {
    let rewrite = std::env::var_os("EYOT_REWRITE").is_some();
    let outcomes = tempfile::tempdir().unwrap();
    let mut seen = 0;
    for entry in fs::read_dir(Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/odd")).unwrap() {
        let case = entry.unwrap().path();
        let outcome = outcomes.path().join(case.file_name().unwrap());
        for arguments in [&["check", "study.toml"][..], &["run", "study.toml", "--out", outcome.to_str().unwrap()]] {
            let assert = Command::cargo_bin("eyot").unwrap().args(arguments).current_dir(&case).assert().code(0);
            let told = String::from_utf8(assert.get_output().stderr.clone()).unwrap();
            if rewrite {
                fs::write(case.join("message.txt"), &told).unwrap();
            }
            assert_eq!(told, fs::read_to_string(case.join("message.txt")).unwrap(), "{} {arguments:?}", case.display());
        }
        let recorded: serde_json::Value =
            serde_json::from_slice(&fs::read(outcome.join("outcome.json")).unwrap()).unwrap();
        assert!(!recorded["warnings"].as_array().unwrap().is_empty(), "{}: the outcome forgets it", case.display());
        seen += 1;
    }
    assert!(seen >= CASES, "only {seen} studies were found");
}

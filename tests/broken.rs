//! A small study a mistake, each in a folder of its own under `tests/broken`, with the whole message beside it.
//!
//! The message is what the program says on standard error, byte for byte. After a change of words, run with
//! `EYOT_REWRITE=1`, read what has changed, and keep it if it is what somebody who made the mistake would want to be told.

#![expect(clippy::unwrap_used, reason = "a test stops where a file is not as it should be")]

use std::fs;
use std::path::{Path, PathBuf};

use assert_cmd::Command;

/// How many studies there are; the number may only grow.
const CASES: usize = 121;

const MESSAGE: &str = "message.txt";

fn cases() -> Vec<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/broken");
    let mut cases: Vec<PathBuf> = fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    cases.sort();
    cases
}

fn names(folder: &Path) -> Vec<String> {
    let name = |entry: std::io::Result<fs::DirEntry>| entry.unwrap().file_name().into_string().unwrap();
    let mut names: Vec<String> = fs::read_dir(folder).unwrap().map(name).collect();
    names.sort();
    names
}

/// What the program says about the study in `folder`, after checking that it refuses it and leaves nothing behind.
fn complaint(folder: &Path, command: &[&str]) -> String {
    let before = names(folder);
    let assert = Command::cargo_bin("eyot").unwrap().args(command).arg("study.toml").current_dir(folder).assert();
    let output = assert.get_output();
    let told = String::from_utf8(output.stderr.clone()).unwrap();
    assert_eq!(output.status.code(), Some(2), "{}: {told}", folder.display());
    assert!(output.stdout.is_empty(), "{}: something on standard output", folder.display());
    assert_eq!(names(folder), before, "something was left behind");
    told
}

#[test]
fn every_mistake_is_told_in_these_words() {
    let rewrite = std::env::var_os("EYOT_REWRITE").is_some();
    let cases = cases();
    assert!(cases.len() >= CASES, "only {} studies were found", cases.len());
    let mut wrong = Vec::new();
    for case in &cases {
        let told = complaint(case, &["run"]);
        if rewrite {
            fs::write(case.join(MESSAGE), &told).unwrap();
        }
        let Ok(expected) = fs::read_to_string(case.join(MESSAGE)) else {
            panic!("{} has no {MESSAGE}", case.display())
        };
        if told != expected {
            wrong.push(format!("{}\nexpected\n{expected}\ntold\n{told}", case.display()));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n\n"));
}

#[test]
fn check_says_the_same_as_run_even_if_quiet() {
    for case in cases() {
        let expected = fs::read_to_string(case.join(MESSAGE)).unwrap();
        for command in [&["check"][..], &["check", "--json", "--quiet"], &["run", "--json", "--quiet"]] {
            assert_eq!(complaint(&case, command), expected, "{command:?}");
        }
    }
}

#[test]
fn messages_are_fragments_without_type_names() {
    for case in cases() {
        let text = fs::read_to_string(case.join(MESSAGE)).unwrap();
        for line in text.lines().filter(|line| !line.is_empty()) {
            assert!(!line.ends_with('.') || line.ends_with(".."), "{line}");
            for word in ["f64", "u32", "usize", "Option", "Some(", "Err(", "os error", "panicked"] {
                assert!(!line.contains(word), "{line}");
            }
        }
        assert!(text.contains("  expected  "), "{text}");
    }
}

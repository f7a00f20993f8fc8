//! Runs that are stopped, and readers that go away.
#![cfg(unix)]

use std::process::{Command, Stdio};
use std::time::Duration;

use super::site::Site;

/// Runs the study with far more replicates than there is time for and sends `signal` after a second.
fn stopped_by(signal: &str) {
    let site = Site::new(&[]);
    let child = Command::new(env!("CARGO_BIN_EXE_eyot"))
        .args(["run", "study.toml", "--replicates", "10000000", "--threads", "2"])
        .current_dir(site.path(""))
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    std::thread::sleep(Duration::from_secs(1));
    assert!(Command::new("kill").args([signal, &child.id().to_string()]).status().unwrap().success());
    let output = child.wait_with_output().unwrap();
    let (out, told) = (String::from_utf8(output.stdout).unwrap(), String::from_utf8(output.stderr).unwrap());
    assert_eq!(output.status.code(), Some(1), "{told}");

    let replicates = &site.json("outcome/outcome.json")["replicates"];
    let done = replicates["done"].as_u64().unwrap();
    assert_eq!((replicates["complete"].as_bool(), replicates["asked"].as_u64()), (Some(false), Some(10_000_000)));
    assert!(done > 0 && done < 10_000_000);
    assert_eq!(told, format!("stopped: the outcome holds the {done} replicates that were done\n"));
    assert!(out.lines().next().unwrap().contains("of 10,000,000 replicates that were done"), "{out}");
    assert_eq!(site.names(), ["fens.geojson", "outcome", "study.toml"]);

    // Those that are done are the first, and what they say is what a run of so many says.
    site.call(&["run", "study.toml", "--out", "as-many", "--replicates", &done.to_string()], 0);
    for file in ["by_year.csv", "by_patch.csv", "by_link.csv", "by_replicate.csv"] {
        assert!(site.read(&format!("outcome/{file}")) == site.read(&format!("as-many/{file}")), "{file}");
    }
}

#[test]
fn ctrl_c_keeps_the_replicates_that_are_done() {
    stopped_by("-INT");
}

#[test]
fn so_does_a_polite_request_of_the_system() {
    stopped_by("-TERM");
}

#[test]
fn a_reader_that_goes_away_is_no_failure() {
    let site = Site::new(&[]);
    let eyot = env!("CARGO_BIN_EXE_eyot");
    for (pipe, expected) in [
        ("run study.toml --replace | head -1", "replicates\n"),
        ("check study.toml | head -1", "seed 7\n"),
        ("run study.toml --replace --json | true", ""),
        ("run --help | true", ""),
    ] {
        let output = Command::new("sh").args(["-c", &format!("'{eyot}' {pipe}")]).current_dir(site.path("")).output();
        let output = output.unwrap();
        let (out, told) = (String::from_utf8_lossy(&output.stdout), String::from_utf8_lossy(&output.stderr));
        assert!(out.ends_with(expected), "{pipe}: {out}");
        assert_eq!(told, "", "{pipe}");
    }
    assert!(site.path("outcome/outcome.json").exists());
}

//! Disks and folders that will not take the outcome.

use std::fs;

use super::site::Site;

#[test]
fn a_place_that_cannot_be_written_is_told_before_the_work() {
    let site = Site::new(&[]);
    let before = site.names();
    // More replicates than there is time for: whoever began them would not end.
    let words = ["run", "study.toml", "--replicates", "10000000", "--out"];
    for place in ["missing/outcome", "study.toml/outcome"] {
        let (out, told) = site.call(&[&words[..], &[place]].concat(), 1);
        assert_eq!(out, "");
        assert!(told.contains("could not"), "{told}");
        assert_eq!(site.names(), before);
    }
    if fs::exists("/proc/self").unwrap() {
        site.call(&[&words[..], &["/proc/eyot-outcome"]].concat(), 1);
    }
}

/// A limit to the size of files stands for a full disk: the write fails in the same place.
#[cfg(unix)]
#[test]
fn a_full_disk_leaves_what_was_there() {
    let site = Site::new(&[]);
    let run = |more: &str| {
        let script =
            format!("trap '' XFSZ; ulimit -f 4; exec '{}' run study.toml --seed 8 {more}", env!("CARGO_BIN_EXE_eyot"));
        let output =
            std::process::Command::new("sh").args(["-c", &script]).current_dir(site.path("")).output().unwrap();
        let told = String::from_utf8(output.stderr).unwrap();
        assert_eq!(output.status.code(), Some(1), "{told}");
        assert!(output.stdout.is_empty(), "no answer where none was kept");
        assert!(told.contains("could not write") && !told.contains("panicked"), "{told}");
    };
    run("");
    assert_eq!(site.names(), ["fens.geojson", "study.toml"]);

    site.call(&["run", "study.toml"], 0);
    let first = site.bytes("outcome");
    run("--replace");
    assert_eq!(site.bytes("outcome"), first);
    assert_eq!(site.names(), ["fens.geojson", "outcome", "study.toml"]);
}

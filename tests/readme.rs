//! What the README shows is what the program prints.

use std::fs;
use std::path::Path;
use std::process::Command;

#[test]
fn the_excerpt_is_the_beginning_of_the_summary() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let readme = fs::read_to_string(root.join("README.md")).unwrap();
    let command = readme.lines().find_map(|line| line.strip_prefix("$ cargo run --release -- run ")).unwrap();
    let excerpt = readme.split("```text\n").nth(1).and_then(|rest| rest.split("```").next()).unwrap();
    let out = tempfile::tempdir().unwrap();
    let run = Command::new(env!("CARGO_BIN_EXE_eyot"))
        .current_dir(root)
        .args(["run", command, "--out"])
        .arg(out.path().join("outcome"))
        .output()
        .unwrap();
    let printed = String::from_utf8(run.stdout).unwrap();
    assert!(run.status.success(), "{}", String::from_utf8_lossy(&run.stderr));
    assert!(
        excerpt.lines().count() >= 3 && printed.starts_with(excerpt),
        "the README shows\n{excerpt}\nbut it is\n{printed}"
    );
}

//! The example of the ember bell reads without a mistake or a warning, and means what it is there to show.

use std::path::Path;

use eyot::engine::{Overrides, prepare};

#[test]
fn the_example_shows_what_strikes_and_what_changes() {
    let study = Path::new(env!("CARGO_MANIFEST_DIR")).join("examples/emberlow/study.toml");
    let checked = match prepare(&study, Overrides::default()) {
        Ok(checked) => checked,
        Err(failure) => panic!("{failure}"),
    };
    assert!(checked.warnings.is_empty(), "{:?}", checked.warnings);
    let prepared = checked.value;
    let names: Vec<&str> = prepared.catastrophes.iter().map(|catastrophe| catastrophe.name.as_str()).collect();
    assert_eq!(names, ["heath fire", "drought", "moth year"]);
    assert_eq!(prepared.landscape.patches.len(), 20);
    let over_time = &prepared.landscape.capacity_over_time;
    assert!(over_time.variation > 0.0 && over_time.mean_in(0, 59, 100.0) < 60.0);
}

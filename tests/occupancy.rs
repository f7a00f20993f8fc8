//! Occupancy studies from end to end: the example, the links, and the columns of the files.

use std::fs;
use std::path::Path;
use std::sync::atomic::AtomicBool;

use eyot::engine::{Overrides, Prepared, Stopping, prepare, run};
use eyot::landscape::Neighbours;
use eyot::network::{DispersalTable, Movement, Sources, Structure};
use eyot::num;
use eyot::outcome::{Counted, Outcome};
use eyot::output::{Account, Existing, Folder, OccupancyUnderstood, summary, write_run};

fn example() -> Prepared {
    let study = Path::new(env!("CARGO_MANIFEST_DIR")).join("examples/tessary/study.toml");
    let checked = prepare(&study, Overrides::default()).unwrap_or_else(|failure| panic!("{failure}"));
    assert!(checked.warnings.is_empty(), "{:?}", checked.warnings);
    checked.value
}

fn outcome(prepared: &Prepared, replicates: u32) -> Outcome {
    let Prepared { model, landscape, network, settings, dispersal, life_history, .. } = prepared;
    let done = run(model, &Stopping::After(replicates), 0, &AtomicBool::new(false), &|_, _| {});
    let exponent = life_history.extinction_exponent();
    let structure = dispersal.as_ref().map(|dispersal| Structure::new(landscape, dispersal, network, exponent));
    let threshold = settings.quasi_extinction.as_ref();
    Outcome::from_tallies(&done.tallies, landscape, network, &model.start_totals(), threshold, structure)
        .expect("replicates are done")
        .counting(Counted::OccupiedPatches)
}

fn account(prepared: &Prepared) -> Account {
    Account {
        command: "eyot run study.toml".to_owned(),
        title: prepared.settings.title.clone(),
        seed: prepared.settings.seed,
        effort: prepared.settings.effort,
        complete: true,
        inputs: prepared.inputs.clone(),
        warnings: Vec::new(),
    }
}

#[test]
fn the_landscape_is_as_its_page_says() {
    let patches = example().landscape.patches;
    assert_eq!(patches.len(), 42);
    let areas: Vec<f64> = patches.iter().map(|patch| patch.area_ha).collect();
    assert!(areas.iter().all(|area| (0.2..=4.6).contains(area)));
    assert!((areas.iter().sum::<f64>() - 61.0).abs() < 0.5);
}

/// An example should leave something to ask: neither outcome is certain, and patches wink.
#[test]
fn the_example_may_go_either_way() {
    let outcome = outcome(&example(), 500);
    let persistence = outcome.summary.persistence;
    assert!(persistence.low > 0.5 && persistence.high < 0.98, "{persistence:?}");
    let winking = |row: &&eyot::outcome::PatchRow| {
        row.local_extinctions_per_century > 2.0 && row.recolonisations_per_century > 2.0
    };
    assert!(outcome.by_patch.iter().filter(winking).count() > 15);
}

/// The columns that individuals alone have are left out, and nothing told speaks of individuals.
#[test]
fn the_files_have_exactly_these_columns() {
    let prepared = example();
    let (outcome, account) = (outcome(&prepared, 20), account(&prepared));
    let parent = tempfile::tempdir().expect("a temporary folder can be made");
    let path = parent.path().join("outcome");
    let folder = Folder::claim(&path, Existing::Keep).unwrap_or_else(|failure| panic!("{failure}"));
    write_run(&folder, &outcome, &prepared.landscape, &account).unwrap_or_else(|failure| panic!("{failure}"));
    let text = |name: &str| fs::read_to_string(path.join(name)).expect("the file was written");
    let by_patch = "patch,area_ha,start,occupied_at_end,occupied_at_end_low,occupied_at_end_high,\
                    share_of_years_occupied,local_extinctions_per_century,recolonisations_per_century,component,\
                    splits_network,metapopulation_capacity_share,connectivity_loss_percent";
    let by_link = "from,to,distance_km,splits_network";
    for (name, columns) in [
        (
            "by_year.csv",
            "year,persistence,persistence_low,persistence_high,quasi_extinction,quasi_extinction_low,\
             quasi_extinction_high,mean_occupied_patches,mean_occupied_patches_low,mean_occupied_patches_high,\
             sd_occupied_patches,occupied_patches_5,occupied_patches_25,occupied_patches_50,occupied_patches_75,\
             occupied_patches_95",
        ),
        ("by_patch.csv", by_patch),
        ("by_link.csv", by_link),
        ("by_replicate.csv", "replicate,extinct_in_year,quasi_extinct_in_year,occupied_at_end,fewest_occupied"),
    ] {
        assert_eq!(text(name).lines().next(), Some(columns), "{name}");
    }
    for (name, columns) in [("by_patch.geojson", by_patch), ("by_link.geojson", by_link)] {
        let collection: serde_json::Value = serde_json::from_str(&text(name)).expect("GeoJSON is JSON");
        let properties = collection["features"][0]["properties"].as_object().expect("features have properties");
        assert_eq!(properties.keys().cloned().collect::<Vec<_>>().join(","), columns, "{name}");
    }
    let written: serde_json::Value = serde_json::from_str(&text("outcome.json")).expect("it is JSON");
    let keys =
        |value: &serde_json::Value| -> Vec<String> { value.as_object().expect("an object").keys().cloned().collect() };
    assert_eq!(
        keys(&written["answer"]),
        [
            "sentence",
            "persistence",
            "quasi_extinction",
            "expected_minimum_occupied_patches",
            "median_time_to_extinction",
            "customary_target"
        ]
    );
    assert_eq!(keys(&written["network"]), ["patches", "links", "area_ha", "start", "structure"]);
    let understood = OccupancyUnderstood::new(&prepared, &[]).expect("a study of occupancy");
    for told in [summary(&outcome, &account), understood.text(), understood.json()] {
        for word in ["individual", "abundance", "capacity ", "emigrant", "growth", "fecundity", "survival"] {
            let without = told.replace("metapopulation capacity ", "");
            assert!(!without.contains(word), "{word} in:\n{told}");
        }
    }
}

/// By no kernel does what is left out of a patch's connectivity, all patches full, pass 1e-9 of it; and something is.
#[test]
fn what_is_left_out_of_connectivity_does_not_matter() {
    let prepared = example();
    let landscape = &prepared.landscape;
    let distances = Neighbours::new(landscape);
    for kernel in [
        "shape = \"exponential\", mean_km = 0.2",
        "shape = \"gaussian\", mean_km = 1.0",
        "shape = \"exponential-power\", c = 1.5, mean_km = 0.4",
        "shape = \"2Dt\", b = 9, mean_km = 0.1",
    ] {
        let text = format!("[dispersal]\nkernel = {{ {kernel} }}\narea_exponent = 0.7\n");
        let document = eyot::study::Document::parse(Path::new("study.toml"), text);
        let table = document.root().table("dispersal").and_then(DispersalTable::read_for_occupancy);
        let table = table.unwrap_or_else(|| panic!("{kernel}"));
        let sources = Sources::build(landscape, &table, &distances).unwrap_or_else(|mistakes| panic!("{mistakes}"));
        let Movement::Kernel(by) = &table.movement else { panic!("a kernel") };
        let n = landscape.patches.len();
        assert!(sources.n_left_out > 0, "{kernel}: nothing is left out");
        assert_eq!(sources.n_left_out as usize + sources.network.links.len(), n * (n - 1));
        let mut kept = vec![0.0; n];
        for link in &sources.network.links {
            kept[link.to as usize] += link.probability * sources.sizes[link.from as usize];
        }
        for (target, kept) in kept.into_iter().enumerate() {
            let from = |source: usize| {
                let size = num::pow(landscape.patches[source].area_ha, 0.7);
                by.kernel.relative(distances.distance_km(source, target)).expect("it has a value at 0") * size
            };
            let whole: f64 = (0..n).filter(|source| *source != target).map(from).sum();
            assert!((whole - kept).abs() <= 1.0001e-9 * whole, "{kernel}: {kept} of {whole}");
        }
    }
}

/// A measured table's own probabilities stand in the place of the kernel.
#[test]
fn a_measured_table_says_by_itself_how_near_patches_are() {
    let folder = tempfile::tempdir().expect("a temporary folder can be made");
    let write = |name: &str, text: &str| fs::write(folder.path().join(name), text).expect("the folder can be written");
    let feature = |name: &str, x: u32, area: f64| {
        format!(
            r#"{{"type":"Feature","properties":{{"patch":"{name}","ha":{area},"there":1}},"geometry":{{"type":"Point","coordinates":[{x},0]}}}}"#
        )
    };
    let features = [feature("a", 0, 4.0), feature("b", 1000, 1.0)].join(",");
    write("p.geojson", &format!(r#"{{"type":"FeatureCollection","features":[{features}]}}"#));
    write("t.csv", "from,to,probability\na,b,0.3\n");
    write(
        "study.toml",
        "title = \"t\"\nseed = 1\nhorizon = 1\nreplicates = 10\n[landscape]\npatches = \"p.geojson\"\nid = \"patch\"\n\
         crs = \"metres\"\narea = { property = \"ha\" }\nstart = { property = \"there\" }\n[life_history]\n\
         kind = \"occupancy\"\nextinction = { e = 0.1, x = 1 }\ncolonisation = { y = 0.6 }\n\
         [dispersal]\nkernel = { table = \"t.csv\" }\narea_exponent = 0.5\n",
    );
    let checked = prepare(&folder.path().join("study.toml"), Overrides::default());
    let checked = checked.unwrap_or_else(|failure| panic!("{failure}"));
    assert_eq!(checked.warnings.len(), 1, "that nobody reaches a: {:?}", checked.warnings);
    let understood = OccupancyUnderstood::new(&checked.value, &[]).expect("a study of occupancy");
    let told: serde_json::Value = serde_json::from_str(&understood.json()).expect("it is JSON");
    // S of b is 0.3 * 4^0.5 = 0.6, so that C is a half; that of a is 0.
    let colonisation = &told["turnover"]["colonisation_with_all_others_occupied"];
    assert!((colonisation["greatest"].as_f64().expect("a number") - 0.5).abs() < 1e-12);
    assert!(colonisation["least"].as_f64().expect("a number").abs() < 1e-12);
}

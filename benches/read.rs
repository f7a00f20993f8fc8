//! Reading a landscape, beside its floor: parsing the JSON and no more.

use std::fmt::Write;
use std::path::PathBuf;

use divan::{Bencher, black_box};
use eyot::landscape::{Landscape, LandscapeTable, Neighbours};
use eyot::study::Document;

fn main() {
    divan::main();
}

const PATCHES: u32 = 10_000;
const VERTICES: u32 = 60;

/// A folder with a layer of 10,000 round patches of 60 vertices in 100 rows, 1 km apart.
struct Layer {
    folder: tempfile::TempDir,
    file: PathBuf,
}

impl Layer {
    fn new() -> Self {
        let folder = tempfile::tempdir().expect("a folder for the layer");
        let file = folder.path().join("patches.geojson");
        std::fs::write(&file, text()).expect("the layer can be written");
        Self { folder, file }
    }

    fn read(&self) -> Landscape {
        let study = "[landscape]\npatches = \"patches.geojson\"\nid = \"patch\"\n\
                     capacity = { per_hectare = 14.0, quality = \"quality\" }\nstart = { share_of_capacity = 0.6 }\n";
        let document = Document::parse(&self.folder.path().join("study.toml"), study.to_owned());
        let table = document.root().table("landscape").and_then(LandscapeTable::read).expect("the table is right");
        Landscape::read(&table, &document, &[]).expect("the layer is right")
    }
}

fn text() -> String {
    let mut text = String::from("{\"type\":\"FeatureCollection\",\"features\":[");
    for patch in 0..PATCHES {
        let (x, y) = (5.0 + f64::from(patch % 100) * 0.0146, 52.0 + f64::from(patch / 100) * 0.009);
        let separator = if patch == 0 { "" } else { "," };
        let _ = write!(
            text,
            "{separator}{{\"type\":\"Feature\",\"properties\":{{\"patch\":{patch},\"quality\":0.8}},\"geometry\":\
             {{\"type\":\"Polygon\",\"coordinates\":[["
        );
        for vertex in 0..=VERTICES {
            let angle = std::f64::consts::TAU * f64::from(vertex % VERTICES) / f64::from(VERTICES);
            let radius = 0.003 * (1.0 + 0.2 * eyot::num::sin(5.0 * angle));
            let at = [x + 1.6 * radius * eyot::num::cos(angle), y + radius * eyot::num::sin(angle)];
            let separator = if vertex == 0 { "" } else { "," };
            let _ = write!(text, "{separator}[{:.7},{:.7}]", at[0], at[1]);
        }
        text.push_str("]]}}");
    }
    text.push_str("]}");
    text
}

#[divan::bench(sample_count = 10)]
fn json_alone(bencher: Bencher<'_, '_>) {
    let layer = Layer::new();
    bencher.bench_local(|| {
        let bytes = std::fs::read(&layer.file).expect("the layer can be read");
        black_box(serde_json::from_slice::<serde_json::Value>(&bytes).expect("the layer is JSON"))
    });
}

#[divan::bench(sample_count = 10)]
fn landscape(bencher: Bencher<'_, '_>) {
    let layer = Layer::new();
    bencher.bench_local(|| black_box(layer.read()));
}

/// All neighbours within 5 km of all patches: about 90 each.
#[divan::bench(sample_count = 5)]
fn neighbours_within_5_km(bencher: Bencher<'_, '_>) {
    let landscape = Layer::new().read();
    bencher.bench_local(|| {
        let neighbours = Neighbours::new(&landscape);
        (0..landscape.patches.len()).map(|patch| neighbours.within(patch, 5.0).len()).sum::<usize>()
    });
}

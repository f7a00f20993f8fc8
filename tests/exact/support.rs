//! Small studies written to a temporary folder and run, and the statistics that judge them.

use std::fmt::Write;
use std::fs;
use std::sync::atomic::AtomicBool;

use eyot::engine::{Overrides, Prepared, Stopping, Tallies, prepare, run};
use eyot::num;

/// Replicates of every statistical check, unless it says otherwise.
pub(crate) const REPLICATES: u32 = 20_000;

/// A point patch: position in km, capacity, and individuals by stage at the start.
#[derive(Clone)]
pub(crate) struct Point {
    pub(crate) at_km: [f64; 2],
    pub(crate) area_ha: f64,
    pub(crate) capacity: f64,
    pub(crate) start: Vec<u32>,
}

/// A patch at a place of its own that does not matter.
pub(crate) fn patch(capacity: f64, start: &[u32]) -> Point {
    Point { at_km: [0.0, 0.0], area_ha: 1.0, capacity, start: start.to_vec() }
}

/// A study in pieces.
#[derive(Clone)]
pub(crate) struct Case {
    pub(crate) name: &'static str,
    pub(crate) points: Vec<Point>,
    /// names of the stages, in order
    pub(crate) stages: Vec<&'static str>,
    /// tables below the landscape
    pub(crate) tables: String,
    /// `arrivals[i][j]`: probability that an emigrant of i arrives alive in j; empty where the tables say it
    pub(crate) arrivals: Vec<Vec<f64>>,
    /// keys of `[dispersal]` beside the measured table
    pub(crate) dispersal_keys: &'static str,
    /// files beside the study, by name
    pub(crate) files: Vec<(&'static str, String)>,
    /// what stands in the study
    pub(crate) quasi_extinction: Option<String>,
    pub(crate) replicates: u32,
}

impl Case {
    /// A case of one or more patches whose life history and other tables are `tables`.
    pub(crate) fn new(name: &'static str, points: Vec<Point>, stages: &[&'static str], tables: &str) -> Self {
        let points = points
            .into_iter()
            .enumerate()
            .map(|(position, mut point)| {
                if point.at_km == [0.0, 0.0] {
                    point.at_km = [position as f64, 0.0];
                }
                point
            })
            .collect();
        Self {
            name,
            points,
            stages: stages.to_vec(),
            tables: tables.to_owned(),
            arrivals: Vec::new(),
            dispersal_keys: "",
            files: Vec::new(),
            quasi_extinction: None,
            replicates: REPLICATES,
        }
    }

    /// Adds a measured dispersal table.
    pub(crate) fn arriving(mut self, arrivals: &[&[f64]]) -> Self {
        self.arrivals = arrivals.iter().map(|row| row.to_vec()).collect();
        self
    }

    /// Adds keys of `[dispersal]` beside the measured table.
    pub(crate) fn dispersing(mut self, keys: &'static str) -> Self {
        self.dispersal_keys = keys;
        self
    }

    /// Adds a file beside the study.
    pub(crate) fn file(mut self, name: &'static str, text: String) -> Self {
        self.files.push((name, text));
        self
    }

    /// Adds a threshold of quasi-extinction.
    pub(crate) fn below(mut self, threshold: u32) -> Self {
        self.quasi_extinction = Some(threshold.to_string());
        self
    }

    /// Adds a threshold of quasi-extinction over one stage.
    pub(crate) fn below_of(mut self, threshold: u32, stage: &str) -> Self {
        self.quasi_extinction = Some(format!("{{ below = {threshold}, stages = [\"{stage}\"] }}"));
        self
    }

    /// Reads and compiles the study over `horizon` years.
    pub(crate) fn prepare(&self, horizon: u32) -> Prepared {
        let folder = tempfile::tempdir().expect("a temporary folder can be made");
        let write = |name: &str, text: &str| {
            fs::write(folder.path().join(name), text).expect("a temporary file can be written")
        };
        write("patches.geojson", &self.geojson());
        write("start.csv", &self.start_table());
        let mut study = format!(
            "title = \"{}\"\nseed = {}\nhorizon = {horizon}\nreplicates = {}\n",
            self.name,
            seed(self.name),
            self.replicates
        );
        if let Some(threshold) = &self.quasi_extinction {
            writeln!(study, "quasi_extinction = {threshold}").expect("a text takes what is written");
        }
        study.push_str(
            "[landscape]\npatches = \"patches.geojson\"\nid = \"patch\"\ncrs = \"metres\"\narea = { property = \"area\" }\n\
             capacity = { property = \"capacity\" }\nstart = { table = \"start.csv\" }\n",
        );
        study.push_str(&self.tables);
        if !self.arrivals.is_empty() {
            study.push_str("\n[dispersal]\nkernel = { table = \"arrivals.csv\" }\n");
            study.push_str(self.dispersal_keys);
            write("arrivals.csv", &self.arrival_table());
        }
        for (name, text) in &self.files {
            write(name, text);
        }
        write("study.toml", &study);
        match prepare(&folder.path().join("study.toml"), Overrides::default()) {
            Ok(checked) => checked.value,
            Err(failure) => panic!("{failure}"),
        }
    }

    /// Runs all replicates over `horizon` years.
    pub(crate) fn run(&self, horizon: u32) -> Seen {
        let prepared = self.prepare(horizon);
        let stop = AtomicBool::new(false);
        let run = run(&prepared.model, &Stopping::After(self.replicates), 0, &stop, &|_, _| {});
        Seen { name: self.name, tallies: run.tallies }
    }

    fn geojson(&self) -> String {
        let features: Vec<String> = self
            .points
            .iter()
            .enumerate()
            .map(|(position, point)| {
                format!(
                    r#"{{"type":"Feature","properties":{{"patch":"p{}","area":{},"capacity":{}}},"geometry":{{"type":"Point","coordinates":[{},{}]}}}}"#,
                    position + 1,
                    point.area_ha,
                    point.capacity,
                    500_000.0 + point.at_km[0] * 1000.0,
                    500_000.0 + point.at_km[1] * 1000.0
                )
            })
            .collect();
        format!(r#"{{"type":"FeatureCollection","features":[{}]}}"#, features.join(","))
    }

    fn start_table(&self) -> String {
        let counted = if self.stages.len() == 1 { "count".to_owned() } else { self.stages.join(",") };
        let mut table = format!("patch,{counted}\n");
        for (position, point) in self.points.iter().enumerate() {
            let counts: Vec<String> = point.start.iter().map(u32::to_string).collect();
            writeln!(table, "p{},{}", position + 1, counts.join(",")).expect("a text takes what is written");
        }
        table
    }

    fn arrival_table(&self) -> String {
        let mut table = String::from("from,to,probability\n");
        for (from, row) in self.arrivals.iter().enumerate() {
            for (to, probability) in row.iter().enumerate().filter(|(_, probability)| **probability > 0.0) {
                writeln!(table, "p{},p{},{probability}", from + 1, to + 1).expect("a text takes what is written");
            }
        }
        table
    }
}

/// A seed from a name, so that nobody chose it.
pub(crate) fn seed(name: &str) -> u64 {
    name.bytes().fold(0, |seed: u64, byte| (seed * 131 + u64::from(byte)) % 1_000_000_007)
}

/// What was seen of a case.
pub(crate) struct Seen {
    pub(crate) name: &'static str,
    pub(crate) tallies: Tallies,
}

impl Seen {
    fn n(&self) -> f64 {
        self.tallies.records.len() as f64
    }

    /// P(whole network extinct at `census`).
    pub(crate) fn extinct(&self, census: usize, null: f64) {
        let seen = self.tallies.records.iter().filter(|record| record.totals[census] == 0).count();
        self.probability(&format!("extinct at {census}"), seen as u64, null);
    }

    /// P(below the threshold at least once up to `census`).
    pub(crate) fn quasi_extinct(&self, census: u32, null: f64) {
        let below = |first: Option<u32>| first.is_some_and(|first| first <= census);
        let seen = self.tallies.records.iter().filter(|record| below(record.quasi_extinct_in)).count();
        self.probability(&format!("below the threshold by {census}"), seen as u64, null);
    }

    /// Mean of the total at `census`, whose exact sd is `sd`; the sd itself within 4 of its own standard errors, as
    /// estimated from the fourth moment.
    pub(crate) fn total(&self, census: usize, mean: f64, sd: f64) {
        let totals: Vec<f64> = self.tallies.records.iter().map(|record| record.totals[census] as f64).collect();
        self.mean(&format!("total at {census}"), sample_mean(&totals), mean, sd);
        let squares: Vec<f64> = totals.iter().map(|total| (total - mean) * (total - mean)).collect();
        self.mean(&format!("variance at {census}"), sample_mean(&squares), sd * sd, sample_sd(&squares));
    }

    /// Extinction and total at `census` against the chance of every total.
    pub(crate) fn distribution(&self, census: usize, chances: impl Iterator<Item = (usize, f64)>) {
        let (mut empty, mut mass, mut mean, mut square) = (0.0, 0.0, 0.0, 0.0);
        for (total, chance) in chances {
            let total = total as f64;
            empty += if total > 0.0 { 0.0 } else { chance };
            mass += chance;
            mean += chance * total;
            square += chance * total * total;
        }
        assert!((mass - 1.0_f64).abs() < 1e-9, "{}: the chain loses mass: {mass}", self.name);
        self.extinct(census, empty);
        self.total(census, mean, (square - mean * mean).sqrt());
    }

    /// P(patch occupied) at the last census.
    pub(crate) fn occupied_at_end(&self, nulls: &[f64]) {
        for (position, (patch, null)) in self.tallies.patches.iter().zip(nulls).enumerate() {
            self.probability(&format!("patch {} occupied at the end", position + 1), patch.occupied_at_end, *null);
        }
    }

    /// Mean over replicates of the lowest census up to `census`, census 0 included.
    pub(crate) fn lowest(&self, census: usize, null: f64) {
        let lowest: Vec<f64> = self
            .tallies
            .records
            .iter()
            .map(|record| record.totals[..=census].iter().min().copied().unwrap_or(0) as f64)
            .collect();
        self.mean(&format!("lowest by {census}"), sample_mean(&lowest), null, sample_sd(&lowest));
    }

    /// A mean against its null, 4 standard errors of `sd`.
    pub(crate) fn mean(&self, what: &str, seen: f64, null: f64, sd: f64) {
        let tolerance = 4.0 * sd / self.n().sqrt();
        // The tables are rounded to a few digits: half a unit of the last is theirs, not ours.
        let rounding = 5.1e-6 * null.abs().max(1.0);
        assert!(
            (seen - null).abs() <= tolerance + rounding,
            "{}: {what}: {seen} is not {null} +- {tolerance}",
            self.name
        );
    }

    /// A proportion against its null, 4 standard errors; the exact binomial where few are expected.
    pub(crate) fn probability(&self, what: &str, seen: u64, null: f64) {
        let n = self.n();
        let label = format!("{}: {what}: {} of {n} where {null} is expected", self.name, seen);
        if null * n < 10.0 || (1.0 - null) * n < 10.0 {
            let (count, chance) = if null < 0.5 { (seen, null) } else { (n as u64 - seen, 1.0 - null) };
            assert!(two_sided_tail(n as u64, chance.max(0.0), count) >= 1e-4, "{label}");
        } else {
            let tolerance = 4.0 * (null * (1.0 - null) / n).sqrt();
            assert!((seen as f64 / n - null).abs() <= tolerance, "{label} +- {tolerance}");
        }
    }
}

/// Twice the smaller tail of the binomial distribution at `seen`, `seen` included.
fn two_sided_tail(n: u64, p: f64, seen: u64) -> f64 {
    if p <= 0.0 {
        return if seen == 0 { 1.0 } else { 0.0 };
    }
    let ln_choose =
        |k: u64| num::ln_gamma(n as f64 + 1.0) - num::ln_gamma(k as f64 + 1.0) - num::ln_gamma((n - k) as f64 + 1.0);
    let mass = |k: u64| num::exp(ln_choose(k) + k as f64 * num::ln(p) + (n - k) as f64 * num::ln_1p(-p));
    let lower: f64 = (0..=seen).map(mass).sum();
    let upper = 1.0 - if seen == 0 { 0.0 } else { (0..seen).map(mass).sum::<f64>() };
    2.0 * lower.min(upper)
}

pub(crate) fn sample_mean(values: &[f64]) -> f64 {
    values.iter().sum::<f64>() / values.len() as f64
}

pub(crate) fn sample_sd(values: &[f64]) -> f64 {
    let mean = sample_mean(values);
    (values.iter().map(|value| (value - mean) * (value - mean)).sum::<f64>() / (values.len() - 1) as f64).sqrt()
}

/// A life history of one stage without weather.
pub(crate) fn one_stage(survival: f64, fecundity: f64, young: &str, density: &str) -> String {
    format!(
        "[life_history]\nkind = \"stages\"\nyoung = \"{young}\"\ndensity_dependence = {{ form = \"{density}\" }}\n\
         [[life_history.stage]]\nname = \"all\"\nsurvival = {survival}\nfecundity = {fecundity}\n"
    )
}

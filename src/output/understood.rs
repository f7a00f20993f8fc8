//! What a study is understood to say, before any run: for the terminal, and as JSON.

use serde::Serialize;

use super::life_words;
use super::rules::{crowding_in_words, record_in_words, removal_in_words};
use super::terminal::{Side, lines};
use super::threats::Threats;
use super::words::{amount, counted, grouped};
use crate::demography::{Census, LifeHistory, Matrix, Rate};
use crate::engine::Prepared;
use crate::environment::Correlation;
use crate::landscape::Crs;
use crate::mistake::Mistake;
use crate::network::Structure;
use crate::study::{Effort, Settings};

/// The most names of patches or links that a line lists.
const NAMES_SHOWN: usize = 8;

/// What was understood.
#[derive(Debug, Serialize)]
pub struct Understood {
    title: String,
    seed: u64,
    horizon_years: u32,
    replicates: Option<u32>,
    precision: Option<f64>,
    landscape: Landscape,
    network: Option<Network>,
    species: Species,
    weather: String,
    threats: Option<Threats>,
    #[serde(skip_serializing_if = "Vec::is_empty")]
    removals: Vec<String>,
    warnings: Vec<String>,
    #[serde(skip)]
    head: String,
}

#[derive(Debug, Serialize)]
struct Landscape {
    patches: usize,
    coordinates: &'static str,
    extent_km: [f64; 2],
    area_ha: f64,
    smallest_ha: f64,
    largest_ha: f64,
    capacity: f64,
    start: u64,
    patches_empty_at_start: usize,
}

#[derive(Debug, Serialize)]
struct Network {
    links: usize,
    #[serde(skip_serializing_if = "Vec::is_empty")]
    crowding: Vec<String>,
    components: usize,
    median_link_km: Option<f64>,
    mean_lost_share: f64,
    largest_cut_share: f64,
    patches_whose_loss_splits: Vec<String>,
    links_whose_loss_splits: Vec<String>,
    metapopulation_capacity: f64,
    probability_of_connectivity: f64,
    equivalent_connected_area_ha: f64,
}

#[derive(Debug, Serialize)]
struct Species {
    kind: &'static str,
    individuals: String,
    young: String,
    growth_in_an_average_year: f64,
    generation_years: Option<f64>,
    generation_is_stated: bool,
    density_dependence: String,
    allee_effect: Vec<String>,
    census: Option<&'static str>,
    average_year: Vec<String>,
    stages: Vec<Stage>,
    elasticity_survival: f64,
    elasticity_fecundity: f64,
}

#[derive(Debug, Serialize)]
struct Stage {
    name: String,
    survival: String,
    fecundity: String,
    emigration: f64,
    toward_capacity: f64,
    stable_share: f64,
    reproductive_value: f64,
    elasticity: f64,
}

impl Understood {
    /// From a study that was read, and what was odd about it.
    pub fn new(prepared: &Prepared, warnings: &[Mistake]) -> Self {
        let settings = &prepared.settings;
        let (replicates, precision) = match settings.effort {
            Effort::Replicates(replicates) => (Some(replicates), None),
            Effort::Precision(precision) => (None, Some(precision)),
        };
        Self {
            title: settings.title.clone(),
            seed: settings.seed,
            horizon_years: settings.horizon,
            replicates,
            precision,
            landscape: Landscape::new(prepared),
            network: Network::new(prepared),
            species: Species {
                allee_effect: life_words::allee_effect(prepared),
                ..Species::new(&prepared.life_history, settings.generation_years)
            },
            weather: weather(prepared),
            threats: Threats::new(prepared),
            removals: prepared.removals.iter().map(removal_in_words).collect(),
            warnings: warnings.iter().map(Mistake::to_string).collect(),
            head: head(settings),
        }
    }

    /// As JSON.
    ///
    /// # Panics
    /// Never: every part of it can be written as JSON.
    pub fn json(&self) -> String {
        serde_json::to_string_pretty(self).expect("texts, numbers and lists are JSON")
    }

    /// For the terminal.
    pub fn text(&self) -> String {
        let mut parts = vec![
            self.head.clone(),
            self.landscape.text(),
            self.network_text(),
            self.species.text(),
            format!("{}\n", self.weather),
        ];
        parts.extend(self.threats.as_ref().map(Threats::text));
        parts.join("\n") + &self.removals_text()
    }

    fn removals_text(&self) -> String {
        if self.removals.is_empty() {
            return String::new();
        }
        let lines: Vec<String> = self.removals.iter().map(|removal| format!("  {removal}\n")).collect();
        format!("\nRemovals, each year after dispersal\n{}", lines.concat())
    }

    fn network_text(&self) -> String {
        self.network
            .as_ref()
            .map_or_else(|| "Network: nobody disperses, so patches stand alone\n".to_owned(), Network::text)
    }
}

impl Landscape {
    fn new(prepared: &Prepared) -> Self {
        let patches = &prepared.landscape.patches;
        let areas = || patches.iter().map(|patch| patch.area_ha);
        let starts = prepared.model.start_totals();
        Self {
            patches: patches.len(),
            coordinates: match prepared.landscape.crs {
                Crs::Degrees => "longitude and latitude",
                Crs::Metres => "planar metres",
            },
            extent_km: prepared.landscape.extent_km(),
            area_ha: areas().sum(),
            smallest_ha: areas().fold(f64::INFINITY, f64::min),
            largest_ha: areas().fold(0.0, f64::max),
            capacity: patches.iter().map(|patch| patch.capacity).sum(),
            start: starts.iter().sum(),
            patches_empty_at_start: starts.iter().filter(|start| **start == 0).count(),
        }
    }

    fn text(&self) -> String {
        let rows = vec![
            row("patches", &format!("{}, in {}", grouped(self.patches as u64), self.coordinates)),
            row(
                "extent",
                &format!(
                    "{} km east to west, {} km north to south",
                    amount(self.extent_km[0]),
                    amount(self.extent_km[1])
                ),
            ),
            row(
                "area",
                &format!("{} ha; {} to {} ha a patch", amount(self.area_ha), ha(self.smallest_ha), ha(self.largest_ha)),
            ),
            row("capacity", &format!("{} individuals", amount(self.capacity))),
            row(
                "start",
                &format!("{} individuals; {} of the patches empty", grouped(self.start), self.patches_empty_at_start),
            ),
        ];
        block("Landscape", rows)
    }
}

impl Network {
    fn new(prepared: &Prepared) -> Option<Self> {
        let Prepared { landscape, network, dispersal, .. } = prepared;
        let structure = Structure::new(landscape, dispersal.as_ref()?, network, 1.0);
        let name = |patch: usize| landscape.patches[patch].name.clone();
        let mut lengths: Vec<f64> = network.links.iter().map(|link| link.distance_km).collect();
        lengths.sort_unstable_by(f64::total_cmp);
        Some(Self {
            links: network.links.len(),
            crowding: crowding_in_words(dispersal.as_ref()?.crowding),
            components: structure.graph.n_components,
            median_link_km: (!lengths.is_empty()).then(|| crate::num::quantile(&lengths, 0.5)),
            mean_lost_share: network.lost.iter().sum::<f64>() / network.lost.len() as f64,
            largest_cut_share: network.cut_share.iter().copied().fold(0.0, f64::max),
            patches_whose_loss_splits: structure.graph.cut_patches.iter().map(|patch| name(*patch)).collect(),
            links_whose_loss_splits: (structure.graph.cut_links.iter())
                .map(|(a, b)| format!("{} - {}", name(*a), name(*b)))
                .collect(),
            metapopulation_capacity: structure.capacity.value,
            probability_of_connectivity: structure.connectivity.probability,
            equivalent_connected_area_ha: structure.connectivity.equivalent_area_ha,
        })
    }

    fn text(&self) -> String {
        let median = self.median_link_km.map(|km| format!(", half of them within {km:.2} km")).unwrap_or_default();
        let mut rows = vec![
            row(
                "links",
                &format!("{}{median}; {}", grouped(self.links as u64), counted(self.components as u64, "component")),
            ),
            row(
                "emigrants lost",
                &format!("{:.1} % die on the way or land nowhere, mean over patches", 100.0 * self.mean_lost_share),
            ),
            row("patches that hold it together", &names(&self.patches_whose_loss_splits)),
            row("links that hold it together", &names(&self.links_whose_loss_splits)),
            row(
                "metapopulation capacity",
                &format!("{} (Hanski & Ovaskainen 2000)", amount(self.metapopulation_capacity)),
            ),
            row(
                "probability of connectivity",
                &format!(
                    "{:.4}, as one patch of {} ha (Saura & Pascual-Hortal 2007)",
                    self.probability_of_connectivity,
                    ha(self.equivalent_connected_area_ha)
                ),
            ),
        ];
        for (position, words) in self.crowding.iter().enumerate() {
            rows.insert(1 + position, row("where it is crowded", words));
        }
        if self.largest_cut_share > 0.0 {
            let cut = format!("at most {:.4} % of those who land", 100.0 * self.largest_cut_share);
            rows.insert(2, row("weakest links cut", &cut));
        }
        block("Network", rows)
    }
}

impl Species {
    fn new(life_history: &LifeHistory, stated_generation_years: Option<f64>) -> Self {
        let matrix = &life_history.matrix;
        let (fates, young) = matrix.elasticities();
        let (stable, values) = (matrix.stable_distribution(), matrix.reproductive_values());
        let stages = life_history
            .stages
            .iter()
            .enumerate()
            .map(|(position, stage)| Stage {
                name: stage.name.clone(),
                survival: rate_in_words(life_history, position, "survival"),
                fecundity: rate_in_words(life_history, position, "fecundity"),
                emigration: stage.emigration,
                toward_capacity: stage.toward_capacity,
                stable_share: stable[position],
                reproductive_value: values[position],
                elasticity: column_sum(&fates, position) + column_sum(&young, position),
            })
            .collect();
        let sum = |part: &Matrix| (0..part.size()).map(|column| column_sum(part, column)).sum();
        Self {
            kind: life_history.kind,
            individuals: life_history.individuals.clone(),
            young: life_history.model.young_in_words(),
            growth_in_an_average_year: matrix.growth(),
            generation_years: life_history.generation_time().or(stated_generation_years),
            generation_is_stated: life_history.generation_time().is_none(),
            density_dependence: density_in_words(life_history),
            allee_effect: Vec::new(),
            census: life_history.census.map(Census::fecundity_in_words),
            average_year: if life_history.kind == "stages" {
                life_words::of_a_hundred(life_history)
            } else {
                Vec::new()
            },
            stages,
            elasticity_survival: sum(&fates),
            elasticity_fecundity: sum(&young),
        }
    }

    fn text(&self) -> String {
        let mut rows = vec![
            row("counted", &format!("{}; {}", self.individuals, self.young)),
            row(
                "in an average year",
                &format!("numbers grow by a factor of {:.4} where there is room", self.growth_in_an_average_year),
            ),
        ];
        if let Some(years) = self.generation_years {
            let how = if self.generation_is_stated {
                "as the study states"
            } else {
                "mean age of mothers, stable distribution; Bienvenu & Legendre 2015"
            };
            rows.push(row("generation", &format!("{years:.2} years ({how})")));
        }
        rows.push(row("density dependence", &self.density_dependence));
        rows.extend(
            self.allee_effect
                .iter()
                .zip(["Allee effect", "where it leaves numbers"])
                .map(|(text, label)| row(label, text)),
        );
        rows.extend(self.census.map(|text| row("census", text)));
        rows.extend(
            self.average_year
                .iter()
                .enumerate()
                .map(|(position, text)| row(if position == 0 { "a year, without crowding" } else { "" }, text)),
        );
        if self.kind == "stages" {
            let (survival, fecundity) = (self.elasticity_survival, self.elasticity_fecundity);
            rows.push(row(
                "growth depends on",
                &format!("survival {survival:.3}, fecundity {fecundity:.3} (elasticities)"),
            ));
        }
        format!("{}\n{}", block("Species", rows), self.stage_table())
    }

    fn stage_table(&self) -> String {
        let rate = if self.kind == "counts" { "growth" } else { "fecundity" };
        let head = ["stage", "survival (sd)", rate, "emigration", "stable share", "reproductive value", "elasticity"];
        let mut rows = vec![head.map(str::to_owned).to_vec()];
        for stage in &self.stages {
            rows.push(vec![
                stage.name.clone(),
                stage.survival.clone(),
                stage.fecundity.clone(),
                stage.emigration.to_string(),
                format!("{:.3}", stage.stable_share),
                format!("{:.3}", stage.reproductive_value),
                format!("{:.3}", stage.elasticity),
            ]);
        }
        lines(rows, &[Side::Left, Side::Right, Side::Right, Side::Right, Side::Right, Side::Right, Side::Right])
            .concat()
    }
}

/// The first line: what is to be run.
pub(super) fn head(settings: &Settings) -> String {
    let Settings { title, horizon, seed, .. } = settings;
    let effort = match settings.effort {
        Effort::Replicates(replicates) => counted(replicates.into(), "replicate"),
        Effort::Precision(precision) => format!("replicates until persistence is known to {precision}"),
    };
    format!("{title}: {}, {effort}, seed {seed}\n", counted((*horizon).into(), "year"))
}

fn column_sum(matrix: &Matrix, column: usize) -> f64 {
    (0..matrix.size()).map(|row| matrix[(row, column)]).sum()
}

/// The rates of a stage are the survivals in order, then the fecundities; a model of counts has growth alone.
fn rate_in_words(life_history: &LifeHistory, stage: usize, which: &str) -> String {
    let n_stages = life_history.stages.len();
    let scaled = |rate: &Rate, by: f64| {
        let (mean, sd) = (by * rate.mean, by * rate.sd);
        if sd > 0.0 { format!("{} ({})", short(mean), short(sd)) } else { short(mean) }
    };
    let of = |rate: &Rate| scaled(rate, 1.0);
    match (life_history.kind, which) {
        ("counts", "survival") => "-".to_owned(),
        ("counts", _) => of(&life_history.rates[0]),
        (_, "survival") => of(&life_history.rates[stage]),
        // With litters the rate is the share that breeds; the matrix holds the young.
        _ => {
            let rate = &life_history.rates[n_stages + stage];
            let young = column_sum(&life_history.matrix.young, stage);
            scaled(rate, if rate.mean > 0.0 { young / rate.mean } else { 1.0 })
        }
    }
}

fn density_in_words(life_history: &LifeHistory) -> String {
    let density = &life_history.density;
    let on = match (density.on_survival, density.on_fecundity, life_history.kind) {
        (_, _, "counts") => "growth",
        (true, true, _) => "survival and fecundity",
        (true, false, _) => "survival",
        (false, _, _) => "fecundity",
    };
    match (&density.curve, density.ceiling, density.form.as_str()) {
        (Some(curve), _, form) => format!("{form} on {on}: times {}", curve.formula()),
        (None, true, _) => "ceiling: what exceeds the whole part of K is removed at random".to_owned(),
        (None, false, "none") => "none: capacity plays no part".to_owned(),
        (None, false, form) => {
            format!("{form}, but numbers do not grow, so that there is nothing to scale: capacity plays no part")
        }
    }
}

pub(super) fn weather(prepared: &Prepared) -> String {
    if prepared.life_history.varies() {
        let environment = &prepared.environment;
        let recorded = environment.recorded.as_ref().map(record_in_words);
        let between_patches = match environment.correlation.as_ref().map(|said| said.value) {
            Some(Correlation::Reach { reach_km, nugget }) if nugget > 0.0 => {
                format!("{} exp(-d / {reach_km} km)", short(1.0 - nugget))
            }
            Some(Correlation::Reach { reach_km, .. }) => format!("exp(-d / {reach_km} km)"),
            _ if recorded.is_some() => "1: all patches have the recorded years".to_owned(),
            Some(Correlation::Full) => "1: all patches have the same years".to_owned(),
            Some(Correlation::None) | None => "0: every patch has years of its own".to_owned(),
        };
        let mut rows = vec![row("correlation of patches", &between_patches)];
        // Growth, and the e and y of an occupancy model, have one deviate.
        if prepared.life_history.kind == "stages" {
            rows.push(row("of survival with fecundity", &short(environment.between_rates)));
        }
        if environment.between_stages < 1.0 {
            rows.push(row("of stages with each other", &short(environment.between_stages)));
        }
        let next = recorded.unwrap_or_else(|| short(environment.autocorrelation));
        rows.push(row("of a year with the next", &next));
        block("Weather", rows).trim_end().to_owned()
    } else {
        "Weather: no rate varies between years".to_owned()
    }
}

pub(super) fn block(title: &str, rows: Vec<Vec<String>>) -> String {
    format!("{title}\n{}", lines(rows, &[Side::Left, Side::Left]).concat())
}

pub(super) fn row(label: &str, text: &str) -> Vec<String> {
    vec![label.to_owned(), text.to_owned()]
}

pub(super) fn names(names: &[String]) -> String {
    if names.is_empty() {
        return "none".to_owned();
    }
    let shown = names[..names.len().min(NAMES_SHOWN)].join(", ");
    let more = names.len().saturating_sub(NAMES_SHOWN);
    if more > 0 { format!("{shown} and {more} more") } else { shown }
}

/// Hectares, finer where there are few.
pub(super) fn ha(area: f64) -> String {
    if area < 10.0 { format!("{area:.2}") } else { amount(area) }
}

/// A rate to four significant digits, without zeros at the end.
pub(super) fn short(number: f64) -> String {
    let text = format!("{number:.4}");
    text.trim_end_matches('0').trim_end_matches('.').to_owned()
}

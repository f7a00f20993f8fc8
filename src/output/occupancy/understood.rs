//! What an occupancy study is understood to say, before any run: for the terminal, and as JSON.

use serde::Serialize;

use super::super::understood::{block, ha, head, names, row, short, weather};
use super::super::words::{amount, counted, grouped};
use crate::demography::local::Occupancy;
use crate::engine::Prepared;
use crate::mistake::Mistake;
use crate::network::{LEFT_OUT, Structure};
use crate::num::{pow, quantile};
use crate::study::Effort;

/// What was understood.
#[derive(Debug, Serialize)]
pub struct OccupancyUnderstood {
    title: String,
    seed: u64,
    horizon_years: u32,
    replicates: Option<u32>,
    precision: Option<f64>,
    landscape: Landscape,
    network: Network,
    turnover: Turnover,
    weather: String,
    warnings: Vec<String>,
    #[serde(skip)]
    head: String,
}

#[derive(Debug, Serialize)]
struct Landscape {
    patches: usize,
    area_ha: f64,
    smallest_ha: f64,
    largest_ha: f64,
    occupied_at_start: usize,
}

#[derive(Debug, Serialize)]
struct Network {
    links: usize,
    pairs_left_out: u64,
    largest_share_left_out: f64,
    components: usize,
    median_link_km: Option<f64>,
    patches_whose_loss_splits: Vec<String>,
    links_whose_loss_splits: Vec<String>,
    metapopulation_capacity: f64,
    probability_of_connectivity: f64,
    equivalent_connected_area_ha: f64,
}

/// The turnover of patches in an average year.
#[derive(Debug, Serialize)]
struct Turnover {
    e: f64,
    x: f64,
    y: f64,
    b: f64,
    rescue: bool,
    e_factor_sd: f64,
    y_factor_sd: f64,
    /// chance a year that a patch dies out, without rescue
    extinction: Spread,
    /// chance a year that a patch is colonised while all others are occupied
    colonisation_with_all_others_occupied: Spread,
    /// patches occupied at rest, chance left out
    occupied_at_rest: Option<f64>,
}

/// The least, the middle and the greatest over the patches.
#[derive(Debug, Serialize)]
struct Spread {
    least: f64,
    median: f64,
    greatest: f64,
}

impl OccupancyUnderstood {
    /// From a study that was read, and what was odd about it; `None` if it is not one of occupancy.
    pub fn new(prepared: &Prepared, warnings: &[Mistake]) -> Option<Self> {
        let occupancy = prepared.life_history.occupancy?;
        let settings = &prepared.settings;
        let (replicates, precision) = match settings.effort {
            Effort::Replicates(replicates) => (Some(replicates), None),
            Effort::Precision(precision) => (None, Some(precision)),
        };
        Some(Self {
            title: settings.title.clone(),
            seed: settings.seed,
            horizon_years: settings.horizon,
            replicates,
            precision,
            landscape: Landscape::new(prepared),
            network: Network::new(prepared)?,
            turnover: Turnover::new(prepared, occupancy)?,
            weather: weather(prepared),
            warnings: warnings.iter().map(Mistake::to_string).collect(),
            head: head(settings),
        })
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
        let parts = [
            self.head.clone(),
            self.landscape.text(),
            self.network.text(),
            self.turnover.text(),
            format!("{}\n", self.weather),
        ];
        parts.join("\n")
    }
}

impl Landscape {
    fn new(prepared: &Prepared) -> Self {
        let areas = || prepared.landscape.patches.iter().map(|patch| patch.area_ha);
        Self {
            patches: prepared.landscape.patches.len(),
            area_ha: areas().sum(),
            smallest_ha: areas().fold(f64::INFINITY, f64::min),
            largest_ha: areas().fold(0.0, f64::max),
            occupied_at_start: prepared.model.start_totals().into_iter().filter(|start| *start > 0).count(),
        }
    }

    fn text(&self) -> String {
        let area =
            format!("{} ha; {} to {} ha a patch", amount(self.area_ha), ha(self.smallest_ha), ha(self.largest_ha));
        let rows = vec![
            row("patches", &grouped(self.patches as u64)),
            row("area", &area),
            row("start", &format!("{} of the patches occupied", grouped(self.occupied_at_start as u64))),
        ];
        block("Landscape", rows)
    }
}

impl Network {
    fn new(prepared: &Prepared) -> Option<Self> {
        let Prepared { landscape, network, dispersal, life_history, .. } = prepared;
        let exponent = life_history.extinction_exponent();
        let structure = Structure::new(landscape, dispersal.as_ref()?, network, exponent);
        let name = |patch: usize| landscape.patches[patch].name.clone();
        let mut lengths: Vec<f64> = network.links.iter().map(|link| link.distance_km).collect();
        lengths.sort_unstable_by(f64::total_cmp);
        let cut_links = structure.graph.cut_links.iter();
        Some(Self {
            links: network.links.len(),
            pairs_left_out: prepared.n_left_out,
            largest_share_left_out: network.cut_share.iter().copied().fold(0.0, f64::max),
            components: structure.graph.n_components,
            median_link_km: (!lengths.is_empty()).then(|| quantile(&lengths, 0.5)),
            patches_whose_loss_splits: structure.graph.cut_patches.iter().map(|patch| name(*patch)).collect(),
            links_whose_loss_splits: cut_links.map(|(a, b)| format!("{} - {}", name(*a), name(*b))).collect(),
            metapopulation_capacity: structure.capacity.value,
            probability_of_connectivity: structure.connectivity.probability,
            equivalent_connected_area_ha: structure.connectivity.equivalent_area_ha,
        })
    }

    fn text(&self) -> String {
        let median = self.median_link_km.map(|km| format!(", half of them within {km:.2} km")).unwrap_or_default();
        let components = counted(self.components as u64, "component");
        let rows = vec![
            row("links", &format!("{}{median}; {components}", grouped(self.links as u64))),
            row(
                "left out",
                &format!(
                    "{} of too little effect: at most {LEFT_OUT:e} of a patch's connectivity",
                    counted(self.pairs_left_out, "pair")
                ),
            ),
            row("patches that hold it together", &names(&self.patches_whose_loss_splits)),
            row("links that hold it together", &names(&self.links_whose_loss_splits)),
            row("metapopulation capacity", &format!("{:.4} (Hanski & Ovaskainen 2000)", self.metapopulation_capacity)),
            row(
                "probability of connectivity",
                &format!(
                    "{:.4}, as one patch of {} ha (Saura & Pascual-Hortal 2007)",
                    self.probability_of_connectivity,
                    ha(self.equivalent_connected_area_ha)
                ),
            ),
        ];
        block("Network", rows)
    }
}

impl Turnover {
    fn new(prepared: &Prepared, occupancy: Occupancy) -> Option<Self> {
        let Prepared { landscape, network, dispersal, life_history, .. } = prepared;
        let b = dispersal.as_ref()?.area_exponent;
        let [e, y] = life_history.rates.as_slice() else { return None };
        let areas_ha: Vec<f64> = landscape.patches.iter().map(|patch| patch.area_ha).collect();
        let mut connectivity = vec![0.0; areas_ha.len()];
        for link in &network.links {
            connectivity[link.to as usize] += link.probability * pow(areas_ha[link.from as usize], b);
        }
        let x = occupancy.extinction_exponent;
        let without_rescue = Occupancy { rescue: false, ..occupancy };
        let patches = areas_ha.iter().zip(&connectivity);
        let (extinction, colonisation) = patches
            .map(|(area_ha, connectivity)| {
                let chances = without_rescue.turnover(e.mean, y.mean, pow(*area_ha, x), *connectivity);
                (chances.extinction, chances.colonisation)
            })
            .unzip();
        Some(Self {
            e: e.mean,
            x,
            y: y.mean,
            b,
            rescue: occupancy.rescue,
            e_factor_sd: e.sd / e.mean,
            y_factor_sd: y.sd / y.mean,
            extinction: Spread::of(extinction),
            colonisation_with_all_others_occupied: Spread::of(colonisation),
            occupied_at_rest: prepared.model.occupied_at_rest(),
        })
    }

    fn text(&self) -> String {
        let Self { e, x, y, b, .. } = self;
        let rescue = if self.rescue { "colonists save patches: E (1 - C)" } else { "colonists save no patch" };
        let mut rows = vec![
            row("counted", "occupied patches, all updated at once from the last census"),
            row("extinction a year", &format!("E = {e} / area^{x}, at most 1: {}", self.extinction.text())),
            row("connectivity", &format!("S = sum over occupied patches of kernel(d) / kernel(0) * area^{b}")),
            row(
                "colonisation a year",
                &format!(
                    "C = S^2 / (S^2 + {y}^2): {}, all others occupied",
                    self.colonisation_with_all_others_occupied.text()
                ),
            ),
            row("rescue", rescue),
        ];
        if self.e_factor_sd > 0.0 || self.y_factor_sd > 0.0 {
            let sds = format!("sd {} on e, {} on y", short(self.e_factor_sd), short(self.y_factor_sd));
            rows.push(row("a year's factors", &format!("{sds}; a bad year raises both")));
        }
        if let Some(patches) = self.occupied_at_rest {
            rows.push(row("at rest", &format!("{} patches occupied, were it not for chance", amount(patches))));
        }
        block("Turnover in an average year (incidence function; Hanski 1994)", rows)
    }
}

impl Spread {
    fn of(mut chances: Vec<f64>) -> Self {
        chances.sort_unstable_by(f64::total_cmp);
        let [least, median, greatest] = [0.0, 0.5, 1.0].map(|p| quantile(&chances, p));
        Self { least, median, greatest }
    }

    fn text(&self) -> String {
        format!("{} ({} to {})", short(self.median), short(self.least), short(self.greatest))
    }
}

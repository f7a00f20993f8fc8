//! Catastrophes and changing capacity, as `check` says them.

use serde::Serialize;

use super::terminal::{Side, lines};
use super::words::amount;
use crate::engine::Prepared;
use crate::environment::Catastrophe;
use crate::environment::catastrophe::Begins;

/// What strikes now and then, and how capacity changes.
#[derive(Debug, Serialize)]
pub(super) struct Threats {
    catastrophes: Vec<Said>,
    /// empty where capacity stays as it is
    capacity: Vec<String>,
}

/// A catastrophe in words.
#[derive(Debug, Serialize)]
struct Said {
    name: String,
    begins: String,
    strikes: String,
    leaves: String,
}

impl Threats {
    /// `None` where nothing strikes and capacity stays.
    pub(super) fn new(prepared: &Prepared) -> Option<Self> {
        let counts = prepared.life_history.kind == "counts";
        let said = |catastrophe: &Catastrophe| Said {
            name: catastrophe.name.clone(),
            begins: begins(catastrophe),
            strikes: format!("{} {}", catastrophe.strikes.in_words(), catastrophe.lasts.in_words()),
            leaves: left(catastrophe, counts),
        };
        let threats =
            Self { catastrophes: prepared.catastrophes.iter().map(said).collect(), capacity: capacity(prepared) };
        (!threats.catastrophes.is_empty() || !threats.capacity.is_empty()).then_some(threats)
    }

    /// For the terminal.
    pub(super) fn text(&self) -> String {
        let row = |label: &str, text: &str| vec![label.to_owned(), text.to_owned()];
        let mut rows = Vec::new();
        for said in &self.catastrophes {
            rows.push(row(&said.name, &format!("begins {}", said.begins)));
            rows.push(row("", &format!("strikes {}", said.strikes)));
            rows.push(row("", &format!("leaves {}", said.leaves)));
        }
        let labels = std::iter::once("capacity").chain(std::iter::repeat(""));
        rows.extend(labels.zip(&self.capacity).map(|(label, text)| row(label, text)));
        format!("Catastrophes and change\n{}", lines(rows, &[Side::Left, Side::Left]).concat())
    }
}

fn begins(catastrophe: &Catastrophe) -> String {
    let mut chances = Vec::new();
    if catastrophe.yearly_probability > 0.0 {
        let where_drawn = match catastrophe.strikes.begins() {
            Begins::InEachPatch => "in each patch",
            Begins::Everywhere | Begins::AtOnePatch => "in the landscape",
        };
        chances.push(format!("with chance {} a year {where_drawn}", catastrophe.yearly_probability));
    }
    if !catastrophe.years.is_empty() {
        let years: Vec<String> = catastrophe.years.iter().map(u32::to_string).collect();
        chances.push(format!(
            "for certain in {} {}",
            if years.len() == 1 { "year" } else { "years" },
            years.join(", ")
        ));
    }
    if chances.is_empty() {
        chances.push("never".to_owned());
    }
    chances.join(" and ")
}

fn left(catastrophe: &Catastrophe, counts: bool) -> String {
    let shares = catastrophe.left;
    let parts = [
        ("survival", shares.survival),
        (if counts { "growth" } else { "fecundity" }, shares.fecundity),
        ("capacity", shares.capacity),
    ];
    let taken: Vec<String> = (parts.iter())
        .filter(|(_, share)| *share < 1.0)
        .map(|(what, share)| format!("{} of {what}", percent(*share)))
        .collect();
    if taken.is_empty() { "everything as it is".to_owned() } else { taken.join(", ") }
}

fn capacity(prepared: &Prepared) -> Vec<String> {
    let over_time = &prepared.landscape.capacity_over_time;
    let mut parts = Vec::new();
    if over_time.trend_per_year != 0.0 {
        parts.push(format!("times {} each year", 1.0 + over_time.trend_per_year));
    }
    if over_time.has_table() {
        parts.push("by the years of its table, linear between them".to_owned());
    }
    if !parts.is_empty() {
        let last = prepared.settings.horizon - 1;
        let total = |year| {
            let patches = prepared.landscape.patches.iter().enumerate();
            amount(patches.map(|(position, patch)| over_time.mean_in(position, year, patch.capacity)).sum())
        };
        parts.push(format!("{} individuals in year 0, {} in year {last}", total(0), total(last)));
    }
    if over_time.variation > 0.0 {
        let sd = percent(over_time.variation);
        parts.push(format!(
            "varies by chance from year to year, sd {sd} of its mean (lognormal, each patch for itself)"
        ));
    }
    parts
}

/// A share in per cent, without zeros at the end.
fn percent(share: f64) -> String {
    let text = format!("{:.2}", 100.0 * share);
    format!("{} %", text.trim_end_matches('0').trim_end_matches('.'))
}

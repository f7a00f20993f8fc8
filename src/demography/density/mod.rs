//! Density dependence: how numbers relative to capacity press on the vital rates.
//!
//! Forms that multiply rates are scaled so that the local growth rate is exactly 1 where N equals K: with phi* the
//! multiplier of the rates acted on that makes the dominant eigenvalue 1, every curve here passes through 1 at N = 0 and
//! phi* at N = K. A new form is one file and one line in `CURVES`.

mod beverton_holt;
mod ricker;
mod theta_logistic;

use std::fmt::Debug;
use std::sync::Arc;

use super::ProjectionMatrix;
use crate::mistake::{Mistake, nearest_word};
use crate::study::{Said, Table};

/// A multiplier of vital rates that falls as numbers rise.
pub trait Curve: Debug + Send + Sync {
    /// The multiplier where numbers are `crowding` times capacity: 1 at 0, between 0 and 1 above.
    fn multiplier(&self, crowding: f64) -> f64;
    /// The curve in a formula, with its numbers.
    fn formula(&self) -> String;
}

/// What a curve is scaled by.
#[derive(Debug, Clone, Copy)]
struct Scale {
    /// the multiplier of the rates acted on that makes the dominant eigenvalue 1; between 0 and 1
    at_capacity: f64,
    /// ln of growth at low numbers, above 0
    log_growth: f64,
}

type MakeCurve = fn(&Table<'_>, Scale) -> Option<Arc<dyn Curve>>;

/// The forms that multiply rates, by the words that the study uses.
const CURVES: &[(&str, MakeCurve)] =
    &[("beverton-holt", beverton_holt::make), ("ricker", ricker::make), (theta_logistic::FORM, theta_logistic::make)];

/// How numbers are held near capacity.
#[derive(Debug, Clone)]
pub struct Density {
    /// the form, as the study names it
    pub form: String,
    /// whether what exceeds the whole part of capacity is removed at random at the end of the year
    pub ceiling: bool,
    /// the multiplier of rates; `None` where the form has none, or where growth at low numbers is at most 1, so that there
    /// is nothing to scale
    pub curve: Option<Arc<dyn Curve>>,
    /// whether the multiplier acts on survival
    pub on_survival: bool,
    /// whether the multiplier acts on fecundity (or growth)
    pub on_fecundity: bool,
    /// the multiplier that holds growth at 1, where a curve acts
    pub at_capacity: Option<f64>,
}

impl Density {
    /// Nothing holds numbers: for a life history without numbers.
    pub(super) fn none() -> Self {
        Self {
            form: "none".to_owned(),
            ceiling: false,
            curve: None,
            on_survival: false,
            on_fecundity: false,
            at_capacity: None,
        }
    }

    /// Whether the study asks for a curve that has nothing to scale, since numbers do not grow.
    pub fn is_idle(&self) -> bool {
        self.curve.is_none() && !self.ceiling && self.form != "none"
    }

    /// Reads `density_dependence` of the life history. `matrix` is the mean projection matrix, if it could be read;
    /// `counts` says that the life history is a model of counts, whose growth is all that there is to act on.
    pub(super) fn read(life_history: &Table<'_>, matrix: Option<&ProjectionMatrix>, counts: bool) -> Option<Self> {
        const KEY: &str = "density_dependence";
        let Some(table) = life_history.table(KEY) else {
            if !life_history.has(KEY) {
                let expected = format!("{{ form = \"..\" }}, one of {}", forms(counts).join(", "));
                life_history.missing(KEY, expected);
            }
            return None;
        };
        let form = read_form(&table, counts);
        let acted_on = read_acts_on(&table, counts);
        let result = match (form, acted_on, matrix) {
            (Some(form), Some((on_survival, on_fecundity)), Some(matrix)) => {
                let plain = Self {
                    form: form.value.clone(),
                    ceiling: form.value == "ceiling",
                    curve: None,
                    on_survival,
                    on_fecundity,
                    at_capacity: None,
                };
                match CURVES.iter().find(|(name, _)| *name == form.value) {
                    None => refuse_curve_keys(&table).then_some(plain),
                    Some((_, make)) => plain.scaled(&table, &form, *make, matrix),
                }
            }
            _ => {
                // The keys are known all the same, so that only true strangers are reported.
                table.has("theta");
                None
            }
        };
        table.finish();
        result
    }

    fn scaled(
        mut self,
        table: &Table<'_>,
        form: &Said<String>,
        make: MakeCurve,
        matrix: &ProjectionMatrix,
    ) -> Option<Self> {
        let growth = matrix.growth();
        let fixed = matrix.scaled(if self.on_survival { 0.0 } else { 1.0 }, if self.on_fecundity { 0.0 } else { 1.0 });
        let idle = growth <= 1.0;
        if !idle && fixed.dominant().0 >= 1.0 {
            let mistake = form.mistake("rates to act on that can bring growth down to 1 at capacity");
            let advice = "let it act on the other rates too: acts_on = [\"survival\", \"fecundity\"]";
            table.document().mistake(mistake.advise(advice));
            return None;
        }
        let at_capacity = if idle { 1.0 } else { multiplier_at_balance(matrix, self.on_survival, self.on_fecundity) };
        let curve = make(table, Scale { at_capacity, log_growth: crate::num::ln(growth.max(1.0)) })?;
        if !idle {
            self.curve = Some(curve);
            self.at_capacity = Some(at_capacity);
        }
        Some(self)
    }
}

/// The multiplier of the rates acted on that makes the dominant eigenvalue 1, by bisection to the last bit.
/// Growth must be above 1 without it and below 1 at 0.
pub(super) fn multiplier_at_balance(matrix: &ProjectionMatrix, on_survival: bool, on_fecundity: bool) -> f64 {
    let growth_at = |multiplier: f64| {
        let on = |acted_on: bool| if acted_on { multiplier } else { 1.0 };
        matrix.scaled(on(on_survival), on(on_fecundity)).dominant().0
    };
    let (mut low, mut high) = (0.0_f64, 1.0_f64);
    loop {
        let middle = f64::midpoint(low, high);
        if middle <= low || middle >= high {
            return middle;
        }
        if growth_at(middle) < 1.0 {
            low = middle;
        } else {
            high = middle;
        }
    }
}

/// The forms that a life history can have.
fn forms(counts: bool) -> Vec<&'static str> {
    let curves = CURVES.iter().map(|(name, _)| *name).filter(|name| counts || *name != theta_logistic::FORM);
    ["none", "ceiling"].into_iter().chain(curves).collect()
}

fn read_form(table: &Table<'_>, counts: bool) -> Option<Said<String>> {
    let forms = forms(counts);
    let Some(form) = table.text("form") else {
        if !table.has("form") {
            table.missing("form", format!("one of {}", forms.join(", ")));
        }
        return None;
    };
    if forms.contains(&form.value.as_str()) {
        return Some(form);
    }
    let mut mistake = form.mistake(format!("one of {}", forms.join(", ")));
    if form.value == theta_logistic::FORM {
        mistake = mistake.advise("that form is for a life history of kind = \"counts\"");
    }
    if let Some(near) = nearest_word(&form.value, forms.iter().copied()) {
        mistake = mistake.advise(format!("write \"{near}\""));
    }
    table.document().mistake(mistake);
    None
}

/// `(on survival, on fecundity)`; fecundity alone unless the study says otherwise.
fn read_acts_on(table: &Table<'_>, counts: bool) -> Option<(bool, bool)> {
    if !table.has("acts_on") {
        return Some((false, true));
    }
    if counts {
        table.mistake(table.address("acts_on"), "no such key in a model of counts, where density acts on growth");
        return None;
    }
    let words = table.texts("acts_on")?;
    let known = ["survival", "fecundity"];
    let mistakes: Vec<Mistake> = words
        .iter()
        .filter(|word| !known.contains(&word.value.as_str()))
        .map(|word| word.mistake("\"survival\" or \"fecundity\""))
        .collect();
    let sound = mistakes.is_empty() && !words.is_empty();
    if words.is_empty() {
        table.mistake(format!("{} = []", table.address("acts_on")), "\"survival\", \"fecundity\" or both");
    }
    for mistake in mistakes {
        table.document().mistake(mistake);
    }
    let acts = |name: &str| words.iter().any(|word| word.value == name);
    sound.then(|| (acts("survival"), acts("fecundity")))
}

/// Forms without a curve have nothing to act on.
fn refuse_curve_keys(table: &Table<'_>) -> bool {
    if table.has("acts_on") {
        table.mistake(table.address("acts_on"), "no such key: this form multiplies no rates");
        return false;
    }
    true
}

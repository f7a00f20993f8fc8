//! The study's table `environment`.

use super::Record;
use crate::study::{Item, Numbers, POSITIVE, PROBABILITY, Said, Table};

/// How the weather of one patch goes with that of another.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Correlation {
    /// every patch has its own
    None,
    /// all patches have the same
    Full,
    /// (1 - nugget) exp(-distance / reach) between the centroids of two patches
    Reach {
        /// the distance at which the correlation is 1/e
        reach_km: f64,
        /// share of the variance that is a patch's own
        nugget: f64,
    },
}

/// What the study says about the weather.
#[derive(Debug, Clone, PartialEq)]
pub struct EnvironmentTable {
    /// between patches; it has no default, and whether it may be missing depends on the rates and patches
    pub correlation: Option<Said<Correlation>>,
    /// correlation between the deviates of the rate groups, from -1 to 1
    pub between_rates: f64,
    /// correlation between the deviates of any two stages in a rate group, from 0 to 1
    pub between_stages: f64,
    /// correlation between a year's deviate and the next year's, between -1 and 1
    pub autocorrelation: f64,
    /// recorded years in place of drawn ones
    pub recorded: Option<Record>,
}

impl Default for EnvironmentTable {
    /// What a study without the table says.
    fn default() -> Self {
        Self { correlation: None, between_rates: 1.0, between_stages: 1.0, autocorrelation: 0.0, recorded: None }
    }
}

impl EnvironmentTable {
    /// Reads the table. `None` if there is a mistake in it, which has then been noted.
    pub fn read(table: Table<'_>) -> Option<Self> {
        let correlation = match table.item("correlation") {
            None => Some(None),
            Some(item) => read_correlation(&table, item).map(Some),
        };
        let closed = Numbers { low: -1.0, high: 1.0, above_low: false, below_high: false };
        let between_rates = number_or(&table, "between_rates", closed, 1.0);
        let between_stages = number_or(&table, "between_stages", PROBABILITY, 1.0);
        let open = Numbers { low: -1.0, high: 1.0, above_low: true, below_high: true };
        let autocorrelation = number_or(&table, "autocorrelation", open, 0.0);
        let recorded = read_recorded(&table);
        table.finish();
        Some(Self {
            correlation: correlation?,
            between_rates: between_rates?,
            between_stages: between_stages?,
            autocorrelation: autocorrelation?,
            recorded: recorded?,
        })
    }
}

/// A record is the same in all patches and has its own memory: `None`, too, where the study says otherwise beside it.
fn read_recorded(table: &Table<'_>) -> Option<Option<Record>> {
    if !table.has("recorded") {
        return Some(None);
    }
    let record = table.table("recorded").and_then(Record::read);
    let mut fits = true;
    match table.item("correlation") {
        None => {}
        Some(Item::Text(said)) if said.value == "full" => {}
        Some(other) => {
            other.refuse(
                table.document(),
                "\"full\" or nothing beside recorded years, which all patches have in common",
            );
            fits = false;
        }
    }
    if let Some(other) = table.item("autocorrelation") {
        other.refuse(table.document(), "nothing beside recorded years, which have their own memory");
        fits = false;
    }
    record.filter(|_| fits).map(Some)
}

fn read_correlation(table: &Table<'_>, item: Item<'_>) -> Option<Said<Correlation>> {
    match item {
        Item::Table(inner) => read_reach(inner),
        Item::Text(said) if said.value == "none" => Some(said.map(|_| Correlation::None)),
        Item::Text(said) if said.value == "full" => Some(said.map(|_| Correlation::Full)),
        other => {
            other.refuse(table.document(), "\"none\", \"full\" or { reach_km = .. }");
            None
        }
    }
}

fn read_reach(table: Table<'_>) -> Option<Said<Correlation>> {
    if !table.has("reach_km") {
        table.missing("reach_km", "the distance in kilometres at which the correlation has fallen to 1/e");
    }
    let reach = table.number("reach_km", POSITIVE);
    let nugget = number_or(&table, "nugget", PROBABILITY, 0.0);
    let (place, words) = (table.place().clone(), table.path().to_owned());
    table.finish();
    let value = Correlation::Reach { reach_km: reach?.value, nugget: nugget? };
    Some(Said { value, place, words })
}

/// The number of an optional key; `None` only where it is wrong.
fn number_or(table: &Table<'_>, key: &str, numbers: Numbers, default: f64) -> Option<f64> {
    if table.has(key) { table.number(key, numbers).map(|said| said.value) } else { Some(default) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::study::Document;
    use std::path::Path;

    fn read(text: &str) -> Result<EnvironmentTable, Vec<(String, String)>> {
        let document = Document::parse(Path::new("fen.toml"), format!("[environment]\n{text}"));
        let root = document.root();
        let table = EnvironmentTable::read(root.table("environment").unwrap());
        match document.verdict() {
            Ok(_) => Ok(table.unwrap()),
            Err(mistakes) => {
                assert!(table.is_none() || mistakes.as_slice().iter().all(|m| m.found.ends_with("is not a key")));
                Err(mistakes.into_vec().into_iter().map(|m| (m.found, m.expected)).collect())
            }
        }
    }

    #[test]
    fn an_empty_table_is_the_default_and_remembers_that_correlation_is_missing() {
        assert_eq!(read(""), Ok(EnvironmentTable::default()));
        assert_eq!(EnvironmentTable::default().correlation, None);
    }

    #[test]
    fn all_that_may_be_said_is_read() {
        let said =
            read("correlation = { reach_km = 12, nugget = 0.2, origin = \"gauges\" }\nautocorrelation = -0.3").unwrap();
        assert_eq!(said.correlation.unwrap().value, Correlation::Reach { reach_km: 12.0, nugget: 0.2 });
        assert_eq!((said.autocorrelation, said.between_rates), (-0.3, 1.0));
        assert_eq!(read("correlation = \"full\"").unwrap().correlation.unwrap().value, Correlation::Full);
        let said = read("correlation = \"none\"\nbetween_rates = -1").unwrap();
        assert_eq!((said.correlation.unwrap().value, said.between_rates), (Correlation::None, -1.0));
    }

    #[test]
    fn every_mistake_is_noted() {
        let mistakes = read(
            "correlation = { reach_km = 0.0, nugget = 1.5, range = 3 }\nbetween_rates = 2\nautocorrelation = 1.0\nnoise = 1",
        );
        let found: Vec<String> = mistakes.unwrap_err().into_iter().map(|(found, _)| found).collect();
        assert_eq!(
            found,
            [
                "environment.correlation.reach_km = 0.0",
                "environment.correlation.nugget = 1.5",
                "environment.correlation.range is not a key",
                "environment.between_rates = 2",
                "environment.autocorrelation = 1.0",
                "environment.noise is not a key",
            ]
        );
        assert_eq!(
            read("correlation = { nugget = 0.1 }").unwrap_err()[0].0,
            "environment.correlation.reach_km is missing"
        );
        assert_eq!(read("correlation = \"some\"").unwrap_err()[0].1, "\"none\", \"full\" or { reach_km = .. }");
        assert_eq!(read("correlation = 12").unwrap_err()[0].0, "environment.correlation = 12");
        assert_eq!(read("correlation = { reach_km = nan }").unwrap_err().len(), 1);
    }
}

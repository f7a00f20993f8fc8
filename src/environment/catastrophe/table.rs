//! The study's `[[catastrophe]]` tables.

use std::collections::BTreeSet;
use std::sync::Arc;

use super::strikes;
use super::{Lasts, Shares, Strikes};
use crate::mistake::Mistake;
use crate::study::{Item, PROBABILITY, Said, Table};

/// What the study says about one catastrophe.
#[derive(Debug, Clone)]
pub struct Catastrophe {
    /// its name, unique in the study; its luck hangs on it
    pub name: String,
    /// chance a year that one begins: in a patch, or in the landscape, as `strikes` says
    pub yearly_probability: f64,
    /// years in which one begins for certain, in order: of year t it strikes in the step from census t to t + 1
    pub years: Vec<u32>,
    /// what it strikes
    pub strikes: Arc<dyn Strikes>,
    /// how long it lasts
    pub lasts: Lasts,
    /// what it leaves
    pub left: Shares,
}

impl Catastrophe {
    /// Reads all catastrophes of a study. `kind` is that of the life history and `horizon` the years of the study, where they
    /// could be read. `None` if there is a mistake in any, which has then been noted.
    pub fn read_all(root: &Table<'_>, kind: Option<&str>, horizon: Option<u32>) -> Option<Vec<Self>> {
        const KEY: &str = "catastrophe";
        let tables = root.tables(KEY);
        let is_list = matches!(root.item(KEY), None | Some(Item::List(_)));
        let mut names = BTreeSet::new();
        let read: Vec<Option<Self>> = tables.into_iter().map(|table| read(table, kind, horizon, &mut names)).collect();
        read.into_iter().collect::<Option<Vec<Self>>>().filter(|_| is_list)
    }

    /// Whether it can happen, and takes anything where it does.
    pub fn acts(&self) -> bool {
        (self.yearly_probability > 0.0 || !self.years.is_empty()) && !self.left.leave_all()
    }
}

fn read(
    mut table: Table<'_>,
    kind: Option<&str>,
    horizon: Option<u32>,
    names: &mut BTreeSet<String>,
) -> Option<Catastrophe> {
    let name = read_name(&mut table, names);
    let years = read_years(&table, horizon);
    let yearly_probability = read_probability(&table);
    let strikes = strikes::read(&table);
    let lasts = Lasts::read(&table);
    let left = Shares::read(&table, kind);
    let (place, path) = (table.place().clone(), table.path().to_owned());
    let document = table.document();
    table.finish();
    let catastrophe = Catastrophe {
        name: name?,
        yearly_probability: yearly_probability?,
        years: years?,
        strikes: strikes?,
        lasts: lasts?,
        left: left?,
    };
    if !catastrophe.acts() {
        let (found, advice) = if catastrophe.left.leave_all() {
            (
                format!("{path} leaves all of every rate and of capacity"),
                "give the shares that are left, such as survival = 0.3",
            )
        } else {
            (
                format!("{path} with a yearly_probability of 0"),
                "give the chance a year that it strikes, or years = [..]",
            )
        };
        document.warning(Mistake::new(place, found, "a catastrophe that changes nothing").advise(advice));
    }
    Some(catastrophe)
}

fn read_name(table: &mut Table<'_>, names: &mut BTreeSet<String>) -> Option<String> {
    let Some(said) = table.text("name") else {
        if !table.has("name") {
            table.missing("name", "a name for the catastrophe, in quotation marks");
        }
        return None;
    };
    if said.value.trim().is_empty() {
        table.document().mistake(said.mistake("a name that can be read"));
        return None;
    }
    if !names.insert(said.value.clone()) {
        let mistake = said.mistake("a name that no other catastrophe has");
        table.document().mistake(mistake.advise("rename one of the two, or take one out"));
        return None;
    }
    table.rename(format!("catastrophe.{}", said.value));
    Some(said.value)
}

fn read_probability(table: &Table<'_>) -> Option<f64> {
    const KEY: &str = "yearly_probability";
    if !table.has(KEY) {
        if table.has("years") {
            return Some(0.0);
        }
        table.missing(
            KEY,
            "the chance that it strikes in a year, from 0 to 1, or the years in which it does: years = [..]",
        );
        return None;
    }
    let item = table.item(KEY)?;
    if let Item::Number(said) = &item
        && said.value > 1.0
    {
        let advice = "once in 25 years is 0.04; if it is a percentage, divide it by 100";
        table.document().mistake(said.mistake(PROBABILITY.to_string()).advise(advice));
        return None;
    }
    table.number_of(&item, PROBABILITY).map(|said| said.value)
}

fn read_years(table: &Table<'_>, horizon: Option<u32>) -> Option<Vec<u32>> {
    const KEY: &str = "years";
    const EXPECTED: &str = "a list of whole numbers, 0 or above: the step from census t to t + 1 is year t";
    if !table.has(KEY) {
        return Some(Vec::new());
    }
    let list = match table.item(KEY)? {
        Item::List(list) => list,
        other => {
            other.refuse(table.document(), EXPECTED);
            return None;
        }
    };
    let said: Option<Vec<Said<u32>>> = list.value.iter().map(|item| whole_year(table, item, EXPECTED)).collect();
    let said = said?;
    if said.is_empty() {
        table.mistake(format!("{} = []", table.address(KEY)), "at least one year; leave the key out for none");
        return None;
    }
    if let Some(pair) = said.windows(2).find(|pair| pair[1].value <= pair[0].value) {
        let mistake = pair[1].mistake(format!("a year after {}: years in order, each once", pair[0].value));
        table.document().mistake(mistake);
        return None;
    }
    if let Some(beyond) = said.iter().find(|year| horizon.is_some_and(|horizon| year.value >= horizon)) {
        let last = horizon.unwrap_or(0).saturating_sub(1);
        table.document().warning(beyond.mistake(format!("never reached: the last year of this study is {last}")));
    }
    Some(said.into_iter().map(|year| year.value).collect())
}

fn whole_year(table: &Table<'_>, item: &Item<'_>, expected: &str) -> Option<Said<u32>> {
    match item {
        Item::Number(said) if said.value.fract() == 0.0 && (0.0..=f64::from(u32::MAX)).contains(&said.value) => {
            Some(said.clone().map(|year| year as u32))
        }
        other => {
            other.refuse(table.document(), expected);
            None
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::environment::catastrophe::Begins;
    use crate::mistake::Warning;
    use crate::study::Document;
    use std::path::Path;

    /// What was read, the mistakes, and the warnings, as the user sees them.
    fn read(text: &str, kind: &str) -> (Option<Vec<Catastrophe>>, String, String) {
        let document = Document::parse(Path::new("fen.toml"), text.to_owned());
        let read = Catastrophe::read_all(&document.root(), Some(kind), Some(50));
        match document.verdict() {
            Ok(warnings) => {
                let warnings: Vec<String> = warnings.iter().map(|warning| Warning(warning).to_string()).collect();
                (read, String::new(), warnings.join("\n"))
            }
            Err(mistakes) => (read, mistakes.to_string(), String::new()),
        }
    }

    /// The study of these lines under one `[[catastrophe]]` must be refused with all these words.
    fn refused(lines: &str, kind: &str, words: &[&str]) {
        let (_, mistakes, _) = read(&format!("[[catastrophe]]\n{lines}"), kind);
        for word in words {
            assert!(mistakes.contains(word), "no `{word}` in:\n{mistakes}");
        }
    }

    const FLOOD: &str = "[[catastrophe]]\nname = \"flood\"\nyearly_probability = 0.04\nstrikes = { radius_km = 3 }\n\
                         lasts = { chance_of_another_year = 0.25 }\nsurvival = 0.3\ncapacity = 0.5\norigin = \"gauges\"\n";

    #[test]
    fn all_that_may_be_said_is_read() {
        let drought = "[[catastrophe]]\nname = \"drought\"\nyears = [12, 40]\nstrikes = \"landscape\"\nfecundity = 0\nlasts = 2\n";
        let (found, mistakes, warnings) = read(&format!("{FLOOD}{drought}"), "stages");
        assert_eq!((mistakes.as_str(), warnings.as_str()), ("", ""));
        let [flood, drought] = found.unwrap().try_into().unwrap();
        assert_eq!((flood.yearly_probability, flood.lasts), (0.04, Lasts::AnotherYear(0.25)));
        assert_eq!(flood.left, Shares { survival: 0.3, fecundity: 1.0, capacity: 0.5 });
        assert_eq!((flood.strikes.begins(), flood.years.len()), (Begins::AtOnePatch, 0));
        assert!(flood.strikes.reaches(0, 1, &[[0.0, 0.0], [3.0, 0.0]]));
        assert!(!flood.strikes.reaches(0, 1, &[[0.0, 0.0], [3.001, 0.0]]));
        assert_eq!((drought.yearly_probability, drought.years, drought.lasts), (0.0, vec![12, 40], Lasts::Years(2)));
        let growth =
            "[[catastrophe]]\nname = \"frost\"\nyearly_probability = 1\nstrikes = \"one patch\"\ngrowth = 0.2\n";
        let left = Shares { fecundity: 0.2, ..Shares::ALL };
        assert_eq!(read(growth, "counts").0.unwrap()[0].left, left);
        assert!(read("", "stages").0.unwrap().is_empty());
    }

    #[test]
    fn every_mistake_is_named() {
        refused(
            "survival = 1.3\nfecundity = -0.1\nstrikes = \"each path\"\nlasts = 0\nyearly_probability = 4\nyear = [3]\n",
            "stages",
            &[
                "catastrophe.1.name is missing",
                "fen.toml:2:1  catastrophe.1.survival = 1.3",
                "leaves more than all of survival",
                "catastrophe.1.fecundity = -0.1",
                "write \"each patch\"",
                "catastrophe.1.lasts = 0",
                "once in 25 years is 0.04",
                "write years",
            ],
        );
        let named = "name = \"flood\"\n";
        refused(
            named,
            "stages",
            &["catastrophe.flood.yearly_probability is missing", "catastrophe.flood.strikes is missing"],
        );
        refused(&format!("{named}strikes = {{ radius_km = 0 }}"), "stages", &["radius_km = 0", "above 0"]);
        refused(
            &format!("{named}strikes = {{ radius = 1 }}"),
            "stages",
            &["radius_km is missing", "radius is not a key"],
        );
        refused(&format!("{named}strikes = 3"), "stages", &["strikes = 3", "\"landscape\" or { radius_km = .. }"]);
        let lasting = |lasts: &str| format!("{named}lasts = {lasts}");
        refused(&lasting("{ chance_of_another_year = 1 }"), "stages", &["never ends", "lower the rates"]);
        refused(&lasting("{ chance_of_another_year = -1 }"), "stages", &["0 or above and below 1"]);
        refused(&lasting("{ }"), "stages", &["chance_of_another_year is missing"]);
        refused(&lasting("1.5"), "stages", &["a whole number from 1"]);
        refused(&lasting("\"long\""), "stages", &["chance_of_another_year = 0.6"]);
        let years = |years: &str| format!("{named}years = {years}");
        refused(&years("[12, 5]"), "stages", &["= 5", "a year after 12"]);
        refused(&years("[5, 5]"), "stages", &["a year after 5"]);
        refused(&years("[]"), "stages", &["years = []"]);
        refused(&years("[2.5]"), "stages", &["= 2.5", "whole numbers"]);
        refused(&years("2024"), "stages", &["a list of whole numbers"]);
        refused(
            &format!("{named}growth = 0.5"),
            "stages",
            &["growth with life_history.kind = \"stages\"", "survival, fecundity, capacity"],
        );
        refused(
            &format!("{named}survival = 0.5\nfecundity = 0.1"),
            "counts",
            &["catastrophe.flood.survival with", "catastrophe.flood.fecundity with", "growth, capacity"],
        );
        refused("name = \" \"", "stages", &["a name that can be read"]);
        let (found, mistakes, _) = read(&format!("{FLOOD}{FLOOD}"), "stages");
        assert!(found.is_none() && mistakes.contains("fen.toml:10:1") && mistakes.contains("rename one"), "{mistakes}");
        let (found, mistakes, _) = read("[catastrophe]\nname = \"flood\"\n", "stages");
        assert!(found.is_none() && mistakes.contains("[[catastrophe]]"), "{mistakes}");
    }

    #[test]
    fn what_is_odd_is_warned_of() {
        let odd = |lines: &str| {
            read(&format!("[[catastrophe]]\nname = \"flood\"\nstrikes = \"landscape\"\n{lines}"), "stages").2
        };
        assert!(odd("yearly_probability = 0.1").contains("changes nothing"));
        assert!(odd("yearly_probability = 0.1\nsurvival = 1").contains("leaves all of every rate"));
        assert!(odd("yearly_probability = 0\nsurvival = 0.1").contains("a yearly_probability of 0"));
        assert!(odd("years = [3, 50]\nsurvival = 0.1").contains("never reached: the last year of this study is 49"));
        assert_eq!(odd("years = [49]\nsurvival = 0.1"), "");
    }
}

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

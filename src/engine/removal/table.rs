//! The tables `[[removal]]` of a study.

use std::collections::BTreeSet;

use super::{Amount, Removal, Years};
use crate::landscape::Landscape;
use crate::mistake::nearest_word;
use crate::random::patch_key;
use crate::study::{Document, Item, PROBABILITY, Said, Table};

/// The last year that may be named.
const LAST_YEAR: u64 = 100_000;

/// What the study says of one removal.
#[derive(Debug, Clone)]
pub struct RemovalTable {
    /// its name
    pub name: Said<String>,
    /// the patches it takes from; `None` means all
    pub patches: Option<Vec<Said<String>>>,
    /// the stage it takes; `None` means all
    pub stage: Option<Said<String>>,
    /// how many it takes from each patch
    pub amount: Amount,
    /// how many it leaves in a patch, of the stage or all
    pub floor: u32,
    /// when
    pub years: Years,
}

impl RemovalTable {
    /// Reads all tables `[[removal]]`. Mistakes are noted in the document; `None` if there was one.
    pub fn read_all(root: &Table<'_>) -> Option<Vec<Self>> {
        let tables = root.tables("removal");
        let read: Vec<Option<Self>> = tables.into_iter().map(Self::read).collect();
        let read: Vec<Self> = read.into_iter().collect::<Option<_>>()?;
        let mut names = BTreeSet::new();
        for twice in read.iter().filter(|removal| !names.insert(&removal.name.value)) {
            root.document().mistake(twice.name.mistake("a name that no other removal has"));
        }
        Some(read)
    }

    fn read(mut table: Table<'_>) -> Option<Self> {
        let name = read_name(&mut table);
        let patches = read_patches(&table);
        let stage = optional(&table, "stage", Table::text);
        let amount = read_amount(&table);
        let floor = optional(&table, "floor", |table, key| table.whole(key, 0, u32::MAX.into()));
        let years = read_years(&table);
        table.finish();
        Some(Self {
            name: name?,
            patches: patches?,
            stage: stage?,
            amount: amount?,
            floor: floor?.map_or(0, |said| fitting(said.value)),
            years: years?,
        })
    }

    /// Finds the patches and the stage that it names. Names that are not there are noted; `None` then.
    pub(in crate::engine) fn compile(
        &self,
        document: &Document,
        landscape: &Landscape,
        stages: &[String],
    ) -> Option<Removal> {
        let patches: Vec<&str> = landscape.patches.iter().map(|patch| patch.name.as_str()).collect();
        let stages: Vec<&str> = stages.iter().map(String::as_str).collect();
        let stage = self.stage.as_ref().map(|said| find(document, said, &stages, "a stage of the life history"));
        let named = self.patches.as_ref().map(|named| {
            let found: Vec<_> = named.iter().map(|said| find(document, said, &patches, "a patch")).collect();
            found.into_iter().collect::<Option<Vec<usize>>>()
        });
        Some(Removal {
            key: patch_key(&self.name.value) as u32,
            patches: named.unwrap_or_else(|| Some((0..patches.len()).collect()))?,
            stage: match stage {
                Some(found) => Some(found?),
                None => None,
            },
            amount: self.amount,
            floor: self.floor.into(),
            years: self.years.clone(),
        })
    }

    /// Warns where years lie beyond the horizon, so that nothing is taken in them.
    pub(in crate::engine) fn warn_of_idle_years(&self, document: &Document, horizon: u32) {
        let last = match &self.years {
            // A span without an end, or one beyond the horizon, just ends with it.
            Years::Between(first, _) => *first,
            Years::Listed(years) => years.last().copied().unwrap_or(0),
        };
        if last >= horizon {
            let note =
                format!("years before {horizon}, the horizon, since the last step begins in year {}", horizon - 1);
            document.warning(self.name.mistake(format!("{note}; nothing is taken in year {last}")));
        }
    }
}

/// The position of a name; notes a mistake with the nearest right one if it is not there.
fn find(document: &Document, said: &Said<String>, names: &[&str], expected: &str) -> Option<usize> {
    let position = names.iter().position(|name| *name == said.value);
    if position.is_none() {
        let mistake = said.mistake(expected);
        document.mistake(match nearest_word(&said.value, names.iter().copied()) {
            Some(near) => mistake.advise(format!("write \"{near}\"")),
            None => mistake,
        });
    }
    position
}

/// The value of a key that may be left out; `None` only where it is wrong.
fn optional<'d, T>(table: &Table<'d>, key: &str, read: impl Fn(&Table<'d>, &str) -> Option<T>) -> Option<Option<T>> {
    if table.has(key) { read(table, key).map(Some) } else { Some(None) }
}

fn read_name(table: &mut Table<'_>) -> Option<Said<String>> {
    if !table.has("name") {
        table.missing("name", "a name for the removal, such as \"trapping\"");
    }
    let name = table.text("name")?;
    if name.value.trim().is_empty() {
        table.document().mistake(name.mistake("a name that is not empty"));
        return None;
    }
    table.rename(format!("removal.{}", name.value));
    Some(name)
}

fn read_patches(table: &Table<'_>) -> Option<Option<Vec<Said<String>>>> {
    let Some(named) = optional(table, "patches", Table::texts)? else { return Some(None) };
    if named.is_empty() {
        let found = format!("{} = []", table.address("patches"));
        table.mistake(found, "at least one patch; leave the key out to take from all");
        return None;
    }
    let mut names = BTreeSet::new();
    let twice: Vec<_> = named.iter().filter(|said| !names.insert(&said.value)).collect();
    for said in &twice {
        table.document().mistake(said.mistake("each patch once"));
    }
    twice.is_empty().then_some(Some(named))
}

fn read_amount(table: &Table<'_>) -> Option<Amount> {
    let number = table.whole("number", 0, u32::MAX.into());
    let share = table.number("share", PROBABILITY);
    match (table.has("number"), table.has("share")) {
        (true, true) => {
            let said = share.map(|said| said.mistake("either number or share, not both"));
            said.into_iter().for_each(|mistake| table.document().mistake(mistake.advise("take one of the two out")));
            None
        }
        (false, false) => {
            table.missing("number", "number = 10 from each patch, or share = 0.1 of those there");
            None
        }
        (true, false) => Some(Amount::Number(fitting(number?.value))),
        (false, true) => Some(Amount::Share(share?.value)),
    }
}

fn read_years(table: &Table<'_>) -> Option<Years> {
    let listed = optional(table, "years", read_list);
    let first = optional(table, "from_year", |table, key| table.whole(key, 0, LAST_YEAR));
    let last = optional(table, "to_year", |table, key| table.whole(key, 0, LAST_YEAR));
    let (listed, first, last) = (listed?, first?, last?);
    match (listed, first, last) {
        (Some(years), None, None) => Some(Years::Listed(years)),
        (Some(_), Some(said), _) | (Some(_), None, Some(said)) => {
            let mistake = said.mistake("either years, or from_year and to_year, not both");
            table.document().mistake(mistake.advise("take one of the two out"));
            None
        }
        (None, Some(first), Some(last)) if first.value > last.value => {
            table.document().mistake(last.mistake(format!("from_year ({}) or later", first.value)));
            None
        }
        (None, first, last) => Some(Years::Between(
            first.map_or(0, |said| fitting(said.value)),
            last.map_or(u32::MAX, |said| fitting(said.value)),
        )),
    }
}

fn read_list(table: &Table<'_>, key: &str) -> Option<Vec<u32>> {
    const EXPECTED: &str = "a list of whole numbers, 0 or above, each greater than the one before";
    let Item::List(list) = table.item(key)? else {
        table.item(key)?.refuse(table.document(), EXPECTED);
        return None;
    };
    let whole = |item: &Item<'_>| match item {
        Item::Number(said) if said.value >= 0.0 && said.value <= LAST_YEAR as f64 && said.value.fract() == 0.0 => {
            Some(said.value as u32)
        }
        _ => None,
    };
    let years: Option<Vec<u32>> = list.value.iter().map(whole).collect();
    let years = years.filter(|years| !years.is_empty() && years.is_sorted_by(|a, b| a < b));
    if years.is_none() {
        table.document().mistake(list.mistake(EXPECTED));
    }
    years
}

/// A number that was read within the bounds of `u32`.
fn fitting(number: u64) -> u32 {
    u32::try_from(number).unwrap_or(u32::MAX)
}

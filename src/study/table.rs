//! The collecting reader: typed access to one table of a study, noting every mistake and going on.

use std::cell::RefCell;
use std::collections::BTreeSet;
use std::fmt;

use super::document::{Document, Entry, Node, Value};
use crate::mistake::{Mistake, Place, nearest_word};

/// A value as the study says it, with the place and words to name if it turns out to clash with another.
#[derive(Debug, Clone, PartialEq)]
pub struct Said<T> {
    /// the value
    pub value: T,
    /// where it stands
    pub place: Place,
    /// the words, such as `life_history.juvenile.survival.sd = 0.52`
    pub words: String,
}

impl<T> Said<T> {
    /// A mistake about this value.
    pub fn mistake(&self, expected: impl Into<String>) -> Mistake {
        Mistake::new(self.place.clone(), self.words.clone(), expected)
    }

    /// Another value that stands on the same words.
    pub fn map<U>(self, change: impl FnOnce(T) -> U) -> Said<U> {
        Said { value: change(self.value), place: self.place, words: self.words }
    }
}

/// The numbers that a key admits.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Numbers {
    /// least
    pub low: f64,
    /// greatest
    pub high: f64,
    /// whether `low` itself is excluded
    pub above_low: bool,
    /// whether `high` itself is excluded
    pub below_high: bool,
}

/// 0 to 1, both included.
pub const PROBABILITY: Numbers = Numbers { low: 0.0, high: 1.0, above_low: false, below_high: false };
/// Above 0.
pub const POSITIVE: Numbers = Numbers { low: 0.0, high: f64::MAX, above_low: true, below_high: false };
/// 0 or above.
pub const NOT_NEGATIVE: Numbers = Numbers { low: 0.0, high: f64::MAX, above_low: false, below_high: false };

impl Numbers {
    /// Numbers above `low`.
    pub const fn above(low: f64) -> Self {
        Self { low, high: f64::MAX, above_low: true, below_high: false }
    }

    /// Whether `x` is one of them; never so for NaN and the infinities.
    pub fn admit(&self, x: f64) -> bool {
        let low_enough = if self.below_high { x < self.high } else { x <= self.high };
        let high_enough = if self.above_low { x > self.low } else { x >= self.low };
        x.is_finite() && low_enough && high_enough
    }
}

impl fmt::Display for Numbers {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let low = if self.above_low { format!("above {}", self.low) } else { format!("{} or above", self.low) };
        let high = if self.below_high { format!("below {}", self.high) } else { format!("at most {}", self.high) };
        match (self.low > f64::MIN, self.high < f64::MAX) {
            (false, false) => write!(f, "a number"),
            (true, false) => write!(f, "a number {low}"),
            (false, true) => write!(f, "a number {high}"),
            (true, true) if self.above_low || self.below_high => write!(f, "a number {low} and {high}"),
            (true, true) => write!(f, "a number from {} to {}", self.low, self.high),
        }
    }
}

/// One table of the study. Getters return `None` both where a key is missing and where its value is wrong; in the latter
/// case the mistake has been noted. Call [`Table::finish`] last: it notes the keys that nobody asked for.
#[derive(Debug)]
pub struct Table<'d> {
    document: &'d Document,
    path: String,
    entries: &'d [Entry],
    place: Place,
    known: RefCell<BTreeSet<String>>,
}

/// A value of the study whose kind is not settled by its key.
#[derive(Debug)]
pub enum Item<'d> {
    /// a string
    Text(Said<String>),
    /// a number, whole or not
    Number(Said<f64>),
    /// true or false
    Flag(Said<bool>),
    /// a table
    Table(Table<'d>),
    /// a list
    List(Said<Vec<Item<'d>>>),
    /// a date or time
    Date(Said<()>),
}

impl Item<'_> {
    /// Notes that this value is of the wrong kind.
    pub fn refuse(&self, document: &Document, expected: &str) {
        let mistake = match self {
            Self::Text(said) => said.mistake(expected),
            Self::Number(said) => said.mistake(expected),
            Self::Flag(said) => said.mistake(expected),
            Self::List(said) => said.mistake(expected),
            Self::Date(said) => said.mistake(expected),
            Self::Table(table) => Mistake::new(table.place.clone(), table.path.clone(), expected),
        };
        document.mistake(mistake);
    }
}

impl<'d> Table<'d> {
    pub(super) fn new(document: &'d Document, path: String, entries: &'d [Entry], place: Place) -> Self {
        Self { document, path, entries, place, known: RefCell::default() }
    }

    /// The document that this is a table of.
    pub fn document(&self) -> &'d Document {
        self.document
    }

    /// Where the table begins.
    pub fn place(&self) -> &Place {
        &self.place
    }

    /// The address of the table, such as `life_history.density_dependence`; empty for the whole file.
    pub fn path(&self) -> &str {
        &self.path
    }

    /// Gives the table a name of the study's own in place of its position, so that addresses read
    /// `life_history.juvenile` and not `life_history.stage.1`.
    pub fn rename(&mut self, path: String) {
        self.path = path;
    }

    /// The address of a key of this table.
    pub fn address(&self, key: &str) -> String {
        if self.path.is_empty() { key.to_owned() } else { format!("{}.{key}", self.path) }
    }

    /// Whether the key is there, whatever its value.
    pub fn has(&self, key: &str) -> bool {
        self.find(key).is_some()
    }

    /// Notes that a key is missing; not so where the TOML is at fault, for the fault may hide the key.
    pub fn missing(&self, key: &str, expected: impl Into<String>) {
        if self.document.has_faults() {
            return;
        }
        let found = format!("{} is missing", self.address(key));
        self.document.mistake(Mistake::new(self.place.clone(), found, expected));
    }

    /// Notes a mistake of this table as a whole.
    pub fn mistake(&self, found: impl Into<String>, expected: impl Into<String>) {
        self.document.mistake(Mistake::new(self.place.clone(), found, expected));
    }

    /// Any value; `None` also where the TOML is at fault, which has been noted.
    pub fn item(&self, key: &str) -> Option<Item<'d>> {
        let entry = self.find(key)?;
        self.item_of(&entry.node, self.address(key), self.document.place(entry.key_span.start))
    }

    /// A string.
    pub fn text(&self, key: &str) -> Option<Said<String>> {
        match self.item(key)? {
            Item::Text(said) => Some(said),
            other => self.refuse(&other, "a text in quotation marks"),
        }
    }

    /// True or false.
    pub fn flag(&self, key: &str) -> Option<Said<bool>> {
        match self.item(key)? {
            Item::Flag(said) => Some(said),
            other => self.refuse(&other, "true or false"),
        }
    }

    /// A number among `numbers`.
    pub fn number(&self, key: &str, numbers: Numbers) -> Option<Said<f64>> {
        let item = self.item(key)?;
        self.number_of(&item, numbers)
    }

    /// The number that an item is, if it is one of `numbers`.
    pub fn number_of(&self, item: &Item<'_>, numbers: Numbers) -> Option<Said<f64>> {
        match item {
            Item::Number(said) if numbers.admit(said.value) => Some(said.clone()),
            Item::Number(said) if said.value.is_infinite() => {
                self.refuse(item, &format!("{numbers}, and not too large to hold"))
            }
            Item::Number(said) if numbers == PROBABILITY && said.value > 2.0 && said.value <= 100.0 => {
                let advice = format!("a percentage is written as a share: {}", said.value / 100.0);
                self.document.mistake(said.mistake(numbers.to_string()).advise(advice));
                None
            }
            other => self.refuse(other, &numbers.to_string()),
        }
    }

    /// A whole number from `low` to `high`, at most the largest of TOML, 2^63 - 1.
    pub fn whole(&self, key: &str, low: u64, high: u64) -> Option<Said<u64>> {
        const LARGEST: u64 = i64::MAX as u64;
        let item = self.item(key)?;
        let whole = match self.find(key)?.node.value {
            Value::Whole(whole) => u64::try_from(whole).ok().filter(|whole| (low..=high).contains(whole)),
            _ => None,
        };
        match (item, whole) {
            (Item::Number(said), Some(whole)) => Some(said.map(|_| whole)),
            (item, _) if high < LARGEST || matches!(&item, Item::Number(said) if said.value.is_infinite()) => {
                self.refuse(&item, &format!("a whole number from {low} to {}", high.min(LARGEST)))
            }
            (item, _) => self.refuse(&item, &format!("a whole number, {low} or above")),
        }
    }

    /// A list of numbers, each among `numbers`.
    pub fn numbers(&self, key: &str, numbers: Numbers) -> Option<Said<Vec<f64>>> {
        let expected = format!("a list, each item {numbers}");
        match self.item(key)? {
            Item::List(list) => {
                let values: Vec<_> = list.value.iter().map(|item| self.number_of(item, numbers)).collect();
                let values = values.into_iter().collect::<Option<Vec<_>>>()?;
                Some(Said {
                    value: values.into_iter().map(|said| said.value).collect(),
                    place: list.place,
                    words: list.words,
                })
            }
            other => self.refuse(&other, &expected),
        }
    }

    /// A list of texts.
    pub fn texts(&self, key: &str) -> Option<Vec<Said<String>>> {
        let expected = "a list of texts in quotation marks";
        match self.item(key)? {
            Item::List(list) => {
                let texts: Vec<_> = list
                    .value
                    .into_iter()
                    .map(|item| match item {
                        Item::Text(said) => Some(said),
                        other => self.refuse(&other, expected),
                    })
                    .collect();
                texts.into_iter().collect()
            }
            other => self.refuse(&other, expected),
        }
    }

    /// A list of lists of numbers, as many rows as it has and each as long as it is.
    pub fn rows(&self, key: &str, numbers: Numbers) -> Option<Said<Vec<Vec<f64>>>> {
        let expected = "a list of rows, each a list of numbers";
        match self.item(key)? {
            Item::List(list) => {
                let rows: Vec<Option<Vec<f64>>> = list
                    .value
                    .iter()
                    .map(|row| match row {
                        Item::List(row) => {
                            let cells: Vec<_> = row.value.iter().map(|item| self.number_of(item, numbers)).collect();
                            cells.into_iter().map(|cell| cell.map(|said| said.value)).collect()
                        }
                        other => self.refuse(other, expected),
                    })
                    .collect();
                let rows = rows.into_iter().collect::<Option<Vec<_>>>()?;
                Some(Said { value: rows, place: list.place, words: list.words })
            }
            other => self.refuse(&other, expected),
        }
    }

    /// A table.
    pub fn table(&self, key: &str) -> Option<Table<'d>> {
        match self.item(key)? {
            Item::Table(table) => Some(table),
            other => self.refuse(&other, "a table"),
        }
    }

    /// The tables of an array of tables, `[[key]]`; empty where the key is missing.
    pub fn tables(&self, key: &str) -> Vec<Table<'d>> {
        let list = match self.item(key) {
            None => return Vec::new(),
            Some(Item::List(list)) => list.value,
            Some(other) => {
                let _: Option<()> = self.refuse(&other, &format!("tables, each under [[{}]]", self.address(key)));
                return Vec::new();
            }
        };
        list.into_iter()
            .filter_map(|item| match item {
                Item::Table(table) => Some(table),
                other => self.refuse(&other, "a table"),
            })
            .collect()
    }

    /// The choice that a text names.
    pub fn choice<T: Clone>(&self, key: &str, choices: &[(&str, T)]) -> Option<Said<T>> {
        let item = self.item(key)?;
        self.choice_of(&item, choices)
    }

    /// The choice that an item names.
    pub fn choice_of<T: Clone>(&self, item: &Item<'_>, choices: &[(&str, T)]) -> Option<Said<T>> {
        let expected = one_of(choices.iter().map(|(word, _)| *word));
        let Item::Text(said) = item else { return self.refuse(item, &expected) };
        if let Some((_, choice)) = choices.iter().find(|(word, _)| *word == said.value) {
            return Some(said.clone().map(|_| choice.clone()));
        }
        let mut mistake = said.mistake(expected);
        if let Some(near) = nearest_word(&said.value, choices.iter().map(|(word, _)| *word)) {
            mistake = mistake.advise(format!("write \"{near}\""));
        }
        self.document.mistake(mistake);
        None
    }

    /// Notes every key that nobody has asked for. The key `origin`, a note on where values come from, may stand anywhere.
    pub fn finish(self) {
        let _ = self.text("origin");
        let known = self.known.borrow();
        for entry in self.entries.iter().filter(|entry| !known.contains(&entry.key)) {
            let words = known.iter().map(String::as_str).filter(|word| *word != "origin");
            let mut mistake = Mistake::new(
                self.document.place(entry.key_span.start),
                format!("{} is not a key", self.address(&self.document.words(&entry.key_span))),
                one_of_keys(words.clone()),
            );
            if let Some(near) = nearest_word(&entry.key, words) {
                mistake = mistake.advise(format!("write {near}"));
            }
            self.document.mistake(mistake);
        }
    }

    fn find(&self, key: &str) -> Option<&'d Entry> {
        self.known.borrow_mut().insert(key.to_owned());
        self.entries.iter().find(|entry| entry.key == key)
    }

    fn refuse<T>(&self, item: &Item<'_>, expected: &str) -> Option<T> {
        item.refuse(self.document, expected);
        None
    }

    fn said<T>(&self, value: T, node: &Node, path: &str, place: Place) -> Said<T> {
        Said { value, place, words: format!("{path} = {}", self.document.words(&node.span)) }
    }

    fn item_of(&self, node: &'d Node, path: String, place: Place) -> Option<Item<'d>> {
        Some(match &node.value {
            Value::Faulty => return None,
            Value::Text(text) => Item::Text(self.said(text.clone(), node, &path, place)),
            Value::Number(number) => Item::Number(self.said(*number, node, &path, place)),
            #[expect(clippy::cast_precision_loss, reason = "counts and seeds are read as whole numbers instead")]
            Value::Whole(whole) => Item::Number(self.said(*whole as f64, node, &path, place)),
            Value::Flag(flag) => Item::Flag(self.said(*flag, node, &path, place)),
            Value::Date => Item::Date(self.said((), node, &path, place)),
            Value::Table(entries) => Item::Table(Table::new(self.document, path, entries, place)),
            Value::List(nodes) => {
                let item = |(position, node): (usize, &'d Node)| {
                    let place = self.document.place(node.span.start);
                    self.item_of(node, format!("{path}.{}", position + 1), place)
                };
                let items = nodes.iter().enumerate().filter_map(item).collect();
                Item::List(self.said(items, node, &path, place))
            }
        })
    }
}

fn one_of<'a>(words: impl Iterator<Item = &'a str>) -> String {
    let words: Vec<String> = words.map(|word| format!("\"{word}\"")).collect();
    match words.as_slice() {
        [only] => only.clone(),
        [first @ .., last] => format!("{} or {last}", first.join(", ")),
        [] => "nothing".to_owned(),
    }
}

fn one_of_keys<'a>(words: impl Iterator<Item = &'a str>) -> String {
    let words: Vec<&str> = words.collect();
    if words.is_empty() { "no keys here".to_owned() } else { format!("one of: {}", words.join(", ")) }
}

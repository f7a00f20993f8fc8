//! How long a catastrophe lasts.

use crate::mistake::Mistake;
use crate::study::{Item, Numbers, Table};

/// The years that a catastrophe goes on once it has begun.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Lasts {
    /// this many, at least 1
    Years(u32),
    /// one more with this chance after each, below 1
    AnotherYear(f64),
}

const EXPECTED: &str = "a whole number of years, 1 or above, or { chance_of_another_year = 0.6 }";

impl Lasts {
    /// Reads the key `lasts` of a `[[catastrophe]]`: one year where it is missing, `None` where it is wrong.
    pub(super) fn read(table: &Table<'_>) -> Option<Self> {
        const KEY: &str = "lasts";
        if !table.has(KEY) {
            return Some(Self::Years(1));
        }
        match table.item(KEY)? {
            Item::Table(inner) => read_chance(inner).map(Self::AnotherYear),
            Item::Number(_) => {
                let years = table.whole(KEY, 1, 100_000)?;
                u32::try_from(years.value).ok().map(Self::Years)
            }
            other => {
                other.refuse(table.document(), EXPECTED);
                None
            }
        }
    }

    /// In words, such as `for 3 years`.
    pub fn in_words(self) -> String {
        match self {
            Self::Years(1) => "for 1 year".to_owned(),
            Self::Years(years) => format!("for {years} years"),
            Self::AnotherYear(chance) => {
                format!("for {:.1} years on average (another with chance {chance})", 1.0 / (1.0 - chance))
            }
        }
    }

    /// The chance that a place is struck in a year. `is_struck` says whether it was in the year before, `at_start` that
    /// there is no year before: then the chance is the long-term share of struck years, p / (p + 1 - q) with p the chance
    /// that a quiet place is struck and q that of another year.
    pub(super) fn chance(self, probability: f64, is_struck: bool, at_start: bool) -> f64 {
        match self {
            Self::Years(_) => probability,
            Self::AnotherYear(again) if at_start => probability / (probability + 1.0 - again),
            Self::AnotherYear(again) => {
                if is_struck {
                    again
                } else {
                    probability
                }
            }
        }
    }
}

fn read_chance(table: Table<'_>) -> Option<f64> {
    const KEY: &str = "chance_of_another_year";
    if !table.has(KEY) {
        table.missing(KEY, "the chance that a struck year is followed by another, below 1");
    }
    let below_one = Numbers { low: 0.0, high: 1.0, above_low: false, below_high: true };
    let chance = match table.item(KEY) {
        Some(Item::Number(said)) if said.value >= 1.0 => {
            let expected = "a chance below 1: an event that always has another year never ends";
            let mistake: Mistake = said.mistake(expected);
            table.document().mistake(mistake.advise("for a change for good, lower the rates or the capacity"));
            None
        }
        Some(item) => table.number_of(&item, below_one),
        None => None,
    };
    table.finish();
    chance.map(|said| said.value)
}

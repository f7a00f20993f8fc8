//! What a struck year leaves.

use crate::study::{Item, PROBABILITY, Table};

/// The shares that are left of a patch's year, each from 0 to 1.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Shares {
    /// of survival
    pub survival: f64,
    /// of fecundity, or of growth in a model of counts
    pub fecundity: f64,
    /// of capacity
    pub capacity: f64,
}

/// The keys, each with the kinds of life history that have it; `capacity` has no part where patches are full or empty.
const KEYS: [(&str, &[&str]); 4] = [
    ("survival", &["stages", "occupancy"]),
    ("fecundity", &["stages"]),
    ("growth", &["counts"]),
    ("capacity", &["stages", "counts"]),
];

impl Shares {
    /// A year that nothing has struck.
    pub const ALL: Self = Self { survival: 1.0, fecundity: 1.0, capacity: 1.0 };

    /// Whether nothing is taken.
    pub fn leave_all(&self) -> bool {
        [self.survival, self.fecundity, self.capacity].iter().all(|share| *share >= 1.0)
    }

    /// What another catastrophe leaves of these.
    pub(super) fn times(&mut self, other: &Self) {
        self.survival *= other.survival;
        self.fecundity *= other.fecundity;
        self.capacity *= other.capacity;
    }

    /// Reads the shares of a `[[catastrophe]]`, of those that a life history of this `kind` has; of any where the kind is
    /// not known. `None` if one is wrong, which has then been noted.
    pub(super) fn read(table: &Table<'_>, kind: Option<&str>) -> Option<Self> {
        let [survival, fecundity, growth, capacity] = KEYS.map(|(key, kinds)| {
            if !table.has(key) {
                return Some(1.0);
            }
            if let Some(kind) = kind.filter(|kind| !kinds.contains(kind)) {
                let known: Vec<&str> =
                    KEYS.iter().filter(|(_, kinds)| kinds.contains(&kind)).map(|(key, _)| *key).collect();
                let found = format!("{} with life_history.kind = \"{kind}\"", table.address(key));
                table.mistake(found, format!("one of {}", known.join(", ")));
                return None;
            }
            read_share(table, key)
        });
        Some(Self { survival: survival?, fecundity: fecundity? * growth?, capacity: capacity? })
    }
}

fn read_share(table: &Table<'_>, key: &str) -> Option<f64> {
    let item = table.item(key)?;
    if let Item::Number(said) = &item
        && said.value > 1.0
    {
        let mistake = said.mistake(format!("a share from 0 to 1: this one leaves more than all of {key}"));
        table.document().mistake(mistake.advise("write the share that is left: 0.3 where 70 % is lost"));
        return None;
    }
    table.number_of(&item, PROBABILITY).map(|said| said.value)
}

//! What the study says of dispersal and crowding: who leaves more where it is crowded, and who passes full patches by.

use crate::study::{Item, POSITIVE, Table};

/// How dispersal answers to crowding. The default is not at all.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct CrowdingResponse {
    /// the exponent of N/K, above 0, by which the chance to leave is multiplied
    pub emigration_exponent: Option<f64>,
    /// whether emigrants pass by patches that are full
    pub avoids_full: bool,
}

impl CrowdingResponse {
    /// Reads `rises_with_crowding` and `avoids_full` of `[dispersal]`. `None` if one of them is wrong, which has then been
    /// noted.
    pub(super) fn read(table: &Table<'_>) -> Option<Self> {
        let exponent = match table.item("rises_with_crowding") {
            None => Some(None),
            Some(Item::Table(inner)) => read_exponent(inner).map(Some),
            Some(other) => {
                other.refuse(table.document(), "{ exponent = 1 } or the like");
                None
            }
        };
        let avoids_full = if table.has("avoids_full") { table.flag("avoids_full")?.value } else { false };
        Some(Self { emigration_exponent: exponent?, avoids_full })
    }

    /// Whether crowding matters at all.
    pub fn is_idle(&self) -> bool {
        *self == Self::default()
    }
}

fn read_exponent(table: Table<'_>) -> Option<f64> {
    if !table.has("exponent") {
        table.missing("exponent", "the power of N/K that multiplies the chance to leave, such as 1");
    }
    let exponent = table.number("exponent", POSITIVE);
    table.finish();
    exponent.map(|said| said.value)
}

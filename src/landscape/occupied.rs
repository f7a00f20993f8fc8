//! Patches that are full or empty at the start.

use std::path::Path;

use serde_json::Value;

use super::coordinates::kind;
use super::findings::Findings;
use super::geojson::Feature;
use super::properties::is_anywhere;
use crate::mistake::Mistake;
use crate::study::Said;

/// What a patch may say of itself.
pub(super) const EXPECTED: &str = "1 or true where the patch is occupied, 0 or false where it is empty";

/// Whether each feature is occupied by a property; `None`, with the mistake noted, where it does not say.
pub(super) fn of_property(
    features: &[Feature],
    file: &Path,
    property: &Said<String>,
    findings: &Findings<'_>,
) -> Vec<Option<bool>> {
    if !is_anywhere(features.iter().map(|feature| &feature.properties), property, findings) {
        return vec![None; features.len()];
    }
    let name = &property.value;
    let occupied = |feature: &Feature| match flag(feature.properties.get(name)) {
        Ok(flag) => Some(flag),
        Err((why, advice)) => {
            let mistake = Mistake::new(feature.place(file), format!("{name} {why}"), EXPECTED);
            findings.mistake(&format!("{name}: {advice}"), mistake.advise(advice));
            None
        }
    };
    features.iter().map(occupied).collect()
}

fn flag(value: Option<&Value>) -> Result<bool, (String, &'static str)> {
    const FILL: &str =
        "fill the field for every patch in the GIS; leave patches that were not surveyed out of the study";
    const RETYPE: &str = "change the field's type to a whole number or a boolean in the GIS and export again";
    match value {
        None => Err(("is missing".to_owned(), FILL)),
        Some(Value::Null) => Err(("is null".to_owned(), FILL)),
        Some(Value::Bool(flag)) => Ok(*flag),
        Some(Value::Number(number)) => match number.as_f64() {
            Some(0.0) => Ok(false),
            Some(1.0) => Ok(true),
            _ => Err((
                format!("= {number}"),
                "correct the value in the GIS; counts are for kind = \"counts\" or \"stages\"",
            )),
        },
        Some(Value::String(text)) => {
            let shown: String = text.chars().take(40).collect();
            Err((format!("= \"{shown}\", which is text"), RETYPE))
        }
        Some(other) => Err((format!("is {}", kind(other)), RETYPE)),
    }
}

/// What a cell of a table says: 0, 1, or true or false in any case, as spreadsheets write them.
pub(super) fn of_cell(cell: &str) -> Option<bool> {
    let is = |word: &str| cell.eq_ignore_ascii_case(word);
    if is("1") || is("true") {
        Some(true)
    } else if is("0") || is("false") {
        Some(false)
    } else {
        None
    }
}

//! Numbers from the properties of features.

use std::collections::BTreeSet;
use std::path::Path;

use serde_json::{Map, Value};

use super::coordinates::kind;
use super::findings::Findings;
use super::geojson::Feature;
use crate::mistake::{Mistake, nearest_word};
use crate::study::{Numbers, Said};

/// The names of the properties that any feature has, sorted.
pub(super) fn property_names<'v>(all: impl Iterator<Item = &'v Map<String, Value>>) -> Vec<&'v str> {
    let names: BTreeSet<&str> = all.flat_map(|properties| properties.keys().map(String::as_str)).collect();
    names.into_iter().collect()
}

/// Whether any feature has the property that the study names; if none has, that is one mistake of the study.
pub(super) fn is_anywhere<'v>(
    all: impl Iterator<Item = &'v Map<String, Value>> + Clone,
    property: &Said<String>,
    findings: &Findings<'_>,
) -> bool {
    if all.clone().any(|properties| properties.contains_key(&property.value)) {
        return true;
    }
    let names = property_names(all);
    let expected = if names.is_empty() {
        "a property of the patches, which have none".to_owned()
    } else {
        format!("a property of the patches: {}", names.join(", "))
    };
    let mut mistake = property.mistake(expected);
    if let Some(near) = nearest_word(&property.value, names) {
        mistake = mistake.advise(format!("write \"{near}\""));
    }
    findings.mistake("property", mistake);
    false
}

/// The numbers that a property holds, in the order of the features; `None`, with the mistake noted, where a feature has no
/// number among `numbers`.
pub(super) fn numbers(
    features: &[Feature],
    file: &Path,
    property: &Said<String>,
    numbers: Numbers,
    findings: &Findings<'_>,
) -> Vec<Option<f64>> {
    if !is_anywhere(features.iter().map(|feature| &feature.properties), property, findings) {
        return vec![None; features.len()];
    }
    let name = &property.value;
    features
        .iter()
        .map(|feature| match number(feature.properties.get(name), numbers) {
            Ok(number) => Some(number),
            Err((why, advice)) => {
                let mistake = Mistake::new(feature.place(file), format!("{name} {why}"), numbers.to_string());
                findings.mistake(&format!("{name}: {advice}"), mistake.advise(advice));
                None
            }
        })
        .collect()
}

fn number(value: Option<&Value>, numbers: Numbers) -> Result<f64, (String, &'static str)> {
    match value {
        None => Err(("is missing".to_owned(), "fill the field for every patch in the GIS")),
        Some(Value::Null) => Err(("is null".to_owned(), "fill the field for every patch in the GIS")),
        Some(Value::Number(number)) => match number.as_f64().filter(|number| numbers.admit(*number)) {
            Some(number) => Ok(number),
            None => Err((format!("= {number}"), "correct the value in the GIS")),
        },
        Some(Value::String(text)) => {
            let shown: String = text.chars().take(40).collect();
            Err((
                format!("= \"{shown}\", which is text"),
                "change the field's type to a number in the GIS and export again",
            ))
        }
        Some(other) => {
            Err((format!("is {}", kind(other)), "change the field's type to a number in the GIS and export again"))
        }
    }
}

//! A first look at a file of patches, before there is a study that says what its properties mean.

use std::path::Path;

use serde_json::{Map, Value};

use super::findings::Findings;
use super::geojson::{features_of, parse};
use crate::mistake::{Failure, Mistake, Place};
use crate::study::Document;

/// What a file of patches holds.
#[derive(Debug, Clone, PartialEq)]
pub struct Glance {
    /// features
    pub n_features: usize,
    /// whether any of them is a point
    pub has_points: bool,
    /// whether every feature has an `id` member
    pub has_ids: bool,
    /// whether the coordinates cannot be degrees
    pub in_metres: bool,
    /// the properties, in the order in which they are first met
    pub properties: Vec<Property>,
}

/// A property of the features.
#[derive(Debug, Clone, PartialEq)]
pub struct Property {
    /// its name
    pub name: String,
    /// what its values are
    pub values: Values,
    /// features that have it
    pub n_filled: usize,
    /// whether no two features have the same value
    pub distinct: bool,
}

/// What the values of a property are.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Values {
    /// numbers, between these two
    Numbers(f64, f64),
    /// texts
    Texts,
    /// anything else, or of several kinds
    Mixed,
}

impl Glance {
    /// Looks at a GeoJSON file.
    ///
    /// # Errors
    /// If the file cannot be read, is not JSON, or is no FeatureCollection with at least one feature.
    pub fn at(file: &Path) -> Result<Self, Failure> {
        let bytes = std::fs::read(file).map_err(|error| unreadable(file, error))?;
        let document = Document::parse(file, String::new());
        let findings = Findings::new(&document);
        let features = parse(file, &bytes, &findings).and_then(|mut root| features_of(file, &mut root, &findings));
        findings.finish();
        document.verdict()?;
        Ok(Self::of(&features.unwrap_or_default()))
    }

    fn of(features: &[Value]) -> Self {
        let type_of = |feature: &Value| feature["geometry"]["type"].as_str().unwrap_or_default().to_owned();
        Self {
            n_features: features.len(),
            has_points: features.iter().any(|feature| type_of(feature) == "Point"),
            has_ids: features.iter().all(|feature| !feature["id"].is_null()),
            in_metres: features.iter().any(|feature| beyond_degrees(&feature["geometry"]["coordinates"])),
            properties: properties(features),
        }
    }
}

/// Whether any position is farther from the origin than degrees go.
fn unreadable(file: &Path, error: std::io::Error) -> Failure {
    let found = match error.kind() {
        std::io::ErrorKind::NotFound => "no such file",
        std::io::ErrorKind::IsADirectory => "a folder",
        _ => return Failure::system(file, "read", error),
    };
    Mistake::new(Place::file(file), found, "a GeoJSON file of patches").into()
}

fn beyond_degrees(coordinates: &Value) -> bool {
    match coordinates.as_array().map(Vec::as_slice) {
        Some([Value::Number(x), Value::Number(y), ..]) => {
            x.as_f64().is_some_and(|x| x.abs() > 360.0) || y.as_f64().is_some_and(|y| y.abs() > 90.0)
        }
        Some(parts) => parts.iter().any(beyond_degrees),
        None => false,
    }
}

fn properties(features: &[Value]) -> Vec<Property> {
    let rows: Vec<&Map<String, Value>> =
        features.iter().filter_map(|feature| feature["properties"].as_object()).collect();
    let mut names: Vec<&String> = Vec::new();
    for row in &rows {
        for name in row.keys() {
            if !names.contains(&name) {
                names.push(name);
            }
        }
    }
    names.into_iter().map(|name| property(name, &rows)).collect()
}

fn property(name: &str, rows: &[&Map<String, Value>]) -> Property {
    let values: Vec<&Value> = rows.iter().filter_map(|row| row.get(name)).filter(|value| !value.is_null()).collect();
    let numbers: Vec<f64> = values.iter().filter_map(|value| value.as_f64()).collect();
    let kind = if !values.is_empty() && numbers.len() == values.len() {
        let low = numbers.iter().copied().fold(f64::INFINITY, f64::min);
        Values::Numbers(low, numbers.iter().copied().fold(f64::NEG_INFINITY, f64::max))
    } else if values.iter().all(|value| value.is_string()) {
        Values::Texts
    } else {
        Values::Mixed
    };
    let mut texts: Vec<String> = values.iter().map(|value| value.to_string()).collect();
    texts.sort_unstable();
    let distinct = texts.windows(2).all(|pair| pair[0] != pair[1]);
    Property { name: name.to_owned(), values: kind, n_filled: values.len(), distinct }
}

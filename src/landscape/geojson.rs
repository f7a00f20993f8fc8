//! A GeoJSON file (RFC 7946) to features, one by one, so that every bad feature is named.

use std::collections::BTreeMap;
use std::path::Path;

use geo::Geometry;
use serde_json::{Map, Value};

use super::coordinates;
use super::findings::Findings;
use super::names;
use super::properties::{is_anywhere, property_names};
use crate::mistake::{Mistake, Place};
use crate::study::Said;

/// The features of a file.
pub(super) struct Collection {
    /// one for every feature that is an object, in the order of the file
    pub(super) features: Vec<Feature>,
    /// the `crs` member, if there is one
    pub(super) crs_member: Option<Value>,
}

/// A feature; what could not be read is `None`, and the mistake has been noted.
pub(super) struct Feature {
    /// position in the file, from 0
    pub(super) index: usize,
    /// the patch's name
    pub(super) name: Option<String>,
    /// a polygon, a multipolygon or a point
    pub(super) geometry: Option<Geometry<f64>>,
    /// the properties
    pub(super) properties: Map<String, Value>,
}

/// A feature as JSON.
struct Raw {
    index: usize,
    id: Option<Value>,
    geometry: Option<Value>,
    properties: Map<String, Value>,
}

impl Feature {
    /// Where the feature stands.
    pub(super) fn place(&self, file: &Path) -> Place {
        place(file, self.index, self.name.as_ref())
    }
}

/// Reads a file. `None`, with the mistake noted, if it holds no features at all.
pub(super) fn read(
    file: &Path,
    bytes: &[u8],
    id: Option<&Said<String>>,
    findings: &Findings<'_>,
) -> Option<Collection> {
    let mut root = parse(file, bytes, findings)?;
    let crs_member = root.remove("crs").filter(|member| !member.is_null());
    let values = features_of(file, &mut root, findings)?;
    let raw: Vec<Raw> =
        values.into_iter().enumerate().filter_map(|(index, value)| raw(file, index, value, findings)).collect();
    if raw.is_empty() {
        // Each has been noted; of properties that nothing has there is nothing to say.
        return None;
    }
    let naming = Naming::settle(&raw, file, id, findings);
    let features: Vec<Feature> = raw
        .into_iter()
        .map(|raw| {
            let name = naming.as_ref().and_then(|naming| naming.name(&raw, file, findings));
            let geometry = read_geometry(raw.geometry.as_ref(), &place(file, raw.index, name.as_ref()), findings);
            Feature { index: raw.index, name, geometry, properties: raw.properties }
        })
        .collect();
    refuse_repeated_names(&features, file, findings);
    Some(Collection { features, crs_member })
}

fn place(file: &Path, index: usize, name: Option<&String>) -> Place {
    Place::Feature { file: file.to_path_buf(), index, id: name.cloned() }
}

pub(super) fn parse(file: &Path, bytes: &[u8], findings: &Findings<'_>) -> Option<Map<String, Value>> {
    let bytes = bytes.strip_prefix("\u{feff}".as_bytes()).unwrap_or(bytes);
    let mistake = match serde_json::from_slice(bytes) {
        Ok(Value::Object(root)) => return Some(root),
        Ok(other) => Mistake::new(Place::file(file), coordinates::kind(&other), COLLECTION).advise(EXPORT),
        Err(error) => {
            let place =
                Place::Text { file: file.to_path_buf(), line: error.line().max(1), column: error.column().max(1) };
            unreadable(place, bytes, &error)
        }
    };
    findings.mistake("file", mistake);
    None
}

const COLLECTION: &str = "a GeoJSON FeatureCollection";
const EXPORT: &str = "export the layer of patches from the GIS as GeoJSON";

fn unreadable(place: Place, bytes: &[u8], error: &serde_json::Error) -> Mistake {
    if bytes.iter().all(u8::is_ascii_whitespace) {
        return Mistake::new(place, "an empty file", COLLECTION).advise(EXPORT);
    }
    if error.is_eof() {
        return Mistake::new(place, "the file ends in the middle", "JSON to the last bracket")
            .advise("the export or copy was cut short: make it again");
    }
    if bytes.starts_with(&[0xff, 0xfe]) || bytes.starts_with(&[0xfe, 0xff]) || std::str::from_utf8(bytes).is_err() {
        return Mistake::new(place, "bytes that are not UTF-8", COLLECTION).advise("export the layer in UTF-8");
    }
    let line = bytes.split(|byte| *byte == b'\n').nth(error.line().saturating_sub(1)).unwrap_or_default();
    let from = error.column().saturating_sub(2).min(line.len());
    let near = String::from_utf8_lossy(&line[from..(from + 12).min(line.len())]).into_owned();
    if near.contains("NaN") || near.contains("Inf") {
        return Mistake::new(place, format!("`{near}` is not JSON"), "a number")
            .advise("give the missing or infinite value in the GIS, or delete it, and export again");
    }
    let message = error.to_string();
    if message.starts_with("number out of range") {
        return Mistake::new(place, "a number too large to hold", "a coordinate or value within reason")
            .advise("look for a broken value here in the GIS, correct it and export again");
    }
    if message.starts_with("trailing characters") {
        return Mistake::new(place, "more text after the end of the first object", COLLECTION).advise(EXPORT);
    }
    let message = message.split(" at line ").next().unwrap_or_default();
    Mistake::new(place, format!("not JSON: {message}"), COLLECTION).advise(EXPORT)
}

pub(super) fn features_of(file: &Path, root: &mut Map<String, Value>, findings: &Findings<'_>) -> Option<Vec<Value>> {
    let features = root.remove("features");
    let found = match (root.get("type").and_then(Value::as_str), features) {
        (Some("FeatureCollection"), Some(Value::Array(features))) if !features.is_empty() => return Some(features),
        (Some("FeatureCollection"), Some(Value::Array(_))) => {
            let advice = "export the layer with its features: a filter or selection may have left none";
            let mistake = Mistake::new(Place::file(file), "no patches", "at least one feature").advise(advice);
            findings.mistake("file", mistake);
            return None;
        }
        (Some("FeatureCollection"), _) => "no list of features".to_owned(),
        (Some(other), _) => format!("type {other}"),
        (None, _) => "an object without a type".to_owned(),
    };
    findings.mistake("file", Mistake::new(Place::file(file), found, COLLECTION).advise(EXPORT));
    None
}

fn raw(file: &Path, index: usize, value: Value, findings: &Findings<'_>) -> Option<Raw> {
    let found = match value {
        Value::Object(mut object) if object.get("type").and_then(Value::as_str) == Some("Feature") => {
            let properties = match object.remove("properties") {
                Some(Value::Object(properties)) => properties,
                _ => Map::new(),
            };
            return Some(Raw { index, id: object.remove("id"), geometry: object.remove("geometry"), properties });
        }
        Value::Object(_) => "an object that is not a feature",
        other => coordinates::kind(&other),
    };
    let mistake = Mistake::new(place(file, index, None), found, "an object with type = Feature");
    findings.mistake("feature", mistake.advise(EXPORT));
    None
}

fn read_geometry(value: Option<&Value>, place: &Place, findings: &Findings<'_>) -> Option<Geometry<f64>> {
    match coordinates::read(value) {
        Ok(read) => {
            if read.closed > 0 {
                let found = if read.closed == 1 { "an unclosed ring" } else { "unclosed rings" };
                let warning = Mistake::new(place.clone(), found, "closed with its first point");
                findings.warning("unclosed", warning.advise("look whether the outline is whole"));
            }
            Some(read.geometry)
        }
        Err(refusal) => {
            let mistake = Mistake::new(place.clone(), refusal.found, refusal.expected);
            findings.mistake(refusal.advice, mistake.advise(refusal.advice));
            None
        }
    }
}

/// Where names come from.
enum Naming<'s> {
    Property(&'s str),
    Id,
}

impl<'s> Naming<'s> {
    /// `None`, with one mistake noted, where no feature has a name at all.
    fn settle(raw: &[Raw], file: &Path, id: Option<&'s Said<String>>, findings: &Findings<'_>) -> Option<Self> {
        if let Some(said) = id {
            let there = is_anywhere(raw.iter().map(|raw| &raw.properties), said, findings);
            return there.then_some(Self::Property(&said.value));
        }
        if raw.iter().any(|raw| raw.id.is_some()) {
            return Some(Self::Id);
        }
        let names = property_names(raw.iter().map(|raw| &raw.properties)).join(", ");
        let mistake = Mistake::new(Place::file(file), "features without an id", "a name for every patch")
            .advise(format!("say in [landscape] which property names a patch, id = \"...\"; there are: {names}"));
        findings.mistake("file", mistake);
        None
    }

    fn name(&self, raw: &Raw, file: &Path, findings: &Findings<'_>) -> Option<String> {
        let (value, called) = match self {
            Self::Property(property) => (raw.properties.get(*property), *property),
            Self::Id => (raw.id.as_ref(), "id"),
        };
        let why = match value.map(names::name_of) {
            Some(Ok(name)) => return Some(name),
            Some(Err(why)) => format!("is {why}"),
            None => "is missing".to_owned(),
        };
        let mistake = Mistake::new(place(file, raw.index, None), format!("{called} {why}"), "a text or number")
            .advise("give every feature a name of its own in the GIS");
        findings.mistake("unnamed", mistake);
        None
    }
}

/// Notes every name that an earlier feature has already.
fn refuse_repeated_names(features: &[Feature], file: &Path, findings: &Findings<'_>) {
    let mut first: BTreeMap<&str, usize> = BTreeMap::new();
    for feature in features {
        let Some(name) = feature.name.as_deref() else { continue };
        let Some(earlier) = first.get(name) else {
            first.insert(name, feature.index);
            continue;
        };
        let found = format!("the name {name}, which feature {earlier} has already");
        let mistake = Mistake::new(feature.place(file), found, "a name of its own for every patch")
            .advise("merge the features into one multipolygon in the GIS, or rename one of them");
        findings.mistake("repeated", mistake);
    }
}

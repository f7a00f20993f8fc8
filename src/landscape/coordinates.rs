//! One geometry of a GeoJSON file (RFC 7946, section 3.1), from JSON to polygons and points.

use geo::{Coord, Geometry, LineString, MultiPolygon, Point, Polygon};
use serde_json::Value;

/// A geometry that was read.
#[derive(Debug)]
pub(super) struct Read {
    /// a polygon, a multipolygon or a point, with finite coordinates, closed rings and no edge of length 0
    pub(super) geometry: Geometry<f64>,
    /// rings that had to be closed
    pub(super) closed: usize,
}

/// Why a geometry cannot be a patch.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Refusal {
    /// the words found
    pub(super) found: String,
    /// what would have been right
    pub(super) expected: &'static str,
    /// what to do in the GIS
    pub(super) advice: &'static str,
}

const PATCHES: &str = "a Polygon, a MultiPolygon or a Point";
const AREAL: &str = "a geometry with coordinates";

/// Reads a geometry object.
pub(super) fn read(geometry: Option<&Value>) -> Result<Read, Refusal> {
    let object = match geometry {
        None | Some(Value::Null) => {
            return Err(refusal("geometry is null", AREAL, "draw the patch in the GIS, or delete its row"));
        }
        Some(Value::Object(object)) => object,
        Some(other) => return Err(refusal(format!("geometry is {}", kind(other)), PATCHES, "export the layer again")),
    };
    let coordinates = object.get("coordinates").unwrap_or(&Value::Null);
    let mut closed = 0;
    let geometry = match object.get("type").and_then(Value::as_str) {
        Some("Polygon") => Geometry::Polygon(polygon(coordinates, "", &mut closed)?),
        Some("MultiPolygon") => Geometry::MultiPolygon(multi_polygon(coordinates, &mut closed)?),
        Some("Point") if coordinates.as_array().is_some_and(Vec::is_empty) => return Err(empty()),
        Some("Point") => Geometry::Point(Point(position(coordinates, || "the point".to_owned())?)),
        Some(kind @ ("LineString" | "MultiLineString")) => {
            return Err(refusal(kind, PATCHES, "turn lines into polygons in the GIS (a buffer), or leave them out"));
        }
        Some("MultiPoint") => {
            let advice = "split multipart features into single parts in the GIS";
            return Err(refusal("MultiPoint", PATCHES, advice));
        }
        Some("GeometryCollection") => {
            let advice =
                "split the collection in the GIS and keep its polygons, as one multipolygon or as several patches";
            return Err(refusal("GeometryCollection", PATCHES, advice));
        }
        Some(other) => return Err(refusal(format!("geometry of type {other}"), PATCHES, "export the layer again")),
        None => return Err(refusal("geometry without a type", PATCHES, "export the layer again")),
    };
    Ok(Read { geometry, closed })
}

fn multi_polygon(coordinates: &Value, closed: &mut usize) -> Result<MultiPolygon<f64>, Refusal> {
    let parts = array(coordinates, "a list of polygons")?;
    let parts: Result<Vec<_>, _> = parts
        .iter()
        .enumerate()
        .map(|(position, part)| polygon(part, &format!("part {}, ", position + 1), closed))
        .collect();
    let parts = parts?;
    if parts.is_empty() { Err(empty()) } else { Ok(MultiPolygon::new(parts)) }
}

fn polygon(coordinates: &Value, part: &str, closed: &mut usize) -> Result<Polygon<f64>, Refusal> {
    let rings = array(coordinates, "a list of rings")?;
    let rings: Result<Vec<_>, _> = rings
        .iter()
        .enumerate()
        .map(|(position, coordinates)| ring(coordinates, &format!("{part}ring {}", position + 1), closed))
        .collect();
    let mut rings = rings?.into_iter();
    let shell = rings.next().ok_or_else(empty)?;
    Ok(Polygon::new(shell, rings.collect()))
}

fn ring(coordinates: &Value, name: &str, closed: &mut usize) -> Result<LineString<f64>, Refusal> {
    let positions = array(coordinates, "a ring of positions")?;
    if positions.is_empty() {
        return Err(empty());
    }
    let mut ring = Vec::with_capacity(positions.len() + 1);
    for (index, at) in positions.iter().enumerate() {
        let at = position(at, || format!("{name}, vertex {}", index + 1))?;
        if ring.last() != Some(&at) {
            ring.push(at);
        }
    }
    if ring.first() != ring.last() {
        ring.push(ring[0]);
        *closed += 1;
    }
    if ring.len() < 4 {
        let found = format!("{name} has {} different points", ring.len().saturating_sub(1).max(1));
        return Err(refusal(found, "three or more points to a ring", "delete the sliver in the GIS, or draw it anew"));
    }
    Ok(LineString::new(ring))
}

fn position(value: &Value, name: impl Fn() -> String) -> Result<Coord<f64>, Refusal> {
    if let Some([x, y, ..]) = value.as_array().map(Vec::as_slice)
        && let (Some(x), Some(y)) = (x.as_f64(), y.as_f64())
        && x.is_finite()
        && y.is_finite()
    {
        return Ok(Coord { x, y });
    }
    let shown: String = value.to_string().chars().take(40).collect();
    Err(refusal(
        format!("{} is {shown}", name()),
        "two or three numbers",
        "repair the geometry in the GIS and export again",
    ))
}

fn array<'v>(value: &'v Value, expected: &'static str) -> Result<&'v Vec<Value>, Refusal> {
    match value {
        Value::Array(items) => Ok(items),
        Value::Null => Err(empty()),
        other => Err(refusal(format!("coordinates with {}", kind(other)), expected, "export the layer again")),
    }
}

fn empty() -> Refusal {
    refusal("empty geometry", AREAL, "delete features without geometry in the GIS, or draw them")
}

fn refusal(found: impl Into<String>, expected: &'static str, advice: &'static str) -> Refusal {
    Refusal { found: found.into(), expected, advice }
}

/// What a JSON value is, in words.
pub(super) fn kind(value: &Value) -> &'static str {
    match value {
        Value::Null => "null",
        Value::Bool(_) => "true or false",
        Value::Number(_) => "a number",
        Value::String(_) => "text",
        Value::Array(_) => "a list",
        Value::Object(_) => "an object",
    }
}

#[cfg(test)]
mod tests {
    use serde_json::json;

    use super::*;

    fn refused(geometry: &Value) -> String {
        read(Some(geometry)).unwrap_err().found
    }

    #[test]
    fn heights_are_ignored_and_open_rings_closed() {
        let polygon = json!({ "type": "Polygon", "coordinates": [[[0, 0, 7], [4, 0, 7], [4, 4, 7], [4, 4, 8]]] });
        let read = read(Some(&polygon)).unwrap();
        assert_eq!(read.closed, 1);
        let Geometry::Polygon(polygon) = read.geometry else { panic!("a polygon went in") };
        assert_eq!(polygon.exterior().0.len(), 4);
    }

    #[test]
    fn what_is_no_patch_is_refused_by_name() {
        assert_eq!(read(None).unwrap_err().found, "geometry is null");
        for (geometry, found) in [
            (json!({ "type": "LineString", "coordinates": [[0, 0], [1, 1]] }), "LineString"),
            (json!({ "type": "GeometryCollection", "geometries": [] }), "GeometryCollection"),
            (json!({ "type": "Polygon", "coordinates": [] }), "empty geometry"),
            (json!({ "type": "Polygon", "coordinates": [[]] }), "empty geometry"),
            (json!({ "type": "MultiPolygon", "coordinates": [] }), "empty geometry"),
            (json!({ "type": "Point", "coordinates": [] }), "empty geometry"),
            (json!({ "type": "Polygon" }), "empty geometry"),
            (json!({ "type": "Polygon", "coordinates": [[[0, 0], [1, 1], [0, 0]]] }), "ring 1 has 2 different points"),
            (json!({ "type": "Point", "coordinates": ["5", 52] }), "the point is [\"5\",52]"),
            (
                json!({ "type": "MultiPolygon", "coordinates": [[[[0, 0], [1, null], [0, 1], [0, 0]]]] }),
                "part 1, ring 1, vertex 2 is [1,null]",
            ),
            (json!({ "type": "Blob" }), "geometry of type Blob"),
            (json!({}), "geometry without a type"),
            (json!(3), "geometry is a number"),
        ] {
            assert_eq!(refused(&geometry), found);
        }
    }
}

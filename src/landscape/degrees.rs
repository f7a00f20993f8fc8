//! Longitudes and latitudes: whether they are, and how they run on across the antimeridian.

use std::path::Path;

use geo::{BoundingRect, Coord, LineString, MultiPolygon, Polygon, Rect};
use serde_json::Value;

use super::findings::Findings;
use super::geojson::Feature;
use super::patch::Crs;
use crate::mistake::{Mistake, Place};

/// Longitudes may run on past 180 where a file does not cut its features there, but not further round than once.
const FARTHEST_LONGITUDE: f64 = 360.0;

/// Planar coordinates beyond this many metres are no place on Earth.
const FARTHEST_METRES: f64 = 1e8;

/// A landscape narrower than this many metres is one in degrees.
const NARROWEST_METRES: f64 = 10.0;

/// Says whether all coordinates can be what the study says they are; if not, that is one mistake of the file.
pub(super) fn check_range(
    features: &[Feature],
    file: &Path,
    crs: Crs,
    crs_member: Option<&Value>,
    findings: &Findings<'_>,
) -> bool {
    let boxes: Vec<(&Feature, Rect<f64>)> =
        features.iter().filter_map(|feature| Some((feature, feature.geometry.as_ref()?.bounding_rect()?))).collect();
    let wrong: Vec<_> = boxes.iter().filter(|(_, bounds)| !fits(bounds, crs)).collect();
    let Some((first, bounds)) = wrong.first() else {
        return crs == Crs::Degrees || !are_degrees(file, &boxes, findings);
    };
    let at = farthest_corner(bounds);
    let mut found = format!("coordinates such as {}, {}", at.x, at.y);
    if wrong.len() > 1 {
        found = format!("{found}, and {} more features like this", wrong.len() - 1);
    }
    let (expected, advice) = match crs {
        Crs::Metres => ("planar metres", "look for a slip in the coordinates, and export the layer again".to_owned()),
        Crs::Degrees if boxes.iter().all(|(_, bounds)| fits(&swapped(bounds), crs)) => {
            let advice = "the two look swapped: export them with the longitude first, as GeoJSON asks";
            ("longitude within 180 and latitude within 90 degrees", advice.to_owned())
        }
        Crs::Degrees => {
            let named = crs_name(crs_member).map(|name| format!(" (the file names {name})")).unwrap_or_default();
            let advice = format!(
                "they look like metres{named}: reproject the layer to longitude and latitude (EPSG:4326) in the GIS, or \
                 declare crs = \"metres\" in [landscape]"
            );
            ("longitude within 180 and latitude within 90 degrees", advice)
        }
    };
    findings.mistake("range", Mistake::new(first.place(file), found, expected).advise(advice));
    false
}

fn fits(bounds: &Rect<f64>, crs: Crs) -> bool {
    let (x, y) = match crs {
        Crs::Degrees => (FARTHEST_LONGITUDE, 90.0),
        Crs::Metres => (FARTHEST_METRES, FARTHEST_METRES),
    };
    bounds.min().x >= -x && bounds.max().x <= x && bounds.min().y >= -y && bounds.max().y <= y
}

fn swapped(bounds: &Rect<f64>) -> Rect<f64> {
    let swap = |at: Coord<f64>| Coord { x: at.y, y: at.x };
    Rect::new(swap(bounds.min()), swap(bounds.max()))
}

fn farthest_corner(bounds: &Rect<f64>) -> Coord<f64> {
    let (low, high) = (bounds.min(), bounds.max());
    let farther = |a: f64, b: f64| if a.abs() > b.abs() { a } else { b };
    Coord { x: farther(low.x, high.x), y: farther(low.y, high.y) }
}

/// The name in a `crs` member, as the 2008 edition of GeoJSON has it.
fn crs_name(member: Option<&Value>) -> Option<&str> {
    member?.get("properties")?.get("name")?.as_str()
}

/// Whether coordinates that the study calls metres must be degrees, which is one mistake; where they may be, that is a
/// warning.
fn are_degrees(file: &Path, boxes: &[(&Feature, Rect<f64>)], findings: &Findings<'_>) -> bool {
    let everything = boxes.iter().map(|(_, bounds)| *bounds).reduce(|a, b| {
        let (low, high) = (a.min(), a.max());
        Rect::new(
            Coord { x: low.x.min(b.min().x), y: low.y.min(b.min().y) },
            Coord { x: high.x.max(b.max().x), y: high.y.max(b.max().y) },
        )
    });
    let Some(everything) = everything.filter(|bounds| {
        let farthest = farthest_corner(bounds);
        farthest.x.abs() <= 180.0 && farthest.y.abs() <= 90.0
    }) else {
        return false;
    };
    let width_m = everything.width().max(everything.height());
    let found = format!("a landscape {width_m:.3} m across, all coordinates within 180 and 90");
    let advice = "if they are degrees, take crs = \"metres\" out of [landscape]";
    let note = |expected: &str| Mistake::new(Place::file(file), found.clone(), expected).advise(advice);
    if width_m < NARROWEST_METRES {
        findings.mistake("degrees", note("planar metres"));
        return true;
    }
    findings.warning("degrees", note("read as metres"));
    false
}

/// An outline of polygons whose longitudes run on across the antimeridian: every vertex lies within half the way round of
/// the one before. `None` if a ring runs round a pole, and so never comes back.
pub(super) fn run_on(outline: MultiPolygon<f64>) -> Option<MultiPolygon<f64>> {
    let mut last = outline.0.first()?.exterior().0.first()?.x;
    let mut parts = Vec::with_capacity(outline.0.len());
    for part in outline {
        let (shell, holes) = part.into_inner();
        let shell = run_on_ring(shell, &mut last)?;
        let holes: Option<Vec<_>> = holes.into_iter().map(|hole| run_on_ring(hole, &mut last)).collect();
        parts.push(Polygon::new(shell, holes?));
    }
    Some(MultiPolygon::new(parts))
}

fn run_on_ring(mut ring: LineString<f64>, last: &mut f64) -> Option<LineString<f64>> {
    for at in &mut ring.0 {
        while at.x - *last > 180.0 {
            at.x -= 360.0;
        }
        while at.x - *last < -180.0 {
            at.x += 360.0;
        }
        *last = at.x;
    }
    ring.is_closed().then_some(ring)
}

#[cfg(test)]
mod tests {
    use geo::wkt;

    use super::*;

    #[test]
    fn longitudes_run_on_across_the_antimeridian() {
        let uncut = wkt!(MULTIPOLYGON(((179. 0., -179. 0., -179. 1., 179. 1., 179. 0.)), ((-178. 0., -177. 0., -177. 1., -178. 0.))));
        let run = run_on(uncut).unwrap();
        assert_eq!(
            run,
            wkt!(MULTIPOLYGON(((179. 0., 181. 0., 181. 1., 179. 1., 179. 0.)), ((182. 0., 183. 0., 183. 1., 182. 0.))))
        );
    }

    #[test]
    fn a_ring_round_the_pole_does_not_come_back() {
        assert_eq!(run_on(wkt!(MULTIPOLYGON(((0. 80., 90. 80., 180. 80., -90. 80., 0. 80.))))), None);
    }
}

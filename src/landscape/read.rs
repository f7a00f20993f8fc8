//! The landscape of a study, from the files that its table names.

use std::collections::BTreeMap;
use std::path::Path;

use geo::{Area, Geometry};
use rayon::prelude::*;

use super::capacity_years::{CapacityOverTime, Course};
use super::findings::Findings;
use super::geojson::{self, Feature};
use super::ground::{self, Ground};
use super::measure::{Measured, measure, round_area_ha};
use super::patch::{Crs, Landscape, Patch};
use super::plane::{NoPlane, Plane};
use super::table::LandscapeTable;
use super::values::{self, Values};
use super::{degrees, overlap};
use crate::mistake::{Mistake, Place};
use crate::study::{Document, Said};

/// A stated area more than so many times the outline's, or less than that part of it, is odd.
const FARTHEST_RATIO: f64 = 5.0;

/// Beyond this width in kilometres the plane strains distances by more than a thousandth.
const WIDEST_KM: f64 = 1000.0;

impl Landscape {
    /// Reads the patches that the table names, with their areas, capacities and start numbers. `stage_names` are the stages
    /// of the life history in order; they may be empty where it has none.
    ///
    /// Mistakes and warnings are noted in the document: of every feature and row, but no more than twenty of one kind, the
    /// last of which says how many there are beyond. `None` if there was any mistake.
    pub fn read(table: &LandscapeTable, document: &Document, stage_names: &[String]) -> Option<Self> {
        let (file, bytes) = document.read_file(&table.patches)?;
        let findings = Findings::new(document);
        let landscape = read(table, &file, &bytes, stage_names, &findings);
        if findings.finish() { landscape } else { None }
    }
}

fn read(
    table: &LandscapeTable,
    file: &Path,
    bytes: &[u8],
    stage_names: &[String],
    findings: &Findings<'_>,
) -> Option<Landscape> {
    let collection = geojson::read(file, bytes, table.id.as_ref(), findings)?;
    let features = collection.features;
    let values = Values::read(table, &features, file, stage_names, findings);
    overlap::refuse_duplicates(&features, file, findings);
    refuse_points_without_area(table, &features, file, findings);
    if !degrees::check_range(&features, file, table.crs, collection.crs_member.as_ref(), findings) {
        return None;
    }
    let grounds = ground::mend_all(&features, file, table.crs, findings);
    let measured = measure_all(&features, &grounds, file, table.crs, findings)?;
    let courses = courses_by_name(&features, &values);
    let patches: Option<Vec<Patch>> = features
        .into_iter()
        .zip(grounds)
        .zip(measured)
        .enumerate()
        .map(|(position, ((feature, ground), measured))| patch(feature, ground?, measured, &values, position, file))
        .collect();
    // Sums and neighbours mean nothing where a patch is missing.
    let mut patches = patches?;
    patches.sort_by(|a, b| a.name.cmp(&b.name));
    values::check_totals(table, file, &patches, findings);
    if let Some(property) = &table.area {
        warn_of_stated_areas(property, &patches, findings);
    }
    overlap::warn_of_overlaps(&patches, findings);
    let patches_ha = round_area_ha(patches.iter().map(|patch| patch.area_ha).sum());
    Some(Landscape {
        crs: table.crs,
        crs_member: collection.crs_member,
        landscape_area_ha: landscape_area_ha(table, patches_ha, findings),
        between_centroids: table.between_centroids,
        capacity_over_time: over_time(table, &patches, &courses),
        patches,
    })
}

/// The capacities that a table states by years, under the names of the patches.
fn courses_by_name(features: &[Feature], values: &Values) -> BTreeMap<String, Course> {
    let named = |(feature, course): (&Feature, &Option<Course>)| Some((feature.name.clone()?, course.clone()?));
    features.iter().zip(&values.courses).filter_map(named).collect()
}

fn over_time(table: &LandscapeTable, patches: &[Patch], courses: &BTreeMap<String, Course>) -> CapacityOverTime {
    let number = |said: &Option<Said<f64>>| said.as_ref().map_or(0.0, |said| said.value);
    let changes = &table.capacity_changes;
    let courses = patches.iter().filter_map(|patch| courses.get(&patch.name).cloned()).collect();
    CapacityOverTime::new(number(&changes.trend_per_year), number(&changes.variation), courses)
}

fn patch(
    feature: Feature,
    (geometry, _): (Geometry<f64>, Ground),
    measured: Measured,
    values: &Values,
    position: usize,
    file: &Path,
) -> Option<Patch> {
    let place = feature.place(file);
    let area_ha = match values.areas_ha.get(position) {
        Some(stated) => round_area_ha((*stated)?),
        None => measured.area_ha,
    };
    Some(Patch {
        name: feature.name?,
        area_ha,
        capacity: values.capacities[position]?.individuals(area_ha),
        start: values.starts[position].clone()?,
        centroid_km: measured.centroid_km,
        radius_km: measured.radius_km,
        outline_km: measured.outline_km,
        shape: geometry,
        place,
    })
}

fn refuse_points_without_area(table: &LandscapeTable, features: &[Feature], file: &Path, findings: &Findings<'_>) {
    if table.area.is_some() {
        return;
    }
    for feature in features.iter().filter(|feature| matches!(feature.geometry, Some(Geometry::Point(_)))) {
        let mistake = Mistake::new(feature.place(file), "a point without an area", "an area for every point")
            .advise("name the property that holds hectares in [landscape]: area = { property = \"...\" }");
        findings.mistake("bare point", mistake);
    }
}

/// Measures every patch that has ground. `None`, with the mistakes noted, if there is no plane for them or one has no area.
fn measure_all(
    features: &[Feature],
    grounds: &[Option<(Geometry<f64>, Ground)>],
    file: &Path,
    crs: Crs,
    findings: &Findings<'_>,
) -> Option<Vec<Measured>> {
    let boxes: Vec<_> = grounds.iter().flatten().filter_map(|(_, ground)| ground.bounds()).collect();
    let plane = match Plane::around(crs, &boxes) {
        Ok(plane) => plane,
        Err(NoPlane::Nothing) => return None,
        Err(NoPlane::TooWide) => {
            let found = "patches more than 6,000 km from their middle";
            let mistake = Mistake::new(Place::file(file), found, "one landscape");
            findings.mistake("wide", mistake.advise("look for stray features in the GIS, often at 0, 0"));
            return None;
        }
    };
    let measured: Vec<Option<Measured>> =
        grounds.par_iter().map(|ground| ground.as_ref().map(|(_, ground)| measure(ground, &plane))).collect();
    let mut sound = true;
    for (feature, measured) in features.iter().zip(&measured) {
        if measured.as_ref().is_some_and(|measured| !measured.outline_km.0.is_empty() && measured.area_ha <= 0.0) {
            let mistake = Mistake::new(feature.place(file), "an outline of zero area", "a patch of at least 0.01 m2");
            findings.mistake("no area", mistake.advise("delete the sliver in the GIS, or draw it anew"));
            sound = false;
        }
    }
    warn_of_width(file, crs, measured.iter().flatten(), findings);
    if sound { measured.into_iter().collect() } else { None }
}

fn warn_of_width<'m>(file: &Path, crs: Crs, measured: impl Iterator<Item = &'m Measured>, findings: &Findings<'_>) {
    let empty = ([f64::INFINITY; 2], [f64::NEG_INFINITY; 2]);
    let (low, high) = measured.fold(empty, |(low, high), patch| {
        let (at, radius) = (patch.centroid_km, patch.radius_km);
        ([0, 1].map(|axis| low[axis].min(at[axis] - radius)), [0, 1].map(|axis| high[axis].max(at[axis] + radius)))
    });
    let width_km = (high[0] - low[0]).max(high[1] - low[1]);
    if crs == Crs::Degrees && width_km > WIDEST_KM {
        let found = format!("a landscape {width_km:.0} km across");
        let expected = format!("beyond {WIDEST_KM} km distances may be wrong by more than 0.1 %; areas stay right");
        findings.warning("width", Mistake::new(Place::file(file), found, expected));
    }
}

/// Warns where a stated area is far from what the outline measures: square metres, or coordinates that are swapped.
fn warn_of_stated_areas(property: &Said<String>, patches: &[Patch], findings: &Findings<'_>) {
    let outline_ha = |patch: &Patch| 100.0 * patch.outline_km.unsigned_area();
    let off = |patch: &&Patch| {
        let ratio = patch.area_ha / outline_ha(patch);
        !patch.outline_km.0.is_empty() && !(1.0 / FARTHEST_RATIO..=FARTHEST_RATIO).contains(&ratio)
    };
    let mut wrong = patches.iter().filter(off);
    let Some(first) = wrong.next() else { return };
    let more = match wrong.count() {
        0 => String::new(),
        more => format!(", and {more} more patches like this"),
    };
    let found = format!("{} = {} ha{more}", property.value, first.area_ha);
    let note = format!("the outline measures {:.2} ha; the stated area is used", outline_ha(first));
    let warning = Mistake::new(first.place.clone(), found, note);
    findings.warning("stated area", warning.advise("look at the unit, hectares, and at the order of the coordinates"));
}

/// The area that the study states, or else that of the patches.
fn landscape_area_ha(table: &LandscapeTable, patches_ha: f64, findings: &Findings<'_>) -> f64 {
    let Some(stated) = &table.landscape_area_ha else { return patches_ha };
    if stated.value < patches_ha {
        let mistake = stated.mistake(format!("at least the {patches_ha} ha of the patches together"));
        findings.mistake("landscape area", mistake.advise("give the area of patches and the ground between them"));
    }
    stated.value
}

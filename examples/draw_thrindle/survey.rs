//! What the survey of 2024 says of each patch, who owns it and what it would cost.

use eyot::num;
use geo::{Area, Geometry, MultiPolygon};
use rand::RngExt;
use serde_json::{Value, json};

use super::plane::{between, normal, poisson};
use super::sites::{Form, Site};
use super::{Rng, feature};

/// What a hectare of the best habitat carries: breeding and young females.
const FEMALES_PER_HA: f64 = 4.0;
/// How full the patches were found, but for chance.
const OCCUPANCY: f64 = 0.6;

/// The patch as a feature of the file.
pub(crate) fn patch(site: &Site, shape: &MultiPolygon, rng: &mut Rng) -> Value {
    let area_ha = shape.unsigned_area() * 100.0;
    let quality = (site.form.draw_quality(rng) * 100.0).round() / 100.0;
    let owner = owner(site.form, rng);
    let properties = json!({
        "patch": site.name,
        "quality": quality,
        "count_2024": count(area_ha, quality, rng),
        "owner": owner,
        "cost": cost(area_ha, owner, rng),
    });
    feature(properties, &geometry(shape))
}

/// A patch of one part is written as a polygon.
fn geometry(shape: &MultiPolygon) -> Geometry {
    match shape.0.as_slice() {
        [only] => only.clone().into(),
        _ => shape.clone().into(),
    }
}

/// Females counted: chance within a patch and between patches; small patches may stand empty.
fn count(area_ha: f64, quality: f64, rng: &mut Rng) -> u32 {
    let is_empty = area_ha < 2.0 && rng.random::<f64>() < 0.35;
    let expected = OCCUPANCY * FEMALES_PER_HA * area_ha * quality * num::exp(0.3 * normal(rng));
    if is_empty { 0 } else { poisson(expected, rng) }
}

fn owner(form: Form, rng: &mut Rng) -> &'static str {
    match (form, rng.random::<f64>()) {
        (Form::Key(_), _) | (_, 0.0..0.2) => "trust",
        (_, 0.2..0.45) => "parish",
        _ => "farm",
    }
}

/// Thousand crowns: fees, and ground that a farm sells dearest.
#[expect(clippy::cast_possible_truncation, clippy::cast_sign_loss, reason = "a few hundred at most")]
fn cost(area_ha: f64, owner: &str, rng: &mut Rng) -> u32 {
    let per_ha = match owner {
        "trust" => 9.0,
        "parish" => 12.0,
        _ => 17.0,
    };
    (4.0 + area_ha * per_ha * between(0.75, 1.3, rng)).round() as u32
}

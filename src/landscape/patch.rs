//! What a landscape is once it has been read: patches in canonical order, measured and placed in one plane.

use geo::{Geometry, MultiPolygon};

use super::capacity_years::CapacityOverTime;
use crate::mistake::Place;

/// The coordinates of the input.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Crs {
    /// longitude and latitude in degrees (RFC 7946)
    Degrees,
    /// planar metres
    Metres,
}

/// The individuals that a patch starts with.
#[derive(Debug, Clone, PartialEq)]
pub enum Start {
    /// this share of the capacity
    ShareOfCapacity(f64),
    /// this many in all, to be split over the stable stage distribution
    Total(f64),
    /// counts by stage, in the order of the life history
    ByStage(Vec<u32>),
}

/// A patch of habitat.
#[derive(Debug, Clone)]
pub struct Patch {
    /// its name, unique in the landscape
    pub name: String,
    /// area in hectares, rounded to 0.01 m2
    pub area_ha: f64,
    /// carrying capacity in individuals at census 0, 0 or above
    pub capacity: f64,
    /// the individuals at census 0
    pub start: Start,
    /// centroid in the plane of the landscape, kilometres
    pub centroid_km: [f64; 2],
    /// the farthest that its outline lies from the centroid, kilometres; 0 for a point
    pub radius_km: f64,
    /// outline in the plane of the landscape, kilometres; empty for a point
    pub outline_km: MultiPolygon<f64>,
    /// geometry as in the input (repaired where need was), in its coordinates
    pub shape: Geometry<f64>,
    /// where it stands in the input
    pub place: Place,
}

/// All patches, as is.
#[derive(Debug, Clone)]
pub struct Landscape {
    /// the patches in the order of their names (bytewise), the canonical order of everything compiled from them
    pub patches: Vec<Patch>,
    /// the coordinates of the input
    pub crs: Crs,
    /// the `crs` member of the input, carried into the outputs
    pub crs_member: Option<serde_json::Value>,
    /// area of the landscape in hectares if the study states one, else the sum of the patches
    pub landscape_area_ha: f64,
    /// whether distances run between centroids instead of nearest edges
    pub between_centroids: bool,
    /// how capacities change from year to year
    pub capacity_over_time: CapacityOverTime,
}

impl Landscape {
    /// How far the patches reach from west to east and from south to north, in kilometres of the plane.
    pub fn extent_km(&self) -> [f64; 2] {
        [0, 1].map(|axis| {
            let edge =
                |sign: f64| self.patches.iter().map(move |patch| patch.centroid_km[axis] + sign * patch.radius_km);
            let (low, high) = (edge(-1.0).fold(f64::INFINITY, f64::min), edge(1.0).fold(f64::NEG_INFINITY, f64::max));
            high - low
        })
    }
}

//! Patches, their geometry, areas and distances; reading them from GeoJSON and CSV.

mod patch;

pub use patch::{Crs, Landscape, Patch, Start};

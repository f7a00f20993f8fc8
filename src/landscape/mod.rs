//! Patches, their geometry, areas and distances; reading them from GeoJSON and CSV.
//!
//! [`LandscapeTable`] is what the study says; [`Landscape::read`] follows it to the files: features one by one
//! (`geojson`, `coordinates`), mended where they cross themselves (`repair`), measured in one plane (`plane`, `measure`),
//! with the values that properties and tables give (`values`). [`Neighbours`] then finds what lies near what.

mod capacity_years;
mod coordinates;
mod degrees;
mod edges;
mod findings;
mod geojson;
mod glance;
mod ground;
mod measure;
mod names;
mod neighbours;
mod occupied;
mod overlap;
mod patch;
mod plane;
mod properties;
mod read;
mod repair;
mod table;
mod tables;
mod values;

pub use capacity_years::CapacityOverTime;
pub use glance::{Glance, Property, Values};
pub use neighbours::Neighbours;
pub use patch::{Crs, Landscape, Patch, Start};
pub use plane::{Ellipsoid, EqualAreaPlane, WGS84};
pub use table::{CapacityFrom, LandscapeTable, StartFrom};

//! Vital rates, projection matrices, density dependence, and the local step of each kind of model.

pub mod allee;
mod census;
pub mod density;
mod life_history;
pub mod local;
mod matrix;
mod oddities;
mod rate;
mod start;

pub use census::Census;
pub use life_history::{LifeHistory, Stage};
pub use matrix::{Matrix, ProjectionMatrix};
pub use rate::{Law, Rate, RateGroup};
pub use start::{ceiling_cut, split_total};

//! What is told of a study whose patches are full or empty: there are no individuals to speak of.

pub(super) mod columns;
pub(super) mod json;
pub(super) mod terminal;
mod understood;

pub use understood::OccupancyUnderstood;

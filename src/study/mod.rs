//! The study file: one TOML document that states the landscape, the species, the horizon and the proposals.
//!
//! It is read as a tree in which every key and value knows its place ([`Document`]), and walked with a reader that
//! collects mistakes instead of stopping at the first ([`Table`]). Each room reads its own table with it. The top of the
//! file, which belongs to no room, is [`Settings`].

mod csv_table;
mod document;
mod faults;
mod settings;
mod table;

pub use csv_table::{CsvRow, CsvTable};
pub use document::{Document, Input};
pub use settings::{Effort, QuasiExtinction, Settings};
pub use table::{Item, NOT_NEGATIVE, Numbers, POSITIVE, PROBABILITY, Said, Table};

//! `eyot` says whether a network of habitat patches keeps its population.
//!
//! Data flows one way, down this list of rooms; a room uses only rooms listed above it:
//!
//! | room | holds |
//! | --- | --- |
//! | [`mistake`] | what is wrong, where, and what to do |
//! | [`num`] | exp, ln, quantiles: the only door to them |
//! | [`random`] | streams by identity, exact samplers |
//! | [`study`] | the study file as a tree with places, and the collecting reader |
//! | [`landscape`] | patches, geometry, areas, distances, reading GeoJSON and tables |
//! | [`network`] | kernels, settlement, the dispersal matrix, the structure of the graph |
//! | [`demography`] | rates, matrices, density dependence, the local models |
//! | [`environment`] | the correlated field, the distributions of rates |
//! | [`engine`] | a study compiled, its replicates run in parallel, the tallies |
//! | [`outcome`] | tallies to curves, tables and intervals |
//! | [`output`] | CSV, GeoJSON, JSON, and whole folders |
//! | [`cli`] | the commands |
//!
//! Each room reads its own table of the study, so that a new kind (a kernel, a local model, a form of density
//! dependence) is one file, with its keys, its checks and its arithmetic side by side, and one line where its kind is
//! listed.

pub mod cli;
pub mod demography;
pub mod engine;
pub mod environment;
pub mod landscape;
pub mod mistake;
pub mod network;
pub mod num;
pub mod outcome;
pub mod output;
pub mod random;
pub mod study;

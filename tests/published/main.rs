//! Checks against the world outside: published formulas, worked examples, and values recomputed independently of this
//! crate. Each test names its source.

mod demography;
mod environment;
mod geodesy;
mod intervals;
mod network;
mod samplers;
mod whole_program;

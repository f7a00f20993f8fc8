//! eyot
fn main() {}

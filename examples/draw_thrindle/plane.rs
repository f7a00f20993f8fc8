//! Small arithmetic of the plane, and chance.

use std::f64::consts::TAU;

use eyot::num;
use geo::Coord;
use rand::RngExt;

use super::Rng;

/// The unit vector at an angle from the east, in radians.
pub(crate) fn toward(direction: f64) -> Coord {
    Coord { x: num::cos(direction), y: num::sin(direction) }
}

/// The vector of length 1 along `v`.
pub(crate) fn unit(v: Coord) -> Coord {
    v / (v.x * v.x + v.y * v.y).sqrt()
}

/// A quarter turn to the left.
pub(crate) fn left_of(v: Coord) -> Coord {
    Coord { x: -v.y, y: v.x }
}

/// A number between two others, each alike.
pub(crate) fn between(low: f64, high: f64, rng: &mut Rng) -> f64 {
    low + (high - low) * rng.random::<f64>()
}

/// A standard normal number (Box & Muller 1958).
pub(crate) fn normal(rng: &mut Rng) -> f64 {
    let radius = (-2.0 * num::ln(1.0 - rng.random::<f64>())).sqrt();
    radius * num::cos(TAU * rng.random::<f64>())
}

/// A Poisson number of a mean in the hundreds at most, by counting arrivals.
pub(crate) fn poisson(mean: f64, rng: &mut Rng) -> u32 {
    let mut count = 0;
    let mut time = -num::ln(1.0 - rng.random::<f64>());
    while time < mean {
        count += 1;
        time -= num::ln(1.0 - rng.random::<f64>());
    }
    count
}

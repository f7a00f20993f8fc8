//! Standard normal deviates.

use std::sync::LazyLock;

use super::Stream;
use crate::num::normal::cdf;
use crate::num::{exp, ln};

/// A standard normal deviate, from one word in 99 draws of 100.
///
/// # Source
/// Marsaglia & Tsang (2000), The ziggurat method for generating random variables, J. Stat. Softw. 5; 256 layers, with
/// separate bits for the layer and the place in it, as Doornik (2005) asks. Measured, it costs under half of the way
/// through the quantile.
#[inline]
pub fn standard_normal(stream: &mut Stream) -> f64 {
    let layers = &*LAYERS;
    loop {
        let word = stream.word();
        let layer = (word & 0xff) as usize;
        // The other bits as a number from -1 to 1.
        let place = (word as i64 >> 11) as f64 / (1_u64 << 52) as f64;
        let x = place * layers.width[layer];
        if x.abs() < layers.width[layer + 1] {
            return x;
        }
        if let Some(x) = layers.at_the_edge(stream, layer, x) {
            return x;
        }
    }
}

const N_LAYERS: usize = 256;

/// Where the tail begins: the one place at which 256 layers of one area end at the summit.
const TAIL: f64 = 3.654_152_885_361_009;

/// The area under exp(-x^2 / 2) right of 0, cut into layers of one area. Layer 0 holds the tail, and is as wide as if it
/// were a rectangle; the others are the rectangles that just contain the curve.
struct Layers {
    width: [f64; N_LAYERS + 1],
    height: [f64; N_LAYERS + 1],
}

static LAYERS: LazyLock<Layers> = LazyLock::new(Layers::new);

fn curve(x: f64) -> f64 {
    exp(-0.5 * x * x)
}

impl Layers {
    fn new() -> Self {
        let beyond = std::f64::consts::TAU.sqrt() * cdf(-TAIL);
        let area = TAIL * curve(TAIL) + beyond;
        let mut width = [0.0; N_LAYERS + 1];
        width[0] = area / curve(TAIL);
        width[1] = TAIL;
        for layer in 2..N_LAYERS {
            let top = curve(width[layer - 1]) + area / width[layer - 1];
            width[layer] = (-2.0 * ln(top)).sqrt();
        }
        Self { width, height: width.map(curve) }
    }

    /// What becomes of a place beyond the part of its layer that lies under the curve for sure.
    #[cold]
    fn at_the_edge(&self, stream: &mut Stream, layer: usize, x: f64) -> Option<f64> {
        if layer == 0 {
            return Some(beyond_the_tail(stream).copysign(x));
        }
        let (low, high) = (self.height[layer], self.height[layer + 1]);
        (low + (high - low) * stream.uniform() < curve(x)).then_some(x)
    }
}

/// Marsaglia (1964), Generating a variable from the tail of the normal distribution, Technometrics 6.
fn beyond_the_tail(stream: &mut Stream) -> f64 {
    loop {
        let x = -ln(stream.open_uniform()) / TAIL;
        let y = -ln(stream.open_uniform());
        if 2.0 * y > x * x {
            return TAIL + x;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// What makes the layers a cover: the last one reaches the curve's summit at 0, to rounding.
    #[test]
    fn the_last_layer_ends_at_the_summit() {
        let area = LAYERS.width[0] * curve(TAIL);
        let last = LAYERS.width[N_LAYERS - 1];
        assert!((curve(last) + area / last - 1.0).abs() < 1e-12);
    }
}

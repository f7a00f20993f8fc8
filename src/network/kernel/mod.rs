//! Dispersal kernels: how densely those who disperse land around the place they left.
//!
//! A kernel is a two-dimensional location density k(r), in landings per km2 at distance r km, with the integral of
//! 2 pi r k(r) equal to 1 (Nathan, Klein, Robledo-Arnuncio & Revilla 2012). Each kind is one file with its keys, their
//! checks and its arithmetic, and one line in the list of kinds.

mod exponential;
mod exponential_power;
mod gaussian;
mod lognormal;
mod two_dt;

use std::fmt::Debug;
use std::sync::Arc;

pub use exponential::Exponential;
pub use exponential_power::ExponentialPower;
pub use gaussian::Gaussian;
pub use lognormal::Lognormal;
pub use two_dt::TwoDt;

use crate::num;
use crate::study::{Numbers, Table};

/// Reads a kind's own keys and builds it to the scale, if there is one.
type Read = fn(&Table<'_>, Option<Scale>) -> Option<Kernel>;

const KINDS: &[(&str, Read)] = &[
    ("exponential", exponential::read),
    ("gaussian", gaussian::read),
    ("exponential-power", exponential_power::read),
    ("2Dt", two_dt::read),
    ("lognormal", lognormal::read),
];

/// From a millimetre to the length of the equator: wide enough for any animal, narrow enough for the arithmetic.
const DISTANCES_KM: Numbers = Numbers { low: 1e-6, high: 40_000.0, above_low: false, below_high: false };

/// What a kind of kernel can say of itself.
pub trait Shape: Debug + Send + Sync {
    /// ln k(r) at `km`, k in landings per km2; may be minus infinity.
    fn ln_density(&self, km: f64) -> f64;

    /// Probability that a dispersal distance exceeds `km`.
    fn beyond(&self, km: f64) -> f64;

    /// k(r) / k(0), from 1 downward; none for a kernel without a density above 0 at distance 0.
    fn relative(&self, km: f64) -> Option<f64>;

    /// Mean dispersal distance in km.
    fn mean_km(&self) -> f64;

    /// Distance in km from which on the density never rises.
    fn peak_km(&self) -> f64 {
        0.0
    }
}

/// The distance that sets the scale of a kernel.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Scale {
    /// mean dispersal distance in km
    MeanKm(f64),
    /// median dispersal distance in km
    MedianKm(f64),
}

impl Scale {
    /// The kernel's length parameter in km, given the mean and the median that it has at length 1.
    fn length_km(self, mean_at_1: f64, median_at_1: impl FnOnce() -> f64) -> f64 {
        match self {
            Self::MeanKm(mean) => mean / mean_at_1,
            Self::MedianKm(median) => median / median_at_1(),
        }
    }
}

/// A dispersal kernel of any kind; cheap to clone.
#[derive(Debug, Clone)]
pub struct Kernel {
    shape: Arc<dyn Shape>,
    median_km: f64,
}

impl Kernel {
    /// The kernel of a given shape.
    pub fn new(shape: impl Shape + 'static) -> Self {
        let median_km = halfway(|km| shape.beyond(km), shape.mean_km());
        Self { shape: Arc::new(shape), median_km }
    }

    /// Reads a kernel's table: `shape`, one of `mean_km` and `median_km`, and the keys of the shape. Mistakes are noted in
    /// the document.
    pub(super) fn read(table: &Table<'_>) -> Option<Self> {
        let scale = read_scale(table);
        if !table.has("shape") {
            table.missing("shape", "the shape of the kernel, such as \"exponential\", or table = \"file.csv\"");
        }
        let read = table.choice("shape", KINDS)?.value;
        read(table, scale)
    }

    /// ln k(r) at `km`, k in landings per km2; may be minus infinity.
    pub fn ln_density(&self, km: f64) -> f64 {
        self.shape.ln_density(km)
    }

    /// k(r) at `km`, in landings per km2.
    pub fn density(&self, km: f64) -> f64 {
        num::exp(self.ln_density(km))
    }

    /// k(r) / k(0), from 1 downward, as the incidence function and the metapopulation capacity read a kernel; none for the
    /// lognormal, whose density at 0 is 0.
    pub fn relative(&self, km: f64) -> Option<f64> {
        self.shape.relative(km)
    }

    /// Probability that a dispersal distance exceeds `km`.
    pub fn beyond(&self, km: f64) -> f64 {
        self.shape.beyond(km)
    }

    /// Mean dispersal distance in km.
    pub fn mean_km(&self) -> f64 {
        self.shape.mean_km()
    }

    /// Median dispersal distance in km.
    pub fn median_km(&self) -> f64 {
        self.median_km
    }

    /// The greatest ln density anywhere beyond `km`.
    pub(super) fn ln_density_beyond(&self, km: f64) -> f64 {
        self.ln_density(km.max(self.shape.peak_km()))
    }

    /// The length over which the bulk of the kernel changes, in km: its mean or median, whichever is shorter.
    pub(super) fn bulk_km(&self) -> f64 {
        self.mean_km().min(self.median_km)
    }
}

fn read_scale(table: &Table<'_>) -> Option<Scale> {
    let mean = table.number("mean_km", DISTANCES_KM);
    let median = table.number("median_km", DISTANCES_KM);
    match (table.has("mean_km"), table.has("median_km")) {
        (true, false) => Some(Scale::MeanKm(mean?.value)),
        (false, true) => Some(Scale::MedianKm(median?.value)),
        (true, true) => {
            if let Some(said) = median {
                let mistake = said.mistake("either mean_km or median_km, not both");
                table.document().mistake(mistake.advise("take one of the two out"));
            }
            None
        }
        (false, false) => {
            table.missing("mean_km", "the mean dispersal distance in km, or median_km");
            None
        }
    }
}

/// The distance at which the falling function `beyond` passes a half, by bisection from a guess.
fn halfway(beyond: impl Fn(f64) -> f64, guess: f64) -> f64 {
    let (mut low, mut high) = (0.0, guess);
    while beyond(high) > 0.5 {
        low = high;
        high *= 2.0;
    }
    loop {
        let middle = low + (high - low) / 2.0;
        if middle <= low || middle >= high {
            return high;
        }
        if beyond(middle) > 0.5 {
            low = middle;
        } else {
            high = middle;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::study::Document;
    use std::path::Path;

    fn read(text: &str) -> (Option<Kernel>, Vec<String>) {
        let document = Document::parse(Path::new("study.toml"), text.to_owned());
        let table = document.root().table("kernel").unwrap();
        let kernel = Kernel::read(&table);
        let mistakes = document.verdict().err().map_or(Vec::new(), |found| found.into_vec());
        (kernel, mistakes.into_iter().map(|mistake| mistake.to_string()).collect())
    }

    #[test]
    fn every_kind_is_read_to_its_mean_and_to_its_median() {
        for keys in
            ["'exponential'", "'gaussian'", "'exponential-power', c = 0.5", "'2Dt', b = 2.5", "'lognormal', s = 0.8"]
        {
            let (kernel, mistakes) = read(&format!("kernel = {{ mean_km = 2.5, shape = {keys} }}"));
            assert_eq!(mistakes, [""; 0]);
            assert!((kernel.unwrap().mean_km() - 2.5).abs() < 1e-12, "{keys}");
            let kernel = read(&format!("kernel = {{ median_km = 2.5, shape = {keys} }}")).0.unwrap();
            assert!((kernel.median_km() - 2.5).abs() < 1e-12, "{keys}");
            assert!((kernel.beyond(2.5) - 0.5).abs() < 1e-12, "{keys}");
        }
    }

    #[test]
    fn mistakes_name_the_key() {
        let both = read("kernel = { shape = 'gaussian', mean_km = 1, median_km = 2 }").1;
        assert!(both[0].contains("kernel.median_km = 2") && both[0].contains("not both"), "{both:?}");
        let none = read("kernel = { shape = 'gaussian' }").1;
        assert!(none[0].contains("kernel.mean_km is missing"), "{none:?}");
        let bad = read("kernel = { shape = '2Dt', b = 1.5, mean_km = -1 }").1;
        assert_eq!(bad.len(), 2, "{bad:?}");
        let lacking = read("kernel = { shape = 'lognormal', mean_km = 1 }").1;
        assert!(lacking[0].contains("kernel.s is missing"), "{lacking:?}");
        let near = read("kernel = { shape = 'gausian', mean_km = 1 }").1;
        assert!(near[0].contains("write \"gaussian\""), "{near:?}");
    }
}

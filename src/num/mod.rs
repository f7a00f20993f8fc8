//! The only door to transcendental functions, and the special functions built on them.
//!
//! `f64::exp`, `ln`, `powf` and their kin come from the platform's C library and differ between platforms in the last
//! bits. Everything here goes through `libm`, whose Rust source is the same everywhere, so that one study gives one
//! answer wherever it is run.

mod gamma;
mod normal;

pub use gamma::gamma_q;
pub use normal::normal_cdf;

/// e to the power `x`.
pub fn exp(x: f64) -> f64 {
    libm::exp(x)
}

/// Natural logarithm; `-inf` at 0, NaN below.
pub fn ln(x: f64) -> f64 {
    libm::log(x)
}

/// ln(1 + x), right for small `x`.
pub fn ln_1p(x: f64) -> f64 {
    libm::log1p(x)
}

/// e^x - 1, right for small `x`.
pub fn exp_m1(x: f64) -> f64 {
    libm::expm1(x)
}

/// `base` to the power `exponent`.
pub fn pow(base: f64, exponent: f64) -> f64 {
    libm::pow(base, exponent)
}

/// Sine of an angle in radians.
pub fn sin(x: f64) -> f64 {
    libm::sin(x)
}

/// Cosine of an angle in radians.
pub fn cos(x: f64) -> f64 {
    libm::cos(x)
}

/// ln of the absolute value of the gamma function.
pub fn ln_gamma(x: f64) -> f64 {
    libm::lgamma(x)
}

//! Streams by identity, and samplers that are exact in distribution at every size.
//!
//! A draw is keyed by who asks for it, never by what was drawn before ([`streams`]). Samplers take any argument: a
//! probability is clamped to 0 to 1, a mean to 0 and above, NaN counts as 0, and nothing panics. They stand on integer
//! arithmetic, the four operations, square roots and [`crate::num`], so that they give the same numbers everywhere.
//! A change in any number they give changes results, and is a change of version.

mod alias;
mod binomial;
mod gamma;
mod hypergeometric;
mod multinomial;
mod normal;
mod poisson;
mod poisson_table;
mod purpose;
pub mod streams;
#[cfg(test)]
mod tests;
mod thinning;

pub use alias::AliasRows;
pub use binomial::binomial;
pub use gamma::gamma;
pub use hypergeometric::hypergeometric;
pub use multinomial::multinomial;
pub use normal::standard_normal;
pub use poisson::poisson;
pub use purpose::Purpose;
pub use streams::{PlaceKey, ReplicateKey, Stream, YearKey, name_index, patch_key};
pub use thinning::remove_at_random;

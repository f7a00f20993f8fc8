//! Fields: how one year's innovations go together over the patches.
//!
//! A field gives, for a replicate, a year and a rate group, one standard normal innovation a patch. Years are independent
//! here; what a year keeps of the last is added in [`super::Weather`].

mod dense;

pub use dense::{DenseField, MOST_CORRELATED_PLACES};

use super::Correlation;
use crate::random::{Purpose, ReplicateKey, standard_normal};
use dense::Block;

/// How the innovations of a year go together.
#[derive(Debug, Clone)]
pub enum Field {
    /// each patch has its own
    Independent,
    /// all patches have the same
    Common,
    /// they are correlated by distance, exactly
    Dense(DenseField),
}

/// What a field keeps between the years of a replicate.
#[derive(Debug, Clone, Default)]
pub struct FieldState(Block);

impl Field {
    /// The field of a correlation over patches with these centroids (kilometres in a plane) and keys.
    ///
    /// # Errors
    /// Why it cannot be made, in words.
    pub fn new(correlation: Correlation, centroids_km: &[[f64; 2]], patch_keys: &[u64]) -> Result<Self, String> {
        match correlation {
            Correlation::None => Ok(Self::Independent),
            Correlation::Full => Ok(Self::Common),
            Correlation::Reach { reach_km, .. } => DenseField::new(centroids_km, patch_keys, reach_km).map(Self::Dense),
        }
    }

    /// Room for what the field keeps, so that drawing allocates nothing.
    pub fn state(&self) -> FieldState {
        match self {
            Self::Independent | Self::Common => FieldState::default(),
            Self::Dense(field) => FieldState(field.block()),
        }
    }

    /// The innovations of a year of a replicate for a rate group, by patch. The years of a replicate are asked for in turn,
    /// from 0 on.
    pub fn draw(
        &self,
        state: &mut FieldState,
        replicate: ReplicateKey,
        year: u32,
        group: u32,
        patch_keys: &[u64],
        innovations: &mut [f64],
    ) {
        let purpose = Purpose::Weather(group);
        match self {
            Self::Independent => {
                let year = replicate.year(year);
                for (innovation, patch) in innovations.iter_mut().zip(patch_keys) {
                    *innovation = standard_normal(&mut year.patch(*patch).draw(purpose));
                }
            }
            Self::Common => innovations.fill(standard_normal(&mut replicate.year(year).network().draw(purpose))),
            Self::Dense(field) => field.draw(&mut state.0, replicate, year, purpose, innovations),
        }
    }
}

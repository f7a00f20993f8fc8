//! One event in the landscape, at one patch.

use std::sync::Arc;

use super::{Begins, Strikes};

#[derive(Debug)]
struct OnePatch;

pub(super) fn make() -> Arc<dyn Strikes> {
    Arc::new(OnePatch)
}

impl Strikes for OnePatch {
    fn begins(&self) -> Begins {
        Begins::AtOnePatch
    }

    fn reaches(&self, origin: usize, patch: usize, _: &[[f64; 2]]) -> bool {
        origin == patch
    }

    fn in_words(&self) -> String {
        "one patch, drawn at random".to_owned()
    }
}

//! Every patch has events of its own.

use std::sync::Arc;

use super::{Begins, Strikes};

#[derive(Debug)]
struct EachPatch;

pub(super) fn make() -> Arc<dyn Strikes> {
    Arc::new(EachPatch)
}

impl Strikes for EachPatch {
    fn begins(&self) -> Begins {
        Begins::InEachPatch
    }

    fn reaches(&self, origin: usize, patch: usize, _: &[[f64; 2]]) -> bool {
        origin == patch
    }

    fn in_words(&self) -> String {
        "each patch for itself".to_owned()
    }
}

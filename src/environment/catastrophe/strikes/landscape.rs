//! One event that strikes all patches.

use std::sync::Arc;

use super::{Begins, Strikes};

#[derive(Debug)]
struct Landscape;

pub(super) fn make() -> Arc<dyn Strikes> {
    Arc::new(Landscape)
}

impl Strikes for Landscape {
    fn begins(&self) -> Begins {
        Begins::Everywhere
    }

    fn reaches(&self, _: usize, _: usize, _: &[[f64; 2]]) -> bool {
        true
    }

    fn in_words(&self) -> String {
        "all patches at once".to_owned()
    }
}

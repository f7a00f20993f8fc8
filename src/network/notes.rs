//! What is odd about a network, said once for all the patches that it concerns.

use crate::landscape::Landscape;
use crate::mistake::{Mistake, Place};

/// Names shown before "and so many more".
const SHOWN: usize = 6;

/// Warnings that gather while a network is built.
pub(super) struct Notes<'a> {
    landscape: &'a Landscape,
    place: Place,
    warnings: Vec<Mistake>,
}

impl<'a> Notes<'a> {
    /// Notes of a network that the table at `place` makes.
    pub(super) fn new(landscape: &'a Landscape, place: Place) -> Self {
        Self { landscape, place, warnings: Vec::new() }
    }

    /// Patches that no link leaves.
    pub(super) fn isolated(&mut self, patches: &[usize]) {
        self.add(patches, "no link out of", "their emigrants are all lost", None);
    }

    /// Patches whose nearest target lies beyond `far_km`, three mean distances, under `shared`.
    pub(super) fn far(&mut self, patches: &[usize], far_km: f64) {
        // Three times a mean such as 1.4 has digits that nobody wrote.
        let far_km = (far_km * 1e6).round() / 1e6;
        let found = format!("no target within three mean distances ({far_km} km) of");
        let advice = "if that is too generous, raise path_mortality_per_km, set max_km, or use settlement = \"open\", which \
                      loses those who land nowhere";
        self.add(
            patches,
            &found,
            "under \"shared\" settlement every emigrant goes to the nearest all the same",
            Some(advice),
        );
    }

    /// Patches whose landing probabilities added up to more than 1.
    pub(super) fn scaled(&mut self, patches: &[usize]) {
        let meaning = "they are scaled to 1: nobody who leaves them is lost but on the way";
        let advice = "look for patches that overlap, or whose stated area is larger than their outline";
        self.add(patches, "landing probabilities of more than 1 in all from", meaning, Some(advice));
    }

    /// Patches on which start points lie farther apart than the kernel reaches.
    pub(super) fn coarse(&mut self, patches: &[usize]) {
        let meaning = "too large beside the kernel for landing probabilities to be right to a few per cent";
        let advice = "cut them into parts that act as patches, or use settlement = \"shared\"";
        self.add(patches, "start points wider apart than the median distance on", meaning, Some(advice));
    }

    pub(super) fn into_warnings(self) -> Vec<Mistake> {
        self.warnings
    }

    fn add(&mut self, patches: &[usize], found: &str, meaning: &str, advice: Option<&str>) {
        if patches.is_empty() {
            return;
        }
        let names: Vec<&str> = patches.iter().map(|patch| self.landscape.patches[*patch].name.as_str()).collect();
        let shown = names.len().min(SHOWN);
        let more = match names.len() - shown {
            0 => String::new(),
            more => format!(" and {more} more"),
        };
        let warning = Mistake::new(self.place.clone(), format!("{found} {}{more}", names[..shown].join(", ")), meaning);
        self.warnings.push(match advice {
            Some(advice) => warning.advise(advice),
            None => warning,
        });
    }
}

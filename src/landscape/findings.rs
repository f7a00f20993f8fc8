//! Mistakes and warnings about a data file, so kept that a flood of one kind does not bury the others.

use std::cell::{Cell, RefCell};
use std::collections::BTreeMap;

use crate::mistake::Mistake;
use crate::study::Document;

/// So many findings of one kind are shown; the last of them says how many more there are.
const SHOWN: usize = 20;

/// What was found while reading a data file. Nothing reaches the document before [`Findings::finish`].
pub(super) struct Findings<'d> {
    pub(super) document: &'d Document,
    mistakes: RefCell<Piles>,
    warnings: RefCell<Piles>,
    clean: Cell<bool>,
}

type Piles = BTreeMap<String, Pile>;

#[derive(Default)]
struct Pile {
    shown: Vec<Mistake>,
    found: usize,
}

impl<'d> Findings<'d> {
    pub(super) fn new(document: &'d Document) -> Self {
        Self { document, mistakes: RefCell::default(), warnings: RefCell::default(), clean: Cell::new(true) }
    }

    /// Notes a mistake; those of one `kind` are counted together.
    pub(super) fn mistake(&self, kind: &str, mistake: Mistake) {
        self.noted();
        note(&mut self.mistakes.borrow_mut(), kind, mistake);
    }

    /// Remembers that a mistake went straight to the document.
    pub(super) fn noted(&self) {
        self.clean.set(false);
    }

    /// Notes a warning; those of one `kind` are counted together.
    pub(super) fn warning(&self, kind: &str, warning: Mistake) {
        note(&mut self.warnings.borrow_mut(), kind, warning);
    }

    /// Hands everything to the document. Says whether there was no mistake.
    pub(super) fn finish(self) -> bool {
        for mistake in self.mistakes.into_inner().into_values().flat_map(Pile::into_list) {
            self.document.mistake(mistake);
        }
        for warning in self.warnings.into_inner().into_values().flat_map(Pile::into_list) {
            self.document.warning(warning);
        }
        self.clean.get()
    }
}

fn note(piles: &mut Piles, kind: &str, mistake: Mistake) {
    let pile = piles.entry(kind.to_owned()).or_default();
    pile.found += 1;
    if pile.shown.len() < SHOWN {
        pile.shown.push(mistake);
    }
}

impl Pile {
    fn into_list(mut self) -> Vec<Mistake> {
        let more = self.found - self.shown.len();
        if let (Some(last), true) = (self.shown.last_mut(), more > 0) {
            last.found = format!("{}, and {more} more like this", last.found);
        }
        self.shown
    }
}

#[cfg(test)]
mod tests {
    use std::path::Path;

    use super::*;
    use crate::mistake::Place;

    #[test]
    fn a_flood_is_cut_and_counted_and_leaves_other_kinds_alone() {
        let document = Document::parse(Path::new("study.toml"), String::new());
        let findings = Findings::new(&document);
        let at = |index| Place::Feature { file: "a.geojson".into(), index, id: None };
        for index in 0..332 {
            findings.mistake("null", Mistake::new(at(index), "geometry is null", "a polygon"));
        }
        findings.mistake("name", Mistake::new(at(400), "no name", "a name"));
        assert!(!findings.finish());
        let mistakes = document.verdict().unwrap_err();
        assert_eq!(mistakes.as_slice().len(), SHOWN + 1);
        assert_eq!(mistakes.as_slice()[SHOWN - 1].found, "geometry is null, and 312 more like this");
    }
}

//! The collecting reader of study files, through its public face: what each getter refuses and in which words, where
//! mistakes stand, and that no text whatever makes it panic.
//!
//! The grammar that decides right from wrong here is TOML 1.0 (toml.io/en/v1.0.0); places are worked out by hand.

#![expect(clippy::unwrap_used, reason = "a test stops where a value is not as it should be")]

mod any_text;
mod csv;
mod faults;
mod getters;
mod places;
mod settings;

use std::path::Path;

use eyot::mistake::{Mistake, Place};
use eyot::study::{Document, Settings, Table};

fn parse(text: &str) -> Document {
    Document::parse(Path::new("s.toml"), text.to_owned())
}

fn at(line: usize, column: usize) -> Place {
    Place::Text { file: "s.toml".into(), line, column }
}

fn mistakes(document: &Document) -> Vec<Mistake> {
    document.verdict().err().map(|mistakes| mistakes.into_vec()).unwrap_or_default()
}

/// Reads `text` with `read` and gives each mistake as `line:column found | expected | advice`.
fn told(text: &str, read: impl Fn(&Table<'_>)) -> Vec<String> {
    let document = parse(text);
    read(&document.root());
    let tell = |mistake: Mistake| {
        let place = mistake.place.to_string();
        let place = place.strip_prefix("s.toml").unwrap().trim_start_matches(':');
        let advice = mistake.advice.map(|advice| format!(" | {advice}")).unwrap_or_default();
        format!("{place} {} | {}{advice}", mistake.found, mistake.expected)
    };
    mistakes(&document).into_iter().map(tell).collect()
}

fn read_settings(table: &Table<'_>) {
    assert!(Settings::read(table).is_none());
}
